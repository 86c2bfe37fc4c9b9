//! One use of a kernel: which slots its scripts fill, with what, on which level, and which brackets they open.
//!
//! What an item of a script is was settled by the reading of the statement; here it is only sorted: indices and
//! components fill slots, labels belong to the kernel's name. A use that holds anything else (an ellipsis, an
//! arithmetic, a factor of its own) is marked as unread and no rule relies on it.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Factor, Item, ItemKind, Kernel, Level, Script};

use crate::conventions::built_in::is_usual_coordinate;

use super::Eyes;

/// What fills a slot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Filling {
    /// An index letter.
    Index(CompactString),
    /// A fixed value: a number or the name of a coordinate.
    Component(CompactString),
}

/// How a slot came about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Origin {
    /// It is the kernel's own.
    Own,
    /// A partial derivative: `\partial_i` before the kernel, or after a comma.
    Partial,
    /// A covariant derivative: `\nabla_i` before the kernel, or after a semicolon.
    Covariant,
}

/// A slot in use.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UsedSlot {
    /// What fills it.
    pub filling: Filling,
    /// Its level; below a fraction line the written one is flipped.
    pub level: Level,
    /// Where the filling stands.
    pub span: Span,
    /// How it came about.
    pub origin: Origin,
}

/// Slots and the brackets among them, in the order written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mark {
    /// A slot, by its position in the use.
    Slot(usize),
    /// `(` or `[`, on the level on which it is written: it holds slots of that level alone.
    Open(char, Level),
    /// `)` or `]`.
    Close,
    /// `|`: what stands between two of them takes no part.
    Bar,
}

impl Mark {
    /// The mark where slots have other positions.
    pub fn moved(self, to: impl Fn(usize) -> usize) -> Self {
        match self {
            Self::Slot(at) => Self::Slot(to(at)),
            other => other,
        }
    }
}

/// A kernel with its scripts.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Use {
    /// The kernel with decorations and labels: `\tilde g`, `h^{TT}`.
    pub kernel: CompactString,
    /// The kernel's bare letter.
    pub letter: CompactString,
    /// Kernel and scripts.
    pub span: Span,
    /// Its slots in the order written.
    pub slots: Vec<UsedSlot>,
    /// Brackets among them.
    pub marks: Vec<Mark>,
    /// Whether upper and lower slots stand one above the other, so that their common order is not written.
    pub stacked: bool,
    /// Whether a power stands on it.
    pub power: bool,
    /// Whether its scripts hold something that fits none of this.
    pub unread: bool,
}

impl Use {
    /// Its own slots, without those of derivatives.
    pub fn own_slots(&self) -> impl Iterator<Item = &UsedSlot> {
        self.slots.iter().filter(|slot| slot.origin == Origin::Own)
    }
}

impl UsedSlot {
    /// The letter, if an index fills the slot.
    pub fn letter(&self) -> Option<&CompactString> {
        match &self.filling {
            Filling::Index(letter) => Some(letter),
            Filling::Component(_) => None,
        }
    }
}

/// The use that a factor makes of its kernel; `flip` below a fraction line.
pub fn use_of(factor: &Factor, kernel: &Kernel, eyes: &Eyes<'_>, flip: bool) -> Use {
    let mut made =
        Use { kernel: kernel.name.clone(), letter: kernel.letter.clone(), span: factor.span, ..Use::default() };
    let mut levels = Vec::new();
    for script in &factor.scripts {
        if is_power(script, factor) && !are_components(script, kernel, eyes) {
            made.power = true;
            continue;
        }
        let before = made.slots.len();
        take_script(&mut made, script, eyes, flip);
        if made.slots.len() > before {
            levels.push((script.level, script.staggered));
        }
    }
    made.stacked = levels.windows(2).any(|pair| matches!(pair, [one, two] if one.0 != two.0 && !two.1));
    made
}

