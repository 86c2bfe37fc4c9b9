//! What the factors of a statement use their letters as.
//!
//! The walk of the tree hands over factors in their order, so that a differential (`dx`, `\delta g`) is known by what
//! comes right after it. Exponents (`e^{i\omega t}`, `x^n`) are no part of a kernel's name; their letters are
//! quantities.

use std::borrow::Cow;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, Fraction, Item, ItemKind, Joint, Kernel, Level, Script, Statement};

use crate::conventions::built_in::{bare_letter, is_labelled_operator};
use crate::sketch::is_exponential;
use crate::terms::Eyes;
use crate::terms::uses::{Filling, Use, use_of};

use super::LetterRole;

/// A letter, what it is used as, and where.
type Played = (CompactString, LetterRole, Span);

/// What one statement uses.
pub(super) struct Roles<'a> {
    text: &'a str,
    eyes: &'a Eyes<'a>,
    kernels: Vec<(Use, bool)>,
    letters: Vec<Played>,
    /// Whether the statement only names things.
    names: bool,
    /// A kernel that is a differential or a derivative if something follows it.
    doubtful: Option<Use>,
    /// Operators above a fraction line, `\frac{d}{dt}`.
    operators: Vec<Span>,
}

impl<'a> Roles<'a> {
    pub(super) fn new(statement: &Statement, text: &'a str, eyes: &'a Eyes<'a>) -> Self {
        let (kernels, letters, operators) = (Vec::new(), Vec::new(), Vec::new());
        Self { text, eyes, kernels, letters, names: only_names(statement), doubtful: None, operators }
    }

    /// Takes a factor; those inside it are taken by themselves.
    pub(super) fn take(&mut self, factor: &Factor) {
        self.settle(Some(factor));
        match &factor.atom {
            Atom::Kernel(kernel) => self.kernel(factor, kernel),
            Atom::Fraction(fraction) => self.operators.extend(operator_above(fraction)),
            _ => {}
        }
        if !matches!(factor.atom, Atom::Kernel(_)) {
            let items = factor.scripts.iter().flat_map(|script| &script.items);
            items.for_each(|item| self.index(item));
        }
    }

    /// The kernels, each with whether it is only named; and the letters.
    pub(super) fn finish(mut self) -> (Vec<(Use, bool)>, Vec<Played>) {
        self.settle(None);
        (self.kernels, self.letters)
    }

    fn kernel(&mut self, factor: &Factor, kernel: &Kernel) {
        let (exponents, others): (Vec<&Script>, Vec<&Script>) =
            factor.scripts.iter().partition(|script| self.is_exponent(script, kernel, &factor.scripts));
        let bare = if exponents.is_empty() {
            Cow::Borrowed(factor)
        } else {
            Cow::Owned(Factor { scripts: others.iter().map(|script| (*script).clone()).collect(), ..factor.clone() })
        };
        let made = use_of(&bare, kernel, self.eyes, false);
        let has_only_exponents = others.is_empty() && !exponents.is_empty();
        for slot in &made.slots {
            match &slot.filling {
                Filling::Index(letter) => self.play(bare_letter(letter), LetterRole::Index, slot.span),
                Filling::Component(name) if is_letter(name) => self.play(name, LetterRole::Component, slot.span),
                Filling::Component(_) => {}
            }
        }
        others.into_iter().filter_map(|script| lone_letter(script)).for_each(|(letter, span)| {
            let filled = made.slots.iter().any(|slot| slot.span == span);
            if !filled {
                self.play(letter, LetterRole::Label, span);
            }
        });
        for item in exponents.into_iter().flat_map(|script| &script.items) {
            if let ItemKind::Letter(letter) = &item.kind {
                self.play(bare_letter(letter), LetterRole::Kernel(0), item.span);
            }
        }
        let is_exponential = kernel.name == "e" && has_only_exponents && made.slots.is_empty();
        if made.unread || is_exponential || self.is_operator(&made, kernel) {
            return;
        }
        match (kernel.letter.as_str(), made.slots.len()) {
            ("d" | "\\delta" | "\\Delta", 0) => self.doubtful = Some(made),
            ("D", 1) if self.eyes.meanings.known(&made.kernel, 1).is_none() => self.doubtful = Some(made),
            _ => self.add(made),
        }
    }

