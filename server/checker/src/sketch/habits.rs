//! Habits of writing that the tree alone shows: what matches anything, what is a function's argument.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Bracket, Factor, Group, Item, ItemKind, Joint, Kernel, Statement, Sum, Term};

use crate::conventions::built_in::is_point_kernel;

/// Price of letting a bracket after a kernel count as a product when it looks like an argument, or the reverse.
const ARGUMENT_PRICE: i32 = 10;
/// The same where only the lack of a sum speaks for an argument.
const DOUBTFUL_ARGUMENT_PRICE: i32 = 20;

/// Terms that fit whatever indices the others have: nothing, zero, words, "h.c.".
pub(super) fn matches_anything(term: &Term) -> bool {
    match term.factors.as_slice() {
        [] => true,
        [Factor { atom: Atom::Number(number), .. }] => number == "0",
        // `={}&` at the start of a row.
        [Factor { atom: Atom::Wrapped(sum), scripts, .. }] => sum.terms.is_empty() && scripts.is_empty(),
        [Factor { atom: Atom::Kernel(kernel), scripts, .. }] => {
            (kernel.word && scripts.is_empty()) || (kernel.bold && kernel.letter == "0")
        }
        [first, second] => {
            let letter = |factor: &Factor| match &factor.atom {
                Atom::Kernel(kernel) if factor.scripts.is_empty() => Some(kernel.letter.clone()),
                _ => None,
            };
            matches!(
                (letter(first).as_deref(), letter(second).as_deref()),
                (Some("h" | "c" | "H"), Some("c")) | (Some("h"), Some("o"))
            ) && term.sign.is_some()
        }
        _ => false,
    }
}

pub(super) fn is_zero(sum: &Sum) -> bool {
    matches!(sum.terms.as_slice(), [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Number(n), .. }] if n == "0"))
}

/// `\mathbf u \cdot \mathbf v`: two small Latin letters in one type with a dot are vectors, and a scalar together.
pub(super) fn is_scalar_product(term: &Term) -> bool {
    let [first, second] = term.factors.as_slice() else { return false };
    let vector = |factor: &Factor| match &factor.atom {
        Atom::Kernel(kernel) if kernel.bold && factor.scripts.is_empty() => {
            Some((kernel.name.strip_suffix(kernel.letter.as_str())?.to_owned(), kernel.letter.clone()))
        }
        Atom::Unknown(name, arguments) if factor.scripts.is_empty() => match arguments.as_slice() {
            [Sum { terms, .. }] => match terms.as_slice() {
                [Term { factors, .. }] => match factors.as_slice() {
                    [Factor { atom: Atom::Kernel(kernel), .. }] => Some((name.to_string(), kernel.letter.clone())),
                    _ => None,
                },
                _ => None,
            },
            _ => None,
        },
        _ => None,
    };
    let small = |letter: &str| letter.len() == 1 && letter.chars().all(|c| c.is_ascii_lowercase());
    match (vector(first), vector(second)) {
        (Some((one, a)), Some((two, b))) => {
            matches!(second.joint, Joint::Times(_)) && one == two && small(&a) && small(&b)
        }
        _ => false,
    }
}

/// A number, or a fraction or a root of numbers.
pub(super) fn is_numeric(factor: &Factor) -> bool {
    let sum = |sum: &Sum| sum.terms.iter().flat_map(|term| &term.factors).all(|f| matches!(f.atom, Atom::Number(_)));
    match &factor.atom {
        Atom::Number(_) => true,
        Atom::Fraction(fraction) => sum(&fraction.over) && sum(&fraction.under),
        Atom::Root(root) => sum(&root.body),
        _ => false,
    }
}

pub(super) fn is_number(part: &Statement) -> bool {
    let number = |sum: &Sum| matches!(sum.terms.as_slice(), [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Number(_), .. }]));
    part.sides.iter().all(number)
}

