//! The steps of a document, judged by the algebra and told as findings.
//!
//! A verdict is a function of a step's expressions and of what the document declares, so that it can be had again; its
//! draws follow from the step's own text. Where a derivative's reach can be read in two ways, both are judged. An
//! error says that a proof is attached; whatever rests on a kernel of unknown meaning is a hint that names it.

use std::hash::{Hash, Hasher};
use std::time::{Duration, Instant};

use compact_str::CompactString;
use indexwise_algebra::expression::{Expression, Given, Size, World};
use indexwise_algebra::verdict::{self, Claim, Limits, Unshown, Verdict};
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Statement;
use rustc_hash::{FxHashMap, FxHashSet, FxHasher};

use crate::conventions::meanings::Meanings;
use crate::finding::{Counterexample, Finding, Fix, Related, Severity, StepVerdict};
use crate::ledger::shown;
use crate::paper::Steps;
use crate::rules;
use crate::terms::Eyes;

use super::claims::{Asked, Step, relations_of, steps_of};
use super::conventions::{self, has_curvature, other_signs};
use super::repairs::{Broken, Look, Source, repairs};
use super::standing::{conditioned, doubt, kernels};
use super::world::Surroundings;

/// Multiplications for the verdict of one step: about a second.
const STEP_WORK: u64 = 100_000_000;
/// Steps of one document that are judged.
const STEPS: usize = 2_000;
/// Time for the steps of one document. Beyond it the rest is undecided, and says so; it is the one thing in a report
/// that a slow machine can change.
const DOCUMENT_TIME: Duration = Duration::from_secs(60);
/// The largest dimension that is tried because so many indices are antisymmetrised.
const LARGEST_DIMENSION: usize = 6;

/// Multiplications for one look at an edit that may mend a step, and for the verdict about it.
const REPAIR_WORK: [u64; 2] = [2_000_000, 30_000_000];
/// Steps of one document that are tried to be mended.
const MENDED: usize = 30;

/// Judges the steps of a document, statement by statement in the order of the text.
pub struct StepJudge<'m> {
    surroundings: Surroundings<'m>,
    known: FxHashMap<u64, Verdict>,
    /// Kernels that the text states conditions on: they are no arbitrary fields.
    conditioned: FxHashSet<CompactString>,
    /// The verdicts so far.
    pub counts: Steps,
    /// Whether the step judged last may be a law.
    law: bool,
    left: usize,
    mended: usize,
    /// The steps of the last statement that are not shown, by their signs.
    open: Vec<Step>,
    begun: Option<Instant>,
}

/// Something given, in the world of its document.
#[derive(Clone, Debug)]
pub struct LabelledGiven(Given);

impl<'m> StepJudge<'m> {
    /// For a document with these declarations.
    pub fn new(meanings: &'m Meanings) -> Self {
        let surroundings = Surroundings::new(meanings);
        Self {
            surroundings,
            known: FxHashMap::default(),
            conditioned: FxHashSet::default(),
            counts: Steps::default(),
            law: false,
            left: STEPS,
            mended: MENDED,
            open: Vec::new(),
            begun: None,
        }
    }

    /// Notes what a statement that is no claim puts under a condition; all statements come here before the first is
    /// judged, for a condition may be stated after its use.
    pub fn condition(&mut self, statement: &Statement, eyes: &Eyes<'_>) {
        self.conditioned.extend(conditioned(statement, eyes));
    }

