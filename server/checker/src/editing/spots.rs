//! Terms of a tree with the sum that each stands in, for changes of the text.

use indexwise_grammar::tree::{Atom, Factor, ItemKind, Statement, Sum, Term};

/// What a sum stands in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Holder {
    /// Something that shows where the sum ends: a side, brackets, a part of a fraction.
    Closed,
    /// Braces, which print nothing.
    Open,
}

/// A term in its sum.
#[derive(Clone, Copy, Debug)]
pub(super) struct Spot<'t> {
    /// The sum.
    pub sum: &'t Sum,
    /// The number of the term in it.
    pub at: usize,
    /// What holds the sum.
    pub holder: Holder,
}

/// Finds a term of a statement, which is told by being the same node.
pub(super) fn spot_of<'t>(statement: &'t Statement, term: &Term) -> Option<Spot<'t>> {
    let mut open: Vec<(&Sum, Holder)> = statement.sides.iter().map(|side| (side, Holder::Closed)).collect();
    while let Some((sum, holder)) = open.pop() {
        if let Some(at) = sum.terms.iter().position(|other| std::ptr::eq(other, term)) {
            return Some(Spot { sum, at, holder });
        }
        for factor in sum.terms.iter().flat_map(|term| &term.factors) {
            open.extend(sums_in(factor));
        }
    }
    None
}

/// The sums that a factor holds, those in its scripts among them.
pub(super) fn sums_in(factor: &Factor) -> Vec<(&Sum, Holder)> {
    let mut out = Vec::new();
    let mut open = vec![factor];
    while let Some(factor) = open.pop() {
        let closed = |sum| (sum, Holder::Closed);
        match &factor.atom {
            Atom::Group(group) => out.extend(group.parts.iter().flat_map(|part| &part.sides).map(closed)),
            Atom::Fraction(fraction) => {
                out.extend(fraction.order.iter().chain([&fraction.over, &fraction.under]).map(closed));
            }
            Atom::Root(root) => out.extend(root.degree.iter().chain([&root.body]).map(closed)),
            Atom::Order(Some(sum)) => out.push(closed(sum)),
            Atom::Wrapped(sum) | Atom::Labelled(sum) | Atom::Struck(sum) => out.push((sum, Holder::Open)),
            Atom::Unknown(_, sums) => out.extend(sums.iter().map(closed)),
            _ => {}
        }
        let items = factor.scripts.iter().flat_map(|script| &script.items);
        open.extend(items.filter_map(|item| match &item.kind {
            ItemKind::Factor(inner) => Some(&**inner),
            _ => None,
        }));
    }
    out
}
