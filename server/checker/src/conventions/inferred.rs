//! What a document shows of its own habits, counted over the statements that balance.
//!
//! Only statements that balance vote, so that a slip or a line half typed does not sway the document. The counts
//! turn into scores of units (see `reading.rs`) and into the level habit of each class of letters. Counts of the
//! whole paper are the prior, those of the file weigh double.

use compact_str::CompactString;
use indexwise_grammar::tree::Level;
use rustc_hash::FxHashMap;

use crate::balance::{self, Event};
use crate::reading::Reading;
use crate::sketch::{Shape, Sketch, Unit};

use super::built_in::{CLASSES, LetterClass, class_of, is_labelled_operator, is_symbol_kernel};
use super::meanings::Levels;

/// Counts over balanced statements.
#[derive(Clone, Debug, Default)]
pub struct Evidence {
    /// Statements in which a letter is surely an index.
    index: FxHashMap<CompactString, u32>,
    /// Statements in which a kernel's lone script is an index, by kernel and class of the letter.
    lone: FxHashMap<(CompactString, LetterClass), u32>,
    /// Statements that balance only if this letter on this kernel is no index.
    label: FxHashMap<(CompactString, CompactString), u32>,
    /// The same by kernel and by letter alone.
    label_kernel: FxHashMap<CompactString, u32>,
    label_letter: FxHashMap<CompactString, u32>,
    /// Statements that balance only if a usual coordinate is an index.
    running: FxHashMap<CompactString, u32>,
    /// Letters that are listed as coordinates.
    coordinates: FxHashMap<CompactString, u32>,
    /// Pairs on opposite levels and on one level, by class.
    pairs: [[u32; 2]; 5],
    /// The same by kernel.
    kernel_pairs: FxHashMap<(CompactString, LetterClass), [u32; 2]>,
    /// Balanced statements whose free levels agree, and do not, by class.
    free_levels: [[u32; 2]; 5],
    /// Statements with indices that balance, and that do not, by class of the odd letters.
    balanced: [[u32; 2]; 5],
    /// Pairs as they are written: one up and one down, and both down.
    written: [u32; 2],
    /// Pairs that are summed without a sum sign, and letters that a sum sign binds, by class.
    sums: [[u32; 2]; 5],
    /// Unknown commands in statements that balance with their arguments as factors, and that do not.
    unknown: FxHashMap<CompactString, [u32; 2]>,
    /// Kernels with how many letters and numbers above and below.
    forms: FxHashMap<(CompactString, u8, u8), u32>,
    /// Kernels that are staggered, and stacked.
    staggered: FxHashMap<(CompactString, u8, u8), [u32; 2]>,
}

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

