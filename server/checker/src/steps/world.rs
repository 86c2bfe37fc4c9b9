//! The world of a document's claims: families, metrics, fields and definitions as the algebra wants them.
//!
//! It grows while statements are lowered, in the order of the text, and is shared by all claims of a document; the
//! algebra draws only what a claim uses. Declarations come first, then built-in meanings, then assumptions: a family
//! that nothing declares has as many members as the dimension that is tried, coordinates, and a metric `g` unless
//! its letters are Cartesian; a kernel that nothing declares is an arbitrary field of unknown meaning.

use compact_str::CompactString;
use indexwise_algebra::expression::{Definition, Expression, Family, Field, Index, Metric, MetricValues, Size, World};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::sample::SlotSymmetry;
use indexwise_grammar::conventions::{Bound, Kind, Range};
use rustc_hash::FxHashMap;

use crate::conventions::built_in::{is_constant_metric, is_metric_by_custom};
use crate::conventions::meanings::{Known, Meanings, Role};

/// The world of a document while it is being read.
#[derive(Clone, Debug)]
pub struct Surroundings<'a> {
    /// Declarations in force.
    pub meanings: &'a Meanings,
    /// What the claims refer to.
    pub world: World,
    families: FxHashMap<FamilyKey, usize>,
    metrics: FxHashMap<(CompactString, usize), usize>,
    fields: FxHashMap<(CompactString, usize), usize>,
    /// Definitions by kernel and number of slots, the latest last.
    definitions: FxHashMap<(CompactString, usize), usize>,
    parameters: FxHashMap<CompactString, usize>,
    /// What stands under roots behind a minus sign in the text, without blanks: `g}` of `\sqrt{-g}`.
    under_roots: Vec<String>,
    /// Metrics whose signature nobody says.
    pub open_signatures: Vec<usize>,
    /// Whether a definition among the conventions chooses signs of the curvature or of the epsilon tensor.
    pub signs_are_declared: bool,
    /// From which order in small fields on definitions have left terms out.
    pub neglected: Option<usize>,
    /// Whether any kernel is declared a matrix.
    has_matrices: bool,
    /// The family of rows and columns, once a matrix has been met.
    matrices: Option<usize>,
    /// Defaults that a verdict has to name, by the family or kernel that asked for them.
    pub assumptions: Vec<String>,
}

/// A family: a declared one by its number, else Cartesian or levelled letters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
enum FamilyKey {
    Declared(usize),
    Cartesian,
    Levelled,
}

/// Whether a kernel is a position by custom: its derivatives are no arbitrary fields, whatever is declared of it.
fn is_position(kernel: &str, slots: usize) -> bool {
    slots == 1 && matches!(kernel, "x" | "X" | "y" | "r")
}

/// A number that has a name: constant, but of no value here that a counterexample could give.
fn is_number_by_custom(kernel: &str, slots: usize) -> bool {
    slots == 0 && kernel == "\\pi"
}

/// How a root begins whose radicand is the opposite of something.
const NEGATED_ROOTS: [&str; 6] = ["\\sqrt{-", "\\sqrt-", "sqrt(-", "sqrt-", "\u{221a}(-", "\u{221a}-"];

/// Signs of a radicand that are kept.
const RADICAND: usize = 40;

/// What stands in a text under roots behind a minus sign, without blanks and without words for a determinant.
fn negated_radicands(text: &str) -> Vec<String> {
    let bare: String = text.chars().filter(|sign| !sign.is_whitespace()).collect();
    let mut found = Vec::new();
    for root in NEGATED_ROOTS {
        for (at, root) in bare.match_indices(root) {
            let rest = bare.get(at + root.len()..).unwrap_or_default();
            let rest = ["\\det", "det"].iter().find_map(|word| rest.strip_prefix(word)).unwrap_or(rest);
            found.push(rest.trim_start_matches(['(', '{']).chars().take(RADICAND).collect());
        }
    }
    found.sort_unstable();
    found.dedup();
    found
}

/// Dimensions that are tried where none is declared.
const DIMENSIONS: [usize; 3] = [2, 3, 4];

