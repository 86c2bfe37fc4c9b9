//! Claims that fail: each with a counterexample that is evaluated again here, from what it says of the fields and by
//! the definitions written out, without the evaluator.

use std::sync::Arc;

use super::build::*;
use crate::contraction::contract;
use crate::expression::{Expression, Function, World};
use crate::geometry::{Geometry, Level, Signs};
use crate::jet::{Jet, Order, Ring, Variable};
use crate::number::{Exact, Number};
use crate::rational::Rational;
use crate::tensor::Tensor;
use crate::verdict::{Counterexample, Reason, Unshown, Verdict};

type Exacts = Tensor<Exact>;

#[track_caller]
fn fails(left: Expression, right: Expression, world: &World) -> Counterexample {
    let verdict = verdict(left, right, world);
    let Verdict::Fails(counterexample) = verdict else { panic!("{verdict:?}") };
    assert_ne!(counterexample.left, counterexample.right);
    counterexample
}

fn ring(counterexample: &Counterexample) -> Arc<Ring> {
    Ring::new(counterexample.dimension, 3).unwrap()
}

/// A polynomial as it is printed, read back.
fn read(text: &str, ring: &Arc<Ring>) -> Jet<Exact> {
    let constant = |number| Jet::constant(ring, number);
    let mut sum = constant(Exact::ZERO);
    let spaced = text.replace(" - ", " + -");
    for term in spaced.split(" + ") {
        let mut product = constant(Exact::ONE);
        for factor in term.split(' ') {
            let (negative, factor) = factor.strip_prefix('-').map_or((false, factor), |rest| (true, rest));
            let jet = match factor.strip_prefix("x_") {
                None => {
                    let (upper, lower) = factor.split_once('/').unwrap_or((factor, "1"));
                    constant(Rational::new(upper.parse().unwrap(), lower.parse().unwrap()).unwrap().into())
                }
                Some(rest) => {
                    let (number, exponent) = rest.split_once('^').unwrap_or((rest, "1"));
                    let number: usize = number.parse().unwrap();
                    let variable = Jet::variable(ring, Variable::Base(number - 1), Exact::ZERO).unwrap();
                    variable.power(exponent.parse().unwrap(), 1).unwrap()
                }
            };
            product = product.times(&jet).unwrap();
            if negative {
                product = product.scaled(-Exact::ONE);
            }
        }
        sum = sum.plus(&product).unwrap();
    }
    sum
}

/// A field of a counterexample; of related components the first alone is told, the others follow with a sign.
fn told(counterexample: &Counterexample, ring: &Arc<Ring>, name: &str, slots: usize, related: Option<i64>) -> Exacts {
    let lengths = vec![counterexample.dimension; slots];
    let size = counterexample.dimension.pow(u32::try_from(slots).unwrap());
    let component = |place: usize| -> Vec<usize> {
        let steps = crate::tensor::strides(&lengths);
        steps.iter().map(|step| place / step % counterexample.dimension).collect()
    };
    let find = |component: &[usize]| {
        let of = counterexample.assignments.iter().find(|of| of.name == name && of.component == component)?;
        Some(read(&of.value, ring))
    };
    let jet = |place: usize| {
        let mut own = component(place);
        if let Some(jet) = find(&own) {
            return jet;
        }
        let zero = Jet::constant(ring, Exact::ZERO);
        let Some(sign) = related else { return zero };
        own.swap(0, 1);
        find(&own).map_or(zero, |jet| jet.scaled(Exact::from_integer(sign)))
    };
    Tensor::from_jets(&lengths, &(0..size).map(jet).collect::<Vec<_>>()).unwrap()
}

/// Compares the two sides, computed anew, with what the counterexample says of them.
#[track_caller]
fn confirmed(counterexample: &Counterexample, labels: &str, left: &Exacts, right: &Exacts) {
    let of = |sign: char| counterexample.component.iter().find(|(label, _)| *label == sign as u16).unwrap().1;
    let component: Vec<usize> = labels.chars().map(of).collect();
    let value = |side: &Exacts| side.value(&component).unwrap().value().unwrap();
    assert_eq!((value(left), value(right)), (counterexample.left, counterexample.right));
}

fn metric(counterexample: &Counterexample, ring: &Arc<Ring>) -> Geometry<Exact> {
    Geometry::new(told(counterexample, ring, "g", 2, Some(1)), Signs::default()).unwrap()
}

#[test]
fn an_index_is_not_raised_through_a_derivative() {
    let world = space(&[2, 3, 4], vec![named("A", "_")]);
    let left = times([g("^ij"), d("_k", field(0, "_j"))]);
    let found = fails(left, d("_k", field(0, "^i")), &world);
    assert_eq!(found.dimension, 2);
    let ring = ring(&found);
    let (space, a) = (metric(&found, &ring), told(&found, &ring, "A", 1, None));
    let left = contract(&[(space.inverse(), &[0, 1]), (&a.gradient().unwrap(), &[1, 2])], &[0, 2]).unwrap();
    let right = space.raised(&a, 0).unwrap().gradient().unwrap();
    confirmed(&found, "ik", &left, &right);
    assert!(found.assignments.len() <= 4, "{found:?}");
}