    /// Takes a statement: its definitions, and the findings about its claims. `givens` are statements that are taken as
    /// given, by their labels, each with the eyes of its reading.
    pub fn statement(
        &mut self,
        statement: &Statement,
        source: &Source<'_>,
        eyes: &Eyes<'_>,
        asked: Asked,
        givens: &[LabelledGiven],
    ) -> Vec<Finding> {
        self.surroundings.world.givens = givens.iter().map(|given| given.0.clone()).collect();
        let steps = steps_of(statement, eyes, &mut self.surroundings, asked);
        let mut told: Vec<Option<Finding>> = Vec::with_capacity(steps.len());
        for step in &steps {
            self.law = false;
            self.surroundings.world.neglected = step.neglected;
            told.push(self.step(step, source.text, asked));
            // A law is a condition for what comes after it.
            if self.law {
                self.conditioned.extend(statement.sides.iter().take(2).flat_map(|side| kernels(side, eyes)));
            }
        }
        let held: Vec<(usize, bool)> =
            steps.iter().zip(&told).map(|(step, told)| (step.relation, told.is_none())).collect();
        self.open.clear();
        let mut found: Vec<Finding> = Vec::new();
        for (step, finding) in steps.iter().zip(told) {
            let Some(mut finding) = finding else { continue };
            let broken = Broken { statement, relation: step.relation, others: &held };
            finding.fixes = self.fixes(step, &finding, &broken, eyes, source);
            let differs = finding.verdict.as_ref().is_some_and(|verdict| verdict.verdict == "differs");
            if differs && givens.is_empty() && step.claims.as_ref().is_ok_and(|claims| claims.len() == 1) {
                self.open.push(step.clone());
            }
            if let Some(signs) = self.other_signs(step, &finding, source.text) {
                finding.message.push_str(&format!("; it holds with the other sign {signs}"));
            }
            found.push(finding);
        }
        // In a note nobody has asked; an ordinary page is no derivation.
        found.retain(|finding| asked != Asked::Quietly || finding.severity != Severity::Hint);
        self.surroundings.world.givens.clear();
        self.surroundings.world.neglected = None;
        found
    }

    /// A statement as something given: each of its relations.
    pub fn given(&mut self, label: &str, statement: &Statement, eyes: &Eyes<'_>) -> Vec<LabelledGiven> {
        let claims = relations_of(statement, eyes, &mut self.surroundings);
        let given = |(left, right)| LabelledGiven(Given { label: label.to_owned(), left, right: Some(right) });
        claims.into_iter().map(given).collect()
    }

    /// Takes a definition of the conventions.
    ///
    /// # Errors
    /// The name, if it is defined by itself.
    pub fn declared(&mut self, statement: &Statement, eyes: &Eyes<'_>) -> Result<(), CompactString> {
        conventions::take(statement, eyes, &mut self.surroundings)
    }

    /// Whether a step of the last statement that was not shown, the one with this sign, holds under something given.
    /// Nothing if there is no such step.
    pub fn holds_with(&self, sign: Span, givens: &[LabelledGiven], text: &str) -> Option<bool> {
        let step = self.open.iter().find(|step| step.sign == sign)?;
        let (left, right) = step.claims.as_ref().ok()?.first()?;
        let mut world = self.surroundings.world.clone();
        world.givens = givens.iter().map(|given| given.0.clone()).collect();
        world.neglected = step.neglected;
        world.dimensions = dimensions(&world, &[left, right], step.antisymmetrised);
        Some(self.holds(step, text, left, right, world))
    }

    /// Whether two expressions are equal in a world, with the work of a verdict about an edit.
    fn holds(&self, step: &Step, text: &str, left: &Expression, right: &Expression, world: World) -> bool {
        let begun = self.begun;
        let stop = || begun.is_some_and(|begun| begun.elapsed() > DOCUMENT_TIME);
        let limits = Limits { total: REPAIR_WORK[1], trials: 0, stop: Some(&stop), ..Limits::seeded(seed(step, text)) };
        let claim = Claim { left: left.clone(), right: right.clone(), world };
        matches!(verdict::judge(&claim, &limits), Verdict::Holds { undefined, .. } if undefined.is_empty())
    }

