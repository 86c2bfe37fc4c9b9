//! What the letters of a statement are, each with its place: the common ground of all questions about a place.
//!
//! Indices are those of `indices.rs`, kernels and labels those of the symbol table. A part that a macro wrote has the
//! place of the macro's call; `typed` tells the two apart.

use std::collections::VecDeque;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, ItemKind, Kernel, Script, walk};

use rustc_hash::FxHashSet;

use crate::changes::is_typed;
use crate::conventions::built_in::is_derivative;
use crate::paper::Asked;
use crate::symbols::{LetterRole, Told, told};
use crate::terms::uses::{Filling, Use, use_of};

use super::indices::{Index, indices};

/// What stands at a place.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum What {
    /// An index, by its number among those of the statement.
    Index(usize),
    /// The value of an index.
    Component(CompactString),
    /// A script that names something.
    Label(CompactString),
    /// A kernel.
    Kernel(Box<Use>),
    /// What differentiates.
    Derivative(CompactString),
}

/// A place with what stands there.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Part {
    pub span: Span,
    pub what: What,
    /// Whether the author typed it there; if not, a macro did.
    pub typed: bool,
}

/// A statement, taken apart.
#[derive(Clone, Debug, Default)]
pub(super) struct Parts {
    pub indices: Vec<Index>,
    /// In the order of their places; several may share one.
    pub parts: Vec<Part>,
}

impl Parts {
    /// The part at an offset: the shortest one; the end of a part counts where no other begins.
    pub fn at(&self, offset: u32) -> Option<&Part> {
        let held = |part: &&Part| part.span.start <= offset && offset < part.span.end;
        let ends = |part: &&Part| part.span.end == offset && part.typed;
        let rank = |part: &&Part| (!part.typed, part.span.len());
        self.parts.iter().filter(held).min_by_key(rank).or_else(|| self.parts.iter().filter(ends).min_by_key(rank))
    }
}

/// Takes a statement of `text` apart.
pub(super) fn parts_of(asked: &Asked<'_>, text: &str) -> Parts {
    let (sketch, mut parts) = (asked.sketch, named_parts(asked, text));
    let indices = indices(sketch, &asked.reading.choice);
    for (number, index) in indices.iter().enumerate() {
        let spans = index.spans(sketch).into_iter();
        let part = |span| Part { span, what: What::Index(number), typed: is_typed(text, span, &index.letter) };
        parts.extend(spans.map(part));
    }
    parts.sort_by_key(|part| (part.span, !part.typed));
    Parts { indices, parts }
}

/// The parts of a statement that are no indices, in the order of the tree.
pub(super) fn named_parts(asked: &Asked<'_>, text: &str) -> Vec<Part> {
    let mut parts = Vec::new();
    let Told { uses, letters } = told(asked.tree, text, asked.eyes);
    let mut uses = VecDeque::from(uses);
    let exponents = letters.iter().filter(|(_, role, _)| matches!(role, LetterRole::Kernel(_)));
    let exponents: FxHashSet<Span> = exponents.map(|(.., span)| *span).collect();
    for side in &asked.tree.sides {
        walk(side, &mut |factor| {
            if let Atom::Kernel(kernel) = &factor.atom {
                kernel_parts(asked, text, (factor, kernel), (&exponents, &mut uses), &mut parts);
            }
        });
    }
    parts
}

fn kernel_parts(
    asked: &Asked<'_>,
    text: &str,
    (factor, kernel): (&Factor, &Kernel),
    (exponents, uses): (&FxHashSet<Span>, &mut VecDeque<Use>),
    parts: &mut Vec<Part>,
) {
    let known = uses.iter().position(|made| made.span == factor.span && made.letter == kernel.letter);
    let head = head_of(factor, kernel, text);
    let span = head.unwrap_or(factor.span);
    // Uses come in the order of the factors, so that the one looked for is mostly the first.
    if let Some(made) = known.and_then(|at| uses.remove(at)) {
        parts.push(Part { span, what: What::Kernel(Box::new(made)), typed: head.is_some() });
    } else if differentiates(asked, kernel) {
        parts.push(Part { span, what: What::Derivative(kernel.name.clone()), typed: head.is_some() });
    }
    let made = use_of(factor, kernel, asked.eyes, false);
    for slot in &made.slots {
        if let Filling::Component(name) = &slot.filling {
            let typed = slot.span.of(text).contains(name.trim_start_matches('\\'));
            let part = Part { span: slot.span, what: What::Component(name.clone()), typed };
            // The digits of a number share its place.
            if parts.last() != Some(&part) {
                parts.push(part);
            }
        }
    }
    for script in &factor.scripts {
        label_parts(asked, script, (&made, exponents), text, parts);
    }
}