impl<'a> Surroundings<'a> {
    /// The world of a document's declarations; the text tells what its metrics are like where nothing is declared.
    pub fn new(meanings: &'a Meanings, text: &str) -> Self {
        let world = World { dimensions: DIMENSIONS.to_vec(), ..World::default() };
        Self {
            meanings,
            world,
            families: FxHashMap::default(),
            metrics: FxHashMap::default(),
            fields: FxHashMap::default(),
            definitions: FxHashMap::default(),
            parameters: FxHashMap::default(),
            under_roots: negated_radicands(text),
            open_signatures: Vec::new(),
            signs_are_declared: false,
            neglected: None,
            has_matrices: meanings.has_kind(Kind::Matrix),
            matrices: None,
            assumptions: Vec::new(),
        }
    }

    /// The family of a letter; `cartesian` where its levels do not matter.
    pub fn family(&mut self, letter: &str, cartesian: bool) -> usize {
        let key = match self.meanings.family_number(letter) {
            Some(number) => FamilyKey::Declared(number),
            None if cartesian => FamilyKey::Cartesian,
            None => FamilyKey::Levelled,
        };
        if let Some(known) = self.families.get(&key) {
            return *known;
        }
        let family = match key {
            FamilyKey::Declared(number) => self.declared_family(number),
            _ => Family { size: Size::Dimension(0), coordinates: Some(0), metric: None },
        };
        self.world.families.push(family);
        let number = self.world.families.len() - 1;
        self.families.insert(key, number);
        number
    }

    /// The family of scalars where a statement has no levelled index: that of the declared metric, else of `\mu`.
    pub fn levelled_family(&mut self) -> usize {
        let declared = self.meanings.metrics().into_iter().find_map(|(_, known)| known.slots.first());
        let letter = declared.map_or(CompactString::const_new("\\mu"), |slot| slot.letter.clone());
        self.family(&letter, false)
    }

    /// Whether any kernel is declared a matrix.
    pub fn has_matrices(&self) -> bool {
        self.has_matrices
    }

    /// The family of rows and columns of matrices: the declared one, else that of levelled letters beside the first
    /// matrix, else Cartesian.
    ///
    /// # Errors
    /// Several families are declared.
    pub fn matrix_family(&mut self, beside: &[usize]) -> Result<usize, String> {
        if let Some(family) = self.matrices {
            return Ok(family);
        }
        let declared = self.meanings.families.first().and_then(|family| family.letters.first().cloned());
        let family = match (self.meanings.families.len(), declared, beside) {
            (0, ..) if !beside.is_empty() => beside.first().copied().unwrap_or_default(),
            (0, ..) => self.family("i", true),
            (1, Some(letter), _) => self.family(&letter, true),
            _ => return Err("it is not said which of the declared ranges is that of the matrices".to_owned()),
        };
        self.matrices = Some(family);
        Ok(family)
    }

    fn declared_family(&mut self, number: usize) -> Family {
        let Some(family) = self.meanings.families.get(number) else {
            return Family { size: Size::Dimension(0), coordinates: Some(0), metric: None };
        };
        let size = match (&family.range, family.size()) {
            (_, Some(size)) => Size::Fixed(size as usize),
            // `from 1 to n-1`, `over n dimensions`.
            (Some(Range::Between(first, Bound::Letter(_, less))), _) => {
                Size::Dimension((*less + *first).saturating_sub(1) as usize)
            }
            (Some(Range::Size(Bound::Letter(_, less))), _) => Size::Dimension(*less as usize),
            _ => Size::Dimension(0),
        };
        let coordinates = match &family.part_of {
            Some(_) => Some(1),
            None if family.frame => None,
            None => Some(0),
        };
        Family { size, coordinates, metric: None }
    }

    /// The metric of a family: the declared one with slots in it, else `g`.
    pub fn metric_of(&mut self, family: usize) -> usize {
        if let Some(metric) = self.world.families.get(family).and_then(|family| family.metric) {
            return metric;
        }
        let letters: Vec<CompactString> = self
            .families
            .iter()
            .find(|(_, number)| **number == family)
            .and_then(|(key, _)| match key {
                FamilyKey::Declared(number) => self.meanings.families.get(*number),
                _ => None,
            })
            .map(|family| family.letters.clone())
            .unwrap_or_default();
        let holds = |known: &Known| {
            known.slots.iter().all(|slot| {
                letters.contains(&slot.letter) || letters.is_empty() && self.meanings.family(&slot.letter).is_none()
            })
        };
        let declared = self.meanings.metrics().into_iter().filter(|(_, known)| holds(known));
        // Of several the one that everybody writes, and none that is flat.
        let rank =
            |name: &str, known: &Known| (name != "g", matches!(known.role, Some(Role::Metric { constant: true, .. })));
        let declared = declared.min_by_key(|((name, _), known)| rank(name, known)).map(|((name, _), _)| name.clone());
        let name = declared.unwrap_or_else(|| CompactString::const_new("g"));
        let metric = self.metric(&name, family);
        if let Some(family) = self.world.families.get_mut(family) {
            family.metric = Some(metric);
        }
        metric
    }

