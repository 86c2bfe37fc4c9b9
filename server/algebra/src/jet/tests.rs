//! The laws of jets: a ring, a derivation, a chain rule; over both primes and over fractions.

#![allow(clippy::unwrap_used)]

use super::*;
use crate::draws::Draws;
use crate::field::{Complex, FIRST, Residue};
use crate::laws::law;
use crate::number::Exact;
use crate::sample;
use crate::trouble::Budget;

law!(jets_are_a_commutative_ring, ring_axioms);
law!(products_agree_with_those_of_polynomials, products_of_polynomials);
law!(the_derivative_obeys_the_product_rule, product_rule);
law!(derivatives_commute_and_shift_coefficients, derivatives);
law!(the_derivative_obeys_the_chain_rule, chain_rule);
law!(composition_obeys_the_chain_rule_of_several_variables, chain_rule_of_several_variables);
law!(reciprocals_multiply_to_one, reciprocals);
law!(roots_square_back, roots);
law!(rational_powers_add_exponents, rational_powers);
law!(exponential_and_logarithm_solve_their_equations, transcendental_functions);
law!(re_expansion_about_another_point_is_a_homomorphism, re_expansion);
law!(small_variables_are_truncated_on_their_own, small_variables);
law!(orders_are_those_known_in_common, orders);

/// Rings of several shapes, with small variables and without.
fn rings() -> Vec<Arc<Ring>> {
    vec![
        Ring::new(1, 5).unwrap(),
        Ring::new(3, 3).unwrap(),
        Ring::new(4, 0).unwrap(),
        Ring::with_small(2, 1, Order { base: 2, small: 2 }).unwrap(),
        Ring::with_small(2, 2, Order { base: 1, small: 2 }).unwrap(),
    ]
}

fn draw<N: Number>(ring: &Arc<Ring>, draws: &mut Draws) -> Jet<N> {
    sample::jet(ring, ring.top(), draws).unwrap()
}

/// A jet with another value at the point.
fn with_value<N: Number>(jet: &Jet<N>, value: N) -> Jet<N> {
    jet.plus(&Jet::constant(jet.ring(), value - jet.value())).unwrap()
}

fn variables(ring: &Ring) -> Vec<Variable> {
    (0..ring.variables()).map(Variable::Base).chain((0..ring.smalls()).map(Variable::Small)).collect()
}

#[track_caller]
fn same<N: Number>(a: &Jet<N>, b: &Jet<N>) {
    assert!(a.agrees(b).unwrap(), "{a:?}\n{b:?}");
}

fn ring_axioms<N: Number>() {
    let mut draws = Draws::from_seed(1);
    for ring in rings() {
        let [a, b, c] = std::array::from_fn(|_| draw::<N>(&ring, &mut draws));
        let (times, plus) = (|x: &Jet<N>, y: &Jet<N>| x.times(y).unwrap(), |x: &Jet<N>, y: &Jet<N>| x.plus(y).unwrap());
        same(&times(&a, &b), &times(&b, &a));
        same(&times(&times(&a, &b), &c), &times(&a, &times(&b, &c)));
        same(&times(&a, &plus(&b, &c)), &plus(&times(&a, &b), &times(&a, &c)));
        same(&plus(&plus(&a, &b), &c), &plus(&a, &plus(&b, &c)));
        same(&times(&a, &Jet::constant(&ring, N::ONE)), &a);
        same(&a.scaled(N::from_integer(3)), &plus(&a, &plus(&a, &a)));
        assert!(a.minus(&a).unwrap().vanishes().unwrap());
        assert_eq!(times(&a, &b).order(), ring.top());
    }
}

