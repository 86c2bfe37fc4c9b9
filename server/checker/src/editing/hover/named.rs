//! Relations with their verdicts, macros, and labels.

use std::sync::Arc;

use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::{Macro, Parameter};
use indexwise_grammar::span::Span;

use crate::finding::{Counterexample, Outcome};
use crate::ledger::shown;
use crate::paper::{DocumentAnalysis, View};

use crate::editing::commands::definitions;
use crate::editing::labels::{Mention, mentions};
use crate::editing::references::{File, Location};

use super::{Hover, block, code, line_of};

/// Components of a counterexample that are shown.
const VALUES_SHOWN: usize = 12;

/// The verdict about the step at a relation sign.
pub(super) fn relation(analysis: &DocumentAnalysis, offset: u32) -> Option<Hover> {
    let holds = |span: Span| span.start <= offset && offset < span.end;
    let mark = analysis.steps.iter().find(|mark| holds(mark.span))?;
    let finding = analysis.findings.iter().find(|one| one.span == mark.span && one.verdict.is_some());
    let word = match mark.outcome() {
        Outcome::Holds => "verified",
        Outcome::Fails => "fails",
        Outcome::Open => "open",
    };
    // A finding at the sign says its sentence itself.
    let said = if finding.is_some() { String::new() } else { format!(": {}", mark.said) };
    let mut lines = vec![format!("**{word}**{said}")];
    if let Some(verdict) = finding.and_then(|finding| finding.verdict.as_ref()) {
        if !verdict.holds.is_empty() && !verdict.fails.is_empty() {
            lines.push(format!("holds in dimension {}, not in {}", numbers(&verdict.holds), numbers(&verdict.fails)));
        }
        if !verdict.assumptions.is_empty() {
            lines.push(format!("rests on: {}", verdict.assumptions.join("; ")));
        }
        lines.extend(verdict.counterexample.as_ref().map(counterexample));
    }
    Some(Hover { span: mark.span, markdown: lines.join("\n\n") })
}

fn numbers(numbers: &[usize]) -> String {
    numbers.iter().map(usize::to_string).collect::<Vec<_>>().join(", ")
}

fn counterexample(numbers: &Counterexample) -> String {
    let values = numbers.values.iter().take(VALUES_SHOWN).map(|(name, value)| code(&format!("{name} = {value}")));
    let values: Vec<String> = values.collect();
    let more = match numbers.values.len().checked_sub(VALUES_SHOWN) {
        None | Some(0) => String::new(),
        Some(more) => format!(" and {more} more"),
    };
    let given = if values.is_empty() {
        "with all fields 0".to_owned()
    } else {
        format!("with {}{more}, all else 0", values.join(", "))
    };
    let place: Vec<String> =
        numbers.component.iter().map(|(letter, value)| format!("{} = {value}", shown(letter))).collect();
    let place = if place.is_empty() { String::new() } else { format!(" for {}", code(&place.join(", "))) };
    let (left, right) = (code(&numbers.left), code(&numbers.right));
    format!("counterexample in dimension {}: {given}: left side {left}, right side {right}{place}", numbers.dimension)
}

/// What a macro of the author's stands for.
pub(super) fn author_macro(view: &View, document: usize, span: Span, found: &Arc<Macro>) -> Hover {
    let call: String = found.parameters.iter().enumerate().map(|(n, parameter)| shape(n + 1, parameter)).collect();
    let mut lines = vec![format!("**\\{}**: macro", found.name)];
    let body = if found.operator { format!("operator {}", code(&found.body)) } else { code(&found.body) };
    lines.push(format!("{} stands for {body}", code(&format!("\\{}{call}", found.name))));
    lines.extend(
        definitions(view, found).first().map(|place| format!("defined in {}", place_in_words(view, document, place))),
    );
    Hover { span, markdown: lines.join("\n\n") }
}

/// A parameter as it is written in a call.
fn shape(number: usize, parameter: &Parameter) -> String {
    match parameter {
        Parameter::Mandatory => format!("{{#{number}}}"),
        Parameter::Optional(default) => format!("[#{number} = {default}]"),
        Parameter::Star => "*".to_owned(),
        Parameter::Until(delimiter) => format!("#{number}{delimiter}"),
    }
}

fn place_in_words(view: &View, document: usize, place: &Location) -> String {
    match place.file {
        File::Document(number) if number == document => {
            format!("line {}", line_of(view.text(number), place.span.start))
        }
        File::Document(number) => {
            let path = view.paper().documents.get(number).map_or("", |source| source.path.as_str());
            format!("{path}, line {}", line_of(view.text(number), place.span.start))
        }
        File::Style(number) => {
            let style = view.paper().styles.get(number);
            let (path, text) = style.map_or(("", ""), |style| (style.path.as_str(), &*style.text));
            format!("{path}, line {}", line_of(text, place.span.start))
        }
    }
}

/// The formula that a label names.
pub(super) fn label(view: &View, document: usize, own: &Mention) -> Option<Hover> {
    let given = |number: usize| mentions(view, number).into_iter().find(|one| one.given && one.name == own.name);
    let (number, place) = (0..view.len()).find_map(|number| Some((number, given(number)?)))?;
    let text = view.text(number);
    let location = Location { file: File::Document(number), span: place.span };
    let mut markdown = format!("**{}**: {}", own.name, place_in_words(view, document, &location));
    let formula = view.formulas(number).iter().find(|formula| formula.span.holds(place.span));
    // On the label itself the formula is before everybody's eyes.
    if let Some(formula) = formula.filter(|_| !own.given) {
        let language = if view.host(number) == Host::Note { "" } else { "latex" };
        markdown.push_str(&format!("\n\n{}", block(formula.span.of(text), language)));
    }
    Some(Hover { span: own.span, markdown })
}
