//! What a piece is symmetric in: by declaration, by custom, and because partial derivatives commute.
//!
//! The answer is a list of signed exchanges of slots that leave the piece as it is. A declaration of the kernel with
//! so many slots replaces custom. Custom is common practice, no source: the metric, the flat metric and Kronecker's
//! delta are symmetric, an epsilon with three slots or more is antisymmetric, a Christoffel symbol is symmetric in its
//! two lower slots, `R` with four slots has the symmetries of a Riemann tensor, and in a paper on curvature `R` and
//! `G` with two are symmetric. Where the text speaks of torsion the connection loses its symmetry and curvature its own;
//! where it speaks of dislocations, vortices or frames without coordinates, partial derivatives need not commute.

use std::ops::Range;
use std::sync::LazyLock;

use aho_corasick::AhoCorasick;
use indexwise_grammar::conventions::{Curvature, Kind};
use indexwise_grammar::tree::Level;

use crate::conventions::meanings::{Known, Meanings, Role};
use crate::conventions::prices::Prices;

use super::product::Piece;
use super::uses::{Origin, Use, UsedSlot};

/// What the usual kernels are taken for in a document.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Customs {
    /// The paper speaks of curvature: it uses Christoffel symbols or a Riemann tensor.
    pub curved: bool,
    /// The text speaks of torsion, other than to say that there is none.
    pub torsion: bool,
    /// The text speaks of what keeps partial derivatives from commuting: lines around which a field has many values, or
    /// frames without coordinates.
    pub partials_differ: bool,
    /// The document writes all its indices below, so that no metric is meant by `g` or `\eta`.
    pub all_below: bool,
}

impl Customs {
    /// The customs of a document by its text.
    pub fn of(text: &str, prices: &Prices<'_>) -> Self {
        let (mut torsion, mut partials_differ) = (false, false);
        for found in TELLING.iter().flat_map(|words| words.find_iter(text)) {
            match found.pattern().as_usize().checked_sub(PARTIALS_DIFFER.len()) {
                None => partials_differ = true,
                Some(0 | 1) => torsion |= !is_denied(text, found.range()),
                Some(_) => torsion = true,
            }
        }
        Self { curved: prices.is_curved(), torsion, partials_differ, all_below: prices.is_cartesian() }
    }
}

/// All words that tell, looked for in one pass: a text is looked through at every key that is pressed. First those for
/// `partials_differ`, then torsion by its name and by that of a theory.
static TELLING: LazyLock<Option<AhoCorasick>> = LazyLock::new(|| {
    let torsion = ["torsion", "Torsion", "Einstein-Cartan", "Einstein--Cartan"];
    AhoCorasick::new(PARTIALS_DIFFER.iter().chain(&torsion)).ok()
});

/// Whether the words around "torsion" say that there is none.
fn is_denied(text: &str, word: Range<usize>) -> bool {
    let after = text.get(word.end..).unwrap_or_default().trim_start_matches(['-', ' ']);
    let before = text.get(..word.start).unwrap_or_default().trim_end();
    NO_TORSION_AFTER.iter().any(|free| after.starts_with(free))
        || NO_TORSION_BEFORE.iter().any(|none| before.ends_with(none))
}

/// Words around "torsion" that say that there is none.
const NO_TORSION_AFTER: &[&str] = &["free", "less", "vanish", "is zero", "is assumed to be zero", "is set to zero"];
const NO_TORSION_BEFORE: &[&str] = &["no", "without", "zero", "vanishing", "without any", "of no", "any"];

/// Words of a text on singular lines or on frames without coordinates.
const PARTIALS_DIFFER: &[&str] = &[
    "dislocation",
    "Dislocation",
    "disclination",
    "Disclination",
    "multivalued",
    "multi-valued",
    "many-valued",
    "vortices",
    "vortex line",
    "line defect",
    "defect line",
    "anholonom",
    "nonholonom",
    "non-holonom",
    "noncoordinate",
    "non-coordinate",
];

/// An exchange of slots that leaves a piece as it is, up to a sign.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SignedExchange {
    /// What stands in slot `n` moves to slot `images[n]`.
    pub images: Vec<usize>,
    /// Whether the sign changes.
    pub negative: bool,
}

/// The exchanges of a piece, over all its slots.
pub fn exchanges(piece: &Piece, meanings: &Meanings, customs: Customs) -> Vec<SignedExchange> {
    let slots = &piece.made.slots;
    let own: Vec<usize> = (0..slots.len()).filter(|at| origin(piece, *at) == Some(Origin::Own)).collect();
    let mut out = if piece.opaque { Vec::new() } else { own_exchanges(&piece.made, &own, meanings, customs) };
    out.extend(derivative_exchanges(piece, &own, meanings, customs));
    out
}

fn origin(piece: &Piece, at: usize) -> Option<Origin> {
    piece.made.slots.get(at).map(|slot| slot.origin)
}

