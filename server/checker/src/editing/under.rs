//! What stands under a cursor: a label, a macro's name, an index or a kernel, in a formula or in a sentence of the
//! conventions. All questions about a place begin here.

use std::sync::Arc;

use indexwise_grammar::macros::Macro;
use indexwise_grammar::span::Span;

use crate::paper::View;

use super::commands::call_at;
use super::indices::{Index, Role};
use super::kernels::{KernelName, named_at};
use super::labels::{Mention, mention_at};
use super::parts::{Part, What, parts_of};

/// What stands at a place.
#[derive(Clone, Debug)]
pub(super) enum Under {
    /// A label, or what refers to one.
    Label(Mention),
    /// The name of an author's macro, and its meaning there.
    Macro(Span, Arc<Macro>),
    /// An index with all its places in the statement.
    Index(Held),
    /// A kernel: its place, and whether the author typed it.
    Kernel(Part, KernelName),
    /// Anything else in a formula that has a part: a component, a label in a script, what differentiates.
    Other(Part),
}

/// An index under a cursor.
#[derive(Clone, Debug)]
pub(super) struct Held {
    /// Where the cursor stands.
    pub part: Part,
    pub index: Index,
    /// The number of its formula.
    pub formula: usize,
    /// All its places, those at a sum sign too, in order, each once.
    pub spans: Vec<Span>,
}

/// Finds what stands at an offset of a document. A macro's name goes before what the macro writes, but not before what
/// stands in its arguments.
pub(super) fn under(view: &View, document: usize, offset: u32) -> Option<Under> {
    if let Some(mention) = mention_at(view, document, offset) {
        return Some(Under::Label(mention));
    }
    if let Some((span, kernel)) = named_at(view, document, offset) {
        let part = Part { span, what: What::Kernel(Box::default()), typed: true };
        return Some(Under::Kernel(part, kernel));
    }
    let part = part_at(view, document, offset);
    match (call_at(view, document, offset), part) {
        (Some((span, found)), part) if part.as_ref().is_none_or(|one| !one.is_typed_within(span, offset)) => {
            Some(Under::Macro(span, found))
        }
        (_, part) => part,
    }
}

impl Under {
    /// Whether the author typed it at the cursor itself, and not as the name of a macro at `call`.
    fn is_typed_within(&self, call: Span, offset: u32) -> bool {
        let part = match self {
            Self::Index(held) => &held.part,
            Self::Kernel(part, _) | Self::Other(part) => part,
            Self::Label(_) | Self::Macro(..) => return true,
        };
        part.typed && part.span != call && part.span.start <= offset && offset < part.span.end
    }
}

/// The part of a statement at an offset.
fn part_at(view: &View, document: usize, offset: u32) -> Option<Under> {
    let text = view.text(document);
    let mut best: Option<Under> = None;
    view.each_tree(document, Span { start: offset, end: offset }, |asked| {
        let parts = parts_of(asked, text);
        let Some(part) = parts.at(offset) else { return };
        let found = match &part.what {
            What::Index(number) => {
                let Some(index) = parts.indices.get(*number) else { return };
                let spans = index.spans(asked.sketch);
                Under::Index(Held { part: part.clone(), index: index.clone(), formula: asked.number, spans })
            }
            What::Kernel(made) => Under::Kernel(part.clone(), KernelName::of(made)),
            _ => Under::Other(part.clone()),
        };
        // Where one statement ends and another begins, the one that begins there.
        let begins = part.span.start <= offset && offset < part.span.end;
        if best.is_none() || begins {
            best = Some(found);
        }
    });
    best
}

impl Held {
    /// Whether a place is the other end of the sum that the cursor stands in.
    pub fn is_partner(&self, span: Span) -> bool {
        matches!(self.index.role, Role::Summed | Role::Bound) && span != self.part.span
    }
}
