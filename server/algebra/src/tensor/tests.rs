//! The laws of arrays with slots, over both primes and over fractions.

#![allow(clippy::unwrap_used)]

use super::*;
use crate::draws::Draws;
use crate::laws::law;
use crate::number::Exact;
use crate::sample;

law!(permutations_move_components_and_compose, permutations);
law!(outer_products_multiply_components, outer_products);
law!(traces_sum_the_diagonal, traces);
law!(means_over_permutations_are_projections, projections);
law!(means_agree_with_sums_over_all_permutations, means);
law!(gradients_collect_derivatives, gradients);
law!(a_fixed_slot_leaves_the_components_of_that_value, fixed_slots);
law!(differences_are_found_where_they_are, differences);

fn ring() -> Arc<Ring> {
    Ring::with_small(2, 1, Order { base: 2, small: 1 }).unwrap()
}

fn draw<N: Number>(lengths: &[usize], seed: u64) -> Tensor<N> {
    let ring = ring();
    sample::tensor(&ring, ring.top(), lengths, &[], &mut Draws::from_seed(seed)).unwrap()
}

/// All components.
fn components(lengths: &[usize]) -> Vec<Vec<usize>> {
    let size = lengths.iter().product();
    (0..size).map(|place| strides::component(lengths, place)).collect()
}

#[track_caller]
fn same<N: Number>(a: &Tensor<N>, b: &Tensor<N>) {
    assert!(a.agrees(b).unwrap());
}

#[track_caller]
fn same_jet<N: Number>(a: &Jet<N>, b: &Jet<N>) {
    assert!(a.agrees(b).unwrap(), "{a:?}\n{b:?}");
}

fn permutations<N: Number>() {
    let tensor = draw::<N>(&[2, 3, 4], 1);
    let turned = tensor.permuted(&[2, 0, 1]).unwrap();
    assert_eq!(turned.lengths(), [4, 2, 3]);
    for component in components(&[2, 3, 4]) {
        let [a, b, c] = component[..] else { unreachable!() };
        same_jet(&turned.get(&[c, a, b]).unwrap(), &tensor.get(&component).unwrap());
        assert_eq!(turned.value(&[c, a, b]), Some(tensor.get(&component).unwrap().value()));
    }
    same(&turned.permuted(&[1, 2, 0]).unwrap(), &tensor);
    same(&tensor.swapped(0, 2).unwrap().swapped(0, 2).unwrap(), &tensor);
    assert_eq!(tensor.permuted(&[0, 1, 1]).unwrap_err(), Trouble::Shape);
    assert_eq!(tensor.permuted(&[0, 1]).unwrap_err(), Trouble::Shape);
    assert_eq!(tensor.swapped(0, 3).unwrap_err(), Trouble::Shape);
}

fn outer_products<N: Number>() {
    let (left, right) = (draw::<N>(&[2, 3], 2), draw::<N>(&[4], 3));
    let product = left.outer(&right).unwrap();
    assert_eq!(product.lengths(), [2, 3, 4]);
    for component in components(&[2, 3, 4]) {
        let (a, b) = (left.get(&component[..2]).unwrap(), right.get(&component[2..]).unwrap());
        same_jet(&product.get(&component).unwrap(), &a.times(&b).unwrap());
    }
    let jet = right.get(&[1]).unwrap();
    same_jet(&left.times(&jet).unwrap().get(&[1, 2]).unwrap(), &left.get(&[1, 2]).unwrap().times(&jet).unwrap());
    same(&left.scaled(N::from_integer(2)), &left.plus(&left).unwrap());
}

fn traces<N: Number>() {
    let tensor = draw::<N>(&[3, 2, 3], 4);
    let trace = tensor.trace(2, 0).unwrap();
    assert_eq!(trace.lengths(), [2]);
    for kept in 0..2 {
        let terms = (0..3).map(|index| tensor.get(&[index, kept, index]).unwrap());
        let sum = terms.reduce(|sum, term| sum.plus(&term).unwrap()).unwrap();
        same_jet(&trace.get(&[kept]).unwrap(), &sum);
    }
    for (a, b) in [(0, 1), (1, 1), (0, 3)] {
        assert_eq!(tensor.trace(a, b).unwrap_err(), Trouble::Shape);
    }
    assert!(draw::<N>(&[3, 3], 5).trace(0, 1).unwrap().to_jet().is_ok());
    assert_eq!(tensor.to_jet().unwrap_err(), Trouble::Shape);
}

fn projections<N: Number>() {
    let tensor = draw::<N>(&[3, 3, 2, 3], 6);
    let slots = [3, 0, 1];
    let (even, odd) = (tensor.symmetrised(&slots).unwrap(), tensor.antisymmetrised(&slots).unwrap());
    same(&even.symmetrised(&slots).unwrap(), &even);
    same(&odd.antisymmetrised(&slots).unwrap(), &odd);
    assert!(even.antisymmetrised(&slots[1..]).unwrap().vanishes().unwrap());
    assert!(odd.symmetrised(&slots[..2]).unwrap().vanishes().unwrap());
    assert!(!odd.vanishes().unwrap() && !even.vanishes().unwrap());
    for (a, b) in [(0, 1), (0, 3), (1, 3)] {
        same(&even.swapped(a, b).unwrap(), &even);
        same(&odd.swapped(a, b).unwrap(), &odd.scaled(-N::ONE));
    }
    // Two slots: the two parts make up the whole.
    let parts = tensor.symmetrised(&[0, 1]).unwrap().plus(&tensor.antisymmetrised(&[0, 1]).unwrap()).unwrap();
    same(&parts, &tensor);
    assert_eq!(tensor.symmetrised(&[0, 0]).unwrap_err(), Trouble::Shape);
    assert_eq!(tensor.symmetrised(&[0, 2]).unwrap_err(), Trouble::Shape);
    // More slots than dimensions.
    assert!(draw::<N>(&[2, 2, 2], 7).antisymmetrised(&[0, 1, 2]).unwrap().vanishes().unwrap());
}