#[test]
fn partial_is_not_covariant() {
    let world = space(&[2, 3], vec![exchangeable("F", "^^", true)]);
    let found = fails(d("_i", field(0, "^ij")), nabla("_i", field(0, "^ij")), &world);
    let ring = ring(&found);
    let (space, f) = (metric(&found, &ring), told(&found, &ring, "F", 2, Some(-1)));
    let left = f.gradient().unwrap().trace(0, 2).unwrap();
    let right = space.covariant(&f, &[Level::Up, Level::Up]).unwrap().trace(0, 2).unwrap();
    confirmed(&found, "j", &left, &right);
}

#[test]
fn the_divergence_formula_needs_antisymmetry_and_both_roots() {
    let world = space(&[2, 3], vec![named("F", "^^"), named("V", "^")]);
    let volume = || root(size(det_g()));
    let formula = over(d("_i", times([volume(), field(0, "^ij")])), volume());
    let found = fails(nabla("_i", field(0, "^ij")), formula, &world);
    let ring = ring(&found);
    let (space, f) = (metric(&found, &ring), told(&found, &ring, "F", 2, None));
    let left = space.covariant(&f, &[Level::Up, Level::Up]).unwrap().trace(0, 2).unwrap();
    let volume_jet = space.volume().unwrap();
    let density = f.times(&volume_jet).unwrap().gradient().unwrap().trace(0, 2).unwrap();
    let right = density.times(&volume_jet.inverse().unwrap()).unwrap();
    confirmed(&found, "j", &left, &right);
    let one_root = d("_i", times([volume(), field(1, "^i")]));
    fails(nabla("_i", field(1, "^i")), one_root, &world);
}

#[test]
fn a_corrupted_contraction_of_christoffel_s_symbol() {
    let world = space(&[2, 3, 4], Vec::new());
    let logarithm = d("_k", function(Function::Log, size(det_g())));
    let found = fails(christoffel("^i_ik"), logarithm, &world);
    let ring = ring(&found);
    let space = metric(&found, &ring);
    let left = space.christoffel().unwrap().trace(0, 1).unwrap();
    let determinant = space.determinant();
    let gradient = Tensor::scalar(determinant).gradient().unwrap();
    confirmed(&found, "k", &left, &gradient.times(&determinant.inverse().unwrap()).unwrap());
}

#[test]
fn a_commutator_of_the_wrong_sign() {
    let world = space(&[2, 3], vec![named("V", "^")]);
    let second = |a, b| nabla(a, nabla(b, field(0, "^i")));
    let wrong = times([int(-1), riemann("^i_jkl"), field(0, "^j")]);
    let found = fails(minus(second("_k", "_l"), second("_l", "_k")), wrong, &world);
    assert_eq!(found.left, -found.right);
}

#[test]
fn corrupted_identities_fail() {
    let plain = space(&[2, 3], Vec::new());
    let half = || ratio(1, 2);
    // The signs of the terms of Christoffel's symbol.
    let gradient = |slot, slots| d(slot, g(slots));
    let bracket = sum([gradient("_j", "_mk"), gradient("_k", "_mj"), gradient("_m", "_jk")]);
    fails(christoffel("^i_jk"), times([half(), g("^im"), bracket]), &plain);
    // Two slots exchanged, a slot cycled the wrong way, a factor lost.
    fails(riemann("_ijkl"), riemann("_jikl"), &plain);
    fails(sum([riemann("^i_jkl"), riemann("^i_klj"), riemann("^i_jlk")]), Expression::zero(), &plain);
    let divergence = nabla("_i", ricci("^i_j"));
    let scalar = curvature(crate::expression::Curvature::Scalar, "");
    fails(divergence, nabla("_j", scalar), &plain);
    // Variations: the sign of that of the inverse, the half of that of the volume.
    let mut varied = plain;
    varied.parameters = vec!["s".to_owned()];
    varied.metrics[0].varies = true;
    fails(vary(g("^ij")), times([g("^ik"), g("^jl"), vary(g("_kl"))]), &varied);
    let volume = || root(size(det_g()));
    fails(vary(volume()), times([volume(), g("^ij"), vary(g("_ij"))]), &varied);
    // Epsilon and delta.
    let deltas = minus(times([delta(".jn"), delta(".km")]), times([delta(".jm"), delta(".kn")]));
    let found = fails(times([epsilon(".ijk"), epsilon(".imn")]), deltas, &cartesian(&[3], Vec::new()));
    assert!(found.assignments.is_empty());
}

#[test]
fn simple_claims_have_simple_counterexamples() {
    let world = cartesian(&[2, 3], vec![named("A", "."), named("B", ".")]);
    let pair = |a, b| times([field(0, a), field(1, b)]);
    let found = fails(pair(".i", ".j"), pair(".j", ".i"), &world);
    let values: Vec<&str> = found.assignments.iter().map(|of| &of.value[..]).collect();
    assert_eq!(values, ["1", "1"]);
    assert_eq!((found.left.min(found.right), found.left.max(found.right)), (Rational::ZERO, Rational::ONE));
    // The square of the root keeps no sign.
    let world = cartesian(&[1], vec![named("f", "")]);
    let found = fails(root(times([field(0, ""), field(0, "")])), field(0, ""), &world);
    assert_eq!(found.left, -found.right);
    let found = fails(x(".i"), Expression::zero(), &world);
    assert_eq!(found.assignments[0].name, "x");
}

