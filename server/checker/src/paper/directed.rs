//! What the author's directives do to the findings: `skip this`, `allow ...`.

use compact_str::CompactString;
use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Formula;
use rustc_hash::FxHashSet;

use crate::conventions::declared::Declared;
use crate::finding::Finding;
use crate::rules;

use super::sentences::problems_of;

/// Rules that speak of a document rather than of a formula: `allow` silences them in the whole file.
const DOCUMENT_RULES: &[&str] = &["missing-part", "unread", "convention-unreadable", "convention-clash", "idle-allow"];

/// The formulas that the author says to skip: they neither vote nor are judged.
pub(super) fn skipped(declared: &Declared, formulas: &[Formula]) -> FxHashSet<usize> {
    let skips = declared.sentences.iter().filter(|(sentence, _)| *sentence == Sentence::Skip);
    skips.filter_map(|(_, span)| target(*span, formulas)).collect()
}

/// The formula that a directive speaks of: the one around it, or the next.
pub(super) fn target(directive: Span, formulas: &[Formula]) -> Option<usize> {
    let at = formulas.partition_point(|formula| formula.span.end <= directive.start);
    (at < formulas.len()).then_some(at)
}

/// Findings after the author's `skip` and `allow`, with those about the document (`about`) and about the directives.
pub(super) fn directed(
    declared: &Declared,
    host: Host,
    formulas: &[Formula],
    mut findings: Vec<(usize, Finding)>,
    mut about: Vec<Finding>,
) -> Vec<Finding> {
    let mut allowed: Vec<&CompactString> = Vec::new();
    let skipped = skipped(declared, formulas);
    findings.retain(|(number, _)| !skipped.contains(number));
    for (sentence, span) in &declared.sentences {
        let target = target(*span, formulas);
        match sentence {
            // What is not about one formula can be allowed for the file.
            Sentence::Allow { rule, .. } if DOCUMENT_RULES.contains(&rule.text.as_str()) => allowed.push(&rule.text),
            Sentence::Allow { rule, here } => {
                let before = findings.len();
                findings.retain(|(number, finding)| finding.rule != rule.text || (*here && Some(*number) != target));
                if findings.len() == before {
                    about.push(rules::idle_allow(*span, &rule.text));
                }
            }
            _ => {}
        }
    }
    about.extend(problems_of(declared, host));
    about.extend(findings.into_iter().map(|(_, finding)| finding));
    about.retain(|finding| !allowed.iter().any(|rule| *rule == finding.rule));
    about
}
