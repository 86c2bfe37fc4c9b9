//! The symbol table of a document: every kernel with its slots and symmetries, and letters that mean two things.
//!
//! It is gathered from the trees of all statements under their readings, so that a label is no slot and an index no
//! quantity. Only who asks for it pays for it.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, ItemKind, Statement, walk};

use crate::conventions::built_in::bare_letter;
use crate::conventions::meanings::Meanings;
use crate::terms::symmetries::{Customs, SignedExchange, exchanges};
use crate::terms::uses::{Use, use_of};
use crate::terms::{Eyes, Piece};

/// The symbols of one document.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SymbolTable {
    /// Kernels by first use.
    pub kernels: Vec<Symbol>,
    /// Letters that are used in more than one way, by first use.
    pub letters: Vec<DoubleUse>,
}

/// A kernel with so many slots.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Symbol {
    /// In LaTeX, with decorations and labels.
    pub kernel: CompactString,
    /// How many slots of its own it has; derivatives do not count.
    pub slots: usize,
    /// How often it is used so.
    pub uses: usize,
    /// Its first use.
    pub first: Span,
    /// What it is symmetric in, in words; slots count from 1.
    pub symmetries: Vec<String>,
    /// Whether the author declares it with so many slots.
    pub declared: bool,
}

/// A letter with several parts to play.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DoubleUse {
    /// In LaTeX.
    pub letter: CompactString,
    /// The parts, by first use.
    pub parts: Vec<Part>,
}

/// What a letter is used as.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Part {
    /// "index", "quantity", "label" or "component".
    pub part: &'static str,
    /// How often.
    pub uses: usize,
    /// The first use.
    pub first: Span,
}

/// Gathers symbols statement by statement.
#[derive(Debug, Default)]
pub struct Gatherer {
    kernels: Vec<Symbol>,
    letters: Vec<DoubleUse>,
}

impl Gatherer {
    /// Takes the symbols of a statement.
    pub fn take(&mut self, statement: &Statement, eyes: &Eyes<'_>) {
        for side in &statement.sides {
            walk(side, &mut |factor| {
                if let Atom::Kernel(kernel) = &factor.atom {
                    let made = use_of(factor, kernel, eyes, false);
                    if made.slots.is_empty() && !kernel.word {
                        self.part(&kernel.letter, "quantity", factor.span);
                    }
                    self.kernel(made, eyes.meanings, eyes.customs);
                }
                for item in factor.scripts.iter().flat_map(|script| &script.items) {
                    if let ItemKind::Letter(letter) = &item.kind {
                        let part = match letter {
                            letter if eyes.is_index(letter, item.span) => "index",
                            letter if eyes.meanings.is_component(letter) => "component",
                            _ => "label",
                        };
                        self.part(bare_letter(letter), part, item.span);
                    }
                }
            });
        }
    }

    /// The table.
    pub fn finish(self) -> SymbolTable {
        let double = |letter: &DoubleUse| letter.parts.len() > 1;
        SymbolTable { kernels: self.kernels, letters: self.letters.into_iter().filter(double).collect() }
    }

    fn kernel(&mut self, made: Use, meanings: &Meanings, customs: Customs) {
        let slots = made.own_slots().count();
        let known = self.kernels.iter_mut().find(|symbol| symbol.kernel == made.kernel && symbol.slots == slots);
        if let Some(symbol) = known {
            symbol.uses += 1;
            return;
        }
        let declared = meanings.known(&made.kernel, slots).is_some();
        let (kernel, first) = (made.kernel.clone(), made.span);
        let bare = Use { slots: made.own_slots().cloned().collect(), stacked: false, ..made };
        let piece = Piece { made: bare, ..Piece::default() };
        let symmetries = in_words(&exchanges(&piece, meanings, customs));
        self.kernels.push(Symbol { kernel, slots, uses: 1, first, symmetries, declared });
    }

    fn part(&mut self, letter: &str, part: &'static str, span: Span) {
        let at = self.letters.iter().position(|known| known.letter == letter).unwrap_or_else(|| {
            self.letters.push(DoubleUse { letter: letter.into(), parts: Vec::new() });
            self.letters.len() - 1
        });
        let Some(known) = self.letters.get_mut(at) else { return };
        match known.parts.iter_mut().find(|known| known.part == part) {
            Some(known) => known.uses += 1,
            None => known.parts.push(Part { part, uses: 1, first: span }),
        }
    }
}

/// Exchanges in words: slots that are exchanged by pairs are told together.
fn in_words(exchanges: &[SignedExchange]) -> Vec<String> {
    let mut groups: Vec<(bool, Vec<usize>)> = Vec::new();
    let mut out = Vec::new();
    for exchange in exchanges {
        let moved: Vec<usize> =
            exchange.images.iter().enumerate().filter(|(at, to)| at != *to).map(|(at, _)| at + 1).collect();
        match moved.as_slice() {
            [one, two] => {
                let sign = exchange.negative;
                let joined = groups
                    .iter_mut()
                    .find(|(other, slots)| *other == sign && (slots.contains(one) || slots.contains(two)));
                match joined {
                    Some((_, slots)) => {
                        slots.extend([*one, *two]);
                        slots.sort_unstable();
                        slots.dedup();
                    }
                    None => groups.push((sign, vec![*one, *two])),
                }
            }
            [a, b, c, d] => out.push(format!("symmetric under the exchange of slots {a} {b} and {c} {d}")),
            _ => {}
        }
    }
    let words = |(negative, slots): (bool, Vec<usize>)| {
        let list: Vec<String> = slots.iter().map(usize::to_string).collect();
        format!("{} in slots {}", if negative { "antisymmetric" } else { "symmetric" }, list.join(" "))
    };
    let mut all: Vec<String> = groups.into_iter().map(words).collect();
    all.append(&mut out);
    all
}