    /// Whether a kernel differentiates, or is a word or a sign that names nothing.
    fn is_operator(&self, made: &Use, kernel: &Kernel) -> bool {
        let declared = self.eyes.meanings.derivatives.iter().any(|(name, _)| *name == kernel.name);
        match kernel.letter.as_str() {
            "\\partial" | "\\nabla" | "\\forall" | "\\exists" | "\\infty" => true,
            _ if is_labelled_operator(&kernel.name) && kernel.letter != "\\Delta" => true,
            _ => declared || kernel.word && made.slots.is_empty() || self.operators.contains(&made.span),
        }
    }

    /// Decides on a differential or a derivative by the factor that follows.
    fn settle(&mut self, next: Option<&Factor>) {
        let Some(made) = self.doubtful.take() else { return };
        let acts = next.filter(|next| next.joint == Joint::Beside && !matches!(next.atom, Atom::Number(_)));
        let acts = acts.is_some_and(|next| {
            let between = self.text.get(made.span.end as usize..next.span.start as usize);
            // What a macro made shares its place. `d E_{ij}` is rather a thickness times a strain.
            between.is_none_or(|between| {
                let indices: usize = next.scripts.iter().map(|script| script.items.len()).sum();
                between.is_empty() || between.trim().is_empty() && (made.letter != "d" || made.power || indices < 2)
            })
        });
        if !acts {
            self.add(made);
        }
    }

    fn add(&mut self, made: Use) {
        // A decorated or labelled letter is another symbol.
        let slots = made.own_slots().count();
        let named = self.names && slots == 0;
        if !named {
            self.play(&made.kernel.clone(), LetterRole::Kernel(slots), made.span);
        }
        self.kernels.push((made, named));
    }

    /// A script of something that is no kernel: only its indices are of interest.
    fn index(&mut self, item: &Item) {
        if let ItemKind::Letter(letter) = &item.kind
            && self.eyes.is_index(letter, item.span)
        {
            self.play(bare_letter(letter), LetterRole::Index, item.span);
        }
    }

    fn play(&mut self, letter: &str, role: LetterRole, span: Span) {
        self.letters.push((letter.into(), role, span));
    }

    /// Whether a script is a power: above, without an index, and on `e`, with a structure of its own, or one small
    /// letter. A capital above is rather a label (`A^T`).
    fn is_exponent(&self, script: &Script, kernel: &Kernel, all: &[Script]) -> bool {
        if is_exponential(script, &kernel.name, all) {
            return true;
        }
        let is_index =
            |item: &Item| matches!(&item.kind, ItemKind::Letter(letter) if self.eyes.is_index(letter, item.span));
        if script.level != Level::Up || script.before || script.items.iter().any(is_index) {
            return false;
        }
        let has_structure = script.items.iter().any(|item| matches!(item.kind, ItemKind::Factor(_)));
        let is_small =
            |letter: &str| letter.trim_start_matches('\\').starts_with(|first: char| first.is_ascii_lowercase());
        let small = matches!(script.items.as_slice(), [Item { kind: ItemKind::Letter(letter), .. }] if is_small(letter)
            && !self.eyes.meanings.is_not_index(letter));
        kernel.letter == "e" || has_structure || small
    }
}

/// Whether every side of a statement is one letter, number or list: `$\alpha$`, `i, j = 1, 2`. Authors name their
/// index letters so, and they are no quantities by that.
fn only_names(statement: &Statement) -> bool {
    let named = |factor: &Factor| match &factor.atom {
        Atom::Kernel(_) => factor.scripts.is_empty(),
        atom => matches!(atom, Atom::Number(_) | Atom::Dots | Atom::Group(_)),
    };
    statement
        .sides
        .iter()
        .flat_map(|side| &side.terms)
        .all(|term| matches!(term.factors.as_slice(), [one] if named(one)))
}

/// A differential alone above a fraction line, and below it more than it.
fn operator_above(fraction: &Fraction) -> Option<Span> {
    let [term] = fraction.over.terms.as_slice() else { return None };
    let [factor] = term.factors.as_slice() else { return None };
    let Atom::Kernel(kernel) = &factor.atom else { return None };
    let first = fraction.under.terms.first()?.factors.first()?;
    let same = matches!(&first.atom, Atom::Kernel(other) if other.letter == kernel.letter);
    (same && matches!(kernel.letter.as_str(), "d" | "\\delta")).then_some(factor.span)
}

/// The letter of a script that holds one letter: several are a word.
fn lone_letter(script: &Script) -> Option<(&str, Span)> {
    match script.items.as_slice() {
        [Item { kind: ItemKind::Letter(letter), span }] => Some((bare_letter(letter), *span)),
        _ => None,
    }
}

/// Whether the name of a component is a letter, not a number.
fn is_letter(name: &str) -> bool {
    !name.starts_with(|first: char| first.is_ascii_digit())
}
