//! The laws of contractions. The comparison with NumPy stands in `tests/references/contractions.py`.

#![allow(clippy::unwrap_used)]

use std::sync::Arc;

use super::*;
use crate::draws::Draws;
use crate::field::{Complex, FIRST, Residue, SECOND};
use crate::jet::{Jet, Order, Ring};
use crate::number::Exact;
use crate::sample;
use crate::tensor::strides;

/// A factor by its lengths and labels.
type Slots = (&'static [usize], &'static [Label]);

/// Contractions of every kind: matrix products, traces, repeated labels, labels on three factors, outer products,
/// strips of columns of every width, with one row and with several.
const CASES: &[(&[Slots], &[Label])] = &[
    (&[(&[2, 3], &[0, 1]), (&[3, 4], &[1, 2])], &[2, 0]),
    (&[(&[3, 3], &[0, 0])], &[]),
    (&[(&[3, 3], &[0, 0])], &[0]),
    (&[(&[3, 2, 3], &[5, 1, 5])], &[1]),
    (&[(&[2, 3], &[0, 1])], &[1, 0]),
    (&[(&[2], &[0]), (&[3], &[1])], &[1, 0]),
    (&[(&[2, 2], &[0, 1]), (&[2], &[0]), (&[2], &[0]), (&[2, 2], &[0, 1])], &[1]),
    (&[(&[2, 2], &[0, 1]), (&[2, 2], &[0, 2]), (&[2, 2], &[0, 3])], &[0, 3]),
    (&[(&[2, 3], &[0, 1]), (&[2, 3], &[0, 1])], &[]),
    (&[(&[2, 3], &[0, 1]), (&[2, 3], &[0, 1])], &[0, 1]),
    (&[(&[], &[]), (&[2], &[7]), (&[], &[])], &[7]),
    (&[(&[2, 2], &[0, 1]), (&[2, 2], &[1, 2]), (&[2, 2], &[2, 3]), (&[2, 2], &[3, 0])], &[]),
    (&[(&[2, 2, 2], &[0, 1, 2]), (&[2, 2, 2], &[0, 3, 4]), (&[2, 2], &[3, 1]), (&[2, 2], &[4, 5])], &[2, 5]),
    (&[(&[3, 2], &[0, 1]), (&[2, 5], &[1, 2])], &[0, 2]),
    (&[(&[5, 2], &[0, 1]), (&[2, 3], &[1, 2])], &[2, 0]),
    (&[(&[2], &[1]), (&[2, 7], &[1, 2])], &[2]),
    (&[(&[6, 2], &[0, 1]), (&[2, 4], &[1, 2])], &[0, 2]),
    (&[(&[2, 2, 3], &[3, 0, 1]), (&[3, 9, 2], &[1, 2, 3])], &[3, 0, 2]),
    (&[(&[2, 70], &[0, 1]), (&[70, 3], &[1, 2])], &[0, 2]),
    (&[(&[2, 3, 2, 2, 3], &[0, 1, 0, 2, 1])], &[2]),
];

fn draw<N: Number>(ring: &Arc<Ring>, slots: &[Slots], draws: &mut Draws) -> Vec<Tensor<N>> {
    slots.iter().map(|(lengths, _)| sample::tensor(ring, ring.top(), lengths, &[], draws).unwrap()).collect()
}

fn with_labels<'a, N>(tensors: &'a [Tensor<N>], slots: &'a [Slots]) -> Vec<Factor<'a, N>> {
    tensors.iter().zip(slots).map(|(tensor, (_, labels))| (tensor, *labels)).collect()
}

/// The definition: one term for each value of each label.
fn term_by_term<N: Number>(factors: &[Factor<N>], free: &[Label]) -> Tensor<N> {
    let mut ranges = std::collections::BTreeMap::new();
    for (tensor, labels) in factors {
        ranges.extend(labels.iter().copied().zip(tensor.lengths().iter().copied()));
    }
    let (labels, lengths): (Vec<Label>, Vec<usize>) = ranges.into_iter().unzip();
    let of = |wanted: &[Label], values: &[usize]| -> Vec<usize> {
        wanted.iter().map(|label| values[labels.binary_search(label).unwrap()]).collect()
    };
    let result_lengths = of(free, &lengths);
    let mut sums = std::collections::BTreeMap::<Vec<usize>, Jet<N>>::new();
    let steps = strides(&lengths);
    for place in 0..lengths.iter().product() {
        let values: Vec<usize> = lengths.iter().zip(&steps).map(|(length, step)| place / step % length).collect();
        let jets = factors.iter().map(|(tensor, labels)| tensor.get(&of(labels, &values)).unwrap());
        let term = jets.reduce(|product, jet| product.times(&jet).unwrap()).unwrap();
        let entry = sums.entry(of(free, &values));
        entry.and_modify(|sum| *sum = sum.plus(&term).unwrap()).or_insert(term);
    }
    Tensor::from_jets(&result_lengths, &sums.into_values().collect::<Vec<_>>()).unwrap()
}