/// Against the definition: every pair of monomials, kept if the product is within the order.
fn products_of_polynomials<N: Number>() {
    let mut draws = Draws::from_seed(2);
    for ring in rings() {
        let (a, b) = (draw::<N>(&ring, &mut draws), draw::<N>(&ring, &mut draws));
        let product = a.times(&b).unwrap();
        for monomial in ring.monomials(ring.top()) {
            let mut expected = N::ZERO;
            for (left, x) in ring.monomials(ring.top()).zip(a.coefficients()) {
                for (right, y) in ring.monomials(ring.top()).zip(b.coefficients()) {
                    if left.iter().zip(right).map(|(l, r)| l + r).eq(monomial.iter().copied()) {
                        expected = expected + *x * *y;
                    }
                }
            }
            assert_eq!(product.coefficient(monomial), Some(expected));
        }
    }
}

fn product_rule<N: Number>() {
    let mut draws = Draws::from_seed(3);
    for ring in rings() {
        let (a, b) = (draw::<N>(&ring, &mut draws), draw::<N>(&ring, &mut draws));
        for variable in variables(&ring) {
            let Ok(derivative) = a.times(&b).unwrap().derivative(variable) else {
                assert_eq!(ring.top().base, 0);
                continue;
            };
            let left = a.derivative(variable).unwrap().times(&b).unwrap();
            let right = a.times(&b.derivative(variable).unwrap()).unwrap();
            same(&derivative, &left.plus(&right).unwrap());
            assert_eq!(Some(derivative.order()), ring.top().lowered(variable));
        }
    }
}

fn derivatives<N: Number>() {
    let ring = Ring::with_small(2, 1, Order { base: 3, small: 2 }).unwrap();
    let a = draw::<N>(&ring, &mut Draws::from_seed(4));
    let (x, y, e) = (Variable::Base(0), Variable::Base(1), Variable::Small(0));
    let after = |first, second| a.derivative(first).unwrap().derivative(second).unwrap();
    for (first, second) in [(x, y), (x, e), (y, e)] {
        same(&after(first, second), &after(second, first));
    }
    // The coefficient of x y^2 e^2 by derivatives at the point: 1! 2! 2! times it.
    let mut derivative = a.clone();
    for variable in [y, e, x, y, e] {
        derivative = derivative.derivative(variable).unwrap();
    }
    assert_eq!(derivative.value(), a.coefficient(&[1, 2, 2]).unwrap() * N::from_integer(4));
    assert_eq!(after(e, e).derivative(e).unwrap_err(), Trouble::Order);
    assert_eq!(a.derivative(Variable::Base(2)).unwrap_err(), Trouble::Shape);
}

fn chain_rule<N: Number>() {
    let mut draws = Draws::from_seed(5);
    for ring in rings().into_iter().filter(|ring| ring.top().base > 0) {
        let a = draw::<N>(&ring, &mut draws);
        let length = ring.top().total() + 1;
        let series: Vec<N> = (0..length).map(|_| N::draw(&mut draws)).collect();
        // f' has the coefficients (k + 1) c_{k+1}; the last one is not needed, and not known.
        let slope = series.iter().zip(0..).skip(1).map(|(c, k)| *c * N::from_integer(k)).chain([N::ZERO]);
        let slope: Vec<N> = slope.collect();
        for variable in variables(&ring) {
            let derivative = a.derivative(variable).unwrap();
            let outer = a.truncated(derivative.order()).unwrap().composed(&slope).unwrap();
            let composed = a.composed(&series).unwrap();
            same(&composed.derivative(variable).unwrap(), &outer.times(&derivative).unwrap());
        }
        assert_eq!(a.composed(series.get(1..).unwrap()).unwrap_err(), Trouble::Shape);
    }
}

