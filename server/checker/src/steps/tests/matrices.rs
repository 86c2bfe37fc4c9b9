//! Matrices without indices and terms that are left out: what is a matrix and what is not, what is refused, and that
//! a counterexample can be computed again from what is printed.

#![allow(clippy::unwrap_used)]

use super::{document, findings, message};

const MATRICES: &str = "A B C h are matrices; h is small; check this";

#[track_caller]
fn holds(declared: &str, formula: &str) {
    assert_eq!(findings(&document(declared, formula)), [], "{formula}");
}

#[track_caller]
fn says(declared: &str, formula: &str, expected: &str) {
    let said = message(&document(declared, formula));
    assert!(said.contains(expected), "{formula}: {said}");
}

/// The square matrix of a kernel in a counterexample.
fn matrix(values: &[(String, String)], kernel: &str, size: usize) -> Vec<Vec<i64>> {
    let mut entries = vec![vec![0; size]; size];
    for (name, value) in values {
        let Some(slots) = name.strip_prefix(&format!("{kernel}_{{")) else { continue };
        let places: Vec<usize> = slots.trim_end_matches('}').split(' ').map(|place| place.parse().unwrap()).collect();
        entries[places[0] - 1][places[1] - 1] = value.parse().unwrap();
    }
    entries
}

#[test]
fn only_what_is_declared_is_a_matrix() {
    holds("check this", r"A B = B A");
    holds("A is a matrix; check this", r"A B C = A C B");
    says(MATRICES, r"A B = B A", "this step does not hold: ");
    holds("A is a scalar; B is a scalar; check this", r"\det(A_{ij}) B A = A B \det(A_{ij})");
}

#[test]
fn a_counterexample_can_be_computed_again() {
    let found = findings(&document(MATRICES, r"A B = B A"));
    let counterexample = found[0].verdict.as_ref().and_then(|verdict| verdict.counterexample.clone()).unwrap();
    let size = counterexample.dimension;
    let (a, b) = (matrix(&counterexample.values, "A", size), matrix(&counterexample.values, "B", size));
    let place = |letter: &str| {
        let own = counterexample.component.iter().find(|(name, _)| name == letter);
        own.map(|(_, member)| member.parse::<usize>().unwrap() - 1).unwrap()
    };
    let (row, column) = (place("row"), place("column"));
    let product = |one: &[Vec<i64>], two: &[Vec<i64>]| (0..size).map(|k| one[row][k] * two[k][column]).sum::<i64>();
    let (left, right) = (product(&a, &b).to_string(), product(&b, &a).to_string());
    assert_eq!((&counterexample.left, &counterexample.right), (&left, &right));
    assert_ne!(left, right);
}

#[test]
fn a_function_reaches_as_far_as_the_sides_allow() {
    holds(MATRICES, r"\operatorname{tr} A B = \operatorname{tr}(B A)");
    holds(MATRICES, r"\operatorname{tr} A\, B = B \operatorname{tr} A");
    holds(MATRICES, r"\det A B = \det B \det A");
    holds(MATRICES, r"\det A\, B C = B (\det A) C");
    says(MATRICES, r"\operatorname{tr}(A)^2 = (\operatorname{tr} A)^2", "how far a function or a derivative reaches");
    // Both readings agree.
    holds(MATRICES, r"\det(A)^2 = \det(A^2)");
}

#[test]
fn what_is_not_plain_is_refused() {
    says(MATRICES, r"A + \lambda = \lambda + A", "a matrix stands beside what is none");
    says(MATRICES, r"\frac{1}{A} = A^{-1}", "a matrix stands below a line");
    says(MATRICES, r"\sqrt{A} = A^{1/2}", "a root of a matrix is not evaluated");
    says(MATRICES, r"\exp(A) = A", "a function of a matrix is not evaluated");
    says(MATRICES, r"A^\dagger = A^T", "the adjoint of a matrix is not evaluated");
    says(MATRICES, r"A^0 B = B A^0", "the scripts of A are not understood");
    // What is no matrix may carry them.
    holds(MATRICES, r"\lambda^{1/2} A \lambda^{1/2} = \lambda A");
    holds(MATRICES, r"\partial_k A^{-1}_{ij} = - A^{-1}_{il} (\partial_k A_{lm}) A^{-1}_{mj}");
    holds(MATRICES, r"\lambda^* A B = A \lambda^* B");
    says(MATRICES, r"A_i B = B A_i", "the scripts of A are not understood");
    says(MATRICES, r"1 + ((((A^8)^8)^8)^8)^8 = A", "a power of a matrix is too large");
    let nested = format!("{}B{} = A", "[A, ".repeat(20), "]".repeat(20));
    says(MATRICES, &nested, "a commutator of matrices is too large");
    let ranges = "i j run from 1 to 3; a b run from 1 to 2; A B are matrices; check this";
    says(ranges, r"A B = B A", "which of the declared ranges");
    let levels = "g_{ij} is a metric; A is a matrix; v^i is a vector; check this";
    says(levels, r"A_{ij} v^j = v^j A_{ij}", "other levels than row and column");
    holds(levels, r"A^i{}_j v^j = v^j A^i{}_j");
}