fn agrees_with_the_definition<N: Number>(ring: &Arc<Ring>) {
    let mut draws = Draws::from_seed(1);
    for (slots, free) in CASES {
        let tensors = draw::<N>(ring, slots, &mut draws);
        let factors = with_labels(&tensors, slots);
        let result = contract(&factors, free).unwrap();
        let expected = term_by_term(&factors, free);
        assert!(result.agrees(&expected).unwrap(), "{slots:?} {free:?}");
        assert_eq!(result.order(), ring.top());
    }
}

#[test]
fn contractions_agree_with_the_sum_of_all_terms() {
    for ring in [Ring::new(1, 0), Ring::new(2, 2), Ring::with_small(1, 1, Order { base: 1, small: 1 })] {
        let ring = ring.unwrap();
        agrees_with_the_definition::<Residue<FIRST>>(&ring);
        agrees_with_the_definition::<Residue<SECOND>>(&ring);
        agrees_with_the_definition::<Complex<FIRST>>(&ring);
        agrees_with_the_definition::<Exact>(&ring);
    }
}

/// A chain of matrices as labels: `M_{01} M_{12} ..`.
fn chain(count: Label) -> Vec<[Label; 2]> {
    (0..count).map(|place| [place, place + 1]).collect()
}

#[test]
fn long_chains_are_planned_greedily_and_agree_with_repeated_products() {
    let ring = Ring::new(1, 0).unwrap();
    let count = FACTORS_BUDGET;
    let mut draws = Draws::from_seed(2);
    let matrix = |_| sample::tensor::<Residue<FIRST>>(&ring, ring.top(), &[3, 3], &[], &mut draws).unwrap();
    let matrices: Vec<_> = (0..count).map(matrix).collect();
    let labels = chain(count as Label);
    let factors: Vec<Factor<_>> = matrices.iter().zip(&labels).map(|(matrix, labels)| (matrix, &labels[..])).collect();
    let free = [0, count as Label];
    let plan = planned(&factors, &free).unwrap();
    let expected = matrices.iter().skip(1).fold(matrices[0].clone(), |product, matrix| {
        contract(&[(&product, &[0, 1]), (matrix, &[1, 2])], &[0, 2]).unwrap()
    });
    assert!(evaluated(&factors, &plan, MULTIPLICATIONS_BUDGET).unwrap().agrees(&expected).unwrap());
    // One product of matrices for each factor after the first, and nothing like 3^65.
    assert_eq!(plan.cost().multiplications, 27 * (count as u64 - 1));
}

#[test]
fn a_chain_of_unequal_matrices_costs_what_the_textbook_says() {
    // Cormen, Leiserson, Rivest and Stein, "Introduction to Algorithms", section on matrix-chain multiplication:
    // ranges 30, 35, 15, 5, 10, 20, 25 need 15 125 multiplications (from memory).
    let ranges = [30, 35, 15, 5, 10, 20, 25];
    let ring = Ring::new(1, 0).unwrap();
    let zero = |pair: &[usize]| Tensor::<Exact>::zero(&ring, ring.top(), pair).unwrap();
    let matrices: Vec<_> = ranges.windows(2).map(zero).collect();
    let labels = chain(6);
    let factors: Vec<Factor<_>> = matrices.iter().zip(&labels).map(|(matrix, labels)| (matrix, &labels[..])).collect();
    assert_eq!(planned(&factors, &[0, 6]).unwrap().cost().multiplications, 15_125);
}

#[test]
fn the_cost_of_jets_counts_pairs_of_coefficients() {
    let ring = Ring::new(4, 2).unwrap();
    let zero = Tensor::<Exact>::zero(&ring, ring.top(), &[4, 4]).unwrap();
    let plan = planned(&[(&zero, &[0, 1]), (&zero, &[1, 2])], &[0, 2]).unwrap();
    // Two monomials of total degree at most 2 in 4 + 4 variables: 10! / 8! 2!.
    assert_eq!(plan.cost(), Cost { multiplications: 64 * 45, numbers: 16 * 15 });
    assert_eq!(plan.order(), ring.top());
}

