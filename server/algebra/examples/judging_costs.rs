//! Prints what verdicts cost, as a table in Markdown: milliseconds from a claim as data to "holds", by the number of
//! dimensions and by how often the claim is differentiated. Run with
//! `cargo run --release -p indexwise-algebra --example judging_costs`.
//!
//! Both sides of a claim are differentiated by the first coordinate, so that every field has to be known to an order
//! more and the components stay as many. Each entry is the fastest of several verdicts, since all of them compute the same and
//! whatever else a machine does only adds to it; the rounds go through the whole table, so that a slow time of the
//! machine meets each entry but once. A dash stands where the claim is refused because a budget does not last, which
//! costs next to nothing.

#![allow(clippy::unwrap_used, clippy::panic)]

use std::time::{Duration, Instant};

use indexwise_algebra::expression::{
    Curvature, Expression, Family, Field, Filling, Index, Metric, MetricValues, Size, World,
};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::rational::Rational;
use indexwise_algebra::verdict::{Claim, Limits, Reason, Verdict, judge};

const DIMENSIONS: std::ops::RangeInclusive<usize> = 2..=6;

const ORDERS: std::ops::RangeInclusive<usize> = 0..=4;

/// How often the whole table is measured.
const ROUNDS: usize = 5;

/// In a round verdicts are measured until there are so many ..
const VERDICTS: usize = 9;

/// .. or so much time has passed, at least one.
const PATIENCE: Duration = Duration::from_millis(300);

/// How many matrices a chain has.
const CHAIN: usize = 8;

fn slot(filling: Filling, level: Level) -> Index {
    Index { filling, level, family: 0 }
}

fn up(label: u16) -> Index {
    slot(Filling::Label(label), Level::Up)
}

fn down(label: u16) -> Index {
    slot(Filling::Label(label), Level::Down)
}

fn product<const K: usize>(factors: [Expression; K]) -> Expression {
    Expression::Product(factors.into())
}

fn metric(slots: [Index; 2]) -> Expression {
    Expression::Metric { metric: 0, slots }
}

fn partial(index: Index, of: Expression) -> Expression {
    Expression::Partial(index, Box::new(of))
}

fn covariant(index: Index, of: Expression) -> Expression {
    Expression::Covariant { metric: 0, index, of: Box::new(of) }
}

fn curvature(kind: Curvature, slots: &[Index]) -> Expression {
    Expression::Curvature { metric: 0, kind, slots: slots.to_vec() }
}

/// `R^1_{234} + R^1_{342} + R^1_{423} = 0`.
fn cyclic() -> [Expression; 2] {
    let riemann = |a, b, c| curvature(Curvature::Riemann, &[up(1), down(a), down(b), down(c)]);
    [Expression::Sum(vec![riemann(2, 3, 4), riemann(3, 4, 2), riemann(4, 2, 3)]), Expression::zero()]
}

/// `D_1 G^{12} = 0`.
fn bianchi() -> [Expression; 2] {
    [covariant(down(1), curvature(Curvature::Einstein, &[up(1), up(2)])), Expression::zero()]
}

/// `d_3 g^{12} = - g^{14} g^{25} d_3 g_{45}`.
fn two_metrics() -> [Expression; 2] {
    let lower = partial(down(3), metric([down(4), down(5)]));
    let right = product([metric([up(1), up(4)]), metric([up(2), up(5)]), lower]);
    [partial(down(3), metric([up(1), up(2)])), right.negated()]
}

/// `D_1 V^1 = d_1 (root |g| V^1) / root |g|`.
fn divergence() -> [Expression; 2] {
    let vector = || Expression::Field { field: 0, slots: vec![up(1)] };
    let size = Expression::Magnitude(Box::new(Expression::Determinant(0)));
    let volume = Expression::Power(Box::new(size), Rational::new(1, 2).unwrap());
    let density = partial(down(1), product([volume.clone(), vector()]));
    [covariant(down(1), vector()), Expression::Quotient(Box::new(density), Box::new(volume))]
}

