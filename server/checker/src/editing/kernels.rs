//! A kernel in a whole paper: its uses in formulas, and where it is declared and defined.
//!
//! A kernel is its name with its number of slots, as everywhere. A sentence about a kernel without slots (`h is small`)
//! speaks of all kernels of the name.

use compact_str::CompactString;
use indexwise_grammar::conventions::{Name, Sentence, Tensor};
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Claim, Factor, Formula, walk};

use crate::paper::{Asked, View};
use crate::terms::uses::Use;

use super::parts::{Part, What, head_of, named_parts};

/// A kernel: its name with decorations and labels, and how many slots it has.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct KernelName {
    pub name: CompactString,
    pub slots: usize,
}

impl KernelName {
    pub fn of(made: &Use) -> Self {
        Self { name: made.kernel.clone(), slots: made.own_slots().count() }
    }

    fn is(&self, made: &Use) -> bool {
        made.kernel == self.name && made.own_slots().count() == self.slots
    }
}

/// A place where a kernel stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct KernelPlace {
    pub span: Span,
    /// Whether the author typed the kernel there; if not, the place is that of a macro's call.
    pub typed: bool,
    /// Whether a sentence without slots names it, so that it means all kernels of the name.
    pub bare: bool,
}

/// The uses of a kernel in the formulas of a document, in their order.
pub(super) fn uses(view: &View, document: usize, kernel: &KernelName) -> Vec<KernelPlace> {
    let text = view.text(document);
    let mut found: Vec<KernelPlace> = Vec::new();
    each_use(view, document, |part, made| {
        if kernel.is(made) {
            let span = if part.typed { Some(part.span) } else { super::tokens::command_at(part.span, text) };
            let place = KernelPlace { span: span.unwrap_or(part.span), typed: part.typed, bare: false };
            if found.last() != Some(&place) {
                found.push(place);
            }
        }
    });
    found.sort_by_key(|place| place.span);
    found.dedup();
    found
}

/// Hands every use of a kernel in the formulas of a document to a function.
pub(super) fn each_use(view: &View, document: usize, mut take: impl FnMut(&Part, &Use)) {
    let text = view.text(document);
    view.each_tree(document, Span::new(0, text.len()), |asked| {
        for part in &named_parts(asked, text) {
            if let What::Kernel(made) = &part.what {
                take(part, made);
            }
        }
    });
}

/// The places of a kernel in the sentences of a document, each with whether it is declared there rather than used.
pub(super) fn in_sentences(view: &View, document: usize, kernel: &KernelName) -> Vec<(KernelPlace, bool)> {
    let text = view.text(document);
    let mut found = Vec::new();
    for (sentence, _) in view.declared(document).map_or(&[][..], |declared| &declared.sentences) {
        for tensor in tensors_of(sentence) {
            found.extend(place_of(&tensor.factor, kernel, text).map(|place| (place, true)));
        }
        let metric = metrics_of(sentence).into_iter().filter(|name| kernel.slots == 2 && name.text == kernel.name);
        found.extend(metric.map(|name| (named(name), false)));
        let raised = raised_by(sentence).iter().filter(|name| name.text == kernel.name);
        found.extend(raised.map(|name| (KernelPlace { bare: true, ..named(name) }, false)));
        if let Sentence::Definition(statement) = sentence {
            for (side, sum) in statement.sides.iter().enumerate() {
                walk(sum, &mut |factor| {
                    found.extend(place_of(factor, kernel, text).map(|place| (place, side == 0)));
                });
            }
        }
    }
    found.sort_by_key(|(place, declares)| (place.span, !declares));
    found.dedup();
    found
}

/// The kernel that a sentence names at an offset, and where.
pub(super) fn named_at(view: &View, document: usize, offset: u32) -> Option<(Span, KernelName)> {
    let text = view.text(document);
    let sentences = &view.declared(document)?.sentences;
    let (sentence, _) = sentences.iter().find(|(_, span)| span.start <= offset && offset <= span.end)?;
    let at = |span: Span| span.start <= offset && offset <= span.end;
    let mut found: Option<(Span, KernelName)> = None;
    let mut take = |factor: &Factor| {
        let Atom::Kernel(own) = &factor.atom else { return };
        if let Some(head) = head_of(factor, own, text).filter(|head| at(*head)) {
            let slots = Tensor { factor: factor.clone(), span: factor.span }.slots().len();
            found = Some((head, KernelName { name: own.name.clone(), slots }));
        }
    };
    tensors_of(sentence).iter().for_each(|tensor| take(&tensor.factor));
    if let Sentence::Definition(statement) = sentence {
        statement.sides.iter().for_each(|side| walk(side, &mut take));
    }
    let metric = || metrics_of(sentence).into_iter().find(|name| at(name.span));
    found.or_else(|| metric().map(|name| (name.span, KernelName { name: name.text.clone(), slots: 2 })))
}

