//! How fast identities are evaluated, on one core. Run with `cargo bench -p indexwise-algebra`.
//!
//! The first three evaluate one claim at one point from the drawn field to the answer; the last ones are the
//! contractions below them.

#![allow(clippy::unwrap_used)]

use std::sync::Arc;

use divan::{Bencher, black_box};
use indexwise_algebra::contraction::{Factor, Label, contract, planned};
use indexwise_algebra::draws::Draws;
use indexwise_algebra::field::{FIRST, Residue};
use indexwise_algebra::geometry::{Geometry, Level, Signs};
use indexwise_algebra::jet::{Order, Ring};
use indexwise_algebra::number::Exact;
use indexwise_algebra::sample;
use indexwise_algebra::tensor::Tensor;

type Number = Residue<FIRST>;

fn main() {
    divan::main();
}

fn space(ring: &Arc<Ring>) -> Geometry<Number> {
    let metric = sample::metric(ring, ring.top(), 1, &mut Draws::from_seed(1)).unwrap();
    Geometry::new(metric, Signs::default()).unwrap()
}

/// `D_i G^{ij} = 0`: a metric to third order, its inverse, connection, curvature, and one more derivative.
#[divan::bench(args = [2, 3, 4, 5])]
fn contracted_bianchi(bencher: Bencher, dimension: usize) {
    let ring = Ring::new(dimension, 3).unwrap();
    bencher.bench(|| {
        let space = space(black_box(&ring));
        let mixed = space.raised(&space.einstein().unwrap(), 0).unwrap();
        let divergence = space.covariant(&mixed, &[Level::Up, Level::Down]).unwrap().trace(0, 2).unwrap();
        assert!(divergence.vanishes().unwrap());
    });
}

/// `R^i_{jkl} + R^i_{klj} + R^i_{ljk} = 0`, in four dimensions.
#[divan::bench]
fn cyclic_identity(bencher: Bencher) {
    let ring = Ring::new(4, 2).unwrap();
    bencher.bench(|| {
        let space = space(black_box(&ring));
        let riemann = space.riemann().unwrap();
        let turned = |order: &[usize]| riemann.permuted(order).unwrap();
        let sum = riemann.plus(&turned(&[0, 2, 3, 1])).unwrap().plus(&turned(&[0, 3, 1, 2])).unwrap();
        assert!(sum.vanishes().unwrap());
    });
}

fn matrices(ring: &Arc<Ring>, count: usize, size: usize) -> Vec<Tensor<Number>> {
    let mut draws = Draws::from_seed(2);
    (0..count).map(|_| sample::tensor(ring, ring.top(), &[size, size], &[], &mut draws).unwrap()).collect()
}

/// The trace of a product of eight matrices in four dimensions, of numbers and of jets to an order.
#[divan::bench(args = [0, 1, 2, 3])]
fn trace_of_a_chain(bencher: Bencher, order: usize) {
    let ring = Ring::new(4, order).unwrap();
    let matrices = matrices(&ring, 8, 4);
    let labels: Vec<[Label; 2]> = (0..8).map(|place| [place, (place + 1) % 8]).collect();
    let factors: Vec<Factor<Number>> = matrices.iter().zip(&labels).map(|(m, labels)| (m, &labels[..])).collect();
    bencher.bench(|| contract(black_box(&factors), &[]).unwrap());
}

/// The plan alone of the same.
#[divan::bench]
fn plan_of_a_chain(bencher: Bencher) {
    let ring = Ring::new(4, 0).unwrap();
    let matrices = matrices(&ring, 8, 4);
    let labels: Vec<[Label; 2]> = (0..8).map(|place| [place, (place + 1) % 8]).collect();
    let factors: Vec<Factor<Number>> = matrices.iter().zip(&labels).map(|(m, labels)| (m, &labels[..])).collect();
    bencher.bench(|| planned(black_box(&factors), &[]).unwrap());
}

/// Two arrays of four slots over two pairs: a product of 16 x 16 matrices, to an order.
#[divan::bench(args = [0, 1, 2])]
fn four_slots_over_two_pairs(bencher: Bencher, order: usize) {
    let ring = Ring::new(4, order).unwrap();
    let mut draws = Draws::from_seed(3);
    let mut array = || sample::tensor::<Number>(&ring, Order::of_base(order), &[4; 4], &[], &mut draws).unwrap();
    let (left, right) = (array(), array());
    let factors: [Factor<Number>; 2] = [(&left, &[0, 1, 2, 3]), (&right, &[2, 3, 4, 5])];
    bencher.bench(|| contract(black_box(&factors), &[0, 1, 4, 5]).unwrap());
}

/// The plain product of two 128 x 128 matrices of numbers.
#[divan::bench]
fn large_product(bencher: Bencher) {
    let matrices = matrices(&Ring::new(1, 0).unwrap(), 2, 128);
    let factors: [Factor<Number>; 2] = [(&matrices[0], &[0, 1]), (&matrices[1], &[1, 2])];
    bencher.bench(|| contract(black_box(&factors), &[0, 2]).unwrap());
}

/// The tables of a ring in four coordinates to third order, made once for many claims.
#[divan::bench]
fn tables() -> Arc<Ring> {
    Ring::new(black_box(4), black_box(3)).unwrap()
}

/// `D_i G^{ij} = 0` with fractions, in two dimensions.
#[divan::bench]
fn contracted_bianchi_in_fractions(bencher: Bencher) {
    let ring = Ring::new(2, 3).unwrap();
    bencher.bench(|| {
        let metric = sample::metric::<Exact>(&ring, ring.top(), 1, &mut Draws::from_seed(1)).unwrap();
        let space = Geometry::new(metric, Signs::default()).unwrap();
        let mixed = space.raised(&space.einstein().unwrap(), 0).unwrap();
        space.covariant(&mixed, &[Level::Up, Level::Down]).unwrap()
    });
}