impl Evidence {
    /// Takes the votes of a statement as it was read.
    pub fn vote(&mut self, sketch: &Sketch, reading: &Reading) {
        if sketch.unjudged.is_some() {
            return;
        }
        for letter in &sketch.coordinates {
            *self.coordinates.entry(letter.clone()).or_default() += 1;
        }
        self.vote_sums(sketch);
        self.vote_balance(sketch, reading);
        self.vote_unknown(sketch, reading);
        if !reading.odd.is_empty() {
            return;
        }
        self.vote_labels(sketch, reading);
        for form in &sketch.forms {
            *self.forms.entry(form.clone()).or_default() += 1;
        }
        for stacked in &sketch.stacked {
            let counts = self.staggered.entry(stacked.kernel.clone()).or_default();
            bump(counts, usize::from(!stacked.staggered));
        }
        for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
            let (_, events) = balance::events(sketch, &reading.choice, number);
            self.vote_letter(sketch, letter, &events);
        }
    }

    /// Sum signs speak against the summation convention, whether the statement balances or not.
    fn vote_sums(&mut self, sketch: &Sketch) {
        for (n, bound) in sketch.bound.iter().enumerate() {
            let letter = &bound.letter;
            let again = sketch.bound.iter().take(n).any(|other| other.letter == *letter);
            let counts = self.sums.get_mut(class_of(letter) as usize).filter(|_| !again);
            if let (Some(counts), Some(_)) = (counts, sketch.number_of(letter)) {
                bump(counts, 1);
            }
        }
    }

    fn vote_balance(&mut self, sketch: &Sketch, reading: &Reading) {
        if sketch.sides.len() < 2 && sketch.sides.iter().all(|side| side.terms < 2) {
            return;
        }
        let mut seen = [false; 5];
        for place in &sketch.places {
            let index = reading.choice.index.get(place.unit as usize).copied().unwrap_or(false);
            if index && let Some(seen) = seen.get_mut(class_of(&place.letter) as usize) {
                *seen = true;
            }
        }
        for class in CLASSES {
            let odd = reading.odd.iter().any(|(letter, _)| class_of(letter) == class);
            if seen.get(class as usize) == Some(&true)
                && let Some(counts) = self.balanced.get_mut(class as usize)
            {
                bump(counts, usize::from(odd));
            }
        }
    }

    /// A letter that stands at least twice and balances speaks for the way the unknown commands were taken.
    fn vote_unknown(&mut self, sketch: &Sketch, reading: &Reading) {
        let twice = sketch
            .letter_numbers()
            .any(|letter| sketch.places.iter().filter(|place| place.number == letter).count() > 1);
        for name in sketch.unknown.iter().filter(|_| twice || !reading.odd.is_empty()) {
            bump(self.unknown.entry(name.clone()).or_default(), usize::from(!reading.odd.is_empty()));
        }
    }

    fn vote_labels(&mut self, sketch: &Sketch, reading: &Reading) {
        for (unit, index) in sketch.units.iter().zip(&reading.choice.index) {
            let likely = unit.bias > 0;
            if likely && !index {
                *self.label.entry((unit.kernel.clone(), unit.letter.clone())).or_default() += 1;
                *self.label_kernel.entry(unit.kernel.clone()).or_default() += 1;
                *self.label_letter.entry(unit.letter.clone()).or_default() += 1;
            }
            if *index && unit.coordinate {
                *self.running.entry(unit.letter.clone()).or_default() += 1;
            }
        }
    }

    fn vote_letter(&mut self, sketch: &Sketch, letter: &str, events: &[Event]) {
        let class = class_of(letter) as usize;
        let mut sure = false;
        for event in events {
            match event {
                Event::Pair(first, second) => {
                    self.vote_pair(sketch, class, *first, *second);
                    // The same kernel twice (`E_e E_e`) says nothing: a label repeats too.
                    if differ(sketch, &[*first, *second]) {
                        sure = true;
                        if let Some(counts) = self.sums.get_mut(class) {
                            bump(counts, 0);
                        }
                        self.vote_lone(sketch, *first);
                        self.vote_lone(sketch, *second);
                    }
                }
                Event::Terms(terms) if terms.len() > 1 => {
                    let free: Vec<u32> = terms.iter().filter_map(|term| term.free).collect();
                    sure |= differ(sketch, &free);
                    let places = || terms.iter().filter_map(|term| term.free);
                    if differ(sketch, &free) {
                        places().for_each(|place| self.vote_lone(sketch, place));
                    }
                    let mut levels = places().filter_map(|place| sketch.place(place)).map(|place| place.level);
                    let first = levels.next();
                    let differ = levels.any(|level| Some(level) != first);
                    if let Some(counts) = self.free_levels.get_mut(class) {
                        bump(counts, usize::from(differ));
                    }
                }
                _ => {}
            }
        }
        if sure {
            *self.index.entry(letter.into()).or_default() += 1;
        }
    }

    fn vote_pair(&mut self, sketch: &Sketch, class: usize, first: u32, second: u32) {
        let (Some(one), Some(two)) = (sketch.place(first), sketch.place(second)) else { return };
        let same = usize::from(one.level == two.level);
        match (one.written, two.written) {
            (Level::Down, Level::Down) => bump(&mut self.written, 1),
            (Level::Up, Level::Up) => {}
            _ => bump(&mut self.written, 0),
        }
        let kernels = [one, two].map(|place| sketch.units.get(place.unit as usize).map(|unit| unit.kernel.clone()));
        let symbol = [one, two].iter().any(|place| {
            sketch.units.get(place.unit as usize).is_some_and(|unit| is_symbol_kernel(&unit.kernel_letter))
        });
        let [first, second] = kernels;
        let second = second.filter(|second| Some(second) != first.as_ref());
        for kernel in [first, second].into_iter().flatten() {
            bump(self.kernel_pairs.entry((kernel, class_of(&one.letter))).or_default(), same);
        }
        if !symbol && let Some(counts) = self.pairs.get_mut(class) {
            bump(counts, same);
        }
    }

    fn vote_lone(&mut self, sketch: &Sketch, place: u32) {
        let unit = sketch.place(place).and_then(|place| sketch.units.get(place.unit as usize));
        if let Some(unit) = unit.filter(|unit| !matches!(unit.shape, Shape::Several | Shape::Particle)) {
            *self.lone.entry((unit.kernel.clone(), unit.class)).or_default() += 1;
        }
    }

    /// Adds the counts of another document of the paper.
    pub fn add(&mut self, other: &Self) {
        merge(&mut self.index, &other.index);
        merge(&mut self.lone, &other.lone);
        merge(&mut self.label, &other.label);
        merge(&mut self.label_kernel, &other.label_kernel);
        merge(&mut self.label_letter, &other.label_letter);
        merge(&mut self.forms, &other.forms);
        merge(&mut self.running, &other.running);
        merge(&mut self.coordinates, &other.coordinates);
        merge_pairs(&mut self.kernel_pairs, &other.kernel_pairs);
        merge_pairs(&mut self.unknown, &other.unknown);
        merge_pairs(&mut self.staggered, &other.staggered);
        self.written.iter_mut().zip(&other.written).for_each(|(own, other)| *own += other);
        for (own, other) in [
            (&mut self.pairs, &other.pairs),
            (&mut self.free_levels, &other.free_levels),
            (&mut self.sums, &other.sums),
            (&mut self.balanced, &other.balanced),
        ] {
            own.iter_mut().flatten().zip(other.iter().flatten()).for_each(|(own, other)| *own += other);
        }
    }

    /// The counts by class in words: pairs on opposite levels and on one, free levels, balanced statements.
    pub fn summary(&self) -> String {
        let counts = |class: LetterClass| {
            let at = |table| Self::class_counts(table, class);
            format!(
                "{class:?} pairs {:?} free {:?} balanced {:?}",
                at(&self.pairs),
                at(&self.free_levels),
                at(&self.balanced)
            )
        };
        CLASSES.map(counts).join("; ")
    }

    fn class_counts(table: &[[u32; 2]; 5], class: LetterClass) -> [u32; 2] {
        table.get(class as usize).copied().unwrap_or_default()
    }
}

