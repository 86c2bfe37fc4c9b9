//! Symmetries that a finding asks for, as sentences of the conventions.
//!
//! A side that is not symmetric where the other is may hold a kernel of which the author knows more than the text says:
//! its symmetry can be declared. A term that vanishes by the custom of its kernel may hold one that is no such thing: that
//! nothing is assumed of it can be declared, too. Each sentence is tried on the statement: it is offered if the finding
//! is gone with it and no other comes.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::tree::{Atom, Factor, Item, ItemKind, Script, Sum, walk};
use indexwise_grammar::write::{Dialect, write_factor};

use crate::editing::saying::declaration;
use crate::finding::Finding;
use crate::ledger::shown;
use crate::paper::View;

use super::{Action, ActionKind};

/// Sentences that are tried for one finding.
const TRIED: usize = 6;

/// What may be declared so that a finding goes.
pub(super) fn symmetries(view: &View, document: usize, finding: &Finding) -> Vec<Action> {
    let wanted = match finding.rule {
        "symmetry-not-shared" => shared(view, document, finding),
        "vanishing-contraction" | "vanishing-bracket" => vanishing(view, document, finding),
        _ => return Vec::new(),
    };
    let offered = wanted.into_iter().take(TRIED).filter_map(|(sentence, title)| {
        let edit = declaration(view, document, &sentence)?;
        view.is_gone_with(document, finding, &edit).then(|| Action {
            title,
            kind: ActionKind::Declare,
            edits: vec![edit],
            preferred: false,
        })
    });
    offered.collect()
}

/// Sentences with their titles.
type Wanted = Vec<(String, String)>;

/// For a side that does not share a symmetry: that its kernels with both letters have it.
fn shared(view: &View, document: usize, finding: &Finding) -> Wanted {
    let word = if finding.message.contains("antisymmetric") { "antisymmetric" } else { "symmetric" };
    let mut out: Wanted = Vec::new();
    for factor in factors_within(view, document, finding) {
        let letters = letters_of(&factor);
        let pair: Vec<&CompactString> = letters.iter().filter(|letter| names(&finding.message, letter)).collect();
        let [one, two] = pair.as_slice() else { continue };
        let Some(tensor) = tensor_of(&factor, view.host(document)) else { continue };
        let in_note = view.host(document) == Host::Note;
        let said = |letter: &CompactString| {
            if in_note { letter.trim_start_matches('\\').to_owned() } else { letter.to_string() }
        };
        let slots = if letters.len() > 2 { format!(" in {} {}", said(one), said(two)) } else { String::new() };
        let kernel = kernel_of(&factor);
        let places = if letters.len() > 2 { format!(" in {} and {}", shown(one), shown(two)) } else { String::new() };
        out.push((format!("{tensor} is {word}{slots}"), format!("Declare that {} is {word}{places}", shown(kernel))));
    }
    out.dedup();
    out
}

/// For a term that vanishes: that nothing is assumed of one of its kernels.
fn vanishing(view: &View, document: usize, finding: &Finding) -> Wanted {
    let mut out: Wanted = Vec::new();
    for factor in factors_within(view, document, finding) {
        let kernel = kernel_of(&factor);
        if !finding.message.contains(&shown(kernel)) {
            continue;
        }
        if let Some(tensor) = tensor_of(&factor, view.host(document)) {
            out.push((format!("{tensor} is a tensor"), format!("Declare that {} has no symmetry", shown(kernel))));
        }
    }
    out.dedup();
    out
}

/// The kernels with letters in a finding's statement, where the finding or what it relates stands.
fn factors_within(view: &View, document: usize, finding: &Finding) -> Vec<Factor> {
    let places = std::iter::once(finding.span).chain(finding.related.iter().map(|related| related.span));
    // A side without the symmetry is the finding's own place; the side that has it is not asked for.
    let places: Vec<_> =
        if finding.rule == "symmetry-not-shared" { places.take(1).collect() } else { places.collect() };
    let Some(formula) =
        view.formula_number(document, finding.span.start).and_then(|number| view.tree(document, number))
    else {
        return Vec::new();
    };
    let mut found: Vec<Factor> = Vec::new();
    let sides: Vec<&Sum> = formula.statements.iter().flat_map(|statement| &statement.sides).collect();
    for side in sides {
        walk(side, &mut |factor| {
            let within = places.iter().any(|place| place.holds(factor.span));
            if within && matches!(factor.atom, Atom::Kernel(_)) && letters_of(factor).len() > 1 {
                found.push(factor.clone());
            }
        });
    }
    found
}

fn kernel_of(factor: &Factor) -> &str {
    match &factor.atom {
        Atom::Kernel(kernel) => &kernel.name,
        _ => "",
    }
}

fn items_of(factor: &Factor) -> impl Iterator<Item = &Item> {
    factor.scripts.iter().flat_map(|script| &script.items)
}

fn letters_of(factor: &Factor) -> Vec<CompactString> {
    items_of(factor)
        .filter_map(|item| match &item.kind {
            ItemKind::Letter(letter) => Some(letter.clone()),
            _ => None,
        })
        .collect()
}

/// Whether a message names a letter as a word of its own.
fn names(message: &str, letter: &str) -> bool {
    let letter = shown(letter);
    message.split([' ', ',', ':', ';']).any(|word| word == letter)
}

/// A kernel with its slots as a sentence names it; nothing where its scripts hold derivatives, labels or anything but
/// different letters.
fn tensor_of(factor: &Factor, host: Host) -> Option<String> {
    let mut letters = letters_of(factor);
    let count = letters.len();
    letters.sort_unstable();
    letters.dedup();
    if items_of(factor).count() != count || letters.len() != count || !factor.marks.is_empty() {
        return None;
    }
    let scripts: Vec<Script> = factor.scripts.iter().filter(|script| !script.items.is_empty()).cloned().collect();
    let bare = Factor { scripts, ..Factor::of(factor.atom.clone()) };
    let written = write_factor(&bare, if host == Host::Note { Dialect::Note } else { Dialect::Latex });
    written.complete.then_some(written.text)
}
