//! The identities of Riemannian geometry, on random metrics of both signs of the determinant: over both primes in
//! dimensions 2 to 4, over the fractions where the numbers fit. What must fail is tried beside what must hold.
//!
//! Published: Misner, Thorne and Wheeler, "Gravitation" (1973), chapters 8, 13, 14 and 21; Wald, "General
//! Relativity" (1984), chapter 3; the identities of Bianchi, Ricci and Palatini (all from memory). Components of
//! given metrics are compared with SymPy in `tests/references/geometry.py`.

#![allow(clippy::unwrap_used)]

mod invariants;
mod symbols;

use std::sync::Arc;

use super::*;
use crate::draws::Draws;
use crate::field::{FIRST, Residue, SECOND};
use crate::jet::{Order, Ring, Variable};
use crate::number::Exact;
use crate::sample::{self, SlotSymmetry};
use crate::symbols::generalised_delta;

/// States one law, for a dimension and a number of negative directions, for both primes in dimensions 2 to 4 and
/// for the fractions in dimension 2.
macro_rules! law {
    ($name:ident, $law:ident) => {
        #[test]
        fn $name() {
            for dimension in 2..=4 {
                $law::<Residue<FIRST>>(dimension, 1);
                $law::<Residue<SECOND>>(dimension, 0);
            }
            $law::<Exact>(2, 1);
        }
    };
}
pub(super) use law;

law!(the_metric_is_covariantly_constant, metric_compatibility);
law!(the_contracted_christoffel_symbol_is_a_logarithmic_derivative, contracted_christoffel);
law!(derivatives_of_the_inverse_metric, inverse_metric);
law!(covariant_derivatives_obey_the_product_rule, product_rule);
law!(second_covariant_derivatives_of_a_scalar_commute, scalar_hessian);
law!(commuted_covariant_derivatives_give_the_curvature, ricci_identity);
law!(a_connection_with_torsion_adds_a_derivative_along_it, torsion);
law!(the_cyclic_identity, cyclic_identity);
law!(the_differential_bianchi_identity, bianchi_identity);
law!(the_einstein_tensor_has_no_divergence, contracted_bianchi);
law!(the_lowered_curvature_tensor_has_its_symmetries, curvature_symmetries);
law!(divergences_by_the_volume_element, divergences);
law!(palatini_s_identities, palatini);

/// A random space, its metric known to an order.
fn space_in<N: Number>(ring: &Arc<Ring>, minus: usize, seed: u64) -> Geometry<N> {
    let metric = sample::metric(ring, ring.top(), minus, &mut Draws::from_seed(seed)).unwrap();
    Geometry::new(metric, Signs::default()).unwrap()
}

fn space<N: Number>(dimension: usize, minus: usize, order: usize) -> Geometry<N> {
    space_in(&Ring::new(dimension, order).unwrap(), minus, 1)
}

fn field<N: Number>(space: &Geometry<N>, slots: usize, symmetries: &[SlotSymmetry], seed: u64) -> Tensor<N> {
    let ring = space.metric().ring();
    let lengths = vec![space.dimension(); slots];
    sample::tensor(ring, ring.top(), &lengths, symmetries, &mut Draws::from_seed(seed)).unwrap()
}

fn half<N: Number>() -> N {
    N::from_integer(2).inverse().unwrap()
}

#[track_caller]
fn same<N: Number>(a: &Tensor<N>, b: &Tensor<N>) {
    assert!(a.agrees(b).unwrap());
}

#[track_caller]
fn zero<N: Number>(tensor: &Tensor<N>) {
    assert!(tensor.vanishes().unwrap());
}

fn sum<N: Number>(terms: &[Tensor<N>]) -> Tensor<N> {
    terms.iter().skip(1).fold(terms[0].clone(), |sum, term| sum.plus(term).unwrap())
}

fn metric_compatibility<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    zero(&space.covariant(space.metric(), &[Level::Down; 2]).unwrap());
    zero(&space.covariant(space.inverse(), &[Level::Up; 2]).unwrap());
    assert!(!space.metric().gradient().unwrap().vanishes().unwrap());
    let christoffel = space.christoffel().unwrap();
    same(&christoffel.swapped(1, 2).unwrap(), christoffel);
    assert_eq!(christoffel.order(), Order::of_base(1));
}