/// Whether places stand on more than one kernel, or on one with several indices.
fn differ(sketch: &Sketch, places: &[u32]) -> bool {
    let units: Vec<&Unit> = places
        .iter()
        .filter_map(|place| sketch.place(*place).and_then(|place| sketch.units.get(place.unit as usize)))
        .collect();
    let first = units.first().map(|unit| (&unit.kernel, unit.shape));
    units.iter().any(|unit| unit.shape == Shape::Several || Some((&unit.kernel, unit.shape)) != first)
}

fn bump(counts: &mut [u32; 2], at: usize) {
    if let Some(count) = counts.get_mut(at) {
        *count += 1;
    }
}

// Order does not matter for sums.
#[allow(clippy::iter_over_hash_type)]
fn merge<K: Clone + Eq + std::hash::Hash>(into: &mut FxHashMap<K, u32>, from: &FxHashMap<K, u32>) {
    for (key, count) in from {
        *into.entry(key.clone()).or_default() += count;
    }
}

#[allow(clippy::iter_over_hash_type)]
fn merge_pairs<K: Clone + Eq + std::hash::Hash>(into: &mut FxHashMap<K, [u32; 2]>, from: &FxHashMap<K, [u32; 2]>) {
    for (key, [first, second]) in from {
        let counts = into.entry(key.clone()).or_default();
        counts[0] += first;
        counts[1] += second;
    }
}

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
}