/// Neighbouring partial derivatives commute; so do two of a scalar of which the outer is covariant, without torsion.
fn derivative_exchanges(piece: &Piece, own: &[usize], meanings: &Meanings, customs: Customs) -> Vec<SignedExchange> {
    let count = piece.made.slots.len();
    let scalar = own.is_empty() && meanings.is_kind(&piece.made.kernel, Kind::Scalar) && !customs.torsion;
    // Derivatives along the vectors of a frame, `e_a`, do not commute.
    let frame = |at: usize| {
        let letter = piece.made.slots.get(at).and_then(UsedSlot::letter);
        letter.and_then(|letter| meanings.family(letter)).is_some_and(|family| family.frame)
    };
    let commute = |one: usize| match (origin(piece, one), origin(piece, one + 1)) {
        (Some(Origin::Partial), Some(Origin::Partial)) => !customs.partials_differ && !frame(one) && !frame(one + 1),
        (Some(Origin::Covariant), Some(Origin::Covariant | Origin::Partial)) => scalar && count == 2,
        _ => false,
    };
    (0..count.saturating_sub(1)).filter(|one| commute(*one)).map(|one| swap(count, one, one + 1, false)).collect()
}

fn own_exchanges(made: &Use, own: &[usize], meanings: &Meanings, customs: Customs) -> Vec<SignedExchange> {
    let count = made.slots.len();
    if let Some(known) = meanings.known(&made.kernel, own.len()) {
        return declared(known, made, own);
    }
    if meanings.declares(&made.kernel) && made.letter != "R" && made.letter != "\\Gamma" {
        return Vec::new();
    }
    let symmetric = |negative: bool| pairs(own).map(|(one, two)| swap(count, one, two, negative)).collect();
    match (made.letter.as_str(), own.len()) {
        ("\\delta", 2) => symmetric(false),
        ("g" | "\\eta", 2) if !customs.all_below => symmetric(false),
        ("\\epsilon" | "\\varepsilon", 3..) => symmetric(true),
        ("\\Gamma", 3) if !customs.torsion => christoffel(made, own),
        ("R", 4) if !customs.torsion => riemann(count, own),
        ("R" | "G", 2) if customs.curved && !customs.torsion => symmetric(false),
        _ => Vec::new(),
    }
}

fn declared(known: &Known, made: &Use, own: &[usize]) -> Vec<SignedExchange> {
    let count = made.slots.len();
    let mut out = Vec::new();
    for exchange in &known.exchanges {
        // Of stacked scripts the order is not written; what is symmetric in all its slots does not ask for it.
        if made.stacked && exchange.slots.len() != own.len() {
            continue;
        }
        let slots: Vec<usize> = exchange.slots.iter().filter_map(|at| own.get(*at).copied()).collect();
        out.extend(pairs(&slots).map(|(one, two)| swap(count, one, two, exchange.antisymmetric)));
    }
    match known.role {
        Some(Role::Christoffel) => out.extend(christoffel(made, own)),
        Some(Role::Curvature(Curvature::Riemann | Curvature::Weyl)) => out.extend(riemann(count, own)),
        _ => {}
    }
    out
}

/// The two slots of a connection that stand on the level of which there are two.
fn christoffel(made: &Use, own: &[usize]) -> Vec<SignedExchange> {
    let on = |level: Level| -> Vec<usize> {
        own.iter().copied().filter(|at| made.slots.get(*at).is_some_and(|slot| slot.level == level)).collect()
    };
    match on(Level::Down).as_slice() {
        [one, two] if own.len() == 3 => vec![swap(made.slots.len(), *one, *two, false)],
        _ => Vec::new(),
    }
}

/// Antisymmetric in each pair, symmetric under their exchange.
fn riemann(count: usize, own: &[usize]) -> Vec<SignedExchange> {
    let [a, b, c, d] = *own else { return Vec::new() };
    let mut pairs = swap(count, a, c, false);
    pairs.images.swap(b, d);
    vec![swap(count, a, b, true), swap(count, c, d, true), pairs]
}

/// The exchange of two slots among so many.
fn swap(count: usize, one: usize, two: usize, negative: bool) -> SignedExchange {
    let mut images: Vec<usize> = (0..count).collect();
    images.swap(one, two);
    SignedExchange { images, negative }
}

/// Neighbours in a list: their exchanges make up all exchanges.
fn pairs(slots: &[usize]) -> impl Iterator<Item = (usize, usize)> + '_ {
    slots.iter().copied().zip(slots.iter().copied().skip(1))
}

/// Whether everything is known of a kernel with so many slots: it is declared, or has a meaning by custom. Of what
/// keeps its order in products, too little is known.
pub fn is_known(piece: &Piece, meanings: &Meanings, customs: Customs) -> bool {
    let own = piece.made.own_slots().count();
    let up = piece.made.own_slots().filter(|slot| slot.level == Level::Up).count();
    let custom = match (piece.made.letter.as_str(), own) {
        ("\\delta", 2) | ("\\epsilon" | "\\varepsilon", 3..) => true,
        ("g" | "\\eta", 2) => !customs.all_below,
        ("\\Gamma", 3) => up == 1 && !customs.torsion,
        ("R", 4) => !customs.torsion,
        _ => false,
    };
    let declared = meanings.known(&piece.made.kernel, own);
    let keeps_order =
        [Kind::NonCommuting, Kind::Matrix].into_iter().any(|kind| meanings.is_kind(&piece.made.kernel, kind));
    !piece.opaque && !keeps_order && declared.map_or(custom, Known::is_settled)
}
