//! Claims in a short hand: `"^i_jk"` are three slots, `"_0i"` has a member; small letters and digits belong to the
//! first family of the world, capitals to the second; after a dot levels do not matter.

use super::super::{Claim, Limits, Verdict, judge};
use crate::expression::{
    Curvature, Definition, Expression, Family, Field, Filling, Function, Index, Metric, MetricValues, Size, World,
};
use crate::geometry::{Level, Signs};
use crate::rational::Rational;
use crate::sample::SlotSymmetry;

pub type E = Expression;

pub fn ix(slots: &str) -> Vec<Index> {
    let mut level = Level::Inert;
    let mut found = Vec::new();
    for sign in slots.chars() {
        let filling = match sign {
            '^' => {
                level = Level::Up;
                continue;
            }
            '_' => {
                level = Level::Down;
                continue;
            }
            '.' => {
                level = Level::Inert;
                continue;
            }
            '0'..='9' => Filling::Member(sign as usize - '0' as usize),
            _ => Filling::Label(sign as u16),
        };
        found.push(Index { filling, level, family: usize::from(sign.is_ascii_uppercase()) });
    }
    found
}

pub fn one(slot: &str) -> Index {
    ix(slot)[0]
}

fn two(slots: &str) -> [Index; 2] {
    ix(slots).try_into().unwrap()
}

pub fn int(number: i64) -> E {
    E::Number(Rational::from_integer(number))
}

pub fn ratio(upper: i128, lower: i128) -> E {
    E::Number(Rational::new(upper, lower).unwrap())
}

pub fn field(field: usize, slots: &str) -> E {
    E::Field { field, slots: ix(slots) }
}

pub fn defined(definition: usize, slots: &str) -> E {
    E::Defined { definition, slots: ix(slots) }
}

pub fn x(slot: &str) -> E {
    E::Coordinate(one(slot))
}

pub fn delta(slots: &str) -> E {
    E::Delta(two(slots))
}

pub fn g(slots: &str) -> E {
    E::Metric { metric: 0, slots: two(slots) }
}

pub fn det_g() -> E {
    E::Determinant(0)
}

pub fn epsilon(slots: &str) -> E {
    E::Epsilon { metric: None, slots: ix(slots) }
}

pub fn christoffel(slots: &str) -> E {
    E::Christoffel { metric: 0, slots: ix(slots).try_into().unwrap() }
}

pub fn curvature(kind: Curvature, slots: &str) -> E {
    E::Curvature { metric: 0, kind, slots: ix(slots) }
}

pub fn riemann(slots: &str) -> E {
    curvature(Curvature::Riemann, slots)
}

pub fn ricci(slots: &str) -> E {
    curvature(Curvature::Ricci, slots)
}

pub fn d(slot: &str, of: E) -> E {
    E::Partial(one(slot), Box::new(of))
}

pub fn nabla(slot: &str, of: E) -> E {
    E::Covariant { metric: 0, index: one(slot), of: Box::new(of) }
}

pub fn vary(of: E) -> E {
    E::Vary { parameter: 0, of: Box::new(of) }
}

pub fn sum<const K: usize>(terms: [E; K]) -> E {
    E::Sum(terms.into())
}

pub fn times<const K: usize>(factors: [E; K]) -> E {
    E::Product(factors.into())
}

pub fn minus(a: E, b: E) -> E {
    sum([a, b.negated()])
}

pub fn over(a: E, b: E) -> E {
    E::Quotient(Box::new(a), Box::new(b))
}

pub fn power(of: E, upper: i128, lower: i128) -> E {
    E::Power(Box::new(of), Rational::new(upper, lower).unwrap())
}

pub fn root(of: E) -> E {
    power(of, 1, 2)
}

pub fn size(of: E) -> E {
    E::Magnitude(Box::new(of))
}

pub fn function(function: Function, of: E) -> E {
    E::Function(function, Box::new(of))
}

pub fn det(of: E, labels: &str) -> E {
    E::Det(Box::new(of), labels_of(labels))
}

pub fn inverse(of: E, labels: &str, slots: &str) -> E {
    E::Inverse(Box::new(of), labels_of(labels), two(slots))
}

pub fn adjugate(of: E, labels: &str, slots: &str) -> E {
    E::Adjugate(Box::new(of), labels_of(labels), two(slots))
}

fn labels_of(labels: &str) -> [u16; 2] {
    labels.chars().map(|sign| sign as u16).collect::<Vec<_>>().try_into().unwrap()
}

/// A field of the first family with slots on these levels (`"^_"`, `"."`).
pub fn named(name: &str, levels: &str) -> Field {
    let level = |sign| match sign {
        '^' => Level::Up,
        '_' => Level::Down,
        _ => Level::Inert,
    };
    Field {
        name: name.to_owned(),
        slots: levels.chars().map(|sign| (0, level(sign))).collect(),
        symmetries: Vec::new(),
        traceless: false,
        constant: false,
        small: false,
        varies: false,
        known: true,
    }
}

/// The same with its first two slots exchangeable.
pub fn exchangeable(name: &str, levels: &str, negative: bool) -> Field {
    let symmetries = vec![SlotSymmetry::exchange(levels.len(), 0, 1, negative)];
    Field { symmetries, ..named(name, levels) }
}

pub fn definition(name: &str, free: &str, body: E) -> Definition {
    Definition { name: name.to_owned(), free: ix(free), body }
}

/// A space with a metric `g` of arbitrary functions.
pub fn space(dimensions: &[usize], fields: Vec<Field>) -> World {
    World {
        families: vec![Family { size: Size::Dimension(0), coordinates: Some(0), metric: Some(0) }],
        metrics: vec![Metric {
            name: "g".to_owned(),
            family: 0,
            values: MetricValues::Arbitrary,
            minus: 0,
            varies: false,
        }],
        fields,
        signs: Signs::default(),
        dimensions: dimensions.to_vec(),
        ..World::default()
    }
}

/// Cartesian coordinates, levels of no matter.
pub fn cartesian(dimensions: &[usize], fields: Vec<Field>) -> World {
    World {
        families: vec![Family { size: Size::Dimension(0), coordinates: Some(0), metric: None }],
        fields,
        dimensions: dimensions.to_vec(),
        ..World::default()
    }
}

pub fn verdict(left: E, right: E, world: &World) -> Verdict {
    judge(&Claim { left, right, world: world.clone() }, &Limits::seeded(7))
}

#[track_caller]
pub fn holds(left: E, right: E, world: &World) {
    let verdict = verdict(left.clone(), right.clone(), world);
    let Verdict::Holds { dimensions, undefined, draws, error_bits } = verdict else { panic!("{verdict:?}") };
    assert_eq!(dimensions, world.dimensions);
    assert!(undefined.is_empty());
    // Twenty where signs are drawn.
    let text = format!("{left:?} {right:?} {:?}", world.definitions);
    let least = if text.contains("Magnitude") || text.contains("Power") { 20 } else { 60 };
    assert!(draws >= 4 * dimensions.len() && error_bits >= least, "{draws} {error_bits}");
}