/// The letters that a bound with scripts names: the kernel, the letters below it, and both together.
pub(super) fn letters_of(factor: &Factor) -> Vec<(CompactString, Span)> {
    let Atom::Kernel(kernel) = &factor.atom else { return Vec::new() };
    let mut out = vec![(kernel.name.clone(), factor.span)];
    for item in factor.scripts.iter().flat_map(|script| &script.items) {
        if let ItemKind::Letter(letter) = &item.kind {
            out.push((compact_str::format_compact!("{}_{letter}", kernel.name), factor.span));
            out.push((letter.clone(), item.span));
        }
    }
    out
}

pub(super) fn is_lone_derivative(sum: &Sum) -> bool {
    matches!(sum.terms.as_slice(), [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Fraction(_), .. }]))
}

pub(super) fn is_lone_kernel(sum: &Sum) -> bool {
    matches!(sum.terms.as_slice(), [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Kernel(_), .. }]))
}

/// `\partial`, `d`, `\delta` without an index of their own: a slash before them reaches over the next factor too.
pub(super) fn is_differential(factor: &Factor) -> bool {
    let Atom::Kernel(kernel) = &factor.atom else { return false };
    let letters =
        factor.scripts.iter().flat_map(|script| &script.items).any(|item| matches!(item.kind, ItemKind::Letter(_)));
    !letters && matches!(kernel.letter.as_str(), "\\partial" | "d" | "\\delta" | "D" | "\\Delta")
}

/// Whether a bracket after a kernel counts, and what the other reading costs; nothing where it is surely a factor.
pub(super) fn argument_odds(kernel: &Kernel, group: &Group, indexed: bool) -> Option<(bool, i32)> {
    let sums = || group.parts.iter().flat_map(|part| &part.sides);
    match group.bracket {
        // A functional, `S[g]`; a commutator or a factor if the kernel has indices.
        Bracket::Square if indexed => {
            let functional = group.parts.len() == 1 && sums().all(is_lone_kernel);
            return functional.then_some((true, ARGUMENT_PRICE));
        }
        Bracket::Square => {
            return (group.parts.len() == 1 && sums().all(is_lone_kernel)).then_some((false, ARGUMENT_PRICE));
        }
        Bracket::Round => {}
        Bracket::Curly | Bracket::Bars | Bracket::Angle | Bracket::Pair => return None,
    }
    if group.parts.len() > 1 || group.parts.iter().any(|part| !part.relations.is_empty()) {
        return Some((false, ARGUMENT_PRICE));
    }
    let points = sums().all(|sum| {
        let product = sum.terms.iter().any(|term| indexed_factors(term) > 1);
        !sum.terms.is_empty() && !product && sum.terms.iter().all(begins_with_point)
    });
    if points {
        return Some((false, ARGUMENT_PRICE));
    }
    let lone_term = sums().all(|sum| sum.terms.len() == 1 && sum.terms.iter().all(|term| term.sign.is_none()));
    if indexed {
        return sums().all(is_lone_kernel).then_some((true, DOUBTFUL_ARGUMENT_PRICE));
    }
    (lone_term && kernel.letter != "d").then_some((true, DOUBTFUL_ARGUMENT_PRICE))
}

/// How many factors of a term carry letters in their scripts.
fn indexed_factors(term: &Term) -> usize {
    let letter = |item: &Item| matches!(item.kind, ItemKind::Letter(_));
    let indexed = |factor: &&Factor| factor.scripts.iter().any(|script| script.items.iter().any(letter));
    term.factors.iter().filter(indexed).count()
}

pub(super) fn begins_with_point(term: &Term) -> bool {
    let first = term.factors.iter().find(|factor| !matches!(factor.atom, Atom::Number(_)));
    match first.map(|factor| &factor.atom) {
        Some(Atom::Kernel(kernel)) => is_point_kernel(&kernel.letter),
        None => true,
        _ => false,
    }
}