/// `tr(A B .. H) = tr(B .. H A)`.
fn chain() -> [Expression; 2] {
    let turned = |by: usize| {
        let matrix = |place: usize| {
            let slots = vec![up(place as u16), down(((place + 1) % CHAIN) as u16)];
            Expression::Field { field: (place + by) % CHAIN, slots }
        };
        Expression::Product((0..CHAIN).map(matrix).collect())
    };
    [turned(0), turned(1)]
}

fn field(name: String, levels: &[Level]) -> Field {
    Field {
        name,
        slots: levels.iter().map(|level| (0, *level)).collect(),
        symmetries: Vec::new(),
        traceless: false,
        constant: false,
        small: false,
        varies: false,
        known: true,
    }
}

/// A space with a metric of arbitrary functions, and fields with slots on these levels.
fn space(dimension: usize, fields: usize, levels: &[Level]) -> World {
    let metric = Metric { name: "g".to_owned(), family: 0, values: MetricValues::Arbitrary, minus: 1, varies: false };
    World {
        families: vec![Family { size: Size::Dimension(0), coordinates: Some(0), metric: Some(0) }],
        metrics: vec![metric],
        fields: (0..fields).map(|number| field(format!("A{number}"), levels)).collect(),
        dimensions: vec![dimension],
        ..World::default()
    }
}

/// The claim, differentiated so often.
fn claim([left, right]: [Expression; 2], order: usize, world: World) -> Claim {
    let first = slot(Filling::Member(0), Level::Down);
    let differentiated = |side| (0..order).fold(side, |side, _| partial(first, side));
    // Zero has no derivative to take.
    let right = if right == Expression::zero() { right } else { differentiated(right) };
    Claim { left: differentiated(left), right, world }
}

/// The time of the fastest verdict; nothing where a budget does not last.
fn measured(claim: &Claim) -> Option<Duration> {
    let begin = Instant::now();
    let mut fastest = None;
    for _ in 0..VERDICTS {
        let start = Instant::now();
        match judge(claim, &Limits::seeded(1)) {
            Verdict::Holds { .. } => {}
            Verdict::Undecided(Reason::Budget(_)) => return None,
            verdict => panic!("{verdict:?}"),
        }
        let time = start.elapsed();
        fastest = Some(fastest.map_or(time, |fastest: Duration| fastest.min(time)));
        if begin.elapsed() > PATIENCE {
            break;
        }
    }
    fastest
}

/// Three digits that count, in milliseconds.
fn printed(time: Option<Duration>) -> String {
    let Some(time) = time else { return "–".to_owned() };
    let thousandths = time.as_nanos() / 1000;
    match thousandths {
        0..10_000 => format!("{}.{:02}", thousandths / 1000, thousandths % 1000 / 10),
        10_000..100_000 => format!("{}.{}", thousandths / 1000, thousandths % 1000 / 100),
        _ => format!("{}", thousandths / 1000),
    }
}

fn main() {
    let claims = [
        ("cyclic identity", cyclic(), 0, &[][..]),
        ("contracted Bianchi identity", bianchi(), 0, &[]),
        ("trace of a chain of eight", chain(), CHAIN, &[Level::Up, Level::Down]),
        ("two metrics", two_metrics(), 0, &[]),
        ("divergence formula", divergence(), 1, &[Level::Up]),
    ];
    let head: Vec<String> = DIMENSIONS.map(|dimension| format!(" n = {dimension} |")).collect();
    println!("| claim | derivatives |{}", head.concat());
    println!("| --- | --- |{}", " ---: |".repeat(head.len()));
    let mut rows = Vec::new();
    for (name, sides, fields, levels) in claims {
        for order in ORDERS {
            let claims = DIMENSIONS.map(|dimension| claim(sides.clone(), order, space(dimension, fields, levels)));
            rows.push((name, order, claims.map(|claim| (claim, None)).collect::<Vec<_>>()));
        }
    }
    for _ in 0..ROUNDS {
        for (claim, fastest) in rows.iter_mut().flat_map(|(.., cells)| cells) {
            // Nothing is more than any time here: the first round, and those that are refused.
            *fastest = measured(claim).map(|time| fastest.map_or(time, |fastest: Duration| fastest.min(time)));
        }
    }
    for (name, order, cells) in rows {
        let cells: String = cells.iter().map(|(_, fastest)| format!(" {} |", printed(*fastest))).collect();
        println!("| {name} | {order} |{cells}");
    }
}
