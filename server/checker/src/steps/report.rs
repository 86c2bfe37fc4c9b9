//! The steps of a document, judged by the algebra and told as findings.
//!
//! A verdict is a function of a step's expressions and of what the document declares, so that it can be had again; its
//! draws follow from the step's own text. Where a derivative's reach can be read in two ways, both are judged. An
//! error says that a proof is attached; whatever rests on a kernel of unknown meaning is a hint that names it.

use std::cell::Cell;
use std::hash::{Hash, Hasher};

use compact_str::CompactString;
use indexwise_algebra::expression::{Expression, Given, MetricValues, Size, World};
use indexwise_algebra::verdict::{Claim, Limits, Reason, Unshown, Verdict};
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Statement;
use rustc_hash::{FxHashSet, FxHasher};

use crate::conventions::meanings::Meanings;
use crate::finding::{Finding, Fix, JudgedStep, Severity, StepVerdict};
use crate::paper::{Cancel, Steps};
use crate::rules;
use crate::terms::Eyes;

use super::claims::{Asked, Step, relations_of, steps_of};
use super::conventions::{self, Geometric, exchanged, other_signs};
use super::lowering::Way;
use super::repairs::{Broken, Look, Source, repairs};
use super::standing::{Doubt, conditioned, doubt, kernels};
use super::telling::{held, in_words, is_number, kind, listed, numbers, plain_view, told};
use super::verdicts::{Court, Verdicts};
use super::words::loosening;
use super::world::Surroundings;

/// Multiplications for the verdict of one step: about a second.
const STEP_WORK: u64 = 100_000_000;
/// Steps of one document that are judged.
const STEPS: usize = 2_000;
/// The largest dimension that is tried because so many indices are antisymmetrised.
const LARGEST_DIMENSION: usize = 6;

/// Multiplications for one look at an edit that may mend a step, and for the verdict about it.
const REPAIR_WORK: [u64; 2] = [2_000_000, 30_000_000];
/// Why a step is doubted, before the words that say so.
const SAID: &str = "the text around it speaks of";
/// Multiplications for all looks at the edits of one step together.
const REPAIRS_WORK: u64 = 100_000_000;
/// Steps of one document that are tried to be mended.
const MENDED: usize = 30;

/// Judges the steps of a document, statement by statement in the order of the text.
pub struct StepJudge<'m> {
    surroundings: Surroundings<'m>,
    court: Court,
    /// Kernels that the text states conditions on: they are no arbitrary fields.
    conditioned: FxHashSet<CompactString>,
    /// The verdicts so far, counted and one by one.
    pub counts: Steps,
    /// Each step with its verdict, whether it is told or not.
    pub judged: Vec<JudgedStep>,
    /// Whether the last statement had steps and all of them hold.
    pub all_hold: bool,
    /// Whether the step judged last may be a law.
    law: bool,
    left: usize,
    mended: usize,
    /// The steps of the last statement that are not shown, by their signs.
    open: Vec<Step>,
}

/// Something given, in the world of its document.
#[derive(Clone, Debug)]
pub struct LabelledGiven(Given);

/// What is given for the steps of a statement.
#[derive(Clone, Copy, Debug, Default)]
pub struct Granted<'g> {
    /// For all of them.
    pub all: &'g [LabelledGiven],
    /// By reasons, each with its place: for the last step before it.
    pub reasoned: &'g [(Span, Vec<LabelledGiven>)],
}

impl<'g> Granted<'g> {
    /// What the reason of a step gives.
    fn reason(&self, step: &Step, steps: &[Step]) -> &'g [LabelledGiven] {
        let next = steps.iter().map(|other| other.sign.start).filter(|start| *start > step.sign.start).min();
        let own = |place: &Span| place.start >= step.sign.end && next.is_none_or(|next| place.start < next);
        self.reasoned.iter().find(|(place, _)| own(place)).map(|(_, givens)| givens.as_slice()).unwrap_or_default()
    }
}

