//! What the sentences of all scopes mean together: index families, kernels, metrics, names of components.
//!
//! Scopes go from the outside in: the project, the root of the paper, the document. What is nearer replaces what is
//! farther, letter by letter and kernel by kernel. Within one scope the first word counts; what contradicts it is a
//! clash (`clashes.rs`). Built-in meanings (`built_in.rs`) are asked only where nothing is declared.

use compact_str::CompactString;
use indexwise_grammar::conventions::{Bound, Curvature, Kind, Name, Range, Sentence, Slot, Tensor};
use rustc_hash::FxHashMap;

use super::built_in::{LetterClass, bare_letter, class_of};

/// Letters that run over the same range.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Family {
    /// Its letters, in the order in which they were declared.
    pub letters: Vec<CompactString>,
    /// What they run over, if it was said.
    pub range: Option<Range>,
    /// Whether levels matter, if it was said or follows from a metric.
    pub levels: Option<Levels>,
    /// A letter of the family that this one is the spatial part of.
    pub part_of: Option<CompactString>,
    /// The letter of the dimension, if one was said to be that of this family.
    pub dimension: Option<CompactString>,
    /// Whether it is a family of frame indices.
    pub frame: bool,
    /// The kernel of the metric that moves its indices, if one was named.
    pub metric: Option<CompactString>,
}

/// Whether levels matter in a family.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Levels {
    /// Pairs stand one up, one down.
    InForce,
    /// Pairs may both be down.
    Cartesian,
}

/// A kernel with so many slots. Kernels of one name and different numbers of slots live side by side.
pub type KernelKey = (CompactString, usize);

/// What is known of a kernel.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Known {
    /// Its slots as declared; none for what is declared without scripts.
    pub slots: Vec<Slot>,
    /// Exchanges of slots.
    pub exchanges: Vec<Exchange>,
    /// What it is among the tensors that everybody knows.
    pub role: Option<Role>,
    /// The kinds that were declared of it.
    pub kinds: Vec<Kind>,
    /// Whether its trace is said to vanish.
    pub traceless: bool,
}

/// Slots that may be exchanged among one another, with a sign or without.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Exchange {
    /// Positions of the slots, from 0.
    pub slots: Vec<usize>,
    /// Whether an exchange changes the sign.
    pub antisymmetric: bool,
}

/// The part that a kernel plays.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Role {
    /// A metric; whether its components are constant.
    Metric {
        /// Whether its components do not depend on position.
        constant: bool,
        /// How many signs of its signature are negative, if it was said.
        negative: Option<usize>,
    },
    /// The connection of a metric.
    Christoffel,
    /// A tensor of curvature.
    Curvature(Curvature),
}

/// All declarations in force in a document.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Meanings {
    /// Index families.
    pub families: Vec<Family>,
    /// Kernels by name and number of slots.
    pub kernels: FxHashMap<KernelKey, Known>,
    /// Letters that are labels.
    pub labels: Vec<CompactString>,
    /// Names of components: coordinates, members of ranges.
    pub components: Vec<CompactString>,
    /// The coordinates by name, in their order: `t r \theta \phi are the coordinates`.
    pub coordinates: Vec<CompactString>,
    /// Kernels of covariant derivatives that are declared, with their metrics.
    pub derivatives: Vec<(CompactString, Option<CompactString>)>,
    /// Which metric raises the indices of which kernel.
    pub raised_by: Vec<(CompactString, CompactString)>,
    /// Letters of dimensions that belong to no family in particular.
    pub dimensions: Vec<CompactString>,
    /// Whether every chain of the document is to be verified.
    pub derivations_are_checked: bool,
}