fn named(name: &Name) -> KernelPlace {
    KernelPlace { span: name.span, typed: true, bare: false }
}

/// Where a factor of a sentence has this kernel.
fn place_of(factor: &Factor, kernel: &KernelName, text: &str) -> Option<KernelPlace> {
    let Atom::Kernel(own) = &factor.atom else { return None };
    let slots = Tensor { factor: factor.clone(), span: factor.span }.slots().len();
    let bare = factor.scripts.is_empty() && kernel.slots > 0;
    if own.name != kernel.name || (slots != kernel.slots && !bare) {
        return None;
    }
    let head = head_of(factor, own, text);
    Some(KernelPlace { span: head.unwrap_or(factor.span), typed: head.is_some(), bare })
}

/// The tensors that a sentence declares.
pub(super) fn tensors_of(sentence: &Sentence) -> Vec<&Tensor> {
    match sentence {
        Sentence::Metric { tensor, .. } | Sentence::Christoffel { tensor, .. } | Sentence::Curvature { tensor, .. } => {
            vec![tensor]
        }
        Sentence::Coordinates(tensor) => vec![tensor],
        Sentence::Symmetry { tensors, .. } | Sentence::Traceless(tensors) | Sentence::Kind { tensors, .. } => {
            tensors.iter().collect()
        }
        _ => Vec::new(),
    }
}

/// The metrics that a sentence names.
fn metrics_of(sentence: &Sentence) -> Vec<&Name> {
    match sentence {
        Sentence::Christoffel { of, .. }
        | Sentence::CovariantDerivative { of, .. }
        | Sentence::Curvature { of, .. } => of.iter().collect(),
        Sentence::Frame { raised_by, .. } => raised_by.iter().collect(),
        Sentence::Raises { metric, .. } => vec![metric],
        _ => Vec::new(),
    }
}

fn raised_by(sentence: &Sentence) -> &[Name] {
    match sentence {
        Sentence::Raises { kernels, .. } => kernels,
        _ => &[],
    }
}

/// Where a formula of a document defines a kernel (`:=`), in their order; each with the place of the whole statement.
pub(super) fn defined_in_formulas(view: &View, document: usize, kernel: &KernelName) -> Vec<(Span, Span)> {
    let text = view.text(document);
    let mut found = Vec::new();
    let defines = |formula: &&Formula| DEFINING.iter().any(|sign| formula.span.of(text).contains(sign));
    // Neighbours that touch a formula are looked at with it, and so may be looked at twice.
    let mut take = |asked: &Asked<'_>| {
        let Some(side) = defined_side(asked) else { return };
        for part in named_parts(asked, text).iter().filter(|part| side.holds(part.span)) {
            if let What::Kernel(made) = &part.what
                && kernel.is(made)
            {
                found.push((part.span, asked.tree.span));
            }
        }
    };
    for formula in view.formulas(document).iter().filter(defines) {
        view.each_tree(document, formula.span, &mut take);
    }
    found.sort_unstable();
    found.dedup();
    found
}

/// What stands in a formula that defines something; a macro of the author's may hide it, and then nothing is shown.
const DEFINING: &[&str] =
    &[":=", "=:", "coloneq", "eqcolon", "eqqcolon", "triangleq", "defeq", "colonequals", "≔", "≕"];

/// The side that a statement defines, if it is one kernel.
fn defined_side(asked: &Asked<'_>) -> Option<Span> {
    let [relation] = asked.tree.relations.as_slice() else { return None };
    let side = match relation.claim() {
        Claim::Definition => asked.tree.sides.first(),
        Claim::DefinitionOfRight => asked.tree.sides.last(),
        Claim::Equality | Claim::Other => None,
    }?;
    match side.terms.as_slice() {
        [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Kernel(_), .. }]) => Some(side.span),
        _ => None,
    }
}
