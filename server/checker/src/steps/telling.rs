//! A verdict of the algebra in the checker's terms: as plain data for programs, and in words for people.

use indexwise_algebra::expression::Expression;
use indexwise_algebra::geometry::Level;
use indexwise_algebra::verdict::{self, Unshown, Verdict};
use indexwise_grammar::span::Span;

use crate::finding::{Counterexample, FieldComponent, Finding, Related, StepVerdict};
use crate::ledger::shown;

use super::claims::Step;

/// A verdict as plain data, without what was taken by default.
pub(super) fn plain_view(step: &Step, verdict: &Verdict) -> StepVerdict {
    let numbers = |found: &verdict::Counterexample| counterexample(step, found);
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
        Verdict::NeedsDimension { holds, fails, counterexample, undefined } => StepVerdict {
            verdict: "needs dimension",
            undefined: undefined.clone(),
            holds: holds.clone(),
            fails: fails.clone(),
            counterexample: counterexample.as_ref().map(numbers),
            ..StepVerdict::default()
        },
        Verdict::Holds { dimensions, undefined, draws, error_bits } => StepVerdict {
            verdict: if *draws == 0 { "holds by form" } else { "holds" },
            holds: dimensions.clone(),
            undefined: undefined.clone(),
            error_bits: (*draws > 0).then_some(*error_bits),
            ..StepVerdict::default()
        },
        Verdict::Undecided(_) => StepVerdict { verdict: "undecided", ..StepVerdict::default() },
    }
}

fn counterexample(step: &Step, found: &verdict::Counterexample) -> Counterexample {
    let values = found.assignments.iter().map(|one| {
        let members: Vec<String> = one.component.iter().map(|member| (member + 1).to_string()).collect();
        let slots = if members.is_empty() { String::new() } else { format!("_{{{}}}", members.join(" ")) };
        // Parameters are named in LaTeX.
        let named = found.variables.iter().filter(|name| name.starts_with('\\'));
        let value = named.fold(one.value.clone(), |value, name| value.replace(name.as_str(), &shown(name)));
        (format!("{}{slots}", shown(&one.name)), value)
    });
    let letter = |label: u16| step.letters.get(label as usize).map(|letter| shown(letter)).unwrap_or_default();
    let level = |level: &Level| match level {
        Level::Up => "up",
        Level::Down => "down",
        Level::Inert => "",
    };
    let fields = found.entries.iter().map(|entry| FieldComponent {
        name: entry.name.clone(),
        levels: entry.levels.iter().map(level).collect(),
        component: entry.component.iter().map(|member| member + 1).collect(),
        terms: entry.terms.iter().map(|(number, exponents)| (number.to_string(), exponents.clone())).collect(),
    });
    Counterexample {
        dimension: found.dimension,
        fields: fields.collect(),
        variables: found.variables.clone(),
        values: values.collect(),
        component: found.component.iter().map(|(label, member)| (letter(*label), (member + 1).to_string())).collect(),
        left: found.left.to_string(),
        right: found.right.to_string(),
    }
}

/// That a step holds, in which dimensions and how surely, as a sentence without its full stop.
pub(super) fn held(verdict: &StepVerdict) -> String {
    let places = match verdict.holds.as_slice() {
        [] => String::new(),
        [one] => format!(" in dimension {one}"),
        some => format!(" in dimensions {}", numbers(some)),
    };
    match verdict.error_bits {
        Some(bits) => format!("this step holds{places}, wrongly with a chance of at most 2^-{bits}"),
        None => format!("this step holds{places} by its form"),
    }
}

/// The verdicts that have to agree where a step can be read in two ways.
pub(super) fn kind(verdict: &Verdict) -> u8 {
    match verdict {
        Verdict::Holds { .. } => 0,
        Verdict::NeedsDimension { .. } => 1,
        Verdict::Fails(_) | Verdict::Differs { .. } => 2,
        Verdict::Undecided(_) => 3,
    }
}

pub(super) fn told(finding: Finding, step: &Step, view: &StepVerdict) -> Finding {
    let side = |span: Span, message: &str| Related { span, message: message.to_owned() };
    let related = vec![side(step.sides.0, "the left side"), side(step.sides.1, "the right side")];
    Finding { related, verdict: Some(view.clone()), ..finding }
}

/// Whether a side is a plain number, perhaps with a sign.
pub(super) fn is_number(side: &Expression) -> bool {
    match side {
        Expression::Number(_) => true,
        Expression::Product(parts) => parts.iter().all(|part| matches!(part, Expression::Number(_))),
        _ => false,
    }
}

pub(super) fn in_words(component: &[(String, String)]) -> String {
    let list: Vec<String> = component.iter().map(|(letter, value)| format!("{letter} = {value}")).collect();
    if list.is_empty() { String::new() } else { format!(", for {}", list.join(", ")) }
}

pub(super) fn listed(names: &[String]) -> String {
    let names: Vec<String> = names.iter().map(|name| shown(name)).collect();
    match names.as_slice() {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

pub(super) fn numbers(list: &[usize]) -> String {
    listed(&list.iter().map(usize::to_string).collect::<Vec<_>>())
}