    /// Other signs of the curvature with which a step holds that does not under those in force.
    fn other_signs(&self, step: &Step, finding: &Finding, text: &str) -> Option<&'static str> {
        finding.verdict.as_ref().filter(|verdict| verdict.verdict != "undecided")?;
        let [(left, right)] = step.claims.as_ref().ok()?.as_slice() else { return None };
        let world = &self.surroundings.world;
        if !has_curvature(world, [left, right]) {
            return None;
        }
        let holds = |signs| {
            let dimensions = dimensions(world, &[left, right], step.antisymmetrised);
            let neglected = step.neglected;
            self.holds(step, text, left, right, World { signs, dimensions, neglected, ..world.clone() })
        };
        other_signs(world.signs).into_iter().find(|(signs, _)| holds(*signs)).map(|(_, said)| said)
    }

    /// What would make a step hold, if it fails.
    fn fixes(
        &mut self,
        step: &Step,
        finding: &Finding,
        broken: &Broken<'_>,
        eyes: &Eyes<'_>,
        source: &Source<'_>,
    ) -> Vec<Fix> {
        let verdict = finding.verdict.as_ref().filter(|verdict| matches!(verdict.verdict, "fails" | "needs dimension"));
        let dimension = verdict.and_then(|verdict| verdict.fails.first().copied());
        let (Some(dimension), Some(left)) = (dimension, self.mended.checked_sub(1)) else { return Vec::new() };
        self.mended = left;
        let (begun, seed) = (self.begun, seed(step, source.text));
        let holds = |surroundings: &Surroundings<'_>, left: &Expression, right: &Expression, look: Look| {
            let mut world = surroundings.world.clone();
            world.dimensions = match look {
                Look::Once => vec![dimension],
                Look::InFull => dimensions(&world, &[left, right], step.antisymmetrised),
            };
            let stop = || begun.is_some_and(|begun| begun.elapsed() > DOCUMENT_TIME);
            let usual = Limits { trials: 0, stop: Some(&stop), ..Limits::seeded(seed) };
            let limits = match look {
                Look::Once => Limits { total: REPAIR_WORK[0], draws: 1, ..usual },
                Look::InFull => Limits { total: REPAIR_WORK[1], ..usual },
            };
            let claim = Claim { left: left.clone(), right: right.clone(), world };
            matches!(verdict::judge(&claim, &limits), Verdict::Holds { undefined, .. } if undefined.is_empty())
        };
        repairs(broken, eyes, source, &self.surroundings, &holds)
    }

    fn step(&mut self, step: &Step, text: &str, asked: Asked) -> Option<Finding> {
        let begun = *self.begun.get_or_insert_with(Instant::now);
        let late = begun.elapsed() > DOCUMENT_TIME;
        self.left = self.left.saturating_sub(1);
        if late || self.left == 0 {
            return Some(self.undecided(step, "the work for the steps of one document is used up"));
        }
        let claims = match &step.claims {
            Ok(claims) => claims,
            Err(reason) => return Some(self.undecided(step, reason)),
        };
        let verdicts: Vec<Verdict> = claims.iter().map(|(left, right)| self.judged(step, text, left, right)).collect();
        let first = verdicts.first()?;
        if verdicts.iter().any(|other| kind(other) != kind(first)) {
            self.counts.undecided += 1;
            let message =
                format!("this step holds or not, depending on how far {} reaches: put brackets", step.reaching);
            return Some(told(
                rules::step_not_shown(step.sign, message),
                step,
                &StepVerdict { verdict: "differs", ..StepVerdict::default() },
            ));
        }
        let sides = claims.first()?;
        if let Verdict::Fails(found) = first
            && let Some((why, names)) = self.doubt(step, sides, asked)
        {
            return Some(self.doubted(step, first, found.dimension, &why, names));
        }
        if let Verdict::NeedsDimension { .. } = first
            && asked != Asked::All
            && (is_number(&sides.0) || is_number(&sides.1))
        {
            // The value of a scalar tells the dimension that the author means.
            self.counts.holds += 1;
            return None;
        }
        self.finding(step, first)
    }

    fn doubt(&self, step: &Step, sides: &(Expression, Expression), asked: Asked) -> Option<(String, Vec<String>)> {
        let world = &self.surroundings.world;
        doubt((&sides.0, &sides.1), world, &self.conditioned, step.relation == 0, asked)
    }

    /// A difference that need not be a mistake.
    fn doubted(&mut self, step: &Step, verdict: &Verdict, dimension: usize, why: &str, names: Vec<String>) -> Finding {
        self.counts.undecided += 1;
        self.law = step.relation == 0;
        let mut view = self.view(step, verdict);
        view.verdict = "differs";
        view.fails = vec![dimension];
        let message = format!("this step does not hold for arbitrary fields: {why} {}", listed(&names));
        view.assumptions = names;
        told(rules::step_not_shown(step.sign, message), step, &view)
    }

    fn judged(&mut self, step: &Step, text: &str, left: &Expression, right: &Expression) -> Verdict {
        let seed = seed(step, text);
        let key = seed ^ (self.surroundings.world.definitions.len() as u64).rotate_left(32);
        let alone =
            step.claims.as_ref().is_ok_and(|claims| claims.len() == 1) && self.surroundings.world.givens.is_empty();
        if let Some(known) = self.known.get(&key).filter(|_| alone) {
            return known.clone();
        }
        let mut world = self.surroundings.world.clone();
        world.dimensions = dimensions(&world, &[left, right], step.antisymmetrised);
        let begun = self.begun;
        let stop = || begun.is_some_and(|begun| begun.elapsed() > DOCUMENT_TIME);
        let limits = Limits { total: STEP_WORK, stop: Some(&stop), ..Limits::seeded(seed) };
        let verdict = verdict::judge(&Claim { left: left.clone(), right: right.clone(), world }, &limits);
        if alone {
            self.known.insert(key, verdict.clone());
        }
        verdict
    }

    fn finding(&mut self, step: &Step, verdict: &Verdict) -> Option<Finding> {
        let view = self.view(step, verdict);
        match verdict {
            Verdict::Holds { .. } => {
                self.counts.holds += 1;
                None
            }
            Verdict::Fails(found) => {
                self.counts.fails += 1;
                let numbers = view.counterexample.clone().unwrap_or_default();
                let place = in_words(&numbers.component);
                let order = match found.order {
                    0 => String::new(),
                    order => format!(" for terms of order {order} in what is small"),
                };
                let message = format!(
                    "this step does not hold{order}: the left side can be {} where the right side is {}{place}",
                    numbers.left, numbers.right
                );
                Some(told(rules::step_fails(step.sign, message), step, &view))
            }
            Verdict::Differs { reason, .. } => {
                self.counts.undecided += 1;
                let message = match reason {
                    Unshown::Unknown(names) => format!(
                        "this step does not hold for arbitrary {}: nothing says what {}",
                        listed(names),
                        if names.len() == 1 { "it is" } else { "they are" }
                    ),
                    Unshown::Givens(labels) => format!("this step does not follow from {} alone", listed(labels)),
                    Unshown::NoWitness => {
                        "the sides of this step differ, but no simple numbers were found that show it".to_owned()
                    }
                };
                Some(told(rules::step_not_shown(step.sign, message), step, &view))
            }
            Verdict::NeedsDimension { holds, fails, undefined, .. } => {
                self.counts.fails += 1;
                let undefined = match undefined.as_slice() {
                    [] => String::new(),
                    some => format!(", and has no meaning in {}", numbers(some)),
                };
                let message = format!(
                    "this step holds in dimension {}, but not in {}{undefined}",
                    numbers(holds),
                    numbers(fails)
                );
                Some(told(rules::step_needs_dimension(step.sign, message), step, &view))
            }
            Verdict::Undecided(reason) => Some(self.undecided(step, &reason.to_string())),
        }
    }

    fn undecided(&mut self, step: &Step, reason: &str) -> Finding {
        self.counts.undecided += 1;
        let message = format!("this step could not be decided: {reason}");
        let view = StepVerdict { verdict: "undecided", ..StepVerdict::default() };
        told(rules::step_undecided(step.sign, message), step, &view)
    }

    /// The verdict as plain data.
    fn view(&self, step: &Step, verdict: &Verdict) -> StepVerdict {
        let numbers = |found: &verdict::Counterexample| self.counterexample(step, found);
        match verdict {
            Verdict::Fails(found) => StepVerdict {
                verdict: "fails",
                fails: vec![found.dimension],
                counterexample: Some(numbers(found)),
                ..StepVerdict::default()
            },
            Verdict::Differs { dimensions, reason } => StepVerdict {
                verdict: "differs",
                fails: dimensions.clone(),
                assumptions: match reason {
                    Unshown::Unknown(names) | Unshown::Givens(names) => names.clone(),
                    Unshown::NoWitness => Vec::new(),
                },
                ..StepVerdict::default()
            },
            Verdict::NeedsDimension { holds, fails, counterexample, .. } => StepVerdict {
                verdict: "needs dimension",
                holds: holds.clone(),
                fails: fails.clone(),
                counterexample: counterexample.as_ref().map(numbers),
                ..StepVerdict::default()
            },
            Verdict::Holds { dimensions, .. } => {
                StepVerdict { verdict: "holds", holds: dimensions.clone(), ..StepVerdict::default() }
            }
            Verdict::Undecided(_) => StepVerdict { verdict: "undecided", ..StepVerdict::default() },
        }
    }

    fn counterexample(&self, step: &Step, found: &verdict::Counterexample) -> Counterexample {
        let world = &self.surroundings.world;
        let values = found.assignments.iter().map(|one| {
            let members: Vec<String> = one.component.iter().map(|member| (member + 1).to_string()).collect();
            let slots = if members.is_empty() { String::new() } else { format!("_{{{}}}", members.join(" ")) };
            let value =
                world.parameters.iter().fold(one.value.clone(), |value, name| value.replace(name, &shown(name)));
            (format!("{}{slots}", shown(&one.name)), value)
        });
        let letter = |label: u16| step.letters.get(label as usize).map(|letter| shown(letter)).unwrap_or_default();
        Counterexample {
            dimension: found.dimension,
            values: values.collect(),
            component: found
                .component
                .iter()
                .map(|(label, member)| (letter(*label), (member + 1).to_string()))
                .collect(),
            left: found.left.to_string(),
            right: found.right.to_string(),
        }
    }
}

