//! Claims that hold by what is given, and those that do not follow from it.

use super::build::*;
use crate::expression::{Expression, Given, World};
use crate::verdict::{Reason, Unshown, Verdict};

fn given(label: &str, left: Expression, right: Option<Expression>) -> Given {
    Given { label: label.to_owned(), left, right }
}

/// Holds with the givens, and not without.
#[track_caller]
fn follows(left: Expression, right: Expression, world: &World) {
    let without = World { givens: Vec::new(), ..world.clone() };
    let verdict = verdict(left.clone(), right.clone(), &without);
    assert!(matches!(verdict, Verdict::Fails(_) | Verdict::Differs { .. }), "{verdict:?}");
    holds(left, right, world);
}

#[test]
fn a_vanishing_trace() {
    let mut world = space(&[2, 3], vec![exchangeable("h", "__", false)]);
    world.givens = vec![given("trace", field(0, "^i_i"), None)];
    follows(times([g("^ij"), nabla("_k", field(0, "_ij"))]), Expression::zero(), &world);
    // The same said of the field.
    world.givens.clear();
    world.fields[0].traceless = true;
    holds(times([g("^ij"), nabla("_k", field(0, "_ij"))]), Expression::zero(), &world);
}

#[test]
fn orthogonal_vectors_and_units() {
    let mut world = space(&[2, 3, 4], vec![named("u", "^"), named("A", "_")]);
    world.metrics[0].minus = 1;
    world.givens = vec![
        given("unit", times([field(0, "_i"), field(0, "^i")]), Some(int(-1))),
        given("orthogonal", times([field(0, "^i"), field(1, "_i")]), None),
    ];
    follows(times([field(0, "_i"), nabla("_j", field(0, "^i"))]), Expression::zero(), &world);
    let moved = times([int(-1), field(1, "_i"), nabla("_j", field(0, "^i"))]);
    follows(times([field(0, "^i"), nabla("_j", field(1, "_i"))]), moved, &world);
    let projector = |slots: &str, a: &str, b: &str| sum([delta(slots), times([field(0, a), field(0, b)])]);
    let twice = times([projector("^i_j", "^i", "_j"), projector("^j_k", "^j", "_k")]);
    follows(twice, projector("^i_k", "^i", "_k"), &world);
}

#[test]
fn a_transverse_traceless_wave() {
    let mut world = cartesian(&[3], vec![exchangeable("h", "..", false)]);
    world.givens = vec![given("transverse", d(".i", field(0, ".ij")), None), given("traceless", field(0, ".ii"), None)];
    let double = d(".i", d(".j", sum([field(0, ".ij"), times([delta(".ij"), field(0, ".kk")])])));
    follows(double, Expression::zero(), &world);
}

#[test]
fn a_source_is_conserved_by_its_field_equation() {
    let mut world = space(&[2, 3], vec![exchangeable("F", "^^", true), named("J", "^")]);
    world.givens = vec![given("maxwell", nabla("_i", field(0, "^ij")), Some(field(1, "^j")))];
    follows(nabla("_j", field(1, "^j")), Expression::zero(), &world);
}

#[test]
fn killing_s_second_derivative() {
    // Wald, "General Relativity" (1984), equation C.3.6, for these signs (from memory).
    let mut world = space(&[2, 3], vec![named("xi", "_")]);
    world.givens = vec![given("killing", sum([nabla("_i", field(0, "_j")), nabla("_j", field(0, "_i"))]), None)];
    let left = nabla("_i", nabla("_j", field(0, "_k")));
    follows(left, times([riemann("_lijk"), field(0, "^l")]), &world);
}

#[test]
fn what_is_made_of_the_metric_does_not_change_along_a_killing_field() {
    for level in ["_", "^"] {
        let mut world = space(&[2, 3], vec![named("xi", level)]);
        let half = || ratio(1, 2);
        let term = |a, b| times([half(), nabla(a, field(0, b))]);
        world.givens = vec![given("killing", term("_i", "_j"), Some(term("_j", "_i").negated()))];
        let scalar = || curvature(crate::expression::Curvature::Scalar, "");
        follows(times([field(0, "^i"), nabla("_i", scalar())]), Expression::zero(), &world);
        // Not so across the field, and not in these coordinates alone.
        let mut other = world.clone();
        other.fields.push(named("v", "^"));
        let across = verdict(times([field(1, "^i"), nabla("_i", scalar())]), Expression::zero(), &other);
        assert!(matches!(across, Verdict::Differs { .. }), "{across:?}");
        let still = verdict(d("_i", field(0, "^j")), times([int(0), delta("_i^j")]), &world);
        assert!(matches!(still, Verdict::Differs { .. }), "{still:?}");
    }
}

#[test]
fn empty_space() {
    // In three dimensions without Ricci's tensor nothing is curved; in four the divergence of the curvature vanishes.
    let mut world = space(&[3], Vec::new());
    world.givens = vec![given("vacuum", ricci("_ij"), None)];
    follows(riemann("^i_jkl"), Expression::zero(), &world);
    follows(nabla("_i", riemann("^i_jkl")), Expression::zero(), &world);
}

#[test]
fn what_does_not_follow_is_not_said_to_fail() {
    let mut world = cartesian(&[2, 3], vec![named("A", "."), named("B", ".")]);
    world.givens = vec![given("orthogonal", times([field(0, ".i"), field(1, ".i")]), None)];
    let verdict = verdict(field(0, ".i"), field(1, ".i"), &world);
    let reason = Unshown::Givens(vec!["orthogonal".to_owned()]);
    assert_eq!(verdict, Verdict::Differs { dimensions: vec![2, 3], reason });
}

#[test]
fn a_given_that_cannot_be_met_is_named() {
    let mut world = cartesian(&[2], vec![named("A", "."), named("f", "")]);
    let unmet = |label: &str| Verdict::Undecided(Reason::GivenUnmet(label.to_owned()));
    world.givens = vec![given("absurd", int(1), Some(int(0)))];
    assert_eq!(verdict(field(0, ".i"), int(0), &world), unmet("absurd"));
    // Nothing but 0 is left, of which everything is true.
    let f = || field(1, "");
    world.givens = vec![given("still", d(".i", f()), None), given("scaled", d(".i", times([x(".i"), f()])), None)];
    assert_eq!(verdict(f(), times([int(2), f()]), &world), unmet("scaled"));
}

#[test]
fn a_source_that_is_left_out() {
    let mut world = cartesian(&[2, 3], vec![named("A", "."), named("J", ".")]);
    world.givens = vec![given("empty", field(1, ".i"), None)];
    follows(d(".j", sum([field(0, ".i"), field(1, ".i")])), d(".j", field(0, ".i")), &world);
}
