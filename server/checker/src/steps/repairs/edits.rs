//! The single edits of a side: signs, numbers, indices, derivatives, each as an edited tree and as edits of the text.
//!
//! The two are made side by side, and whoever uses them reads the edited text again and compares: where a macro made
//! a part, its place is the macro's call, and an edit there would say something else. The recursion is as deep as the
//! tree, which the reader bounds.

use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, ItemKind, Level, SignKind, Sum, Term};

use crate::conventions::built_in::is_derivative;
use crate::finding::Edit;
use crate::terms::Eyes;

use super::coefficients::{coefficients, value};

/// What an edit does, the most local first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(super) enum Kind {
    /// Another sign.
    Sign,
    /// Another number where one stands.
    Number,
    /// Two neighbours among the indices of one factor come into the order of their letters.
    Order,
    /// Two indices of one factor change places.
    Exchange,
    /// A partial derivative for a covariant one, or the reverse.
    Derivative,
    /// A number where none stands.
    NewNumber,
    /// Two indices of different factors change places.
    ExchangeAcross,
    /// One more term.
    NewTerm,
}

/// A part of a tree after an edit.
#[derive(Clone, Debug)]
pub(super) struct Change<T> {
    /// The part.
    pub of: T,
    /// The same in the text.
    pub edits: Vec<Edit>,
    /// What it does, as a sentence.
    pub title: String,
    /// Of which kind it is.
    pub kind: Kind,
}

impl<T> Change<T> {
    /// The same change of what holds the part.
    pub fn within<U>(self, build: impl FnOnce(T) -> U) -> Change<U> {
        Change { of: build(self.of), edits: self.edits, title: self.title, kind: self.kind }
    }
}

/// What the edits of a statement are made from.
pub(super) struct Page<'p> {
    /// The document.
    pub text: &'p str,
    /// How formulas are written in it.
    pub dialect: indexwise_grammar::write::Dialect,
    /// What the reading knows of the letters.
    pub eyes: &'p Eyes<'p>,
}

impl Page<'_> {
    /// The text of a place, shortened for a title.
    pub fn quoted(&self, span: Span) -> String {
        const LONGEST: usize = 32;
        let words = span.of(self.text).split_whitespace().collect::<Vec<_>>().join(" ");
        match words.char_indices().nth(LONGEST) {
            Some((end, _)) => format!("{} ..", words.get(..end).unwrap_or_default().trim_end()),
            None => words,
        }
    }

    /// An edit that puts a text at a place.
    pub fn edit(&self, span: Span, by: &str) -> Edit {
        Edit::pasted(self.text, span, by)
    }
}

/// Indices of one term beyond which none are exchanged: pairs grow with the square.
pub(super) const PLACES: usize = 40;

/// Every single edit of a sum.
pub(super) fn of_sum(sum: &Sum, page: &Page<'_>) -> Vec<Change<Sum>> {
    let mut changes = Vec::new();
    for (number, term) in sum.terms.iter().enumerate() {
        for change in of_term(term, number == 0, page) {
            changes.push(change.within(|term| {
                let mut copy = sum.clone();
                copy.terms.splice(number..=number, [term]);
                copy
            }));
        }
    }
    changes
}

fn of_term(term: &Term, first: bool, page: &Page<'_>) -> Vec<Change<Term>> {
    let mut changes = Vec::new();
    changes.extend(other_sign(term, first, page));
    changes.extend(coefficients(term, page));
    changes.extend(exchanges(term, page));
    for (number, factor) in term.factors.iter().enumerate() {
        let inner = other_derivative(factor, page).into_iter().chain(inside(factor, page));
        for change in inner {
            changes.push(change.within(|factor| {
                let mut copy = term.clone();
                copy.factors.splice(number..=number, [factor]);
                copy
            }));
        }
    }
    changes
}