#[test]
fn numbers_and_units_stand_for_the_identity() {
    holds(MATRICES, r"A A^{-1} = 1");
    holds(MATRICES, r"(1 + A)(1 - A) = \mathbb{1} - A^2");
    holds("A I are matrices; check this", r"A I = I A = A");
    // Something else is said of the letter.
    says("A I are matrices; I_{ij} is symmetric; check this", r"A I = A", "this step does not hold: ");
}

#[test]
fn rows_and_columns_run_over_the_declared_range() {
    let three = "i j k run from 1 to 3; A B are matrices; check this";
    holds(three, r"\det(2 A) = 8 \det A");
    says("A B are matrices; check this", r"\det(2 A) = 8 \det A", "this step holds in dimension 3, but not in 2 and 4");
}

#[test]
fn what_a_definition_leaves_out_is_missing_later() {
    let text = |later: &str| {
        format!(
            "% indexwise: A h C are matrices; h is small\n$$ C = A + h + O(h^2) $$\n% indexwise: check this\n$$ {later} $$\n"
        )
    };
    assert_eq!(findings(&text(r"C^2 = A^2 + A h + h A + O(h^2)")), []);
    // To second order nothing is known of it.
    assert_eq!(findings(&text(r"C^2 = A^2 + A h + h A + h^2 + O(h^3)")), []);
    assert!(message(&text(r"C^2 = A^2 + 2 A h + O(h^2)")).starts_with("this step does not hold for terms of order 1"));
}

#[test]
fn letters_that_are_declared_do_not_stand_for_terms_left_out() {
    let declared = "O A B are matrices; h is a scalar; h is small; check this";
    says(declared, r"A B = A B + O(h)", "what a matrix takes in brackets is not understood");
    holds(MATRICES, r"(1 + h)^2 = 1 + 2 h + \mathcal O(\|h\|^2)");
    says(MATRICES, r"1 + A = 1 + O(A^2)", "nothing says that A is small");
}

#[test]
fn a_metric_that_is_defined_has_its_own_inverse() {
    let text = |later: &str| {
        let declared = "g_{ab} is the metric; h_{ab} is symmetric; h_{ab} is small";
        format!(
            "% indexwise: {declared}\n$$ g_{{ab}} := \\eta_{{ab}} + h_{{ab}} $$\n% indexwise: check this\n$$ {later} $$\n"
        )
    };
    assert_eq!(findings(&text(r"g^{ab} = \eta^{ab} - \eta^{ac} \eta^{bd} h_{cd}")), []);
    assert_eq!(findings(&text(r"g^{ac} g_{cb} = \delta^a_b + O(h^5)")), []);
    assert!(message(&text(r"g^{ab} = \eta^{ab} + \eta^{ac} \eta^{bd} h_{cd}")).contains("for terms of order 1"));
}

#[test]
fn indices_are_moved_by_the_metric_that_is_declared() {
    let text = |declared: &str, definition: &str, later: &str| {
        let fields = "h_{ab} is symmetric; h_{ab} is small; \\Omega is a scalar";
        format!("% indexwise: {declared}; {fields}\n$$ {definition} $$\n% indexwise: check this\n$$ {later} $$\n")
    };
    let flat = "g_{ab} is the metric; \\eta_{ab} is the metric, constant";
    let connection = r"\Gamma^c_{ab} = \frac12 \eta^{cd} (\partial_a h_{bd} + \partial_b h_{ad} - \partial_d h_{ab})";
    assert_eq!(findings(&text(flat, r"g_{ab} := \eta_{ab} + h_{ab}", connection)), []);
    let whole = r"\Gamma^c_{ab} = \frac12 g^{cd} (\partial_a g_{bd} + \partial_b g_{ad} - \partial_d g_{ab})";
    assert_eq!(findings(&text("g_{ab} is the metric", r"g_{ab} := \bar g_{ab} + h_{ab}", whole)), []);
    // What is made of the metric does not take its place.
    let scaled = r"\tilde g_{ab} := \Omega^2 g_{ab}";
    assert_eq!(findings(&text("f is a scalar", scaled, r"\tilde g^{ab} = \Omega^{-2} g^{ab}")), []);
    assert_eq!(findings(&text("f is a scalar", scaled, whole)), []);
}