fn chain_rule_of_several_variables<N: Number>() {
    let mut draws = Draws::from_seed(6);
    for ring in rings().into_iter().filter(|ring| ring.top().base > 0) {
        let outer = draw::<N>(&ring, &mut draws);
        // Inner functions without constant term, small ones included: they vanish with the coordinates.
        let inner: Vec<Jet<N>> = (0..ring.variables())
            .map(|number| {
                let x = Jet::variable(&ring, Variable::Base(number), N::ZERO).unwrap();
                let factor = with_value(&draw::<N>(&ring, &mut draws), N::ONE);
                x.times(&factor).unwrap()
            })
            .collect();
        let composed = outer.substitute(&inner).unwrap();
        for variable in (0..ring.variables()).map(Variable::Base) {
            let mut expected: Option<Jet<N>> = None;
            for (number, inner_jet) in inner.iter().enumerate() {
                let slope = outer.derivative(Variable::Base(number)).unwrap().substitute(&inner).unwrap();
                let term = slope.times(&inner_jet.derivative(variable).unwrap()).unwrap();
                expected = Some(expected.map_or(Ok(term.clone()), |sum| sum.plus(&term)).unwrap());
            }
            same(&composed.derivative(variable).unwrap(), &expected.unwrap());
        }
    }
}

fn reciprocals<N: Number>() {
    let mut draws = Draws::from_seed(7);
    for ring in rings() {
        let (a, b) = (draw::<N>(&ring, &mut draws), draw::<N>(&ring, &mut draws));
        let a = with_value(&a, N::from_integer(2));
        same(&a.times(&a.inverse().unwrap()).unwrap(), &Jet::constant(&ring, N::ONE));
        same(&b.over(&a).unwrap().times(&a).unwrap(), &b);
        assert_eq!(with_value(&a, N::ZERO).inverse().unwrap_err(), Trouble::ZeroDivisor);
    }
}

fn roots<N: Number>() {
    let mut draws = Draws::from_seed(8);
    for ring in rings() {
        let a = with_value(&draw::<N>(&ring, &mut draws), N::from_integer(-3));
        let square = a.times(&a).unwrap();
        same(&square.root().unwrap(), &a.magnitude().unwrap());
        same(&square.root().unwrap().times(&square.root().unwrap()).unwrap(), &square);
        assert_eq!(square.scaled(-N::ONE).root().unwrap_err(), Trouble::NoRoot);
        assert_eq!(with_value(&a, N::ZERO).root().unwrap_err(), Trouble::ZeroDivisor);
        assert_eq!(with_value(&a, N::ZERO).magnitude().unwrap_err(), Trouble::ZeroDivisor);
    }
}

fn rational_powers<N: Number>() {
    let mut draws = Draws::from_seed(9);
    for ring in rings() {
        // A sixth power at the point, so that the roots are fractions.
        let sixth = N::from_integer(64);
        let a = with_value(&draw::<N>(&ring, &mut draws), sixth);
        let power = |n, d| a.power(n, d).unwrap();
        same(&power(1, 2).times(&power(1, 3)).unwrap(), &power(5, 6));
        same(&power(1, 3).power(3, 1).unwrap(), &a);
        same(&power(-4, 1).times(&power(4, 1)).unwrap(), &Jet::constant(&ring, N::ONE));
        same(&power(2, 1), &a.times(&a).unwrap());
        same(&power(0, 1), &Jet::constant(&ring, N::ONE));
        assert_eq!(a.power(1, 0).unwrap_err(), Trouble::NoRoot);
        let vanishing = with_value(&a, N::ZERO);
        same(&vanishing.power(2, 1).unwrap(), &vanishing.times(&vanishing).unwrap());
    }
}