impl Meanings {
    /// What holds when these sentences are put into a nearer scope.
    pub fn with<'s>(&self, sentences: impl Iterator<Item = &'s Sentence> + Clone) -> Self {
        let mut own = Self::default();
        for sentence in sentences.clone() {
            own.take_families(sentence);
        }
        for sentence in sentences {
            own.take_properties(sentence);
        }
        let mut all = self.clone();
        all.cover_with(own);
        all.settle_metrics();
        all
    }

    /// The family of a letter: `i'` and `i_1` belong to that of `i`.
    pub fn family(&self, letter: &str) -> Option<&Family> {
        let number = self.family_number(letter)?;
        self.families.get(number)
    }

    /// The number of a letter's family.
    pub fn family_number(&self, letter: &str) -> Option<usize> {
        let holds = |name: &str| self.families.iter().position(|family| family.letters.iter().any(|one| one == name));
        holds(letter).or_else(|| holds(bare_letter(letter)))
    }

    /// Whether levels matter for a letter, if the author says so.
    pub fn levels(&self, letter: &str) -> Option<Levels> {
        if let Some(family) = self.family(letter) {
            return family.levels;
        }
        // A metric whose letters belong to no family speaks for all letters of their class.
        self.levels_of_class(class_of(letter))
    }

    fn levels_of_class(&self, class: LetterClass) -> Option<Levels> {
        let metrics = self.metrics();
        let speaks = |slots: &[Slot]| {
            slots.iter().any(|slot| self.family(&slot.letter).is_none() && class_of(&slot.letter) == class)
        };
        metrics.into_iter().any(|(_, known)| speaks(&known.slots)).then_some(Levels::InForce)
    }

    /// Declared metrics, in the order of their names.
    pub fn metrics(&self) -> Vec<(&KernelKey, &Known)> {
        // Sorted below.
        #[allow(clippy::iter_over_hash_type)]
        let mut found: Vec<(&KernelKey, &Known)> =
            self.kernels.iter().filter(|(_, known)| matches!(known.role, Some(Role::Metric { .. }))).collect();
        found.sort_by(|one, two| one.0.cmp(two.0));
        found
    }

    /// Whether a kernel is declared with any number of slots.
    pub fn declares(&self, kernel: &str) -> bool {
        self.kernels.keys().any(|(name, _)| name == kernel)
    }

    /// The numbers of slots that a kernel is declared with, in order.
    pub fn slot_counts(&self, kernel: &str) -> Vec<usize> {
        let mut counts: Vec<usize> =
            self.kernels.keys().filter(|(name, _)| name == kernel).map(|(_, slots)| *slots).collect();
        counts.sort_unstable();
        counts
    }

    /// What is known of a kernel with so many slots.
    pub fn known(&self, kernel: &str, slots: usize) -> Option<&Known> {
        self.kernels.get(&(kernel.into(), slots))
    }

    /// Whether a kernel is declared to be of a kind, with any number of slots.
    pub fn is_kind(&self, kernel: &str, kind: Kind) -> bool {
        // Whether any holds does not depend on the order.
        #[allow(clippy::iter_over_hash_type)]
        self.kernels.iter().any(|((name, _), known)| name == kernel && known.kinds.contains(&kind))
    }

    /// Whether any kernel is declared to be of a kind.
    pub fn has_kind(&self, kind: Kind) -> bool {
        self.kernels.values().any(|known| known.kinds.contains(&kind))
    }

    /// Whether a letter in a script names a component by declaration and is no index.
    pub fn is_component(&self, letter: &str) -> bool {
        self.family_number(letter).is_none() && self.components.iter().any(|name| name == letter)
    }

    /// Whether a letter in a script is declared to be no index.
    pub fn is_not_index(&self, letter: &str) -> bool {
        let named = |names: &[CompactString]| names.iter().any(|name| name == letter || name == bare_letter(letter));
        named(&self.labels) || (self.family_number(letter).is_none() && named(&self.components))
    }

    /// Whether a family has numbers for values, so that components can be out of range.
    pub fn has_numbered_ranges(&self) -> bool {
        self.families.iter().any(|family| family.holds_number(0).is_some())
    }

    /// Whether nothing is declared.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    fn take_families(&mut self, sentence: &Sentence) {
        match sentence {
            Sentence::Family { letters, range } => {
                let own = Family { range: Some(range.clone()), ..Family::of(letters) };
                self.add_family(own);
                if let Range::Members(names) = range {
                    push_all(&mut self.components, names);
                }
            }
            Sentence::Frame { letters, raised_by } => self.add_family(Family {
                frame: true,
                levels: Some(Levels::InForce),
                metric: raised_by.as_ref().map(|name| name.text.clone()),
                ..Family::of(letters)
            }),
            // Here, so that of a label and an index in one scope the first word counts.
            Sentence::Labels(names) => {
                let free = names.iter().filter(|name| self.family_number(&name.text).is_none());
                self.labels.extend(free.map(|name| name.text.clone()).collect::<Vec<_>>());
            }
            Sentence::Spatial { letters, of } => {
                self.add_family(Family { part_of: of.first().map(|name| name.text.clone()), ..Family::of(letters) })
            }
            _ => {}
        }
    }

    /// Adds a family, or what is new of it where its letters are known already.
    fn add_family(&mut self, mut own: Family) {
        own.letters.retain(|letter| !self.labels.contains(letter));
        if own.letters.is_empty() {
            return;
        }
        let known = self.families.iter_mut().find(|family| own.letters.iter().all(|one| family.letters.contains(one)));
        let Some(known) = known else {
            let taken = |letter: &CompactString| self.families.iter().any(|family| family.letters.contains(letter));
            let free: Vec<CompactString> = own.letters.iter().filter(|letter| !taken(letter)).cloned().collect();
            let beside = self.families.iter_mut().find(|family| family.range.is_some() && family.range == own.range);
            match beside.filter(|family| free.len() < own.letters.len() && family.part_of == own.part_of) {
                // `i j run from 1 to 3` and `j k run from 1 to 3` are one family.
                Some(family) => family.letters.extend(free),
                None if free.is_empty() => {}
                None => self.families.push(Family { letters: free, ..own }),
            }
            return;
        };
        known.range = known.range.take().or(own.range);
        known.levels = known.levels.or(own.levels);
        known.part_of = known.part_of.take().or(own.part_of);
        known.metric = known.metric.take().or(own.metric);
        known.frame |= own.frame;
    }

    fn take_properties(&mut self, sentence: &Sentence) {
        match sentence {
            Sentence::Cartesian(letters) => {
                for letter in letters {
                    if self.family_number(&letter.text).is_none() {
                        self.add_family(Family::of(letters));
                    }
                    if let Some(number) = self.family_number(&letter.text)
                        && let Some(family) = self.families.get_mut(number)
                    {
                        family.levels = Some(Levels::Cartesian);
                    }
                }
            }
            Sentence::Dimension { letter, of } if of.is_empty() => self.dimensions.push(letter.text.clone()),
            Sentence::Dimension { letter, of } => {
                if of.iter().all(|name| self.family_number(&name.text).is_none()) {
                    self.add_family(Family::of(of));
                }
                for number in of.iter().filter_map(|name| self.family_number(&name.text)).collect::<Vec<_>>() {
                    if let Some(family) = self.families.get_mut(number) {
                        family.dimension = Some(letter.text.clone());
                    }
                }
            }
            Sentence::CoordinateNames(names) => {
                push_all(&mut self.components, names);
                // One name says what a script means, not what a range is.
                if self.coordinates.is_empty() && names.len() > 1 {
                    push_all(&mut self.coordinates, names);
                }
            }
            Sentence::CovariantDerivative { kernel, of } => {
                self.derivatives.push((kernel.text.clone(), of.as_ref().map(|name| name.text.clone())));
            }
            Sentence::Raises { metric, kernels } => {
                self.raised_by.extend(kernels.iter().map(|name| (name.text.clone(), metric.text.clone())));
            }
            Sentence::DerivationsAreChecked => self.derivations_are_checked = true,
            _ => self.take_kernel(sentence),
        }
    }

    fn take_kernel(&mut self, sentence: &Sentence) {
        match sentence {
            Sentence::Metric { tensor, constant, signature } => {
                let known = self.know(tensor);
                let negative = signature.iter().filter(|plus| !**plus).count();
                let negative = (!signature.is_empty()).then_some(negative);
                known.role = Some(Role::Metric { constant: *constant, negative });
                known.exchange(&[0, 1], false);
            }
            Sentence::Christoffel { tensor, .. } => {
                let known = self.know(tensor);
                known.role = Some(Role::Christoffel);
            }
            Sentence::Curvature { tensor, kind, .. } => {
                let known = self.know(tensor);
                known.role = Some(Role::Curvature(*kind));
                if matches!(kind, Curvature::Ricci | Curvature::Einstein) {
                    known.exchange(&[0, 1], false);
                }
            }
            Sentence::Symmetry { tensors, antisymmetric, slots } => {
                for tensor in tensors {
                    let own = tensor.slots();
                    let at = |name: &Name| own.iter().position(|slot| slot.letter == name.text);
                    let positions: Vec<usize> =
                        if slots.is_empty() { (0..own.len()).collect() } else { slots.iter().filter_map(at).collect() };
                    self.know(tensor).exchange(&positions, *antisymmetric);
                }
            }
            Sentence::Traceless(tensors) => tensors.iter().for_each(|tensor| self.know(tensor).traceless = true),
            Sentence::Kind { tensors, kind } => {
                for tensor in tensors {
                    let known = self.know(tensor);
                    if !known.kinds.contains(kind) {
                        known.kinds.push(*kind);
                    }
                }
            }
            Sentence::Coordinates(tensor) => {
                self.know(tensor);
            }
            Sentence::Definition(statement) => {
                let left = statement.sides.first().and_then(|side| match side.terms.as_slice() {
                    [term] => match term.factors.as_slice() {
                        [factor] => Some(factor),
                        _ => None,
                    },
                    _ => None,
                });
                if let Some(factor) = left {
                    self.know(&Tensor { factor: factor.clone(), span: factor.span });
                }
            }
            _ => {}
        }
    }

    fn know(&mut self, tensor: &Tensor) -> &mut Known {
        let slots = tensor.slots();
        let known = self.kernels.entry((tensor.name().into(), slots.len())).or_default();
        if known.slots.is_empty() {
            known.slots = slots;
        }
        known
    }

    /// Puts a nearer scope over this one.
    fn cover_with(&mut self, nearer: Self) {
        let claimed = |letter: &CompactString| {
            nearer.families.iter().any(|family| family.letters.contains(letter))
                || nearer.labels.contains(letter)
                || nearer.components.contains(letter)
        };
        for family in &mut self.families {
            family.letters.retain(|letter| !claimed(letter));
        }
        self.families.retain(|family| !family.letters.is_empty());
        self.labels.retain(|letter| !claimed(letter));
        self.families.extend(nearer.families);
        self.labels.extend(nearer.labels);
        self.components.extend(nearer.components);
        if !nearer.coordinates.is_empty() {
            self.coordinates = nearer.coordinates;
        }
        // Each key is put in once, so that the order does not matter.
        self.kernels.extend(nearer.kernels);
        self.derivatives.retain(|(kernel, _)| nearer.derivatives.iter().all(|(other, _)| other != kernel));
        self.derivatives.extend(nearer.derivatives);
        self.raised_by.retain(|(kernel, _)| nearer.raised_by.iter().all(|(other, _)| other != kernel));
        self.raised_by.extend(nearer.raised_by);
        self.dimensions.extend(nearer.dimensions);
        self.derivations_are_checked |= nearer.derivations_are_checked;
    }

    /// A metric puts levels in force in the families of its letters, unless the author calls them Cartesian.
    fn settle_metrics(&mut self) {
        let letters: Vec<CompactString> =
            self.metrics().iter().flat_map(|(_, known)| &known.slots).map(|slot| slot.letter.clone()).collect();
        for family in &mut self.families {
            if family.letters.iter().any(|letter| letters.contains(letter)) {
                family.levels = family.levels.or(Some(Levels::InForce));
            }
        }
    }
}

