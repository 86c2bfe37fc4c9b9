//! Tests of the symbol table: first what must not stand in it, then what must.

#![allow(clippy::unwrap_used, clippy::panic, clippy::indexing_slicing)]

use indexwise_grammar::hosts::Host;

use super::SymbolTable;
use crate::paper::{Cancel, Paper, Settings, Source, check};

/// Formulas that settle `i j k` as indices.
const SETTLED: &str =
    "$\\sigma_{ij} = C_{ijkl} \\epsilon_{kl}$ and $t_i = \\sigma_{ij} n_j$ and $q_i = \\kappa_{ij} n_j$.\n";

fn table(text: &str) -> SymbolTable {
    let source = Source { path: "shell".to_owned(), text: text.into(), host: Host::Latex };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let settings = Settings { symbols: true, ..Settings::default() };
    let documents = check(&paper, &settings, &Cancel::default()).documents;
    documents.into_iter().next().unwrap().symbols.unwrap()
}

/// Kernels with slots and uses, in order.
fn kernels(text: &str) -> Vec<String> {
    let kernel = |symbol: &super::Symbol| format!("{}/{} x{}", symbol.kernel, symbol.slots, symbol.uses);
    table(text).kernels.iter().map(kernel).collect()
}

/// Letters with their parts, in order.
fn letters(text: &str) -> Vec<String> {
    let parts = |one: &super::DoubleUse| {
        let parts: Vec<String> = one.parts.iter().map(|part| part.role.words()).collect();
        format!("{}: {}", one.letter, parts.join(", "))
    };
    table(text).letters.iter().map(parts).collect()
}

#[test]
fn derivatives_and_differentials_are_no_kernels() {
    let text = "$\\partial_i u_i + \\nabla_j v_j + D_i w_i = 0$ and $\\int d^3x \\, f\\, dx = 0$ and $\\frac{d}{dt} \\delta h = 0$";
    assert_eq!(kernels(text), ["u/1 x1", "v/1 x1", "w/1 x1", "x/0 x2", "f/0 x1", "t/0 x1", "h/0 x1"]);
}

#[test]
fn a_thickness_is_a_kernel_and_so_are_symbols_with_slots() {
    assert_eq!(kernels("$N_{ij} = d E_{ij}$"), ["N/2 x1", "d/0 x1", "E/2 x1"]);
    assert_eq!(kernels("$P_{ij} = \\delta_{ij} - n_i n_j$"), ["P/2 x1", "\\delta/2 x1", "n/1 x2"]);
}

#[test]
fn words_and_exponents_are_no_kernels() {
    let text = "$u_i = A_i e^{i\\omega t} + \\mathrm{const} \\, n_i r^p$";
    assert_eq!(kernels(text), ["u/1 x1", "A/1 x1", "n/1 x1", "r/0 x1"]);
    assert_eq!(kernels("$\\forall x : f(x) < \\infty$"), ["x/0 x2", "f/0 x1"]);
}

#[test]
fn what_is_skipped_or_only_said_is_left_out() {
    let text = format!("{SETTLED}\n% indexwise: skip this\n$Z_{{ij}} = 0$\n");
    assert!(!kernels(&text).iter().any(|kernel| kernel.starts_with('Z')));
    // To say which letters are indices makes no quantities of them.
    let text = format!("{SETTLED} Here $i$, $j$ and $k = 1, 2, 3$ and $p$ is the pressure.");
    let found = kernels(&text);
    assert!(found.contains(&"p/0 x1".to_owned()), "{found:?}");
    assert!(!found.iter().any(|kernel| kernel.starts_with(['i', 'j', 'k'])), "{found:?}");
    assert_eq!(letters(&text), [""; 0]);
}

#[test]
fn one_thing_in_several_forms_is_told_of_once() {
    // A label that is a quantity, a vector and its length, a metric and its determinant, curvature.
    for text in [
        "$p_r = f(r)$",
        "$u = \\sqrt{u_i u_i}$",
        "$\\Gamma^i{}_{ik} = \\frac{1}{2 g} \\partial_k g$ and $u_i = g_{ij} u^j$",
        "$R_{ij} = R^k{}_{ikj}$ and $R = g^{ij} R_{ij}$ and $\\Gamma^i{}_{jk} = 0$",
        "% indexwise: h_{ij} is symmetric; h is constant\n$P_{ij} = h h_{ij}$",
    ] {
        assert_eq!(letters(text), [""; 0], "{text}");
    }
}

#[test]
fn letters_that_mean_several_things_are_told() {
    let told = |text: &str| letters(&format!("{SETTLED}{text}"));
    assert_eq!(told("$f = 2 k x$"), ["k: index, quantity"]);
    assert_eq!(told("$E_{ij} = E n_i n_j$"), ["E: 2 slots, quantity"]);
    assert_eq!(told("$t_i = h_{ij} h_j$"), ["h: 2 slots, 1 slot"]);
    assert_eq!(told("$t_i = k_{ij} n_j$"), ["k: index, 2 slots"]);
    // Another accent is another symbol.
    assert_eq!(told("$f = 2 \\hat k \\, \\bar E$ and $E_{ij} = 0$"), [""; 0]);
}

#[test]
fn symmetries_are_told_by_declaration_and_by_custom() {
    let text = "% indexwise: S_{ijk} is symmetric in i j; F_{ij} is antisymmetric\n\
                $S_{ijk} = \\epsilon_{ijl} F_{lk}$ and $R_{ijkl} = 0$ and $T_{ij} = g_{ij}$";
    let found: Vec<_> = table(text)
        .kernels
        .into_iter()
        .map(|symbol| (symbol.kernel.to_string(), symbol.declared, symbol.symmetries.join("; ")))
        .collect();
    let riemann = "antisymmetric in slots 1 2; antisymmetric in slots 3 4; symmetric in the pairs of slots 1 2 and 3 4";
    let want = [
        ("S", true, "symmetric in slots 1 2"),
        ("\\epsilon", false, "antisymmetric in slots 1 2 3"),
        ("F", true, "antisymmetric in slots 1 2"),
        ("R", false, riemann),
        ("T", false, ""),
        ("g", false, "symmetric in slots 1 2"),
    ];
    let want = want.map(|(kernel, declared, words)| (kernel.to_owned(), declared, words.to_owned()));
    assert_eq!(found, want);
}

#[test]
fn the_first_use_is_the_first_in_the_text() {
    // The first statement has no letter in a script and is read after the others.
    let text = "$p = p_0$ and $\\sigma_{ij} n_j = - p n_i$";
    let table = table(text);
    let pressure = table.kernels.iter().find(|symbol| symbol.kernel == "p" && symbol.slots == 0).unwrap();
    assert_eq!((pressure.first.start as usize, pressure.uses), (1, 2));
    assert!(table.kernels.is_sorted_by_key(|symbol| symbol.first));
}
