//! Prints random contractions of arrays of integers with our results, and the symbols that index notation is built
//! on, as JSON for `tests/references/contractions.py`, which computes the same with NumPy.
//!
//! Subscripts are those of `einsum`. All results are texts: fractions, or residues beside their modulus.

#![allow(clippy::unwrap_used)]

use std::sync::Arc;

use indexwise_algebra::contraction::{Factor, Label, contract};
use indexwise_algebra::draws::Draws;
use indexwise_algebra::field::{FIRST, Residue, SECOND};
use indexwise_algebra::jet::Ring;
use indexwise_algebra::number::{Exact, Number};
use indexwise_algebra::symbols::{delta, epsilon, generalised_delta};
use indexwise_algebra::tensor::Tensor;
use serde_json::{Value, json};

/// How many contractions.
const CASES: usize = 60;

/// Factors of a contraction, at most; beyond `contraction::EXACT_FACTORS`, so that both planners are tried.
const FACTORS: u64 = 10;

/// Slots of a factor, at most.
const SLOTS: u64 = 3;

/// Distinct labels of a contraction.
const LABELS: u64 = 7;

/// Factors and what is asked for.
struct Case {
    /// The range of each label.
    ranges: Vec<usize>,
    /// The labels and entries of each factor.
    factors: Vec<(Vec<Label>, Vec<i64>)>,
    free: Vec<Label>,
}

/// Labels may stand any number of times; about a third of those that occur are free, in random order. The more
/// factors, the smaller their entries, so that NumPy's 64 bits hold every sum.
fn draw(draws: &mut Draws) -> Case {
    let ranges: Vec<usize> = (0..LABELS).map(|_| 1 + draws.below(3) as usize).collect();
    let count = 1 + draws.below(FACTORS);
    let largest = if count > 5 { 2 } else { 9 };
    let mut factors = Vec::new();
    for _ in 0..count {
        let labels: Vec<Label> = (0..draws.below(SLOTS + 1)).map(|_| draws.below(LABELS) as Label).collect();
        let size: usize = labels.iter().map(|label| ranges[usize::from(*label)]).product();
        let entries = (0..size).map(|_| draws.below(2 * largest + 1).cast_signed() - largest.cast_signed()).collect();
        factors.push((labels, entries));
    }
    let mut free = Vec::new();
    for label in (0..LABELS as Label).filter(|label| factors.iter().any(|(labels, _)| labels.contains(label))) {
        if draws.below(3) == 0 {
            free.insert(draws.below(free.len() as u64 + 1) as usize, label);
        }
    }
    Case { ranges, factors, free }
}

fn computed<N: Number>(case: &Case, print: fn(N) -> String) -> Vec<String> {
    let ring = Ring::new(0, 0).unwrap();
    let tensors: Vec<Tensor<N>> =
        case.factors.iter().map(|(labels, entries)| array(&ring, case, labels, entries)).collect();
    let factors: Vec<Factor<N>> =
        tensors.iter().zip(&case.factors).map(|(tensor, (labels, _))| (tensor, &labels[..])).collect();
    contract(&factors, &case.free).unwrap().values().iter().map(|number| print(*number)).collect()
}

fn array<N: Number>(ring: &Arc<Ring>, case: &Case, labels: &[Label], entries: &[i64]) -> Tensor<N> {
    let lengths = lengths(case, labels);
    let place =
        |component: &[usize]| component.iter().zip(&lengths).fold(0, |place, (index, length)| place * length + index);
    Tensor::from_numbers(ring, &lengths, |component| N::from_integer(entries[place(component)])).unwrap()
}

fn lengths(case: &Case, labels: &[Label]) -> Vec<usize> {
    labels.iter().map(|label| case.ranges[usize::from(*label)]).collect()
}

fn letters(labels: &[Label]) -> String {
    labels.iter().map(|label| char::from(b'a' + *label as u8)).collect()
}

fn printed(case: &Case) -> Value {
    let subscripts: Vec<String> = case.factors.iter().map(|(labels, _)| letters(labels)).collect();
    let operands =
        case.factors.iter().map(|(labels, entries)| json!({ "shape": lengths(case, labels), "entries": entries }));
    json!({
        "subscripts": format!("{}->{}", subscripts.join(","), letters(&case.free)),
        "operands": operands.collect::<Vec<_>>(),
        "results": [
            { "modulus": null, "values": computed::<Exact>(case, |number| number.to_string()) },
            { "modulus": FIRST.to_string(), "values": computed::<Residue<FIRST>>(case, |x| x.value().to_string()) },
            { "modulus": SECOND.to_string(), "values": computed::<Residue<SECOND>>(case, |x| x.value().to_string()) },
        ],
    })
}

/// Delta, epsilon and generalised deltas in low dimensions.
fn symbols() -> Vec<Value> {
    let ring = Ring::new(0, 0).unwrap();
    let values = |tensor: Tensor<Exact>| tensor.values().iter().map(Exact::to_string).collect::<Vec<_>>();
    let mut symbols = Vec::new();
    for dimension in 1..=4 {
        let mut push = |kind: &str, count: usize, tensor| {
            symbols.push(json!({ "kind": kind, "dimension": dimension, "count": count, "values": values(tensor) }));
        };
        push("delta", 1, delta(&ring, dimension).unwrap());
        push("epsilon", dimension, epsilon(&ring, dimension).unwrap());
        for count in 1..=3 {
            push("generalised delta", count, generalised_delta(&ring, dimension, count).unwrap());
        }
    }
    symbols
}

fn main() {
    let mut draws = Draws::from_seed(1);
    let contractions: Vec<Value> = (0..CASES).map(|_| printed(&draw(&mut draws))).collect();
    println!("{:#}", json!({ "contractions": contractions, "symbols": symbols() }));
}
