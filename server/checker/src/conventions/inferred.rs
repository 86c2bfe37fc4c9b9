//! What a document shows of its own habits, counted over the statements that balance.
//!
//! Only statements that balance vote, so that a slip or a line half typed does not sway the document. Votes can be
//! taken back, so that an editor need not count a document again for each letter typed: a count that has come to 0 says
//! as little as one that is not there. `prices.rs` says what follows from the counts.

use compact_str::CompactString;
use indexwise_grammar::tree::Level;
use rustc_hash::FxHashMap;

use crate::balance::{self, Event};
use crate::reading::Reading;
use crate::sketch::{Shape, Sketch, Unit};

use super::built_in::{CLASSES, LetterClass, class_of, is_symbol_kernel};

/// Counts over balanced statements.
#[derive(Clone, Debug, Default)]
pub struct Evidence {
    /// Statements in which a letter is surely an index.
    pub(super) index: FxHashMap<CompactString, u32>,
    /// Statements in which a kernel's lone script is an index, by kernel and class of the letter.
    pub(super) lone: FxHashMap<(CompactString, LetterClass), u32>,
    /// Statements that balance only if this letter on this kernel is no index.
    pub(super) label: FxHashMap<(CompactString, CompactString), u32>,
    /// The same by kernel and by letter alone.
    pub(super) label_kernel: FxHashMap<CompactString, u32>,
    pub(super) label_letter: FxHashMap<CompactString, u32>,
    /// Statements that balance only if a usual coordinate is an index.
    pub(super) running: FxHashMap<CompactString, u32>,
    /// Letters that are listed as coordinates.
    pub(super) coordinates: FxHashMap<CompactString, u32>,
    /// Pairs on opposite levels and on one level, by class.
    pub(super) pairs: [[u32; 2]; 5],
    /// The same by kernel.
    pub(super) kernel_pairs: FxHashMap<(CompactString, LetterClass), [u32; 2]>,
    /// Balanced statements whose free levels agree, and do not, by class.
    pub(super) free_levels: [[u32; 2]; 5],
    /// Statements with indices that balance, and that do not, by class of the odd letters.
    pub(super) balanced: [[u32; 2]; 5],
    /// Pairs as they are written: one up and one down, and both down.
    pub(super) written: [u32; 2],
    /// Pairs that are summed without a sum sign, and letters that a sum sign binds, by class.
    pub(super) sums: [[u32; 2]; 5],
    /// Unknown commands in statements that balance with their arguments as factors, and that do not.
    pub(super) unknown: FxHashMap<CompactString, [u32; 2]>,
    /// Kernels with how many letters and numbers above and below.
    pub(super) forms: FxHashMap<(CompactString, u8, u8), u32>,
    /// Kernels that are staggered, and stacked.
    pub(super) staggered: FxHashMap<(CompactString, u8, u8), [u32; 2]>,
}

impl Evidence {
    /// Takes the votes of a statement as it was read, as often as it stands in the document.
    pub fn vote(&mut self, sketch: &Sketch, reading: &Reading, times: u32) {
        self.weigh(sketch, reading, times);
    }

    /// Takes votes back that were taken before.
    pub fn take_back(&mut self, sketch: &Sketch, reading: &Reading, times: u32) {
        // All counts wrap, so that this is a subtraction.
        self.weigh(sketch, reading, times.wrapping_neg());
    }

