//! How fast claims are judged, from the claim as data to the verdict, on one core. Run with
//! `cargo bench -p indexwise-algebra --bench verdicts`.

#![allow(clippy::unwrap_used)]

use divan::{Bencher, black_box};
use indexwise_algebra::expression::{
    Curvature, Expression, Family, Filling, Given, Index, Metric, MetricValues, Size, World,
};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::rational::Rational;
use indexwise_algebra::verdict::{Claim, Limits, Verdict, judge};

fn main() {
    divan::main();
}

fn up(label: u16) -> Index {
    Index { filling: Filling::Label(label), level: Level::Up, family: 0 }
}

fn down(label: u16) -> Index {
    Index { level: Level::Down, ..up(label) }
}

fn metric(slots: [Index; 2]) -> Expression {
    Expression::Metric { metric: 0, slots }
}

fn curvature(kind: Curvature, slots: &[Index]) -> Expression {
    Expression::Curvature { metric: 0, kind, slots: slots.to_vec() }
}

fn divergence(of: Expression) -> Expression {
    Expression::Covariant { metric: 0, index: down(1), of: Box::new(of) }
}

fn space(dimension: usize) -> World {
    let metric = Metric { name: "g".to_owned(), family: 0, values: MetricValues::Arbitrary, minus: 1, varies: false };
    World {
        families: vec![Family { size: Size::Dimension(0), coordinates: Some(0), metric: Some(0) }],
        metrics: vec![metric],
        dimensions: vec![dimension],
        ..World::default()
    }
}

fn holds(claim: &Claim) {
    assert!(matches!(judge(black_box(claim), &Limits::seeded(1)), Verdict::Holds { .. }));
}

/// `d_k g^{ij} = - g^{ia} g^{jb} d_k g_{ab}`: a step with two metrics.
#[divan::bench(args = [2, 3, 4])]
fn two_metrics(bencher: Bencher, dimension: usize) {
    let derivative = |of: Expression| Expression::Partial(down(3), Box::new(of));
    let left = derivative(metric([up(1), up(2)]));
    let factors = vec![metric([up(1), up(4)]), metric([up(2), up(5)]), derivative(metric([down(4), down(5)]))];
    let claim = Claim { left, right: Expression::Product(factors).negated(), world: space(dimension) };
    bencher.bench(|| holds(&claim));
}

/// `D_i G^{ij} = 0`.
#[divan::bench(args = [2, 3, 4])]
fn contracted_bianchi(bencher: Bencher, dimension: usize) {
    let left = divergence(curvature(Curvature::Einstein, &[up(1), up(2)]));
    let claim = Claim { left, right: Expression::zero(), world: space(dimension) };
    bencher.bench(|| holds(&claim));
}

/// `D_i G^{ij} = D^j R` in two dimensions, where it fails: with the search for a counterexample.
#[divan::bench]
fn counterexample(bencher: Bencher) {
    let left = divergence(curvature(Curvature::Ricci, &[up(1), up(2)]));
    let scalar = curvature(Curvature::Scalar, &[]);
    let right = Expression::Covariant { metric: 0, index: up(2), of: Box::new(scalar) };
    let claim = Claim { left, right, world: space(2) };
    bencher.bench(|| assert!(matches!(judge(black_box(&claim), &Limits::seeded(1)), Verdict::Fails(_))));
}

/// `R^i_{jkl} = 0` by `R_{ij} = 0` in three dimensions: a given that is solved for the metric.
#[divan::bench]
fn by_a_given(bencher: Bencher) {
    let mut world = space(3);
    let ricci = curvature(Curvature::Ricci, &[down(1), down(2)]);
    world.givens = vec![Given { label: "vacuum".to_owned(), left: ricci, right: None }];
    let left = curvature(Curvature::Riemann, &[up(1), down(2), down(3), down(4)]);
    let claim = Claim { left, right: Expression::Number(Rational::ZERO), world };
    bencher.bench(|| holds(&claim));
}