fn contracted_christoffel<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 3);
    let contracted = space.christoffel().unwrap().trace(0, 1).unwrap();
    let change = space.metric().gradient().unwrap();
    let by_metric = contract(&[(space.inverse(), &[0, 1]), (&change, &[0, 1, 2])], &[2]).unwrap();
    same(&contracted, &by_metric.scaled(half()));
    let determinant = Tensor::scalar(space.determinant());
    let by_determinant = determinant.gradient().unwrap().times(&space.determinant().inverse().unwrap()).unwrap();
    same(&contracted, &by_determinant.scaled(half()));
    let volume = space.volume().unwrap();
    // Any number serves as the value of the logarithm.
    let logarithm = volume.logarithm(N::from_integer(7)).unwrap();
    same(&contracted, &Tensor::scalar(&logarithm).gradient().unwrap());
    assert!(volume.times(&volume).unwrap().agrees(&space.determinant().magnitude().unwrap()).unwrap());
    let sign = if minus == 1 { -N::ONE } else { N::ONE };
    assert_eq!(space.sign(), Ok(sign));
}

fn inverse_metric<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let unit = delta(space.metric().ring(), dimension).unwrap();
    same(&matrix::times(space.metric(), space.inverse()).unwrap(), &unit);
    let change = space.metric().gradient().unwrap();
    let factors: [(_, &[Label]); 3] = [(space.inverse(), &[0, 3]), (space.inverse(), &[1, 4]), (&change, &[3, 4, 2])];
    let product = contract(&factors, &[0, 1, 2]).unwrap();
    same(&space.inverse().gradient().unwrap(), &product.scaled(-N::ONE));
}

fn product_rule<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 1);
    let (left, right) = (field(&space, 2, &[], 2), field(&space, 1, &[], 3));
    let (mixed, up) = ([Level::Up, Level::Down], [Level::Up]);
    let whole = space.covariant(&left.outer(&right).unwrap(), &[Level::Up, Level::Down, Level::Up]).unwrap();
    let first = space.covariant(&left, &mixed).unwrap().outer(&right).unwrap().permuted(&[0, 1, 3, 2]).unwrap();
    let second = left.outer(&space.covariant(&right, &up).unwrap()).unwrap();
    same(&whole, &first.plus(&second).unwrap());
    // Contraction and the covariant derivative commute, and so do raising and the derivative.
    let traced = Tensor::scalar(&left.trace(0, 1).unwrap().to_jet().unwrap());
    same(&space.covariant(&left, &mixed).unwrap().trace(0, 1).unwrap(), &space.covariant(&traced, &[]).unwrap());
    let lowered = space.lowered(&left, 0).unwrap();
    let derivative = space.lowered(&space.covariant(&left, &mixed).unwrap(), 0).unwrap();
    same(&space.covariant(&lowered, &[Level::Down; 2]).unwrap(), &derivative);
    same(&space.raised(&lowered, 0).unwrap(), &left);
    // A slot of another family is left alone.
    let inert = space.covariant(&left, &[Level::Inert; 2]).unwrap();
    same(&inert, &left.gradient().unwrap());
}

fn scalar_hessian<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let gradient = field(&space, 0, &[], 4).gradient().unwrap();
    let hessian = space.covariant(&gradient, &[Level::Down]).unwrap();
    same(&hessian.swapped(0, 1).unwrap(), &hessian);
    // Of a field that is no gradient they do not, and the antisymmetric part knows no connection.
    let covector = field(&space, 1, &[], 5);
    let curl = |derivative: Tensor<N>| derivative.antisymmetrised(&[0, 1]).unwrap();
    let covariant = curl(space.covariant(&covector, &[Level::Down]).unwrap());
    same(&covariant, &curl(covector.gradient().unwrap()));
    assert!(!covariant.vanishes().unwrap());
}