    fn weigh(&mut self, sketch: &Sketch, reading: &Reading, by: u32) {
        if sketch.unjudged.is_some() || by == 0 {
            return;
        }
        for letter in &sketch.coordinates {
            add(self.coordinates.entry(letter.clone()).or_default(), by);
        }
        self.vote_sums(sketch, by);
        self.vote_balance(sketch, reading, by);
        self.vote_unknown(sketch, reading, by);
        if !reading.odd.is_empty() {
            return;
        }
        self.vote_labels(sketch, reading, by);
        for form in &sketch.forms {
            add(self.forms.entry(form.clone()).or_default(), by);
        }
        for stacked in &sketch.stacked {
            let counts = self.staggered.entry(stacked.kernel.clone()).or_default();
            bump(counts, usize::from(!stacked.staggered), by);
        }
        for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
            let (_, events) = balance::events(sketch, &reading.choice, number);
            self.vote_letter(sketch, letter, &events, by);
        }
    }

    /// Sum signs speak against the summation convention, whether the statement balances or not.
    fn vote_sums(&mut self, sketch: &Sketch, by: u32) {
        for (n, bound) in sketch.bound.iter().enumerate() {
            let letter = &bound.letter;
            let again = sketch.bound.iter().take(n).any(|other| other.letter == *letter);
            let counts = self.sums.get_mut(class_of(letter) as usize).filter(|_| !again);
            if let (Some(counts), Some(_)) = (counts, sketch.number_of(letter)) {
                bump(counts, 1, by);
            }
        }
    }

    fn vote_balance(&mut self, sketch: &Sketch, reading: &Reading, by: u32) {
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
                bump(counts, usize::from(odd), by);
            }
        }
    }

    /// A letter that stands at least twice and balances speaks for the way the unknown commands were taken.
    fn vote_unknown(&mut self, sketch: &Sketch, reading: &Reading, by: u32) {
        let twice = sketch
            .letter_numbers()
            .any(|letter| sketch.places.iter().filter(|place| place.number == letter).count() > 1);
        for name in sketch.unknown.iter().filter(|_| twice || !reading.odd.is_empty()) {
            bump(self.unknown.entry(name.clone()).or_default(), usize::from(!reading.odd.is_empty()), by);
        }
    }

    fn vote_labels(&mut self, sketch: &Sketch, reading: &Reading, by: u32) {
        for (unit, index) in sketch.units.iter().zip(&reading.choice.index) {
            let likely = unit.bias > 0;
            if likely && !index {
                add(self.label.entry((unit.kernel.clone(), unit.letter.clone())).or_default(), by);
                add(self.label_kernel.entry(unit.kernel.clone()).or_default(), by);
                add(self.label_letter.entry(unit.letter.clone()).or_default(), by);
            }
            if *index && unit.coordinate {
                add(self.running.entry(unit.letter.clone()).or_default(), by);
            }
        }
    }

    fn vote_letter(&mut self, sketch: &Sketch, letter: &str, events: &[Event], by: u32) {
        let class = class_of(letter) as usize;
        let mut sure = false;
        for event in events {
            match event {
                Event::Pair(first, second) => {
                    self.vote_pair(sketch, class, (*first, *second), by);
                    // The same kernel twice (`E_e E_e`) says nothing: a label repeats too.
                    if differ(sketch, &[*first, *second]) {
                        sure = true;
                        if let Some(counts) = self.sums.get_mut(class) {
                            bump(counts, 0, by);
                        }
                        self.vote_lone(sketch, *first, by);
                        self.vote_lone(sketch, *second, by);
                    }
                }
                Event::Terms(terms) if terms.len() > 1 => {
                    let free: Vec<u32> = terms.iter().filter_map(|term| term.free).collect();
                    sure |= differ(sketch, &free);
                    let places = || terms.iter().filter_map(|term| term.free);
                    if differ(sketch, &free) {
                        places().for_each(|place| self.vote_lone(sketch, place, by));
                    }
                    let mut levels = places().filter_map(|place| sketch.place(place)).map(|place| place.level);
                    let first = levels.next();
                    let differ = levels.any(|level| Some(level) != first);
                    if let Some(counts) = self.free_levels.get_mut(class) {
                        bump(counts, usize::from(differ), by);
                    }
                }
                _ => {}
            }
        }
        if sure {
            add(self.index.entry(letter.into()).or_default(), by);
        }
    }

    fn vote_pair(&mut self, sketch: &Sketch, class: usize, (first, second): (u32, u32), by: u32) {
        let (Some(one), Some(two)) = (sketch.place(first), sketch.place(second)) else { return };
        let same = usize::from(one.level == two.level);
        match (one.written, two.written) {
            (Level::Down, Level::Down) => bump(&mut self.written, 1, by),
            (Level::Up, Level::Up) => {}
            _ => bump(&mut self.written, 0, by),
        }
        let kernels = [one, two].map(|place| sketch.units.get(place.unit as usize).map(|unit| unit.kernel.clone()));
        let symbol = [one, two].iter().any(|place| {
            sketch.units.get(place.unit as usize).is_some_and(|unit| is_symbol_kernel(&unit.kernel_letter))
        });
        let [first, second] = kernels;
        let second = second.filter(|second| Some(second) != first.as_ref());
        for kernel in [first, second].into_iter().flatten() {
            bump(self.kernel_pairs.entry((kernel, class_of(&one.letter))).or_default(), same, by);
        }
        if !symbol && let Some(counts) = self.pairs.get_mut(class) {
            bump(counts, same, by);
        }
    }

    fn vote_lone(&mut self, sketch: &Sketch, place: u32, by: u32) {
        let unit = sketch.place(place).and_then(|place| sketch.units.get(place.unit as usize));
        if let Some(unit) = unit.filter(|unit| !matches!(unit.shape, Shape::Several | Shape::Particle)) {
            add(self.lone.entry((unit.kernel.clone(), unit.class)).or_default(), by);
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

    pub(super) fn class_counts(table: &[[u32; 2]; 5], class: LetterClass) -> [u32; 2] {
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

fn bump(counts: &mut [u32; 2], at: usize, by: u32) {
    if let Some(count) = counts.get_mut(at) {
        add(count, by);
    }
}

fn add(count: &mut u32, by: u32) {
    *count = count.wrapping_add(by);
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
