//! Doubts that a whole statement casts on its letters: one that is a quantity, a vector or a coordinate there is
//! less likely an index.

use compact_str::CompactString;
use indexwise_grammar::tree::{Atom, Bracket, Factor, ItemKind, Level, Statement, Sum};

use super::{Shape, Sketch};

/// How much it speaks against an index that its letter is a quantity of the same statement.
const QUANTITY_DOUBT: i32 = 55;
/// The same for the imaginary unit and the like, which stand beside indices of the same letter by custom.
const UNIT_DOUBT: i32 = 15;
/// How much it speaks against an index that a vector of the statement has the letter's name.
const VECTOR_DOUBT: i32 = 40;
/// How much it speaks against an index that its kernel stands in a bracket with scripts of its own, or that the
/// letter names one of several things.
pub(super) const NAME_DOUBT: i32 = 80;

/// Lowers the bias of letters that the statement uses otherwise too. `named` name one of several things, `counters`
/// are kernels with letters that count there.
pub(super) fn cast_doubts(sketch: &mut Sketch, named: &[CompactString], counters: &[(CompactString, CompactString)]) {
    let kernels: Vec<(CompactString, Shape)> =
        sketch.units.iter().map(|unit| (unit.kernel_letter.clone(), unit.shape)).collect();
    let below: Vec<CompactString> =
        sketch.units.iter().filter(|unit| unit.level == Level::Down).map(|unit| unit.letter.clone()).collect();
    for unit in &mut sketch.units {
        unit.counter = counters.iter().any(|(kernel, letter)| *kernel == unit.kernel && *letter == unit.letter);
        unit.mirrored = unit.level == Level::Up && below.contains(&unit.letter);
        let vector = |shape| kernels.iter().any(|(letter, other)| *letter == unit.letter && *other == shape);
        // A derivative along a vector of the statement, `\nabla_m t = m^a ..`, or a component along two of them,
        // `N_{\nu\tau} = N^{\alpha\beta} \nu_\alpha \tau_\beta`.
        let along = matches!(unit.kernel_letter.as_str(), "\\nabla" | "D") && vector(Shape::Lone);
        if along || sketch.quantities.iter().any(|(letter, _)| *letter == unit.letter) {
            unit.bias -= if matches!(unit.letter.as_str(), "i" | "d" | "e") { UNIT_DOUBT } else { QUANTITY_DOUBT };
        } else if unit.shape == Shape::Several && vector(Shape::Lone) {
            unit.bias -= VECTOR_DOUBT;
        }
        if unit.shape != Shape::Several && named.contains(&unit.letter) {
            unit.bias -= NAME_DOUBT;
        }
    }
}

/// Letters listed as coordinates: `x^\alpha = (s, \theta)`.
pub(super) fn listed_coordinates(statement: &Statement) -> Vec<CompactString> {
    let [left, right] = statement.sides.as_slice() else { return Vec::new() };
    let (Some(point), Some(list)) = (lone_factor(left), lone_factor(right)) else { return Vec::new() };
    let one_letter = matches!(
        (&point.atom, point.scripts.as_slice()),
        (Atom::Kernel(_), [script]) if matches!(script.items.as_slice(), [item] if matches!(item.kind, ItemKind::Letter(_)))
    );
    let Atom::Group(group) = &list.atom else { return Vec::new() };
    if !one_letter || group.bracket != Bracket::Round || group.parts.len() < 2 {
        return Vec::new();
    }
    let name = |part: &Statement| match part.sides.as_slice() {
        [side] => match lone_factor(side)? {
            Factor { atom: Atom::Kernel(kernel), scripts, .. } if scripts.is_empty() => Some(kernel.name.clone()),
            _ => None,
        },
        _ => None,
    };
    group.parts.iter().map(name).collect::<Option<Vec<_>>>().unwrap_or_default()
}

fn lone_factor(sum: &Sum) -> Option<&Factor> {
    match sum.terms.as_slice() {
        [term] if term.sign.is_none() && term.factors.len() == 1 => term.factors.first(),
        _ => None,
    }
}