fn transcendental_functions<N: Number>() {
    let mut draws = Draws::from_seed(10);
    for ring in rings().into_iter().filter(|ring| ring.top().base > 0) {
        let a = with_value(&draw::<N>(&ring, &mut draws), N::from_integer(2));
        let (five, seven) = (N::from_integer(5), N::from_integer(7));
        let exponential = a.exponential(five).unwrap();
        assert_eq!(exponential.value(), five);
        // The logarithm undoes it, the constant being given.
        same(&exponential.logarithm(a.value()).unwrap(), &a);
        let (sine, cosine) = a.sine_and_cosine(five, seven).unwrap();
        let squares = sine.times(&sine).unwrap().plus(&cosine.times(&cosine).unwrap()).unwrap();
        same(&squares, &Jet::constant(&ring, five * five + seven * seven));
        for variable in variables(&ring) {
            let slope = a.derivative(variable).unwrap();
            same(&exponential.derivative(variable).unwrap(), &exponential.times(&slope).unwrap());
            let logarithm = a.logarithm(seven).unwrap().derivative(variable).unwrap();
            same(&logarithm.times(&a).unwrap(), &slope);
            same(&sine.derivative(variable).unwrap(), &cosine.times(&slope).unwrap());
            same(&cosine.derivative(variable).unwrap(), &sine.times(&slope).unwrap().scaled(-N::ONE));
        }
    }
}

fn re_expansion<N: Number>() {
    let mut draws = Draws::from_seed(11);
    let ring = Ring::with_small(2, 1, Order { base: 4, small: 1 }).unwrap();
    // Polynomials of degree 2, so that products are not truncated.
    let quadratic = |draws: &mut Draws| {
        let mut coefficients = draw::<N>(&ring, draws).coefficients().to_vec();
        for (coefficient, monomial) in coefficients.iter_mut().zip(ring.monomials(ring.top())) {
            if monomial.iter().take(2).sum::<u8>() > 2 {
                *coefficient = N::ZERO;
            }
        }
        Jet::new(&ring, ring.top(), coefficients).unwrap()
    };
    let (a, b) = (quadratic(&mut draws), quadratic(&mut draws));
    let shift = |sign: i64| -> Vec<Jet<N>> {
        let value = |number: usize| N::from_integer(sign * (2 + 3 * number as i64));
        (0..2).map(|number| Jet::variable(&ring, Variable::Base(number), value(number)).unwrap()).collect()
    };
    let moved = |jet: &Jet<N>| jet.substitute(&shift(1)).unwrap();
    same(&moved(&a.times(&b).unwrap()), &moved(&a).times(&moved(&b)).unwrap());
    same(&moved(&a).substitute(&shift(-1)).unwrap(), &a);
    assert_eq!(a.substitute(&shift(1)[..1]).unwrap_err(), Trouble::Shape);
}

fn small_variables<N: Number>() {
    let ring = Ring::with_small(1, 2, Order { base: 2, small: 2 }).unwrap();
    let variable = |variable| Jet::<N>::variable(&ring, variable, N::ZERO).unwrap();
    let (x, e, f) = (variable(Variable::Base(0)), variable(Variable::Small(0)), variable(Variable::Small(1)));
    let product = |jets: &[&Jet<N>]| jets.iter().fold(Jet::constant(&ring, N::ONE), |p, jet| p.times(jet).unwrap());
    for kept in [&[&x, &x, &e, &f][..], &[&e, &e], &[&x, &f]] {
        assert!(!product(kept).vanishes().unwrap());
    }
    for lost in [&[&e, &f, &f][..], &[&x, &x, &x], &[&e, &e, &e]] {
        assert!(product(lost).vanishes().unwrap());
    }
    assert_eq!(ring.width(ring.top()), 3 * 6);
}

fn orders<N: Number>() {
    let mut draws = Draws::from_seed(12);
    let ring = Ring::with_small(2, 1, Order { base: 3, small: 2 }).unwrap();
    let (a, b) = (draw::<N>(&ring, &mut draws), draw::<N>(&ring, &mut draws));
    for order in [Order { base: 1, small: 2 }, Order { base: 3, small: 1 }, Order { base: 2, small: 0 }] {
        let lower = a.truncated(order).unwrap();
        assert_eq!(lower.times(&b).unwrap().order(), order);
        // Truncation is a homomorphism.
        same(&lower.times(&b).unwrap(), &a.times(&b).unwrap().truncated(order).unwrap());
        same(&lower, &a);
        for (monomial, coefficient) in ring.monomials(order).zip(lower.coefficients()) {
            assert_eq!(a.coefficient(monomial), Some(*coefficient));
        }
        assert_eq!(lower.truncated(ring.top()).unwrap_err(), Trouble::Order);
        assert_eq!(lower.coefficient(&[3, 0, 2]), None);
    }
}