    /// The metric of a name on a family.
    pub fn metric(&mut self, name: &CompactString, family: usize) -> usize {
        let key = (name.clone(), family);
        if let Some(known) = self.metrics.get(&key) {
            return *known;
        }
        let role = self.meanings.known(name, 2).and_then(|known| known.role.clone());
        let defined = self.definitions.get(&(name.clone(), 2)).copied();
        let values = match (defined, role) {
            (Some(definition), _) => MetricValues::Defined(definition),
            (None, Some(Role::Metric { constant: true, .. })) => MetricValues::Constant,
            (None, Some(_)) => MetricValues::Arbitrary,
            (None, None) if is_constant_metric(name) => MetricValues::Flat,
            (None, None) => MetricValues::Arbitrary,
        };
        let declared = match self.meanings.known(name, 2).and_then(|known| known.role.as_ref()) {
            Some(Role::Metric { negative, .. }) => *negative,
            _ => None,
        };
        // Time is counted where the flat metric is meant, and where the determinant is negative.
        let bare: String = name.split_whitespace().collect();
        let named =
            |radicand: &String| radicand.strip_prefix(&bare).is_some_and(|rest| !rest.starts_with(char::is_alphabetic));
        let is_negated = self.under_roots.iter().any(named);
        let minus = declared.unwrap_or(usize::from(name.contains("eta") || is_negated));
        if declared.is_none() && !name.contains("eta") {
            self.open_signatures.push(self.world.metrics.len());
        }
        self.world.metrics.push(Metric { name: name.to_string(), family, values, minus, varies: true });
        let number = self.world.metrics.len() - 1;
        self.metrics.insert(key, number);
        number
    }

    /// The metric of this name on a family, if it is defined by its components.
    pub fn defined_metric(&mut self, name: &CompactString, family: usize) -> Option<usize> {
        if !self.plays_metric(name) || !self.is_defined(name, 2) {
            return None;
        }
        let metric = self.metric(name, family);
        let values = self.world.metrics.get(metric).map(|metric| &metric.values);
        matches!(values, Some(MetricValues::Defined(_))).then_some(metric)
    }

    /// Whether a family has more than one metric.
    pub fn has_metrics(&self, family: usize) -> bool {
        self.world.metrics.iter().filter(|metric| metric.family == family).count() > 1
    }

    /// Makes a metric of a kernel that has been defined and plays one; it moves the indices of its family where a flat
    /// one did before, or, if it is declared, one that is not.
    pub fn define_metric(&mut self, name: &CompactString, slots: &[Index]) {
        let [one, two] = slots else { return };
        let levels = [one.level, two.level] == [Level::Down, Level::Down];
        let Some(definition) = self.definition(name, 2).filter(|_| levels && one.family == two.family) else { return };
        if !self.plays_metric(name) {
            return;
        }
        let metric = self.metric(name, one.family);
        if self.mentions(definition, metric) {
            return;
        }
        if let Some(own) = self.world.metrics.get_mut(metric) {
            own.values = MetricValues::Defined(definition);
        }
        let declared = self.is_declared_metric(name);
        let gives_way = |other: usize| {
            let flat = |own: &Metric| own.values == MetricValues::Flat;
            let lesser = |own: &Metric| declared && !self.is_declared_metric(&own.name);
            self.world.metrics.get(other).is_some_and(|own| flat(own) || lesser(own))
        };
        if self.world.families.get(one.family).is_some_and(|family| family.metric.is_none_or(gives_way))
            && let Some(family) = self.world.families.get_mut(one.family)
        {
            family.metric = Some(metric);
        }
    }

