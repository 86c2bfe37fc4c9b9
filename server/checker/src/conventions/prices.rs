//! What follows from the counts of a document and of its paper: the scores of units (see `reading.rs`), and what the
//! document's habits are. Counts of the whole paper are the prior, those of the file weigh double.
//!
//! Every question about habits may be noted with its answer (`inquiries.rs`), so that what was found out by them holds
//! for as long as the answers stay the same.

use compact_str::CompactString;
use indexwise_grammar::tree::Level;

use crate::sketch::{Shape, Unit};

use super::built_in::{LetterClass, class_of, is_labelled_operator, is_symbol_kernel};
use super::inferred::Evidence;
use super::inquiries::{Inquiries, Inquiry};
use super::meanings::Levels;

/// What is done about same-level pairs of a class.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LevelHabit {
    /// Pairs stand one up, one down.
    InForce,
    /// All indices down, or anything goes.
    Cartesian,
    /// Not clear: level rules are silent.
    Unclear,
}

/// Opposite pairs from which levels may be in force.
const OPPOSITE_PAIRS: u32 = 5;
/// Pairs from which a file's own habit counts rather than its paper's.
const OWN_PAIRS: u32 = 5;
/// Share of same-level pairs, in percent, up to which levels are in force.
const SAME_LEVEL_PERCENT: u32 = 10;
/// Share of same-level pairs, in percent, from which a class is Cartesian.
const CARTESIAN_PERCENT: u32 = 80;
/// The same share for a file in which letters above are names, how much that speaks against an index, and what the
/// other reading costs at least and at most.
const CARTESIAN_FILE_PERCENT: u32 = 95;
const CARTESIAN_DOUBT: i32 = 90;
const CHEAP_NAME: i32 = 10;
/// Scores of a letter that is declared an index: beside others or on a declared kernel, and alone on any other kernel.
const DECLARED_INDEX: i32 = 1000;
const DECLARED_LONE: i32 = 30;
const DEAR_NAME: i32 = 25;
/// Balanced statements that `free-index-levels` asks for, and the share of them, in percent, that must agree.
const FREE_STATEMENTS: u32 = 20;
const FREE_PERCENT: u32 = 95;
/// A document's class is not in index notation if more than this share of its statements, in percent, is odd.
const ODD_PERCENT: u32 = 33;
/// Balanced statements from which an unknown command's arguments are trusted to be factors, and the share of odd
/// ones, in percent, up to which they are.
const TRUSTED_STATEMENTS: u32 = 2;
const TRUSTED_ODD_PERCENT: u32 = 34;
/// Sum signs from which a file may write its sums out rather than imply them; then it is not in index notation from a
/// smaller share of odd statements on, in percent.
const SUM_SIGNS: u32 = 4;
const ODD_PERCENT_WRITTEN_OUT: u32 = 10;
/// Odd statements that are forgiven before that share is taken.
const ODD_FREE: u32 = 3;

/// Scores of units under the evidence of a file and of its paper.
#[derive(Clone, Copy, Debug)]
pub struct Prices<'e> {
    /// Counts of the file.
    pub file: &'e Evidence,
    /// Counts of the whole paper, the file among them.
    pub paper: &'e Evidence,
    /// What the author declared: a letter is a label or a coordinate.
    pub declared: &'e super::declared::Declared,
    /// Macros in force, to read a statement again after a change of its text.
    pub macros: &'e indexwise_grammar::macros::Macros,
    /// Where questions are noted with their answers, if somebody wants to know.
    pub inquiries: Option<&'e Inquiries>,
}