#[test]
fn jets_of_different_rings_do_not_mix() {
    let (one, other) = (Ring::new(2, 2).unwrap(), Ring::new(2, 3).unwrap());
    let (a, b) = (Jet::constant(&one, Exact::ONE), Jet::constant(&other, Exact::ONE));
    assert_eq!(a.plus(&b).unwrap_err(), Trouble::Shape);
    assert_eq!(a.times(&b).unwrap_err(), Trouble::Shape);
    assert_eq!(Jet::new(&one, one.top(), vec![Exact::ONE]).unwrap_err(), Trouble::Shape);
    // Two rings of the same shape are the same ring.
    assert!(a.plus(&Jet::constant(&Ring::new(2, 2).unwrap(), Exact::ONE)).is_ok());
}

#[test]
fn rings_are_within_their_budget() {
    assert_eq!(Ring::new(4, 8).unwrap().width(Order::of_base(8)), 495);
    let refused = |variables, degree| Ring::new(variables, degree).unwrap_err();
    for (variables, degree) in [(4, 9), (64, 2), (3, usize::MAX), (1, 256), (0, 256)] {
        assert_eq!(refused(variables, degree), Trouble::Budget(Budget::Monomials));
    }
    for (variables, degree) in [(65, 0), (usize::MAX, 0), (usize::MAX, 3)] {
        assert_eq!(refused(variables, degree), Trouble::Budget(Budget::Variables));
    }
    let x = Jet::variable(&Ring::new(1, 255).unwrap(), Variable::Base(0), Residue::<FIRST>::ONE).unwrap();
    let highest = (0..255).fold(x.power(255, 1).unwrap(), |jet, _| jet.derivative(Variable::Base(0)).unwrap());
    assert_eq!(highest.value(), (1..=255).fold(Residue::ONE, |product, factor| product * Residue::new(factor)));
    assert_eq!(Ring::new(0, 3).unwrap().width(Order::of_base(3)), 1);
}

#[test]
fn monomials_are_sorted_by_degree() {
    let ring = Ring::with_small(2, 1, Order { base: 1, small: 1 }).unwrap();
    let monomials: Vec<&[u8]> = ring.monomials(ring.top()).collect();
    assert_eq!(monomials, [&[0, 0, 0], &[0, 0, 1], &[0, 1, 0], &[1, 0, 0], &[0, 1, 1], &[1, 0, 1]].map(|m| &m[..]));
}

#[test]
fn units_of_the_extension_are_exponentials_of_imaginary_arguments() {
    let ring = Ring::new(1, 4).unwrap();
    let x = Jet::variable(&ring, Variable::Base(0), Complex::<FIRST>::from_integer(3)).unwrap();
    let unit = Complex::new(Residue::new(5), Residue::new(8)).unit().unwrap();
    let (sine, cosine) = x.sine_and_cosine(unit.imaginary.into(), unit.real.into()).unwrap();
    let turning = x.scaled(Complex::I).exponential(unit).unwrap();
    same(&turning, &cosine.plus(&sine.scaled(Complex::I)).unwrap());
}

#[test]
fn what_does_not_fit_is_told_apart_from_a_difference() {
    let ring = Ring::new(1, 1).unwrap();
    let large = Jet::constant(&ring, Exact::from_integer(i64::MAX));
    let lost = large.power(3, 1).unwrap();
    assert_eq!(lost.agrees(&lost).unwrap_err(), Trouble::Overflow);
    assert_eq!(lost.vanishes().unwrap_err(), Trouble::Overflow);
    assert_eq!(lost.inverse().unwrap_err(), Trouble::Overflow);
}