/// The other sign before a term.
fn other_sign(term: &Term, first: bool, page: &Page<'_>) -> Option<Change<Term>> {
    let what = page.quoted(term.span);
    let mut copy = term.clone();
    let (edit, title) = match term.sign {
        Some(sign) => {
            let (written, by) = match sign.kind {
                SignKind::Plus => ("+", "-"),
                SignKind::Minus => ("-", if first { "" } else { "+" }),
                SignKind::PlusMinus | SignKind::MinusPlus => return None,
            };
            if sign.span.of(page.text) != written {
                return None;
            }
            copy.sign = (!by.is_empty()).then(|| copy.clone().signed(SignKind::Minus).sign).flatten();
            let title = if by.is_empty() {
                format!("Drop the - before {what}")
            } else {
                format!("Write {by} for {written} before {what}")
            };
            (page.edit(sign.span, by), title)
        }
        None => {
            copy = copy.signed(SignKind::Minus);
            let start = Span { end: term.span.start, ..term.span };
            (page.edit(start, "-"), format!("Write - before {what}"))
        }
    };
    Some(Change { of: copy, edits: vec![edit], title, kind: Kind::Sign })
}

/// An index of a term: where it stands in the tree and in the text.
struct Place {
    factor: usize,
    script: usize,
    item: usize,
    level: Level,
    span: Span,
    kind: ItemKind,
}

/// Two indices on one level change places: those of the term's own factors, since a bracket is a scope of its own.
fn exchanges(term: &Term, page: &Page<'_>) -> Vec<Change<Term>> {
    let places = places(term, page);
    if places.len() > PLACES {
        return Vec::new();
    }
    let mut changes = Vec::new();
    for (number, one) in places.iter().enumerate() {
        for two in places.get(number + 1..).unwrap_or_default() {
            let apart = one.span.end <= two.span.start && !one.span.is_empty();
            if one.level != two.level || one.kind == two.kind || !apart {
                continue;
            }
            let mut copy = term.clone();
            put(&mut copy, one, &two.kind);
            put(&mut copy, two, &one.kind);
            let edits = vec![page.edit(one.span, two.span.of(page.text)), page.edit(two.span, one.span.of(page.text))];
            let (a, b) = (one.span.of(page.text), two.span.of(page.text));
            let span = |place: &Place| term.factors.get(place.factor).map(|factor| factor.span).unwrap_or_default();
            let beside = one.script == two.script && one.item + 1 == two.item;
            let (kind, place) = if one.factor == two.factor {
                (if beside && a > b { Kind::Order } else { Kind::Exchange }, page.quoted(span(one)))
            } else {
                (Kind::ExchangeAcross, page.quoted(span(one).join(span(two))))
            };
            let title = format!("Exchange {a} and {b} in {place}");
            changes.push(Change { of: copy, edits, title, kind });
        }
    }
    changes
}

/// The indices of the factors of a term.
fn places(term: &Term, page: &Page<'_>) -> Vec<Place> {
    let mut places = Vec::new();
    for (number, factor) in term.factors.iter().enumerate() {
        for (script, held) in factor.scripts.iter().enumerate() {
            for (item, one) in held.items.iter().enumerate() {
                if let ItemKind::Letter(letter) = &one.kind
                    && page.eyes.is_index(letter, one.span)
                {
                    let (level, span, kind) = (held.level, one.span, one.kind.clone());
                    places.push(Place { factor: number, script, item, level, span, kind });
                }
            }
        }
    }
    places
}

fn put(term: &mut Term, place: &Place, kind: &ItemKind) {
    let factor = term.factors.get_mut(place.factor);
    let script = factor.and_then(|factor| factor.scripts.get_mut(place.script));
    if let Some(item) = script.and_then(|script| script.items.get_mut(place.item)) {
        item.kind = kind.clone();
    }
}