/// A number above a kernel without other scripts above is a power from 2 on; so is any arithmetic.
fn is_power(script: &Script, factor: &Factor) -> bool {
    if script.level == Level::Down {
        return false;
    }
    let lower = factor.scripts.iter().filter(|other| other.level == Level::Down).flat_map(|other| &other.items);
    let lower = lower.filter(|item| matches!(item.kind, ItemKind::Letter(_) | ItemKind::Number(_))).count();
    match script.items.as_slice() {
        [Item { kind: ItemKind::Number(number), .. }] => match number.as_str() {
            "0" | "1" => false,
            "3" => lower < 2,
            _ => true,
        },
        items => items.iter().any(|item| is_arithmetic(&item.kind)),
    }
}

/// Digits above a kernel that is declared with so many slots, `T^{10}`, or that begin with a nought, `T^{05}`.
fn are_components(script: &Script, kernel: &Kernel, eyes: &Eyes<'_>) -> bool {
    let [Item { kind: ItemKind::Number(number), .. }] = script.items.as_slice() else { return false };
    number.len() > 1 && (number.starts_with('0') || eyes.meanings.known(&kernel.name, number.len()).is_some())
}

fn is_arithmetic(kind: &ItemKind) -> bool {
    matches!(kind, ItemKind::Sign(_) | ItemKind::Operator(_))
}

fn take_script(made: &mut Use, script: &Script, eyes: &Eyes<'_>, flip: bool) {
    let level = if flip { script.level.flipped() } else { script.level };
    let mut origin = Origin::Own;
    let mut labels = String::new();
    for (n, item) in script.items.iter().enumerate() {
        let alone = is_enclosed(&script.items, n);
        match &item.kind {
            ItemKind::Letter(letter) if eyes.is_index(letter, item.span) => {
                push(made, Filling::Index(letter.clone()), level, item.span, origin);
            }
            ItemKind::Letter(letter) if !alone && is_component(letter, script, eyes) => {
                push(made, Filling::Component(letter.clone()), level, item.span, origin);
            }
            ItemKind::Number(number) if !alone => {
                for digit in number.chars() {
                    let name = CompactString::from_iter([digit]);
                    push(made, Filling::Component(name), level, item.span, origin);
                }
            }
            ItemKind::Letter(text) | ItemKind::Number(text) | ItemKind::Label(text) | ItemKind::Styled(text) => {
                labels.push_str(text);
            }
            ItemKind::Mark(text) => labels.push_str(text),
            ItemKind::Comma => origin = Origin::Partial,
            ItemKind::Semicolon => origin = Origin::Covariant,
            ItemKind::Bar => made.marks.push(Mark::Bar),
            ItemKind::Open(sign @ ('(' | '[')) => made.marks.push(Mark::Open(*sign, level)),
            ItemKind::Close(')' | ']') => made.marks.push(Mark::Close),
            _ => made.unread = true,
        }
    }
    if !labels.is_empty() {
        let sign = if script.level == Level::Up { '^' } else { '_' };
        made.kernel.push_str(&format!("{sign}{{{labels}}}"));
    }
}

fn push(made: &mut Use, filling: Filling, level: Level, span: Span, origin: Origin) {
    made.marks.push(Mark::Slot(made.slots.len()));
    made.slots.push(UsedSlot { filling, level, span, origin });
}

/// A letter that is no index names a component if the author says so, or if it usually names one and stands with
/// other indices or components.
fn is_component(letter: &str, script: &Script, eyes: &Eyes<'_>) -> bool {
    eyes.meanings.is_component(letter)
        || is_usual_coordinate(letter) && script.items.len() > 1 && !eyes.meanings.is_not_index(letter)
}

/// Something alone in brackets, `\rho^{(0)}`: a label.
fn is_enclosed(items: &[Item], at: usize) -> bool {
    let kind = |at: Option<usize>| at.and_then(|at| items.get(at)).map(|item| &item.kind);
    matches!((kind(at.checked_sub(1)), kind(Some(at + 1))), (Some(ItemKind::Open('(')), Some(ItemKind::Close(')'))))
}