impl Prices<'_> {
    fn noted<T>(&self, answer: T, as_number: impl Fn(&T) -> i64, inquiry: impl FnOnce() -> Inquiry) -> T {
        if let Some(inquiries) = self.inquiries {
            inquiries.note(inquiry(), as_number(&answer));
        }
        answer
    }

    /// The answer to a question that was asked before, as a number; the question is not noted again.
    pub(crate) fn answer(&self, inquiry: &Inquiry) -> i64 {
        match inquiry {
            Inquiry::Score(unit) => self.scored(unit).into(),
            Inquiry::WritesBelow => self.writes_below().into(),
            Inquiry::TellsLevels(letter) => self.tells_levels(letter).into(),
            Inquiry::Levels(letter) => self.habit(letter) as i64,
            Inquiry::IgnoresLevels(unit) => self.ignores_levels(unit).into(),
            Inquiry::FreeLevels(letter) => self.free_levels(letter).into(),
            Inquiry::IndexNotation(letter) => self.mostly_balances(letter).into(),
            Inquiry::Trusts(name) => self.trusted(name).into(),
            Inquiry::Strange(unit) => self.strange(unit).into(),
            Inquiry::Curved => self.speaks_of_curvature().into(),
            Inquiry::Uses(form) => self.counted(form).into(),
            Inquiry::Alone(kernel, letter) => self.counted_alone(kernel, letter).into(),
            Inquiry::Staggering(kernel) => pair(self.staggered(kernel)),
        }
    }

    /// The score of a unit, in tenths: positive for an index; its size is the price of the other reading. The
    /// weights were set by measurement on real documents (see the changelog for the figures).
    pub fn score(&self, unit: &Unit) -> i32 {
        self.noted(self.scored(unit), |score| i64::from(*score), || Inquiry::Score(unit.clone()))
    }

    fn scored(&self, unit: &Unit) -> i32 {
        if self.declared.is_not_index(unit) {
            return -1000;
        }
        if let Some(score) = self.declared_score(unit) {
            return score;
        }
        let letter = &unit.letter;
        let listed = !unit.coordinate
            && unit.class != LetterClass::Greek
            && self.file.coordinates.get(letter).is_some_and(|lists| *lists > 0);
        if listed && self.file.index.get(letter).is_none_or(|votes| *votes < 3) {
            return -25;
        }
        if unit.coordinate {
            let seen = self.count(|evidence| evidence.running.get(letter).copied());
            return unit.bias + 12 * steps(seen).min(4);
        }
        // Where all indices stand below, a letter above is a name: `\epsilon^p_{ij}`.
        if unit.level == Level::Up && !unit.mirrored && self.writes_below() {
            return (unit.bias - CARTESIAN_DOUBT).clamp(-DEAR_NAME, -CHEAP_NAME);
        }
        let label_key = (unit.kernel.clone(), letter.clone());
        let labels = self.count(|evidence| evidence.label.get(&label_key).copied());
        let index = steps(self.count(|evidence| evidence.index.get(letter).copied())).min(3);
        let lone_key = (unit.kernel.clone(), unit.class);
        let lone = steps(self.count(|evidence| evidence.lone.get(&lone_key).copied())).min(3);
        // A kernel that is never seen with an index of this class is more likely to carry a label.
        let stranger = || {
            let kernel = self.count(|evidence| evidence.label_kernel.get(&unit.kernel).copied());
            let kernel = steps(others(kernel)).min(3);
            let other = steps(others(self.count(|evidence| evidence.label_letter.get(letter).copied()))).min(3);
            let usual = matches!(letter.as_str(), "i" | "j" | "k" | "l" | "a" | "b" | "c" | "d");
            let greek_up = unit.class == LetterClass::Greek && unit.level == Level::Up && unit.bias > 20;
            match (usual, greek_up) {
                (true, _) => 6 * index - 4 * kernel - 4 * other,
                (_, true) => 5 * index - 4 * kernel - 2 * other,
                _ => index - 4 * kernel - 2 * other,
            }
        };
        let by_document = match unit.shape {
            Shape::Several | Shape::Particle
                if self.paper.kernel_pairs.get(&lone_key).is_some_and(|pairs| *pairs != [0; 2]) =>
            {
                7 * index
            }
            Shape::Several | Shape::Particle => {
                let kernel = self.count(|evidence| evidence.label_kernel.get(&unit.kernel).copied());
                7 * index - 7 * steps(others(kernel)).min(4)
            }
            Shape::Bracketed => return unit.bias,
            Shape::Lone if unit.bias <= -40 => 0,
            Shape::Lone if lone == 0 => stranger(),
            // Letters past n are labels more often.
            Shape::Lone if (4..6).contains(&unit.bias) => 3 * index + 5 * lone,
            Shape::Lone => 7 * index + 8 * lone,
            Shape::OnGroup if unit.bias > -40 => 4 * index + 8 * lone,
            Shape::OnGroup => 0,
        };
        unit.bias + by_document - 12 * steps(others(labels)).min(4)
    }

    /// The score of a letter that the author declares an index: high enough that only a lone letter above, which may
    /// be a power, is read otherwise within the margin.
    fn declared_score(&self, unit: &Unit) -> Option<i32> {
        let meanings = &self.declared.meanings;
        meanings.family_number(&unit.letter)?;
        if unit.counter {
            return None;
        }
        let declared = match unit.shape {
            Shape::Several => DECLARED_INDEX,
            _ if meanings.declares(&unit.kernel) => DECLARED_INDEX,
            _ if unit.level == Level::Up && !unit.mirrored => return Some(unit.bias.max(CHEAP_NAME)),
            _ if is_labelled_operator(&unit.kernel) || unit.shape == Shape::Bracketed => return None,
            _ => unit.bias.max(0) + DECLARED_LONE,
        };
        Some(declared)
    }

    /// The count of the file, doubled, with that of the rest of the paper.
    fn count(&self, of: impl Fn(&Evidence) -> Option<u32>) -> u32 {
        of(self.file).unwrap_or(0) + of(self.paper).unwrap_or(0)
    }

    /// Whether the file writes all its indices below.
    pub fn is_cartesian(&self) -> bool {
        self.noted(self.writes_below(), |below| i64::from(*below), || Inquiry::WritesBelow)
    }

    fn writes_below(&self) -> bool {
        let [mixed, below] = self.file.written;
        below >= OPPOSITE_PAIRS && below * 100 >= CARTESIAN_FILE_PERCENT * (below + mixed)
    }

    /// Whether levels are worth a word in messages: the file writes pairs one up, one down.
    pub fn speaks_of_levels(&self, letter: &str) -> bool {
        self.noted(self.tells_levels(letter), |tells| i64::from(*tells), || Inquiry::TellsLevels(letter.into()))
    }

    fn tells_levels(&self, letter: &str) -> bool {
        self.file.written[0] > 0 || self.habit(letter) == LevelHabit::InForce
    }

    /// Statements of the file in which a letter is surely an index. No rule may ask for it: it is not noted.
    pub fn index_votes(&self, letter: &str) -> u32 {
        self.file.index.get(letter).copied().unwrap_or(0)
    }

    /// What is done about levels in a class of letters.
    pub fn level_habit(&self, letter: &str) -> LevelHabit {
        self.noted(self.habit(letter), |habit| *habit as i64, || Inquiry::Levels(letter.into()))
    }

    fn habit(&self, letter: &str) -> LevelHabit {
        match self.declared.meanings.levels(letter) {
            Some(Levels::InForce) => return LevelHabit::InForce,
            Some(Levels::Cartesian) => return LevelHabit::Cartesian,
            None => {}
        }
        let class = class_of(letter);
        let own = Evidence::class_counts(&self.file.pairs, class);
        let all = Evidence::class_counts(&self.paper.pairs, class);
        let [opposite, same] = if own[0] + own[1] >= OWN_PAIRS { own } else { all };
        let total = opposite + same;
        // A single pair is forgiven: it may be the slip itself.
        if opposite >= OPPOSITE_PAIRS && (same == 1 || same * 100 <= SAME_LEVEL_PERCENT * total) {
            LevelHabit::InForce
        } else if total >= OPPOSITE_PAIRS && same * 100 >= CARTESIAN_PERCENT * total {
            LevelHabit::Cartesian
        } else {
            LevelHabit::Unclear
        }
    }

    /// Whether a kernel's pairs usually stand on one level, as with internal indices.
    pub fn kernel_ignores_levels(&self, unit: &Unit) -> bool {
        self.noted(self.ignores_levels(unit), |ignores| i64::from(*ignores), || Inquiry::IgnoresLevels(unit.clone()))
    }

    fn ignores_levels(&self, unit: &Unit) -> bool {
        if is_symbol_kernel(&unit.kernel_letter) {
            return true;
        }
        let key = (unit.kernel.clone(), unit.class);
        let [opposite, same] = self.file.kernel_pairs.get(&key).copied().unwrap_or_default();
        same >= 4 && same > opposite
    }

    /// Whether free levels are consistent enough in a class for a difference to be a slip.
    pub fn free_levels_in_force(&self, letter: &str) -> bool {
        self.noted(self.free_levels(letter), |force| i64::from(*force), || Inquiry::FreeLevels(letter.into()))
    }

    fn free_levels(&self, letter: &str) -> bool {
        if let Some(levels) = self.declared.meanings.levels(letter) {
            return levels == Levels::InForce;
        }
        let class = class_of(letter);
        let own = Evidence::class_counts(&self.file.free_levels, class);
        let all = Evidence::class_counts(&self.paper.free_levels, class);
        let [agree, differ] = if own[0] + own[1] >= FREE_STATEMENTS { own } else { all };
        let total = agree + differ;
        total >= FREE_STATEMENTS && agree * 100 >= FREE_PERCENT * total && self.habit(letter) == LevelHabit::InForce
    }

    /// Whether the file writes this class of letters in index notation at all: by the summation convention, and mostly
    /// in balance.
    pub fn is_index_notation(&self, letter: &str) -> bool {
        self.noted(
            self.mostly_balances(letter),
            |balances| i64::from(*balances),
            || Inquiry::IndexNotation(letter.into()),
        )
    }

    fn mostly_balances(&self, letter: &str) -> bool {
        let [balanced, odd] = Evidence::class_counts(&self.file.balanced, class_of(letter));
        let [implied, signs] = Evidence::class_counts(&self.file.sums, class_of(letter));
        let written_out = signs >= SUM_SIGNS && signs > implied;
        if written_out && odd >= ODD_FREE && odd * 100 >= ODD_PERCENT_WRITTEN_OUT * (balanced + odd) {
            return false;
        }
        odd <= ODD_FREE || (odd - ODD_FREE) * 100 <= ODD_PERCENT * (balanced + odd)
    }

    /// Whether statements with these unknown commands may be judged.
    pub fn trusts(&self, unknown: &[CompactString]) -> bool {
        let trusted =
            |name| self.noted(self.trusted(name), |trusted| i64::from(*trusted), || Inquiry::Trusts(name.clone()));
        unknown.iter().all(trusted)
    }

    fn trusted(&self, name: &CompactString) -> bool {
        let [balanced, odd] = self.paper.unknown.get(name).copied().unwrap_or_default();
        balanced >= TRUSTED_STATEMENTS && odd * 100 <= TRUSTED_ODD_PERCENT * (balanced + odd)
    }

    /// Whether neither kernel of a pair is ever seen in a pair on opposite levels: then the two may be labels.
    pub fn both_strange(&self, one: &Unit, two: &Unit) -> bool {
        let strange = |unit: &Unit| {
            self.noted(self.strange(unit), |strange| i64::from(*strange), || Inquiry::Strange(unit.clone()))
        };
        [one, two].into_iter().all(strange)
    }

    fn strange(&self, unit: &Unit) -> bool {
        let key = (unit.kernel.clone(), unit.class);
        let opposite = self.file.kernel_pairs.get(&key).is_some_and(|[opposite, _]| *opposite > 0);
        unit.shape == Shape::Lone && !opposite
    }

    /// Whether the paper is about curvature: it uses Christoffel symbols or a Riemann tensor.
    pub fn is_curved(&self) -> bool {
        self.noted(self.speaks_of_curvature(), |curved| i64::from(*curved), || Inquiry::Curved)
    }

    fn speaks_of_curvature(&self) -> bool {
        let form = |kernel: &str, up, down| self.counted(&(kernel.into(), up, down)) > 0;
        form("\\Gamma", 1, 2) || form("\\Gamma", 0, 3) || (0..=4).any(|up| form("R", up, 4 - up))
    }

    /// In how many balanced statements a kernel carries so many letters and numbers above and below.
    pub fn uses(&self, form: &(CompactString, u8, u8)) -> u32 {
        self.noted(self.counted(form), |uses| i64::from(*uses), || Inquiry::Uses(form.clone()))
    }

    fn counted(&self, form: &(CompactString, u8, u8)) -> u32 {
        self.paper.forms.get(form).copied().unwrap_or(0)
    }

    /// In how many balanced statements a kernel carries so many letters and numbers, wherever they stand.
    pub fn uses_with(&self, kernel: &str, slots: u8) -> u32 {
        (0..=slots).map(|up| self.uses(&(kernel.into(), up, slots - up))).sum()
    }

    /// In how many statements of the paper a kernel carries an index of this class alone.
    pub fn lone_uses(&self, kernel: &str, letter: &str) -> u32 {
        self.noted(
            self.counted_alone(kernel, letter),
            |uses| i64::from(*uses),
            || Inquiry::Alone(kernel.into(), letter.into()),
        )
    }

    fn counted_alone(&self, kernel: &str, letter: &str) -> u32 {
        self.paper.lone.get(&(kernel.into(), class_of(letter))).copied().unwrap_or(0)
    }

    /// Letters of a class that the file uses as indices, the most used first. No rule may ask for it: it is not noted.
    pub fn index_letters(&self, class: LetterClass) -> Vec<CompactString> {
        // Sorted below.
        #[allow(clippy::iter_over_hash_type)]
        let mut letters: Vec<(&CompactString, &u32)> =
            self.file.index.iter().filter(|(letter, votes)| class_of(letter) == class && **votes > 0).collect();
        letters.sort_by(|one, two| two.1.cmp(one.1).then(one.0.cmp(two.0)));
        letters.into_iter().map(|(letter, _)| letter.clone()).collect()
    }

    /// How often a kernel with these scripts is staggered, and stacked.
    pub fn staggering(&self, kernel: &(CompactString, u8, u8)) -> [u32; 2] {
        self.noted(self.staggered(kernel), |counts| pair(*counts), || Inquiry::Staggering(kernel.clone()))
    }

    fn staggered(&self, kernel: &(CompactString, u8, u8)) -> [u32; 2] {
        self.paper.staggered.get(kernel).copied().unwrap_or_default()
    }
}

/// Votes for a label without one statement's own (counted for the file and for the paper): else a slip that the
/// margin excuses would excuse itself for good.
fn others(votes: u32) -> u32 {
    votes.saturating_sub(2)
}

/// 0, 1, 2, 3, ... for 0, 1, 3, 7, ... votes: coarse, so that one statement more rarely changes a score.
fn steps(votes: u32) -> i32 {
    i32::try_from((votes + 1).ilog2()).unwrap_or(0)
}

/// Two counts as one number.
fn pair([one, two]: [u32; 2]) -> i64 {
    (i64::from(one) << 32) | i64::from(two)
}