impl<'m> StepJudge<'m> {
    /// For a document with these declarations; `verdicts` are those that are known.
    pub fn new(meanings: &'m Meanings, text: &str, verdicts: &Verdicts, cancel: &Cancel) -> Self {
        let surroundings = Surroundings::new(meanings, text);
        Self {
            surroundings,
            court: Court::new(verdicts, cancel),
            conditioned: FxHashSet::default(),
            counts: Steps::default(),
            judged: Vec::new(),
            all_hold: false,
            law: false,
            left: STEPS,
            mended: MENDED,
            open: Vec::new(),
        }
    }

    /// Notes what a statement that is no claim puts under a condition; all statements come here before the first is
    /// judged, for a condition may be stated after its use.
    pub fn condition(&mut self, statement: &Statement, eyes: &Eyes<'_>) {
        self.conditioned.extend(conditioned(statement, eyes));
    }

    /// Takes a statement: its definitions, and the findings about its claims, under what is given.
    pub fn statement(
        &mut self,
        statement: &Statement,
        source: &Source<'_>,
        eyes: &Eyes<'_>,
        asked: Asked,
        granted: &Granted<'_>,
    ) -> Vec<Finding> {
        let steps = steps_of(statement, eyes, &mut self.surroundings, asked);
        let mut told: Vec<Option<Finding>> = Vec::with_capacity(steps.len());
        for step in &steps {
            self.law = false;
            self.surroundings.world.neglected = step.neglected;
            let reason = granted.reason(step, &steps);
            self.surroundings.world.givens = granted.all.iter().chain(reason).map(|given| given.0.clone()).collect();
            let finding = self.step(step, source.text, asked);
            if let Some((verdict, said)) = finding.as_ref().and_then(|it| Some((it.verdict.clone()?, &it.message))) {
                self.judged.push(JudgedStep { span: step.sign, verdict, said: said.clone() });
            }
            told.push(finding);
            // A law is a condition for what comes after it.
            if self.law {
                self.conditioned.extend(statement.sides.iter().take(2).flat_map(|side| kernels(side, eyes)));
            }
        }
        let held: Vec<(usize, bool)> =
            steps.iter().zip(&told).map(|(step, told)| (step.relation, told.is_none())).collect();
        self.surroundings.world.givens = granted.all.iter().map(|given| given.0.clone()).collect();
        self.all_hold = !told.is_empty() && told.iter().all(Option::is_none);
        self.open.clear();
        let mut found: Vec<Finding> = Vec::new();
        for (step, finding) in steps.iter().zip(told) {
            let Some(mut finding) = finding else { continue };
            let broken = Broken { statement, relation: step.relation, others: &held };
            finding.fixes = self.fixes(step, &finding, &broken, eyes, source);
            let differs = finding.verdict.as_ref().is_some_and(|verdict| verdict.verdict == "differs");
            if differs && granted.all.is_empty() && step.claims.as_ref().is_ok_and(|claims| claims.len() == 1) {
                self.open.push(step.clone());
            }
            if let Some(choice) = self.other_choice(step, &finding, source.text) {
                finding.message.push_str(&format!("; it holds with {choice}"));
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
        let limits = Limits { total: REPAIR_WORK[1], trials: 0, ..Limits::seeded(seed(step, text)) };
        let claim = Claim { left: left.clone(), right: right.clone(), world };
        matches!(self.court.judge(&claim, &limits, false), Verdict::Holds { undefined, .. } if undefined.is_empty())
    }

    /// Another usual choice of signs, or of what an epsilon is, with which a step holds that does not under that in
    /// force.
    fn other_choice(&self, step: &Step, finding: &Finding, text: &str) -> Option<String> {
        finding.verdict.as_ref().filter(|verdict| verdict.verdict != "undecided")?;
        let [(left, right)] = step.claims.as_ref().ok()?.as_slice() else { return None };
        let world = &self.surroundings.world;
        let holds = |left: &Expression, right: &Expression, signs| {
            let dimensions = dimensions(world, &[left, right], step.antisymmetrised);
            let neglected = step.neglected;
            self.holds(step, text, left, right, World { signs, dimensions, neglected, ..world.clone() })
        };
        let mut choices = other_signs(world.signs, Geometric::of(world, [left, right])).into_iter();
        if let Some((_, said)) = choices.find(|(signs, _)| holds(left, right, *signs)) {
            return Some(format!("the other sign {said}"));
        }
        let (one, two, said) = exchanged(left, right)?;
        holds(&one, &two, world.signs).then_some(said)
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
        let (court, seed, spent) = (&self.court, seed(step, source.text), Cell::new(0));
        let holds = |surroundings: &Surroundings<'_>, left: &Expression, right: &Expression, look: Look| {
            let mut world = surroundings.world.clone();
            world.dimensions = match look {
                Look::Once => vec![dimension],
                Look::InFull => dimensions(&world, &[left, right], step.antisymmetrised),
            };
            let unspent = REPAIRS_WORK.saturating_sub(spent.get());
            let usual = Limits { trials: 0, spent: Some(&spent), ..Limits::seeded(seed) };
            let limits = match look {
                Look::Once => Limits { total: unspent.min(REPAIR_WORK[0]), draws: 1, ..usual },
                Look::InFull => Limits { total: unspent.min(REPAIR_WORK[1]), ..usual },
            };
            let claim = Claim { left: left.clone(), right: right.clone(), world };
            matches!(court.judge(&claim, &limits, false), Verdict::Holds { undefined, .. } if undefined.is_empty())
        };
        repairs(broken, eyes, source, &self.surroundings, &holds)
    }

    fn step(&mut self, step: &Step, text: &str, asked: Asked) -> Option<Finding> {
        let late = self.court.is_over();
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
        // What holds for the change of the inverse metric, as most mean it, holds.
        let matters = |way: Way| way != Way::Raised || !matches!(first, Verdict::Holds { .. });
        let mut others = verdicts.iter().skip(1).zip(&step.others).filter(|(_, way)| matters(**way));
        if let Some((_, way)) = others.find(|(other, _)| kind(other) != kind(first)) {
            self.counts.undecided += 1;
            let message = format!("this step holds or not, depending on {}", way.words());
            return Some(told(
                rules::step_not_shown(step.sign, message),
                step,
                &StepVerdict { verdict: "differs", ..StepVerdict::default() },
            ));
        }
        let sides = claims.first()?;
        let failed = match first {
            Verdict::Fails(found) => Some(found.dimension),
            Verdict::NeedsDimension { fails, .. } => fails.first().copied(),
            _ => None,
        };
        if let Some(dimension) = failed
            && let Some(doubt) = self.doubt(step, text, sides, asked)
            && (doubt.derived || matches!(first, Verdict::Fails(_)))
        {
            return Some(self.doubted(step, first, dimension, doubt));
        }
        if matches!(first, Verdict::Fails(_) | Verdict::NeedsDimension { .. })
            && let Some(minus) = self.other_signature(step, text, sides)
        {
            return Some(self.signed(step, first, minus));
        }
        if let Verdict::NeedsDimension { .. } = first
            && asked != Asked::All
            && (is_number(&sides.0) || is_number(&sides.1))
        {
            // The value of a scalar tells the dimension that the author means.
            self.counts.holds += 1;
            let verdict = StepVerdict { verdict: "holds", counterexample: None, ..self.view(step, first) };
            let said = held(&verdict);
            self.judged.push(JudgedStep { span: step.sign, verdict, said });
            return None;
        }
        self.finding(step, first)
    }

    fn doubt(&self, step: &Step, text: &str, sides: &(Expression, Expression), asked: Asked) -> Option<Doubt> {
        let world = &self.surroundings.world;
        let doubt = doubt((&sides.0, &sides.1), world, &self.conditioned, step.relation == 0, asked);
        let doubt = doubt.filter(|doubt| !doubt.may_be_law || !self.is_identity_if_flat(step, text, sides));
        // Whoever asks for a formula by itself means it as it stands.
        let loosening = if asked == Asked::All { None } else { loosening(text, step.sign) };
        let by_words = |phrase: &str| Doubt {
            why: SAID,
            names: vec![format!("\u{201c}{phrase}\u{201d}")],
            may_be_law: false,
            derived: false,
        };
        doubt.or_else(|| loosening.map(by_words))
    }

    /// Whether the sides are equal and not 0 where all metrics are constant. That was derived, and nobody writes it as a
    /// law: what is wrong with it is a derivative of the metric that was forgotten.
    fn is_identity_if_flat(&self, step: &Step, text: &str, (left, right): &(Expression, Expression)) -> bool {
        let mut world = self.surroundings.world.clone();
        for metric in world.metrics.iter_mut().filter(|metric| metric.values == MetricValues::Arbitrary) {
            metric.values = MetricValues::Flat;
        }
        world.dimensions = dimensions(&world, &[left, right], step.antisymmetrised);
        let nothing = Expression::Product(vec![Expression::zero(), left.clone()]);
        self.holds(step, text, left, right, world.clone()) && !self.holds(step, text, left, &nothing, world)
    }

    /// How many negative signs a metric has with which a step holds, if nobody says how many there are.
    fn other_signature(&self, step: &Step, text: &str, (left, right): &(Expression, Expression)) -> Option<usize> {
        let world = &self.surroundings.world;
        if !Geometric::of(world, [left, right]).sign {
            return None;
        }
        let dimensions = dimensions(world, &[left, right], step.antisymmetrised);
        let other = self.surroundings.other_signature(&World { dimensions, ..world.clone() })?;
        let minus = *self.surroundings.open_signatures.first()?;
        let minus = other.metrics.get(minus)?.minus;
        self.holds(step, text, left, right, other).then_some(minus)
    }

    /// A step that holds in another signature than the one that was taken for want of a declaration.
    fn signed(&mut self, step: &Step, verdict: &Verdict, minus: usize) -> Finding {
        self.counts.undecided += 1;
        let mut view = self.view(step, verdict);
        view.verdict = "differs";
        view.assumptions = vec!["the signature of the metric".to_owned()];
        let (has, other, signs) = if minus == 0 { ("no", "one", "+ + + +") } else { ("one", "none", "- + + +") };
        let message = format!(
            "this step holds for a metric with {has} negative sign, but not with {other}: nothing says which, as \
             g_{{ij}} is the metric, signature {signs} would"
        );
        told(rules::step_not_shown(step.sign, message), step, &view)
    }

    /// A difference that need not be a mistake.
    fn doubted(&mut self, step: &Step, verdict: &Verdict, dimension: usize, doubt: Doubt) -> Finding {
        let Doubt { why, names, .. } = doubt;
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
        let mut world = self.surroundings.world.clone();
        world.dimensions = dimensions(&world, &[left, right], step.antisymmetrised);
        let limits = Limits { total: STEP_WORK, ..Limits::seeded(seed) };
        let other = self.surroundings.other_signature(&world);
        let judge = |world| {
            let claim = Claim { left: left.clone(), right: right.clone(), world };
            self.court.judge(&claim, &limits, true)
        };
        let mut verdict = judge(world);
        // The root of a determinant may exist with the other sign alone.
        if verdict == Verdict::Undecided(Reason::Undefined)
            && let Some(world) = other
        {
            verdict = judge(world);
        }
        verdict
    }

    fn finding(&mut self, step: &Step, verdict: &Verdict) -> Option<Finding> {
        let view = self.view(step, verdict);
        match verdict {
            Verdict::Holds { .. } => {
                self.counts.holds += 1;
                let said = held(&view);
                self.judged.push(JudgedStep { span: step.sign, verdict: view, said });
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
            Verdict::NeedsDimension { holds, fails, .. } if !self.surroundings.world.givens.is_empty() => {
                self.counts.undecided += 1;
                let mut labels: Vec<String> =
                    self.surroundings.world.givens.iter().map(|given| given.label.clone()).collect();
                labels.dedup();
                let message = format!(
                    "this step follows from {} in dimension {}, but not from that alone in {}",
                    listed(&labels),
                    numbers(holds),
                    numbers(fails)
                );
                let view = StepVerdict { verdict: "differs", assumptions: labels, ..view };
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
        let sides = step.claims.as_ref().ok().and_then(|claims| claims.first());
        let defaults = match verdict {
            Verdict::Undecided(_) => Vec::new(),
            _ => sides.map(|(left, right)| self.surroundings.defaults([left, right])).unwrap_or_default(),
        };
        let world = &self.surroundings.world;
        let tried = sides.map(|(left, right)| dimensions(world, &[left, right], step.antisymmetrised));
        StepVerdict { defaults, tried: tried.unwrap_or_default(), ..plain_view(step, verdict) }
    }
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
