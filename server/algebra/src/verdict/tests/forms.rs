//! Claims that hold by form, and those that do not though they hold.

use super::build::*;
use crate::expression::{Expression, World};
use crate::verdict::{Claim, Verdict, holds_by_form};

#[track_caller]
fn by_form(left: Expression, right: Expression, world: &World, expected: bool) {
    let found = holds_by_form(&Claim { left: left.clone(), right: right.clone(), world: world.clone() });
    assert_eq!(found.is_some(), expected, "{left:?} {right:?}");
    if expected {
        // What holds by form holds at random points.
        assert!(matches!(verdict(left, right, world), Verdict::Holds { .. }));
    }
}

#[test]
fn names_orders_symmetries_and_partial_derivatives() {
    let world =
        cartesian(&[2, 3], vec![exchangeable("S", "..", false), named("u", "."), exchangeable("F", "..", true)]);
    let (s, u, f) = (|slots| field(0, slots), |slot| field(1, slot), |slots| field(2, slots));
    by_form(times([s(".ij"), u(".j")]), times([u(".k"), s(".ki")]), &world, true);
    by_form(times([s(".ij"), f(".ij")]), int(0), &world, true);
    by_form(d(".i", d(".j", u(".k"))), d(".j", d(".i", u(".k"))), &world, true);
    by_form(times([u(".i"), sum([u(".j"), u(".j")])]), times([int(2), u(".j"), u(".i")]), &world, true);
    // The product rule is no form, and a wrong sign is none.
    let rule = sum([times([u(".i"), d(".i", u(".j"))]), times([u(".j"), d(".i", u(".i"))])]);
    by_form(d(".i", times([u(".i"), u(".j")])), rule, &world, false);
    by_form(times([f(".ij"), u(".j")]), times([f(".ji"), u(".j")]), &world, false);
    by_form(times([u(".i"), u(".i")]), times([u(".i"), u(".j")]), &world, false);
}

#[test]
fn covariant_and_raised_derivatives_keep_their_order() {
    let world = space(&[2, 3], vec![named("V", "^"), named("f", "")]);
    let (v, f) = (|| field(0, "^i"), || field(1, ""));
    by_form(nabla("_k", nabla("_l", v())), nabla("_l", nabla("_k", v())), &world, false);
    by_form(d("^i", d("_j", f())), d("_j", d("^i", f())), &world, false);
    by_form(d("_i", d("_j", f())), d("_j", d("_i", f())), &world, true);
    by_form(riemann("_ijkl"), riemann("_klij"), &world, true);
    by_form(riemann("^i_jkl"), times([int(-1), riemann("^i_jlk")]), &world, true);
    by_form(christoffel("^i_jk"), christoffel("^i_kj"), &world, true);
    // Moving indices through a derivative needs the metric, which no form knows.
    by_form(d("_k", times([g("^ij"), field(0, "_j")])), d("_k", v()), &world, false);
}