#[test]
fn what_would_cost_too_much_is_not_begun() {
    let ring = Ring::new(1, 0).unwrap();
    let zero = Tensor::<Exact>::zero(&ring, ring.top(), &[8, 8]).unwrap();
    let factors: [Factor<_>; 2] = [(&zero, &[0, 1]), (&zero, &[1, 2])];
    let plan = planned(&factors, &[0, 2]).unwrap();
    assert!(evaluated(&factors, &plan, 512).is_ok());
    assert_eq!(evaluated(&factors, &plan, 511).unwrap_err(), Trouble::Budget(Budget::Multiplications));
    // Seven arrays of 64 without a common label: 2^42 numbers.
    let labels: Vec<[Label; 2]> = (0..7).map(|place| [2 * place, 2 * place + 1]).collect();
    let many: Vec<Factor<_>> = labels.iter().map(|labels| (&zero, &labels[..])).collect();
    let free: Vec<Label> = (0..14).collect();
    assert_eq!(planned(&many, &free).unwrap_err(), Trouble::Budget(Budget::Numbers));
    // Four of 2^20 numbers each: no plan has a cost below 2^64, and still one is made and refused.
    let large = Tensor::<Residue<FIRST>>::zero(&ring, ring.top(), &[1 << 10, 1 << 10]).unwrap();
    let many: Vec<Factor<_>> = labels.iter().take(4).map(|labels| (&large, &labels[..])).collect();
    assert_eq!(planned(&many, &[0, 1, 2, 3, 4, 5, 6, 7]).unwrap_err(), Trouble::Budget(Budget::Numbers));
    let unit = Tensor::<Exact>::zero(&ring, ring.top(), &[1, 1]).unwrap();
    let labels: Vec<[Label; 2]> = (0..65).map(|place| [2 * place, 2 * place + 1]).collect();
    let many: Vec<Factor<_>> = labels.iter().map(|labels| (&unit, &labels[..])).collect();
    assert_eq!(planned(&many, &[]).unwrap_err(), Trouble::Budget(Budget::Factors));
    let wide = Tensor::<Exact>::zero(&ring, ring.top(), &[1; 32]).unwrap();
    let labels: Vec<Label> = (0..160).collect();
    let many: Vec<Factor<_>> = labels.chunks(32).map(|labels| (&wide, labels)).collect();
    assert_eq!(planned(&many, &[]).unwrap_err(), Trouble::Budget(Budget::Labels));
    assert!(planned(&many[..4], &[]).is_ok());
}

#[test]
fn arguments_that_do_not_fit_are_refused() {
    let ring = Ring::new(1, 0).unwrap();
    let zero = |lengths: &[usize]| Tensor::<Exact>::zero(&ring, ring.top(), lengths).unwrap();
    let (square, oblong) = (zero(&[2, 2]), zero(&[2, 3]));
    let refused: &[(&[Factor<Exact>], &[Label])] = &[
        (&[], &[]),
        (&[(&square, &[0])], &[]),
        (&[(&oblong, &[0, 0])], &[]),
        (&[(&square, &[0, 1]), (&oblong, &[0, 1])], &[]),
        (&[(&square, &[0, 1])], &[2]),
        (&[(&square, &[0, 1])], &[0, 0]),
    ];
    for (factors, free) in refused {
        assert_eq!(contract(factors, free).unwrap_err(), Trouble::Shape);
    }
    let other = Ring::new(2, 0).unwrap();
    let foreign = Tensor::<Exact>::zero(&other, other.top(), &[2]).unwrap();
    assert_eq!(contract(&[(&square, &[0, 1]), (&foreign, &[0])], &[]).unwrap_err(), Trouble::Shape);
}

#[test]
fn a_number_that_does_not_fit_is_told() {
    let ring = Ring::new(1, 0).unwrap();
    let large = Tensor::from_numbers(&ring, &[2], |_| Exact::from_integer(i64::MAX)).unwrap();
    let factors: [Factor<_>; 3] = [(&large, &[0]), (&large, &[0]), (&large, &[0])];
    assert_eq!(contract(&factors, &[]).unwrap_err(), Trouble::Overflow);
    assert!(contract(&factors[..1], &[]).is_ok());
}
