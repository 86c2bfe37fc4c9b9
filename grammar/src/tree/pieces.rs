//! Building trees from pieces: what a fix, a definition put in or a contraction written out is made of.
//!
//! Pieces that were never typed have an empty place at the start of the document; pieces cloned from a document keep
//! theirs. Nothing here looks at meaning: which letters are indices is the caller's knowledge.

use compact_str::CompactString;

use crate::span::Span;

use super::{
    Atom, Factor, Fraction, FractionKind, Item, ItemKind, Joint, Kernel, Level, Script, Sign, SignKind, Sum, Term,
};

impl Sum {
    /// A sum of terms; the place is that of the terms. From the second term on every term should have a sign.
    pub fn of(terms: Vec<Term>) -> Self {
        let span = joined(terms.iter().map(|term| term.span));
        Self { span, terms }
    }

    /// One factor as a sum.
    pub fn of_factor(factor: Factor) -> Self {
        Self::of(vec![Term::of(vec![factor])])
    }
}

impl Term {
    /// A product without a sign.
    pub fn of(factors: Vec<Factor>) -> Self {
        let span = joined(factors.iter().map(|factor| factor.span));
        Self { span, factors, ..Self::default() }
    }

    /// The term with a sign multiplied onto it.
    pub fn signed(mut self, kind: SignKind) -> Self {
        self.sign = Some(match self.sign {
            Some(sign) => Sign { kind: sign.kind.times(kind), ..sign },
            None => Sign { kind, span: Span { end: self.span.start, ..self.span } },
        });
        self
    }
}

impl Factor {
    /// An atom without scripts.
    pub fn of(atom: Atom) -> Self {
        Self { span: Span::default(), atom, scripts: Vec::new(), joint: Joint::Beside, marks: CompactString::default() }
    }

    /// A kernel of one letter in LaTeX spelling (`g`, `\Gamma`), with its slots in order. Neighbours on one level share
    /// a script; every other is set apart, so that the order is plain.
    pub fn kernel(letter: &str, slots: &[(Level, ItemKind)]) -> Self {
        let kernel = Kernel { name: letter.into(), letter: letter.into(), bold: false, word: false };
        let run = |slots: &[(Level, ItemKind)]| -> Option<Script> {
            let (level, _) = slots.first()?;
            Some(Script::of(*level, slots.iter().map(|(_, kind)| kind.clone()).collect()))
        };
        let mut scripts: Vec<Script> = slots.chunk_by(|one, other| one.0 == other.0).filter_map(run).collect();
        scripts.iter_mut().skip(1).for_each(|script| script.staggered = true);
        Self { scripts, ..Self::of(Atom::Kernel(kernel)) }
    }

    /// A whole number; a minus belongs to the term.
    pub fn number(number: u64) -> Self {
        Self::of(Atom::Number(compact_str::format_compact!("{number}")))
    }

    /// A quotient.
    pub fn quotient(over: Sum, under: Sum) -> Self {
        Self::of(Atom::Fraction(Box::new(Fraction { over, under, kind: FractionKind::Quotient, order: None })))
    }
}

impl Script {
    /// A script of items.
    pub fn of(level: Level, items: Vec<ItemKind>) -> Self {
        let items = items.into_iter().map(|kind| Item { span: Span::default(), kind }).collect();
        Self { span: Span::default(), level, staggered: false, before: false, items }
    }
}

/// Visits every item of every script of a term, however deep: in brackets, fractions, roots, arguments, derivatives and
/// scripts of scripts. In the order written, but for scripts, which come after what their atom holds.
pub fn each_item_mut(term: &mut Term, visit: &mut impl FnMut(&mut Item)) {
    each_script_mut(term, &mut |script| script.items.iter_mut().for_each(&mut *visit));
}

/// Visits every script of a term, however deep, each before the scripts of what stands in it.
pub fn each_script_mut(term: &mut Term, visit: &mut impl FnMut(&mut Script)) {
    term.factors.iter_mut().for_each(|factor| in_factor(factor, visit));
}

fn in_sum(sum: &mut Sum, visit: &mut impl FnMut(&mut Script)) {
    sum.terms.iter_mut().for_each(|term| each_script_mut(term, visit));
}

fn in_factor(factor: &mut Factor, visit: &mut impl FnMut(&mut Script)) {
    match &mut factor.atom {
        Atom::Group(group) => {
            group.parts.iter_mut().flat_map(|part| &mut part.sides).for_each(|side| in_sum(side, visit));
        }
        Atom::Fraction(fraction) => {
            fraction.order.iter_mut().for_each(|order| in_sum(order, visit));
            in_sum(&mut fraction.over, visit);
            in_sum(&mut fraction.under, visit);
        }
        Atom::Root(root) => {
            root.degree.iter_mut().for_each(|degree| in_sum(degree, visit));
            in_sum(&mut root.body, visit);
        }
        Atom::Order(Some(sum)) | Atom::Wrapped(sum) | Atom::Labelled(sum) | Atom::Struck(sum) => in_sum(sum, visit),
        Atom::Unknown(_, sums) => sums.iter_mut().for_each(|sum| in_sum(sum, visit)),
        Atom::Kernel(_)
        | Atom::Number(_)
        | Atom::Big(..)
        | Atom::Function(_)
        | Atom::Matrix
        | Atom::Text(_)
        | Atom::Dots
        | Atom::Order(None)
        | Atom::Unread(_) => {}
    }
    for script in &mut factor.scripts {
        visit(script);
        for item in &mut script.items {
            if let ItemKind::Factor(inner) = &mut item.kind {
                in_factor(inner, visit);
            }
        }
    }
}

/// Puts an item in the place of a letter of the scripts of a term, and says how many places there were. `from` is the
/// letter as items spell it (`\mu`, `i'`, `i_1`); `i'` is another letter than `i`.
///
/// A letter on the line is left alone, since there it is a quantity. The bounds of a sum sign (`\sum_i`) and a lone
/// letter in an exponent (`e^{i k_j}`) are scripts too: for a letter that plays two parts use `each_item_mut`.
pub fn substitute_letter(term: &mut Term, from: &str, to: &ItemKind) -> usize {
    let mut places = 0;
    each_item_mut(term, &mut |item| {
        if matches!(&item.kind, ItemKind::Letter(letter) if letter == from) {
            item.kind = to.clone();
            places += 1;
        }
    });
    places
}

/// A contraction written out: the term once for each value of its summed letter, each with the term's sign. As long as
/// the term times the number of values, which the caller bounds.
pub fn written_out(term: &Term, letter: &str, values: &[ItemKind]) -> Sum {
    let copy = |(n, value): (usize, &ItemKind)| {
        let mut copy = term.clone();
        substitute_letter(&mut copy, letter, value);
        if n > 0 && copy.sign.is_none() { copy.signed(SignKind::Plus) } else { copy }
    };
    Sum { span: term.span, terms: values.iter().enumerate().map(copy).collect() }
}

/// The smallest span that holds all; empty ones do not count.
fn joined(spans: impl Iterator<Item = Span>) -> Span {
    spans.filter(|span| !span.is_empty()).reduce(Span::join).unwrap_or_default()
}
