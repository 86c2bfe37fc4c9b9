//! Delta, generalised delta and epsilon, as symbols and as tensors.

use super::*;
use crate::trouble::Budget;

law!(epsilon_tensors_are_constant_and_inverse_to_each_other, epsilon_tensors);
law!(products_of_epsilons_are_generalised_deltas, epsilon_products);
law!(the_generalised_delta_antisymmetrises, antisymmetrisation);

fn factorial(number: usize) -> i64 {
    (1..=number as i64).product()
}

fn epsilon_tensors<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 1);
    let (down, up) = (space.epsilon_down().unwrap(), space.epsilon_up().unwrap());
    zero(&space.covariant(&down, &vec![Level::Down; dimension]).unwrap());
    zero(&space.covariant(&up, &vec![Level::Up; dimension]).unwrap());
    let raised = (0..dimension).fold(down.clone(), |tensor, slot| space.raised(&tensor, slot).unwrap());
    same(&raised, &up);
    let first: Vec<usize> = (0..dimension).collect();
    assert!(down.get(&first).unwrap().agrees(&space.volume().unwrap()).unwrap());
    let labels: Vec<Label> = (0..dimension as Label).collect();
    let product = contract(&[(&down, &labels), (&up, &labels)], &[]).unwrap().to_jet().unwrap();
    assert_eq!(product.value(), space.sign().unwrap() * N::from_integer(factorial(dimension)));
}

/// `e^{i..} e_{j..} = sign(g) d^{i..}_{j..}`.
fn epsilon_products<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 0);
    let product = space.epsilon_up().unwrap().outer(&space.epsilon_down().unwrap()).unwrap();
    let deltas = generalised_delta(space.metric().ring(), dimension, dimension).unwrap();
    same(&product, &deltas.scaled(space.sign().unwrap()));
}

fn antisymmetrisation<N: Number>(dimension: usize, minus: usize) {
    let space = space::<N>(dimension, minus, 0);
    for count in 1..=3 {
        let deltas = generalised_delta(space.metric().ring(), dimension, count).unwrap();
        let tensor = field(&space, count, &[], 13);
        let (lower, upper): (Vec<Label>, Vec<Label>) = ((10..).take(count).collect(), (0..).take(count).collect());
        let product = contract(&[(&deltas, &[&upper[..], &lower].concat()), (&tensor, &upper)], &lower).unwrap();
        let slots: Vec<usize> = (0..count).collect();
        let expected = tensor.antisymmetrised(&slots).unwrap().scaled(N::from_integer(factorial(count)));
        same(&product, &expected);
        assert_eq!(product.vanishes(), Ok(count > dimension));
    }
}

type Plain = Residue<SECOND>;

/// `e_{ijk} e_{imn} = d_{jm} d_{kn} - d_{jn} d_{km}`, `e_{ijk} e_{ijn} = 2 d_{kn}`, `e_{ijk} e_{ijk} = 6` (NIST
/// Digital Library of Mathematical Functions, section 1.6; from memory).
#[test]
fn the_symbol_in_three_dimensions_contracts_as_published() {
    let ring = Ring::new(3, 0).unwrap();
    let (symbol, unit) = (epsilon::<Plain>(&ring, 3).unwrap(), delta::<Plain>(&ring, 3).unwrap());
    assert_eq!(symbol.value(&[0, 1, 2]), Some(Plain::ONE));
    assert_eq!(symbol.value(&[1, 0, 2]), Some(-Plain::ONE));
    let once = contract(&[(&symbol, &[0, 1, 2]), (&symbol, &[0, 3, 4])], &[1, 2, 3, 4]).unwrap();
    let pairs = |labels: [Label; 4]| contract(&[(&unit, &labels[..2]), (&unit, &labels[2..])], &[1, 2, 3, 4]).unwrap();
    same(&once, &pairs([1, 3, 2, 4]).minus(&pairs([1, 4, 2, 3])).unwrap());
    let twice = contract(&[(&symbol, &[0, 1, 2]), (&symbol, &[0, 1, 3])], &[2, 3]).unwrap();
    same(&twice, &unit.scaled(Plain::from_integer(2)));
    let thrice = contract(&[(&symbol, &[0, 1, 2]), (&symbol, &[0, 1, 2])], &[]).unwrap();
    assert_eq!(thrice.to_jet().unwrap().value(), Plain::from_integer(6));
}

/// `curl curl V = grad div V - div grad V`.
#[test]
fn the_curl_of_the_curl_in_three_flat_dimensions() {
    let ring = Ring::new(3, 2).unwrap();
    let symbol = epsilon::<Plain>(&ring, 3).unwrap();
    let vector = sample::tensor::<Plain>(&ring, ring.top(), &[3], &[], &mut Draws::from_seed(14)).unwrap();
    let curl = |field: &Tensor<Plain>| {
        contract(&[(&symbol, &[0, 1, 2]), (&field.gradient().unwrap(), &[2, 1])], &[0]).unwrap()
    };
    let second = vector.gradient().unwrap().gradient().unwrap();
    let expected = second.trace(0, 1).unwrap().minus(&second.trace(1, 2).unwrap()).unwrap();
    same(&curl(&curl(&vector)), &expected);
    assert!(!expected.vanishes().unwrap());
}

#[test]
fn the_generalised_delta_loses_a_pair_by_a_trace() {
    // d^{ij}_{kj} = (n - 1) d^i_k.
    for dimension in 1..=4 {
        let ring = Ring::new(1, 0).unwrap();
        let pair = generalised_delta::<Plain>(&ring, dimension, 2).unwrap().trace(1, 3).unwrap();
        let unit = delta::<Plain>(&ring, dimension).unwrap();
        same(&pair, &unit.scaled(Plain::from_integer(dimension as i128 - 1)));
    }
    let none = generalised_delta::<Plain>(&Ring::new(1, 0).unwrap(), 3, 0).unwrap();
    assert_eq!(none.to_jet().unwrap().value(), Plain::ONE);
}

#[test]
fn symbols_are_within_the_budget_of_numbers() {
    let ring = Ring::new(1, 0).unwrap();
    let budget = Trouble::Budget(Budget::Numbers);
    let slots = Trouble::Budget(Budget::Slots);
    assert_eq!(epsilon::<Plain>(&ring, 8).unwrap_err(), budget);
    assert_eq!(generalised_delta::<Plain>(&ring, 10, usize::MAX).unwrap_err(), slots);
    assert_eq!(generalised_delta::<Plain>(&ring, 10, 4).unwrap_err(), budget);
    assert_eq!(epsilon::<Plain>(&ring, usize::MAX).unwrap_err(), slots);
    assert_eq!(epsilon::<Plain>(&ring, 7).unwrap().size(), 823_543);
}