    /// Whether a kernel with two slots is a metric, by declaration or by custom.
    fn plays_metric(&self, name: &str) -> bool {
        let role = self.meanings.known(name, 2).and_then(|known| known.role.as_ref());
        self.is_declared_metric(name) || role.is_none() && is_metric_by_custom(name)
    }

    fn is_declared_metric(&self, name: &str) -> bool {
        let role = self.meanings.known(name, 2).and_then(|known| known.role.as_ref());
        matches!(role, Some(Role::Metric { .. }))
    }

    /// Whether a metric, or what follows from it, stands in a definition.
    fn mentions(&self, definition: usize, metric: usize) -> bool {
        let mut pending: Vec<&Expression> =
            self.world.definitions.get(definition).map(|own| &own.body).into_iter().collect();
        while let Some(part) = pending.pop() {
            let own = match part {
                Expression::Metric { metric, .. }
                | Expression::Determinant(metric)
                | Expression::Christoffel { metric, .. }
                | Expression::Curvature { metric, .. }
                | Expression::Covariant { metric, .. } => Some(*metric),
                Expression::Epsilon { metric, .. } => *metric,
                _ => None,
            };
            if own == Some(metric) {
                return true;
            }
            pending.extend(part.parts());
        }
        false
    }

    /// The definition of a kernel with so many slots, if one stands before.
    pub fn definition(&self, kernel: &CompactString, slots: usize) -> Option<usize> {
        self.definitions.get(&(kernel.clone(), slots)).copied()
    }

    /// Whether a kernel with so many slots has been used or defined.
    pub fn is_defined(&self, kernel: &CompactString, slots: usize) -> bool {
        self.definitions.contains_key(&(kernel.clone(), slots))
    }

    /// Defines a kernel.
    pub fn define(&mut self, kernel: &CompactString, free: Vec<Index>, body: Expression) {
        let slots = free.len();
        self.world.definitions.push(Definition { name: kernel.to_string(), free, body });
        self.definitions.insert((kernel.clone(), slots), self.world.definitions.len() - 1);
    }

    /// Takes the last definition back, which is that of this kernel: the kernel is an arbitrary field again.
    pub fn forget_last_definition(&mut self, kernel: &CompactString, slots: usize) {
        self.world.definitions.pop();
        self.definitions.remove(&(kernel.clone(), slots));
    }

    /// Forgets what a kernel with so many slots is defined as.
    pub fn forget(&mut self, kernel: &CompactString, slots: usize) {
        self.definitions.remove(&(kernel.clone(), slots));
    }

    /// The field of a kernel with these slots; what it is on is what it was first used with, or declared with.
    pub fn field(&mut self, kernel: &CompactString, slots: &[(usize, Level)], exchanges: Vec<SlotSymmetry>) -> usize {
        let key = (kernel.clone(), slots.len());
        if let Some(known) = self.fields.get(&key) {
            return *known;
        }
        let known = self.meanings.known(kernel, slots.len());
        let is = |kind: Kind| self.meanings.is_kind(kernel, kind);
        let field = Field {
            name: kernel.to_string(),
            slots: slots.to_vec(),
            symmetries: exchanges,
            traceless: known.is_some_and(|known| known.traceless),
            constant: is(Kind::Constant) || is_number_by_custom(kernel, slots.len()),
            small: is(Kind::Small),
            varies: true,
            known: (known.is_some_and(Known::is_settled) || is(Kind::Matrix) && slots.len() == 2)
                && !is_position(kernel, slots.len()),
        };
        self.world.fields.push(field);
        let number = self.world.fields.len() - 1;
        self.fields.insert(key, number);
        number
    }

    /// A world in which metrics whose signature nobody says have the other usual one; nothing if there are none.
    pub fn other_signature(&self, world: &World) -> Option<World> {
        let mut other = world.clone();
        for metric in &self.open_signatures {
            let metric = other.metrics.get_mut(*metric)?;
            metric.minus = usize::from(metric.minus == 0);
        }
        (!self.open_signatures.is_empty()).then_some(other)
    }

    /// The parameter of a variation or of a derivative along a curve.
    pub fn parameter(&mut self, name: &str) -> usize {
        if let Some(known) = self.parameters.get(name) {
            return *known;
        }
        self.world.parameters.push(name.to_owned());
        let number = self.world.parameters.len() - 1;
        self.parameters.insert(name.into(), number);
        number
    }
}