/// `[D_k, D_l] V^i = R^i_{jkl} V^j` and `[D_k, D_l] W_j = -R^i_{jkl} W_i`.
fn ricci_identity<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let commutator = |field: &Tensor<N>, level| {
        let first = space.covariant(field, &[level]).unwrap();
        // Slots (i, l, k) of D_k D_l V^i.
        let second = space.covariant(&first, &[level, Level::Down]).unwrap().swapped(1, 2).unwrap();
        second.minus(&second.swapped(1, 2).unwrap()).unwrap()
    };
    let field = field(&space, 1, &[], 6);
    let riemann = space.riemann().unwrap();
    let on_vector = contract(&[(riemann, &[0, 4, 2, 3]), (&field, &[4])], &[0, 2, 3]).unwrap();
    same(&commutator(&field, Level::Up), &on_vector);
    assert!(!on_vector.vanishes().unwrap());
    let on_covector = contract(&[(riemann, &[4, 1, 2, 3]), (&field, &[4])], &[1, 2, 3]).unwrap();
    same(&commutator(&field, Level::Down), &on_covector.scaled(-N::ONE));
}

/// `[D_k, D_l] V^i = R^i_{jkl} V^j + (G^m_{kl} - G^m_{lk}) D_m V^i` for a connection without symmetry, and
/// `D_k (V^i W_i) = d_k (V^i W_i)`.
fn torsion<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let connection = field(&space, 3, &[], 15);
    let (vector, covector) = (field(&space, 1, &[], 16), field(&space, 1, &[], 17));
    let first = covariant(&vector, &[Level::Up], &connection).unwrap();
    let second = covariant(&first, &[Level::Up, Level::Down], &connection).unwrap().swapped(1, 2).unwrap();
    let commutator = second.minus(&second.swapped(1, 2).unwrap()).unwrap();
    let riemann = curvature(&connection).unwrap();
    let turning = contract(&[(&riemann, &[0, 4, 2, 3]), (&vector, &[4])], &[0, 2, 3]).unwrap();
    let torsion = connection.minus(&connection.swapped(1, 2).unwrap()).unwrap();
    let along = contract(&[(&torsion, &[4, 2, 3]), (&first, &[0, 4])], &[0, 2, 3]).unwrap();
    same(&commutator, &turning.plus(&along).unwrap());
    assert!(!along.vanishes().unwrap());
    let change = covariant(&covector, &[Level::Down], &connection).unwrap();
    let product = [(&first, &covector, [0, 1]), (&change, &vector, [0, 1])]
        .map(|(change, other, labels)| contract(&[(change, &labels), (other, &[0])], &[1]).unwrap());
    let scalar = contract(&[(&vector, &[0]), (&covector, &[0])], &[]).unwrap();
    same(&sum(&product), &scalar.gradient().unwrap());
}

fn cyclic_identity<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 3);
    let riemann = space.riemann().unwrap();
    let turned = |order: [usize; 4]| riemann.permuted(&order).unwrap();
    zero(&sum(&[riemann.clone(), turned([0, 2, 3, 1]), turned([0, 3, 1, 2])]));
    assert!(!riemann.plus(&turned([0, 2, 3, 1])).unwrap().vanishes().unwrap());
}

fn bianchi_identity<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 3);
    let levels = [Level::Up, Level::Down, Level::Down, Level::Down];
    let derivative = space.covariant(space.riemann().unwrap(), &levels).unwrap();
    let turned = |order: [usize; 5]| derivative.permuted(&order).unwrap();
    zero(&sum(&[derivative.clone(), turned([0, 1, 3, 4, 2]), turned([0, 1, 4, 2, 3])]));
    // With the partial derivative it does not hold, nor is the curvature covariantly constant.
    assert!(!derivative.vanishes().unwrap());
    let partial = space.riemann().unwrap().gradient().unwrap();
    let turned = |order: [usize; 5]| partial.permuted(&order).unwrap();
    let partial_sum = sum(&[partial.clone(), turned([0, 1, 3, 4, 2]), turned([0, 1, 4, 2, 3])]);
    assert!(dimension == 2 || !partial_sum.vanishes().unwrap());
}

fn contracted_bianchi<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 3);
    let divergence = |tensor: &Tensor<N>| {
        let mixed = space.raised(tensor, 0).unwrap();
        space.covariant(&mixed, &[Level::Up, Level::Down]).unwrap().trace(0, 2).unwrap()
    };
    zero(&divergence(&space.einstein().unwrap()));
    // That of the Ricci tensor is half the gradient of the scalar, and not 0.
    let gradient = Tensor::scalar(&space.scalar().unwrap()).gradient().unwrap();
    same(&divergence(space.ricci().unwrap()), &gradient.scaled(half()));
    assert!(!gradient.vanishes().unwrap());
}