impl Family {
    fn of(letters: &[Name]) -> Self {
        Self { letters: letters.iter().map(|name| name.text.clone()).collect(), ..Self::default() }
    }

    /// How many values an index of the family takes, if it is a number.
    pub fn size(&self) -> Option<u32> {
        match self.range.as_ref()? {
            Range::Between(first, Bound::Number(last)) => last.checked_sub(*first).map(|steps| steps + 1),
            Range::Size(Bound::Number(size)) => Some(*size),
            Range::Members(names) => u32::try_from(names.len()).ok(),
            _ => None,
        }
    }

    /// Whether a number is a value of its indices; nothing if its values have no numbers.
    pub fn holds_number(&self, number: u32) -> Option<bool> {
        match self.range.as_ref()? {
            Range::Between(first, Bound::Number(last)) => Some((*first..=*last).contains(&number)),
            _ => None,
        }
    }

    /// The first and the last number of its range, if both are numbers.
    pub fn numbers(&self) -> Option<(u32, u32)> {
        match self.range.as_ref()? {
            Range::Between(first, Bound::Number(last)) => Some((*first, *last)),
            _ => None,
        }
    }

    /// Whether two families are known to run over different ranges.
    pub fn differs_from(&self, other: &Self) -> bool {
        match (self.size(), other.size()) {
            (Some(one), Some(two)) => one != two,
            _ => false,
        }
    }