/// `\nabla` for `\partial` and back, `;` for `,` and back.
fn other_derivative(factor: &Factor, page: &Page<'_>) -> Vec<Change<Factor>> {
    let mut changes = Vec::new();
    let Atom::Kernel(kernel) = &factor.atom else { return changes };
    if is_derivative(&kernel.letter) && kernel.name == kernel.letter {
        let by = if kernel.letter == "\\partial" { "\\nabla" } else { "\\partial" };
        let mut copy = factor.clone();
        if let Atom::Kernel(kernel) = &mut copy.atom {
            (kernel.name, kernel.letter) = (by.into(), by.into());
        }
        // The sign stands where the factor begins, as long as no script does.
        let written = [kernel.letter.as_str(), kernel.letter.trim_start_matches('\\')];
        let found = written.into_iter().find(|name| factor.span.of(page.text).starts_with(name));
        if let Some(name) = found {
            let span = Span { start: factor.span.start, end: factor.span.start + name.len() as u32 };
            let new = if name.starts_with('\\') { by } else { by.trim_start_matches('\\') };
            let title = format!("Write {new} for {name} in {}", page.quoted(factor.span));
            changes.push(Change { of: copy, edits: vec![page.edit(span, new)], title, kind: Kind::Derivative });
        }
    }
    changes.extend(other_comma(factor, page));
    changes
}

fn other_comma(factor: &Factor, page: &Page<'_>) -> Vec<Change<Factor>> {
    let mut changes = Vec::new();
    for (number, script) in factor.scripts.iter().enumerate() {
        for (place, item) in script.items.iter().enumerate() {
            let (kind, written, by) = match item.kind {
                ItemKind::Comma => (ItemKind::Semicolon, ",", ";"),
                ItemKind::Semicolon => (ItemKind::Comma, ";", ","),
                _ => continue,
            };
            let mut copy = factor.clone();
            let held = copy.scripts.get_mut(number).and_then(|script| script.items.get_mut(place));
            if let Some(held) = held.filter(|_| item.span.of(page.text) == written) {
                held.kind = kind;
                let title = format!("Write {by} for {written} in {}", page.quoted(factor.span));
                changes.push(Change { of: copy, edits: vec![page.edit(item.span, by)], title, kind: Kind::Derivative });
            }
        }
    }
    changes
}

/// The edits of what a factor holds.
fn inside(factor: &Factor, page: &Page<'_>) -> Vec<Change<Factor>> {
    let with = |atom: Atom| Factor { atom, ..factor.clone() };
    let changes = |sum: &Sum, build: &dyn Fn(Sum) -> Atom| -> Vec<Change<Factor>> {
        of_sum(sum, page).into_iter().map(|change| change.within(|sum| with(build(sum)))).collect()
    };
    match &factor.atom {
        Atom::Group(group) => match group.parts.as_slice() {
            [part] if part.sides.len() == 1 => part
                .sides
                .iter()
                .flat_map(|side| {
                    changes(side, &|sum| {
                        let mut group = group.clone();
                        group.parts.iter_mut().for_each(|part| part.sides = vec![sum.clone()]);
                        Atom::Group(group)
                    })
                })
                .collect(),
            _ => Vec::new(),
        },
        // A fraction of numbers is one number.
        Atom::Fraction(_) if value(factor).is_some() => Vec::new(),
        Atom::Fraction(fraction) => {
            let mut all = changes(&fraction.over, &|over| {
                let mut fraction = fraction.clone();
                fraction.over = over;
                Atom::Fraction(fraction)
            });
            all.extend(changes(&fraction.under, &|under| {
                let mut fraction = fraction.clone();
                fraction.under = under;
                Atom::Fraction(fraction)
            }));
            all
        }
        Atom::Root(root) => changes(&root.body, &|body| {
            let mut root = root.clone();
            root.body = body;
            Atom::Root(root)
        }),
        Atom::Wrapped(sum) => changes(sum, &|sum| Atom::Wrapped(Box::new(sum))),
        _ => Vec::new(),
    }
}