/// What of a script names something: what fills no slot and is no exponent. Letters side by side are one word.
fn label_parts(
    asked: &Asked<'_>,
    script: &Script,
    (made, exponents): (&Use, &FxHashSet<Span>),
    text: &str,
    parts: &mut Vec<Part>,
) {
    let mut last: Option<(Span, CompactString)> = None;
    // In an exponent, which is a formula of its own, nothing is known of a letter.
    let named = |name: &CompactString, span: Span| !exponents.contains(&span) && asked.eyes.has_read(name, span);
    for item in &script.items {
        let name = match &item.kind {
            ItemKind::Letter(name) if named(name, item.span) => name,
            ItemKind::Label(name) | ItemKind::Styled(name) => name,
            _ => continue,
        };
        if made.slots.iter().any(|slot| slot.span == item.span) {
            continue;
        }
        match &mut last {
            Some((span, word)) if span.end == item.span.start => {
                *span = span.join(item.span);
                word.push_str(name);
            }
            _ => {
                parts.extend(last.take().map(|word| label(word, text)));
                last = Some((item.span, name.clone()));
            }
        }
    }
    parts.extend(last.map(|word| label(word, text)));
}

fn label((span, name): (Span, CompactString), text: &str) -> Part {
    let letters: String = name.chars().filter(|sign| sign.is_alphanumeric()).collect();
    let typed = span.of(text).contains(letters.as_str());
    Part { span, what: What::Label(name), typed }
}

fn differentiates(asked: &Asked<'_>, kernel: &Kernel) -> bool {
    let declared = asked.eyes.meanings.derivatives.iter().any(|(name, _)| *name == kernel.name);
    declared || is_derivative(&kernel.letter) || matches!(kernel.letter.as_str(), "d" | "\\delta" | "\\Delta")
}

/// Where a kernel stands without its scripts; nothing if a macro wrote it.
pub(super) fn head_of(factor: &Factor, kernel: &Kernel, text: &str) -> Option<Span> {
    let (before, after): (Vec<&Script>, Vec<&Script>) = factor.scripts.iter().partition(|script| script.before);
    let start = before.iter().map(|script| script.span.end).max().unwrap_or(factor.span.start);
    let end = after.iter().map(|script| script.span.start).min().unwrap_or(factor.span.end);
    let whole = Span { start, end };
    // Signs of the kernel's letter: `\mu`, `μ`, `mu`.
    let letter = kernel.letter.as_str();
    let sign = indexwise_grammar::unicode_sign(letter);
    let spellings = [Some(letter), sign, Some(letter.trim_start_matches('\\'))];
    let own = whole.of(text).trim();
    let found = spellings.into_iter().flatten().find_map(|name| spelled_at(own, name).map(|at| (at, name.len())))?;
    let begin = start as usize + whole.of(text).find(own)?;
    if !own.starts_with('{') && is_balanced(own) {
        return Some(Span::new(begin, begin + own.len()));
    }
    // `{R^i}_{jk}`, `\tensor{R}{^i}`: the letter alone.
    Some(Span::new(begin + found.0, begin + found.0 + found.1))
}

/// Where a letter is spelled so, by itself: not within the name of a command, as `E` is in `\Err`.
fn spelled_at(text: &str, name: &str) -> Option<usize> {
    let is_letter = |sign: char| sign.is_ascii_alphabetic();
    let whole = |(at, _): &(usize, &str)| {
        let before = text.get(..*at).unwrap_or_default();
        let after = text.get(at + name.len()..).unwrap_or_default();
        if name.starts_with('\\') {
            return !after.starts_with(is_letter);
        }
        !(name.starts_with(is_letter) && before.trim_end_matches(is_letter).ends_with('\\'))
    };
    text.match_indices(name).find(whole).map(|(at, _)| at)
}

fn is_balanced(text: &str) -> bool {
    text.matches('{').count() == text.matches('}').count()
}
