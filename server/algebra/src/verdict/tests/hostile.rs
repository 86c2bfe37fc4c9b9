//! Claims that are too large, too deep, nowhere defined or in a circle: each ends with a verdict that says so.

use std::cell::Cell;

use super::build::*;
use crate::expression::{Expression, MetricValues};
use crate::trouble::Budget;
use crate::verdict::{Claim, Limits, Reason, Verdict, judge};

#[test]
fn forty_factors_in_a_chain_are_contracted() {
    let world = space(&[2, 3], vec![named("M", "^_"), named("N", "^_")]);
    let letter = |place: u32| char::from_u32(u32::from('\u{3b1}') + place).unwrap();
    let factor = |place: u32| field(place as usize % 2, &format!("^{}_{}", letter(place), letter(place + 1)));
    let forth = Expression::Product((0..40).map(factor).collect());
    let back = Expression::Product((0..40).rev().map(factor).collect());
    holds(forth, back, &world);
}

#[test]
fn the_same_dummies_serve_in_each_nested_product() {
    let world = space(&[2, 3, 4], vec![named("M", "^_"), named("N", "^_")]);
    // The trace of M N M N is that of N M N M, and so are their cubes.
    let chain =
        |slots: [(usize, &str); 4]| Expression::Product(slots.map(|(number, slots)| field(number, slots)).into());
    let forth = || chain([(0, "^i_j"), (1, "^j_k"), (0, "^k_l"), (1, "^l_i")]);
    let back = || chain([(1, "^i_j"), (0, "^j_k"), (1, "^k_l"), (0, "^l_i")]);
    holds(times([forth(), forth(), forth()]), times([back(), back(), back()]), &world);
    // An outer index of the same name is another one.
    let vector = |slots: &str| times([field(0, slots), field(1, "^j_j")]);
    let outer = times([times([field(0, "^i_k"), field(1, "^k_j")]), vector("^k_i")]);
    let plain = times([field(0, "^i_l"), field(1, "^l_j"), field(0, "^k_i"), field(1, "^m_m")]);
    holds(outer, plain, &world);
}

#[test]
fn too_many_factors_too_high_derivatives_and_too_many_dimensions() {
    let budget = |left: Expression, right: Expression, world: &_| {
        let verdict = verdict(left, right, world);
        let Verdict::Undecided(Reason::Budget(budget)) = verdict else { panic!("{verdict:?}") };
        budget
    };
    let world = cartesian(&[4], vec![named("f", ""), named("M", "..")]);
    let many = Expression::Product(vec![field(0, ""); 70]);
    assert_eq!(budget(many.clone(), many, &world), Budget::Factors);
    let eighth = (0..9).fold(field(0, ""), |of, _| d(".0", of));
    assert_eq!(budget(eighth.clone(), eighth, &world), Budget::Monomials);
    let world = cartesian(&[11], Vec::new());
    let epsilon = || epsilon(".ijklmnopqrs");
    assert_eq!(budget(epsilon(), epsilon(), &world), Budget::Numbers);
    let world = space(&[11], Vec::new());
    let verdict = verdict(riemann("_ijkl"), riemann("_klij"), &world);
    assert!(matches!(verdict, Verdict::Undecided(Reason::Budget(_)) | Verdict::Holds { .. }), "{verdict:?}");
}

#[test]
fn a_dimension_that_is_too_large_is_left_out() {
    let world = cartesian(&[2, 3, 40], vec![exchangeable("F", ".....", false)]);
    let verdict = verdict(field(0, ".ijklm"), field(0, ".jiklm"), &world);
    let Verdict::Holds { dimensions, undefined, .. } = verdict else { panic!("{verdict:?}") };
    assert_eq!((dimensions, undefined), (vec![2, 3], Vec::new()));
}

#[test]
fn the_eighth_derivative_in_two_dimensions_is_one() {
    let world = cartesian(&[2], vec![named("f", "")]);
    let eighth = |slots: [&str; 8]| slots.into_iter().fold(field(0, ""), |of, slot| d(slot, of));
    let (i, j) = (".0", ".1");
    holds(eighth([i, i, j, j, i, j, i, j]), eighth([j, j, j, j, i, i, i, i]), &world);
}

#[test]
fn deep_nesting_is_refused() {
    let world = cartesian(&[2], vec![named("f", "")]);
    let deep = (0..200).fold(field(0, ""), |of, _| size(of));
    assert_eq!(verdict(deep, int(1), &world), Verdict::Undecided(Reason::Budget(Budget::Depth)));
    let within = (0..20).fold(field(0, ""), |of, _| over(times([sum([of, int(1)]), int(2)]), int(2)));
    holds(within, sum([field(0, ""), int(20)]), &world);
}