impl Prices<'_> {
    /// The score of a unit, in tenths: positive for an index; its size is the price of the other reading. The
    /// weights were set by measurement on real documents (see the changelog for the figures).
    pub fn score(&self, unit: &Unit) -> i32 {
        if self.declared.is_not_index(unit) {
            return -1000;
        }
        if let Some(score) = self.declared_score(unit) {
            return score;
        }
        let letter = &unit.letter;
        let listed = !unit.coordinate && unit.class != LetterClass::Greek && self.file.coordinates.contains_key(letter);
        if listed && self.file.index.get(letter).is_none_or(|votes| *votes < 3) {
            return -25;
        }
        if unit.coordinate {
            let seen = self.count(|evidence| evidence.running.get(letter).copied());
            return unit.bias + 12 * steps(seen).min(4);
        }
        // Where all indices stand below, a letter above is a name: `\epsilon^p_{ij}`.
        if unit.level == Level::Up && !unit.mirrored && self.is_cartesian() {
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
            Shape::Several | Shape::Particle if self.paper.kernel_pairs.contains_key(&lone_key) => 7 * index,
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
        let [mixed, below] = self.file.written;
        below >= OPPOSITE_PAIRS && below * 100 >= CARTESIAN_FILE_PERCENT * (below + mixed)
    }

    /// Whether levels are worth a word in messages: the file writes pairs one up, one down.
    pub fn speaks_of_levels(&self, letter: &str) -> bool {
        self.file.written[0] > 0 || self.level_habit(letter) == LevelHabit::InForce
    }

    /// Statements of the file in which a letter is surely an index.
    pub fn index_votes(&self, letter: &str) -> u32 {
        self.file.index.get(letter).copied().unwrap_or(0)
    }

    /// What is done about levels in a class of letters.
    pub fn level_habit(&self, letter: &str) -> LevelHabit {
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
        if is_symbol_kernel(&unit.kernel_letter) {
            return true;
        }
        let key = (unit.kernel.clone(), unit.class);
        let [opposite, same] = self.file.kernel_pairs.get(&key).copied().unwrap_or_default();
        same >= 4 && same > opposite
    }

    /// Whether free levels are consistent enough in a class for a difference to be a slip.
    pub fn free_levels_in_force(&self, letter: &str) -> bool {
        if let Some(levels) = self.declared.meanings.levels(letter) {
            return levels == Levels::InForce;
        }
        let class = class_of(letter);
        let own = Evidence::class_counts(&self.file.free_levels, class);
        let all = Evidence::class_counts(&self.paper.free_levels, class);
        let [agree, differ] = if own[0] + own[1] >= FREE_STATEMENTS { own } else { all };
        let total = agree + differ;
        total >= FREE_STATEMENTS
            && agree * 100 >= FREE_PERCENT * total
            && self.level_habit(letter) == LevelHabit::InForce
    }

    /// Whether the file writes this class of letters in index notation at all: by the summation convention, and mostly
    /// in balance.
    pub fn is_index_notation(&self, letter: &str) -> bool {
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
        unknown.iter().all(|name| {
            let [balanced, odd] = self.paper.unknown.get(name).copied().unwrap_or_default();
            balanced >= TRUSTED_STATEMENTS && odd * 100 <= TRUSTED_ODD_PERCENT * (balanced + odd)
        })
    }

    /// Whether neither kernel of a pair is ever seen in a pair on opposite levels: then the two may be labels.
    pub fn both_strange(&self, one: &Unit, two: &Unit) -> bool {
        [one, two].iter().all(|unit| {
            let key = (unit.kernel.clone(), unit.class);
            let opposite = self.file.kernel_pairs.get(&key).is_some_and(|[opposite, _]| *opposite > 0);
            unit.shape == Shape::Lone && !opposite
        })
    }

    /// Whether the paper is about curvature: it uses Christoffel symbols or a Riemann tensor.
    pub fn is_curved(&self) -> bool {
        let form = |kernel: &str, up, down| self.uses(&(kernel.into(), up, down)) > 0;
        form("\\Gamma", 1, 2) || form("\\Gamma", 0, 3) || (0..=4).any(|up| form("R", up, 4 - up))
    }

    /// In how many balanced statements a kernel carries so many letters and numbers above and below.
    pub fn uses(&self, form: &(CompactString, u8, u8)) -> u32 {
        self.paper.forms.get(form).copied().unwrap_or(0)
    }

    /// In how many balanced statements a kernel carries so many letters and numbers, wherever they stand.
    pub fn uses_with(&self, kernel: &str, slots: u8) -> u32 {
        (0..=slots).map(|up| self.uses(&(kernel.into(), up, slots - up))).sum()
    }

    /// In how many statements of the paper a kernel carries an index of this class alone.
    pub fn lone_uses(&self, kernel: &str, letter: &str) -> u32 {
        self.paper.lone.get(&(kernel.into(), class_of(letter))).copied().unwrap_or(0)
    }

    /// Letters of a class that the file uses as indices, the most used first.
    pub fn index_letters(&self, class: LetterClass) -> Vec<CompactString> {
        // Sorted below.
        #[allow(clippy::iter_over_hash_type)]
        let mut letters: Vec<(&CompactString, &u32)> =
            self.file.index.iter().filter(|(letter, _)| class_of(letter) == class).collect();
        letters.sort_by(|one, two| two.1.cmp(one.1).then(one.0.cmp(two.0)));
        letters.into_iter().map(|(letter, _)| letter.clone()).collect()
    }

    /// How often a kernel with these scripts is staggered, and stacked.
    pub fn staggering(&self, kernel: &(CompactString, u8, u8)) -> [u32; 2] {
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