fn curvature_symmetries<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let lowered = space.lowered(space.riemann().unwrap(), 0).unwrap();
    for (a, b) in [(0, 1), (2, 3)] {
        same(&lowered.swapped(a, b).unwrap(), &lowered.scaled(-N::ONE));
    }
    same(&lowered.permuted(&[2, 3, 0, 1]).unwrap(), &lowered);
    assert!(!lowered.vanishes().unwrap());
    let ricci = space.ricci().unwrap();
    same(&ricci.swapped(0, 1).unwrap(), ricci);
}

/// `D_i V^i = (1/v) d_i (v V^i)`, the same for antisymmetric fields, and the Laplacian of a scalar.
fn divergences<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 2);
    let volume = space.volume().unwrap();
    let inverse = volume.inverse().unwrap();
    let by_volume = |field: &Tensor<N>| {
        let gradient = field.times(&volume).unwrap().gradient().unwrap();
        gradient.trace(0, field.lengths().len()).unwrap().times(&inverse).unwrap()
    };
    let vector = field(&space, 1, &[], 7);
    let divergence = space.covariant(&vector, &[Level::Up]).unwrap().trace(0, 1).unwrap();
    same(&divergence, &by_volume(&vector));
    assert!(!divergence.agrees(&vector.gradient().unwrap().trace(0, 1).unwrap()).unwrap());
    let of_two = |field: &Tensor<N>| space.covariant(field, &[Level::Up; 2]).unwrap().trace(0, 2).unwrap();
    let odd = field(&space, 2, &[SlotSymmetry::exchange(2, 0, 1, true)], 8);
    same(&of_two(&odd), &by_volume(&odd));
    let general = field(&space, 2, &[], 9);
    assert!(!of_two(&general).agrees(&by_volume(&general)).unwrap());
    let scalar = field(&space, 0, &[], 10);
    let rising = space.raised(&scalar.gradient().unwrap(), 0).unwrap();
    let laplacian = space.covariant(&rising, &[Level::Up]).unwrap().trace(0, 1).unwrap();
    same(&laplacian, &by_volume(&rising));
}

/// The variation is the derivative along a small variable, at 0.
fn palatini<N: Number>(dimension: usize, minus: usize) {
    let ring = Ring::with_small(dimension, 1, Order { base: 2, small: 1 }).unwrap();
    let varied = space_in::<N>(&ring, minus, 11);
    let variation = |tensor: &Tensor<N>| tensor.derivative(Variable::Small(0)).unwrap();
    let change = variation(varied.metric());
    // dG^i_{jk} = 1/2 g^{im} (D_j dg_{mk} + D_k dg_{mj} - D_m dg_{jk}).
    let slope = varied.covariant(&change, &[Level::Down; 2]).unwrap();
    let lower = slope.swapped(1, 2).unwrap().plus(&slope).unwrap().minus(&slope.permuted(&[2, 0, 1]).unwrap()).unwrap();
    let connection = contract(&[(varied.inverse(), &[0, 3]), (&lower, &[3, 1, 2])], &[0, 1, 2]).unwrap();
    let connection = connection.scaled(half());
    same(&variation(varied.christoffel().unwrap()), &connection);
    assert!(!connection.vanishes().unwrap());
    // dR_{jl} = D_i dG^i_{jl} - D_l dG^i_{ji}.
    let slope = varied.covariant(&connection, &[Level::Up, Level::Down, Level::Down]).unwrap();
    let ricci = slope.trace(0, 3).unwrap().minus(&slope.trace(0, 2).unwrap()).unwrap();
    same(&variation(varied.ricci().unwrap()), &ricci);
    // dv = 1/2 v g^{ij} dg_{ij}, and dg^{ij} = -g^{ia} g^{jb} dg_{ab}.
    let trace = contract(&[(varied.inverse(), &[0, 1]), (&change, &[0, 1])], &[]).unwrap();
    let volume = varied.volume().unwrap();
    same(&variation(&Tensor::scalar(&volume)), &trace.times(&volume).unwrap().scaled(half()));
    let raised = varied.raised(&varied.raised(&change, 0).unwrap(), 1).unwrap();
    same(&variation(varied.inverse()), &raised.scaled(-N::ONE));
}