/// Whether a side is a plain number, perhaps with a sign.
fn is_number(side: &Expression) -> bool {
    match side {
        Expression::Number(_) => true,
        Expression::Product(parts) => parts.iter().all(|part| matches!(part, Expression::Number(_))),
        _ => false,
    }
}

/// The verdicts that have to agree where a step can be read in two ways.
fn kind(verdict: &Verdict) -> u8 {
    match verdict {
        Verdict::Holds { .. } => 0,
        Verdict::NeedsDimension { .. } => 1,
        Verdict::Fails(_) | Verdict::Differs { .. } => 2,
        Verdict::Undecided(_) => 3,
    }
}

fn told(finding: Finding, step: &Step, view: &StepVerdict) -> Finding {
    let side = |span: Span, message: &str| Related { span, message: message.to_owned() };
    let related = vec![side(step.sides.0, "the left side"), side(step.sides.1, "the right side")];
    Finding { related, verdict: Some(view.clone()), ..finding }
}

/// The hash of a step's text.
fn seed(step: &Step, text: &str) -> u64 {
    let mut hasher = FxHasher::default();
    step.sides.0.of(text).hash(&mut hasher);
    step.sides.1.of(text).hash(&mut hasher);
    hasher.finish()
}

/// The dimensions to be tried: the one that is declared, or that an epsilon fixes, else a few, and as many as indices
/// are antisymmetrised.
fn dimensions(world: &World, sides: &[&Expression], antisymmetrised: usize) -> Vec<usize> {
    let mut pending: Vec<&Expression> = sides.to_vec();
    let mut fixed = None;
    let mut families: Vec<usize> = Vec::new();
    while let Some(part) = pending.pop() {
        let slots = part.slots();
        if let Expression::Epsilon { slots, .. } = part {
            fixed = Some(slots.len());
        }
        families.extend(slots.iter().map(|index| index.family));
        if let Expression::Defined { definition, .. } = part
            && let Some(definition) = world.definitions.get(*definition)
        {
            pending.push(&definition.body);
        }
        pending.extend(part.parts());
    }
    let sizes = || families.iter().filter_map(|family| world.families.get(*family)).map(|family| family.size);
    let declared: Vec<usize> =
        sizes().filter_map(|size| if let Size::Fixed(size) = size { Some(size) } else { None }).collect();
    let free = sizes().any(|size| matches!(size, Size::Dimension(_)));
    match (fixed, declared.first()) {
        (Some(dimension), _) => vec![dimension],
        (None, Some(size)) if !free => vec![*size],
        _ => {
            let mut all = world.dimensions.clone();
            all.extend(5..=antisymmetrised.min(LARGEST_DIMENSION));
            all
        }
    }
}

fn in_words(component: &[(String, String)]) -> String {
    let list: Vec<String> = component.iter().map(|(letter, value)| format!("{letter} = {value}")).collect();
    if list.is_empty() { String::new() } else { format!(", for {}", list.join(", ")) }
}

fn listed(names: &[String]) -> String {
    let names: Vec<String> = names.iter().map(|name| shown(name)).collect();
    match names.as_slice() {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

fn numbers(list: &[usize]) -> String {
    listed(&list.iter().map(usize::to_string).collect::<Vec<_>>())
}
