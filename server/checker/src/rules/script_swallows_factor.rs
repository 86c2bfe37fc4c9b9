//! A script contains a whole tensor, and moving its brace restores the balance.

use indexwise_grammar::span::Span;

use crate::finding::{Edit, Finding, Fix, Severity};
use crate::ledger::Judged;
use crate::reading::read;
use crate::sketch::Sketch;

use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "script-swallows-factor",
    severity: Severity::Error,
    summary: "A script contains a whole tensor, and moving its brace restores the balance.",
    page: include_str!("script_swallows_factor.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    for swallowed in &judged.sketch.swallowed {
        let text = judged.text;
        let last = Span { start: swallowed.script.end.saturating_sub(1), end: swallowed.script.end };
        if last.of(text) != "}" {
            continue;
        }
        let at = swallowed.kept.of(text).trim_end().len();
        let at = Span::new(swallowed.kept.start as usize + at, swallowed.kept.start as usize + at);
        let edits = vec![Edit { span: at, text: "}".to_owned() }, Edit { span: last, text: String::new() }];
        let Some((sketch, choice)) = reread(judged, &edits) else { continue };
        let rest = Span { start: swallowed.from.start, end: last.start };
        let finding = Finding {
            rule: RULE.name,
            severity: RULE.severity,
            span: rest,
            message: format!("the script swallows {}: its brace closes too late", rest.of(text)),
            related: Vec::new(),
            fixes: vec![Fix { title: format!("Close the brace before {}", rest.of(text)), edits, bulk: Ok(()) }],
            ledger: Some(judged.view(&[])),
            verdict: None,
        };
        return Some(Report { finding, mended: Some((sketch, choice)) });
    }
    None
}

/// The statement read again with the edits made; nothing unless it is in balance then, and was not before or gains
/// an index by it.
fn reread(judged: &Judged<'_>, edits: &[Edit]) -> Option<(Sketch, crate::balance::Choice)> {
    let statement = judged.sketch.span;
    let mut text = statement.of(judged.text).to_owned();
    for edit in edits.iter().rev() {
        let start = edit.span.start.checked_sub(statement.start)? as usize;
        let end = edit.span.end.checked_sub(statement.start)? as usize;
        text.get(start..end)?;
        text.replace_range(start..end, &edit.text);
    }
    let formula = indexwise_grammar::read_formula(&text, &judged.prices.macros.inherited());
    let [statement] = formula.statements.as_slice() else { return None };
    let mut sketch = Sketch::of(statement);
    let reading = read(&sketch, sketch.units.iter().map(|unit| judged.prices.score(unit)).collect());
    let gains = sketch.places.len() > judged.sketch.places.len();
    let mends = reading.odd.is_empty() && gains && sketch.swallowed.is_empty();
    sketch.move_spans(|span| Span {
        start: before(edits, judged.sketch.span.start, span.start),
        end: before(edits, judged.sketch.span.start, span.end),
    });
    mends.then_some((sketch, reading.choice))
}

/// Where a place of the edited statement stands in the author's text. `start` is the start of the statement, `at`
/// counts from there.
fn before(edits: &[Edit], start: u32, at: u32) -> u32 {
    let (mut old, mut new) = (start, start);
    let goal = start + at;
    for edit in edits {
        let kept = edit.span.start.saturating_sub(old);
        if new + kept >= goal {
            break;
        }
        let inserted = u32::try_from(edit.text.len()).unwrap_or(0);
        (old, new) = (edit.span.end, new + kept + inserted);
        if new >= goal {
            return old;
        }
    }
    old + goal.saturating_sub(new)
}