#[test]
fn a_determinant_to_first_order_has_one_term_of_it() {
    let mut h = named("h", "..");
    h.small = true;
    let world = cartesian(&[2, 3], vec![named("A", ".."), h]);
    let changed = det(sum([field(0, ".ij"), field(1, ".ij")]), "ij");
    let twice = times([int(2), adjugate(field(0, ".ij"), "ij", ".kl"), field(1, ".lk")]);
    let found = fails(minus(changed, det(field(0, ".ij"), "ij")), twice, &world);
    let doubled = found.left.checked_mul(Rational::from_integer(2));
    assert_eq!((Some(found.right), found.order), (doubled, 1));
}

#[test]
fn terms_of_second_order_are_missed_where_they_are_asked_for() {
    let mut h = named("h", "..");
    h.small = true;
    let mut world = cartesian(&[2], vec![h]);
    let changed = || det(sum([delta(".ij"), field(0, ".ij")]), "ij");
    let first = || sum([int(1), field(0, ".ii")]);
    holds(changed(), first(), &world);
    world.neglected = Some(3);
    let found = fails(changed(), first(), &world);
    assert_eq!((found.order, found.right), (2, Rational::ZERO));
    // In dimension 2 the term of second order is the determinant.
    let entry = |component: [usize; 2]| {
        let own = found.assignments.iter().find(|own| own.name == "h" && own.component == component);
        own.map_or(0, |own| own.value.parse::<i128>().unwrap())
    };
    let expected = entry([0, 0]) * entry([1, 1]) - entry([0, 1]) * entry([1, 0]);
    assert_eq!(found.left, Rational::new(expected, 1).unwrap());
}

#[test]
fn a_counterexample_has_the_signature_that_was_declared() {
    let mut world = space(&[2, 3], Vec::new());
    world.metrics[0].minus = 1;
    // The sign of the determinant decides.
    let found = fails(root(size(det_g())), det_g(), &world);
    assert!(found.right < Rational::ZERO && found.left > Rational::ZERO, "{found:?}");
    let found = fails(det_g(), int(1), &world);
    assert!(found.left < Rational::ZERO, "{found:?}");
}

#[test]
fn what_is_unknown_is_named() {
    let mut j = named("J", ".");
    j.known = false;
    let world = cartesian(&[2, 3], vec![j, named("A", ".")]);
    let verdict = verdict(field(0, ".i"), field(1, ".i"), &world);
    let reason = Unshown::Unknown(vec!["J".to_owned()]);
    assert_eq!(verdict, Verdict::Differs { dimensions: vec![2, 3], reason });
}

#[test]
fn values_of_functions_prove_nothing() {
    let world = cartesian(&[2], vec![named("A", ".."), named("B", ".."), named("a", ""), named("b", "")]);
    let log = |of| function(Function::Log, of);
    let sum_of_logs = sum([log(field(2, "")), log(field(3, ""))]);
    let differs = Verdict::Differs { dimensions: vec![2], reason: Unshown::NoWitness };
    assert_eq!(verdict(log(field(2, "")), sum_of_logs, &world), differs);
    // True, but the determinant of a product is not seen to be one of determinants.
    let product = times([field(0, ".ik"), field(1, ".kj")]);
    let left = log(size(det(product, "ij")));
    let right = sum([log(size(det(field(0, ".ij"), "ij"))), log(size(det(field(1, ".ij"), "ij")))]);
    assert_eq!(verdict(left, right, &world), Verdict::Undecided(Reason::Functions));
}

#[test]
fn what_fails_in_some_dimensions_comes_with_a_counterexample() {
    let world = space(&[2, 3], Vec::new());
    let einstein = curvature_of_einstein();
    let verdict = verdict(einstein, Expression::zero(), &world);
    let Verdict::NeedsDimension { counterexample: Some(found), .. } = verdict else { panic!("{verdict:?}") };
    let ring = ring(&found);
    let left = metric(&found, &ring).einstein().unwrap();
    let zero = Tensor::zero(&ring, Order::default(), &[3, 3]).unwrap();
    assert_eq!(found.dimension, 3);
    confirmed(&found, "ij", &left, &zero);
}

fn curvature_of_einstein() -> Expression {
    curvature(crate::expression::Curvature::Einstein, "_ij")
}

#[test]
fn printed_polynomials_are_read_back() {
    let ring = Ring::new(2, 3).unwrap();
    let jet = read("-2 + 3/2 x_1 - x_1 x_2^2", &ring);
    let of = |exponents: &[u8]| jet.coefficient(exponents).unwrap().value().unwrap();
    assert_eq!(of(&[0, 0]), Rational::from_integer(-2));
    assert_eq!(Some(of(&[1, 0])), Rational::new(3, 2));
    assert_eq!(of(&[1, 2]), -Rational::ONE);
}