#[test]
fn quotients_where_the_divisor_may_or_must_vanish() {
    let world = cartesian(&[2, 3], vec![named("f", ""), named("A", ".")]);
    let f = || field(0, "");
    holds(over(f(), f()), int(1), &world);
    let nothing = || minus(f(), f());
    let undefined = Verdict::Undecided(Reason::Undefined);
    assert_eq!(verdict(over(f(), nothing()), int(1), &world), undefined);
    assert_eq!(verdict(over(nothing(), nothing()), over(nothing(), nothing()), &world), undefined);
    assert_eq!(verdict(root(times([f(), f()]).negated()), f(), &world), undefined);
    let verdict = verdict(over(int(1), minus(Expression::Dimension(0), int(2))), int(1), &world);
    let Verdict::Holds { dimensions, undefined, .. } = verdict else { panic!("{verdict:?}") };
    assert_eq!((dimensions, undefined), (vec![3], vec![2]));
}

#[test]
fn the_root_of_two_exists_modulo_one_prime() {
    let world = cartesian(&[1], Vec::new());
    let two = || root(int(2));
    holds(times([two(), two()]), int(2), &world);
    holds(root(int(8)), times([int(2), two()]), &world);
}

#[test]
fn a_sum_of_squares_has_no_sign_here() {
    let world = cartesian(&[2], vec![named("A", ".")]);
    let square = || times([field(0, ".i"), field(0, ".i")]);
    assert_eq!(verdict(size(square()), square(), &world), Verdict::Undecided(Reason::Signs));
    holds(power(root(square()), 2, 1), square(), &world);
    holds(root(times([square(), square()])), size(square()), &world);
}

#[test]
fn signs_that_are_drawn_ask_for_many_draws() {
    let world = cartesian(&[1], vec![named("f", ""), named("h", "")]);
    let (f, h) = (|| field(0, ""), || field(1, ""));
    // Right at every second point, at three of four, and everywhere.
    for seed in 0..20 {
        let claim = Claim { left: size(f()), right: f(), world: world.clone() };
        assert!(matches!(judge(&claim, &Limits::seeded(seed)), Verdict::Fails(_)));
        let product = times([minus(size(f()), f()), minus(size(h()), h())]);
        let claim = Claim { left: product, right: int(0), world: world.clone() };
        assert!(matches!(judge(&claim, &Limits::seeded(seed)), Verdict::Fails(_)));
    }
    let verdict = verdict(root(times([f(), f()])), size(f()), &world);
    let Verdict::Holds { draws, error_bits, .. } = verdict else { panic!("{verdict:?}") };
    assert_eq!((draws, error_bits), (50, 20));
}

#[test]
fn what_does_not_fit_together_is_said() {
    let world = space(&[2], vec![named("A", "_"), named("B", "_")]);
    let shape = Verdict::Undecided(Reason::Shape);
    let a = || field(0, "_i");
    assert_eq!(verdict(a(), field(1, "_j"), &world), shape);
    assert_eq!(verdict(sum([a(), int(1)]), a(), &world), shape);
    assert_eq!(verdict(times([a(), field(1, "_i")]), int(0), &world), shape);
    assert_eq!(verdict(field(9, ""), int(0), &world), shape);
    assert_eq!(verdict(a(), a(), &crate::expression::World::default()), shape);
    let nowhere = space(&[], vec![named("A", "_")]);
    assert_eq!(verdict(a(), a(), &nowhere), Verdict::Undecided(Reason::NoDimension));
}

#[test]
fn definitions_in_a_circle_are_said() {
    let mut world = space(&[2], Vec::new());
    world.definitions = vec![definition("a", "", defined(1, "")), definition("b", "", defined(0, ""))];
    assert_eq!(verdict(defined(0, ""), int(1), &world), Verdict::Undecided(Reason::Shape));
    // A metric made of its own curvature.
    world.definitions = vec![definition("g", "_ij", ricci("_ij"))];
    world.metrics[0].values = MetricValues::Defined(0);
    assert_eq!(verdict(g("_ij"), g("_ji"), &world), Verdict::Undecided(Reason::Shape));
}

#[test]
fn whoever_asks_may_stop() {
    let asked = Cell::new(0);
    let stop = || {
        asked.set(asked.get() + 1);
        asked.get() > 3
    };
    let world = space(&[2, 3, 4], Vec::new());
    let claim = Claim { left: riemann("_ijkl"), right: riemann("_klij"), world };
    let limits = Limits { stop: Some(&stop), ..Limits::seeded(1) };
    assert_eq!(judge(&claim, &limits), Verdict::Undecided(Reason::Stopped));
    let limits = Limits { total: 100, ..Limits::seeded(1) };
    assert_eq!(judge(&claim, &limits), Verdict::Undecided(Reason::Budget(Budget::Total)));
}

#[test]
fn a_verdict_is_the_same_every_time() {
    let world = space(&[2, 3], vec![named("A", "_")]);
    let again = || verdict(times([g("^ij"), d("_k", field(0, "_j"))]), d("_k", field(0, "^i")), &world);
    assert_eq!(again(), again());
}