    /// Whether the values are numbers of the other's range, all but one of them: `from 1 to 2` beside `from 1 to 3`, the
    /// surface in its space, though nobody says so.
    pub fn lies_in(&self, other: &Self) -> bool {
        let (Some(Range::Between(first, Bound::Number(last))), Some(size)) = (&self.range, self.size()) else {
            return false;
        };
        let held = |number: u32| other.holds_number(number) == Some(true);
        held(*first) && held(*last) && other.size() == size.checked_add(1)
    }

    /// Whether one of the families is the spatial part of the other.
    pub fn is_part_of(&self, other: &Self) -> bool {
        self.part_of.as_ref().is_some_and(|letter| other.letters.contains(letter))
    }
}

impl Known {
    /// Notes that slots may be exchanged.
    fn exchange(&mut self, slots: &[usize], antisymmetric: bool) {
        let own = Exchange { slots: slots.to_vec(), antisymmetric };
        // Of two slots with both signs nothing would be left but zero: the first word counts.
        let shared = |other: &Exchange| other.slots.iter().filter(|slot| slots.contains(slot)).count();
        let clash = self.exchanges.iter().any(|other| other.antisymmetric != antisymmetric && shared(other) > 1);
        if slots.len() > 1 && !clash && !self.exchanges.contains(&own) {
            self.exchanges.push(own);
        }
    }

    /// Whether nothing but its slots is said of it that would leave room for unknown properties: an arbitrary field,
    /// or one whose symmetries are declared.
    pub fn is_settled(&self) -> bool {
        self.role.is_some() || !self.exchanges.is_empty() || !self.kinds.is_empty()
    }
}

fn push_all(into: &mut Vec<CompactString>, names: &[Name]) {
    into.extend(names.iter().map(|name| name.text.clone()));
}