fn means<N: Number>() {
    let tensor = draw::<N>(&[3, 3, 3], 8);
    let permuted = |order: &[usize]| tensor.permuted(order).unwrap();
    let even = [[0, 1, 2], [1, 2, 0], [2, 0, 1]].map(|order| permuted(&order));
    let odd = [[1, 0, 2], [0, 2, 1], [2, 1, 0]].map(|order| permuted(&order));
    let sum = |parts: &[Tensor<N>]| parts.iter().skip(1).fold(parts[0].clone(), |sum, part| sum.plus(part).unwrap());
    let six = N::from_integer(6);
    same(&tensor.symmetrised(&[0, 1, 2]).unwrap().scaled(six), &sum(&even).plus(&sum(&odd)).unwrap());
    same(&tensor.antisymmetrised(&[0, 1, 2]).unwrap().scaled(six), &sum(&even).minus(&sum(&odd)).unwrap());
}

fn gradients<N: Number>() {
    let tensor = draw::<N>(&[2, 3], 9);
    let gradient = tensor.gradient().unwrap();
    assert_eq!(gradient.lengths(), [2, 3, 2]);
    assert_eq!(gradient.order(), Order { base: 1, small: 1 });
    for component in components(&[2, 3]) {
        for number in 0..2 {
            let expected = tensor.get(&component).unwrap().derivative(Variable::Base(number)).unwrap();
            same_jet(&gradient.get(&[&component[..], &[number]].concat()).unwrap(), &expected);
            let along = tensor.derivative(Variable::Base(number)).unwrap();
            same_jet(&along.get(&component).unwrap(), &expected);
        }
    }
    let variation = tensor.derivative(Variable::Small(0)).unwrap();
    assert_eq!(variation.order(), Order { base: 2, small: 0 });
    assert_eq!(gradient.gradient().unwrap().gradient().unwrap_err(), Trouble::Order);
}

fn fixed_slots<N: Number>() {
    let tensor = draw::<N>(&[2, 3, 4], 10);
    let part = tensor.fixed(1, 2).unwrap();
    assert_eq!(part.lengths(), [2, 4]);
    same_jet(&part.get(&[1, 3]).unwrap(), &tensor.get(&[1, 2, 3]).unwrap());
    assert!(tensor.fixed(1, 3).is_none() && tensor.fixed(3, 0).is_none());
}

fn differences<N: Number>() {
    let tensor = draw::<N>(&[2, 3], 11);
    let other = Tensor::from_numbers(&ring(), &[2, 3], |component| N::from_integer((component == [1, 1]).into()));
    let changed = tensor.plus(&other.unwrap()).unwrap();
    assert_eq!(tensor.differs_at(&changed).unwrap(), Some(vec![1, 1]));
    assert_eq!(tensor.differs_at(&tensor).unwrap(), None);
    assert!(!tensor.agrees(&changed).unwrap());
    assert_eq!(tensor.plus(&draw(&[3, 2], 12)).unwrap_err(), Trouble::Shape);
}

#[test]
fn components_out_of_bounds_are_nothing() {
    let tensor = draw::<Exact>(&[2, 3], 13);
    for component in [&[2, 0][..], &[0, 3], &[0], &[0, 0, 0], &[]] {
        assert!(tensor.get(component).is_none());
        assert!(tensor.value(component).is_none());
    }
    assert!(tensor.get(&[1, 2]).is_some());
}

#[test]
fn arrays_are_within_their_budget() {
    let ring = Ring::new(2, 0).unwrap();
    let zero = |lengths: &[usize]| Tensor::<Exact>::zero(&ring, ring.top(), lengths).map(|tensor| tensor.size());
    assert_eq!(zero(&[4; 11]), Ok(NUMBERS_BUDGET));
    assert_eq!(zero(&[4; 12]), Err(Trouble::Budget(Budget::Numbers)));
    assert_eq!(zero(&[usize::MAX, usize::MAX]), Err(Trouble::Budget(Budget::Numbers)));
    assert_eq!(zero(&[1; SLOTS_BUDGET]), Ok(1));
    assert_eq!(zero(&[1; SLOTS_BUDGET + 1]), Err(Trouble::Budget(Budget::Slots)));
    assert_eq!(zero(&[3, 0]), Err(Trouble::Shape));
    let large = Tensor::<Exact>::zero(&ring, ring.top(), &[4; 6]).unwrap();
    assert_eq!(large.outer(&large).unwrap_err(), Trouble::Budget(Budget::Numbers));
}

#[test]
fn arrays_of_components_fit_their_lengths() {
    let ring = ring();
    let one = Jet::constant(&ring, Exact::ONE);
    assert_eq!(Tensor::from_jets(&[2], std::slice::from_ref(&one)).unwrap_err(), Trouble::Shape);
    assert_eq!(Tensor::<Exact>::from_jets(&[1], &[]).unwrap_err(), Trouble::Shape);
    let lower = one.truncated(Order::of_base(1)).unwrap();
    assert_eq!(Tensor::from_jets(&[2], &[one, lower]).unwrap().order(), Order::of_base(1));
}
