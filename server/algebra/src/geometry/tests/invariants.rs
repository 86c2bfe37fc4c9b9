//! Curvature in particular dimensions and of particular spaces, and the conventions of sign.

use super::*;

law!(each_sign_convention_turns_what_it_should, sign_conventions);

fn sign_conventions<N: Number>(dimension: usize, minus: usize) {
    let plain = space::<N>(dimension, minus, 2);
    for (riemann_reversed, ricci_reversed) in [(true, false), (false, true), (true, true)] {
        let epsilon_reversed = riemann_reversed != ricci_reversed;
        let signs = Signs { riemann_reversed, ricci_reversed, epsilon_reversed };
        let other = Geometry::new(plain.metric().clone(), signs).unwrap();
        let sign = |reversed: bool| if reversed { -N::ONE } else { N::ONE };
        same(other.riemann().unwrap(), &plain.riemann().unwrap().scaled(sign(riemann_reversed)));
        let ricci_sign = sign(riemann_reversed != ricci_reversed);
        same(other.ricci().unwrap(), &plain.ricci().unwrap().scaled(ricci_sign));
        same(&other.einstein().unwrap(), &plain.einstein().unwrap().scaled(ricci_sign));
        assert!(other.scalar().unwrap().agrees(&plain.scalar().unwrap().scaled(ricci_sign)).unwrap());
        same(&other.epsilon_down().unwrap(), &plain.epsilon_down().unwrap().scaled(sign(epsilon_reversed)));
        same(&other.epsilon_up().unwrap(), &plain.epsilon_up().unwrap().scaled(sign(epsilon_reversed)));
        if dimension > 2 {
            same(&other.weyl().unwrap(), &plain.weyl().unwrap().scaled(sign(riemann_reversed)));
        }
    }
    assert!(!plain.ricci().unwrap().vanishes().unwrap());
}

type Plain = Residue<FIRST>;

#[test]
fn the_einstein_tensor_vanishes_in_two_dimensions_only() {
    for dimension in 2..=4 {
        let space = space::<Plain>(dimension, 1, 2);
        assert_eq!(space.einstein().unwrap().vanishes(), Ok(dimension == 2));
        assert_eq!(space.scalar().unwrap().vanishes(), Ok(false));
    }
    let line = space::<Plain>(1, 0, 2);
    assert_eq!(line.riemann().unwrap().vanishes(), Ok(true));
}

#[test]
fn the_weyl_tensor_is_undefined_in_two_dimensions_and_vanishes_in_three() {
    assert_eq!(space::<Plain>(1, 0, 2).weyl().unwrap_err(), Trouble::Dimension);
    assert_eq!(space::<Plain>(2, 0, 2).weyl().unwrap_err(), Trouble::Dimension);
    assert_eq!(space::<Plain>(3, 1, 2).weyl().unwrap().vanishes(), Ok(true));
    for dimension in [4, 5] {
        let weyl = space::<Plain>(dimension, 1, 2).weyl().unwrap();
        assert_eq!(weyl.vanishes(), Ok(false));
        zero(&weyl.trace(0, 2).unwrap());
        zero(&weyl.trace(0, 1).unwrap());
        zero(&weyl.plus(&weyl.swapped(2, 3).unwrap()).unwrap());
    }
}

#[test]
fn the_weyl_tensor_is_that_of_every_conformal_metric() {
    let space = space::<Plain>(4, 1, 2);
    let ring = space.metric().ring();
    let factor = sample::jet(ring, ring.top(), &mut Draws::from_seed(12)).unwrap();
    let other = Geometry::new(space.metric().times(&factor).unwrap(), Signs::default()).unwrap();
    same(&other.weyl().unwrap(), &space.weyl().unwrap());
    assert!(!other.riemann().unwrap().agrees(space.riemann().unwrap()).unwrap());
}

/// `-(1 - 2m/r) dt^2 + dr^2 / (1 - 2m/r) + r^2 (du^2 / (1 - u^2) + (1 - u^2) dv^2)`, with `u` the cosine of the
/// polar angle, about `r = 3`, `m = 1`, `u = 1/2`.
fn schwarzschild() -> Geometry<Exact> {
    let ring = Ring::new(4, 2).unwrap();
    let number = |value| Jet::constant(&ring, Exact::from_integer(value));
    let x = |place, value| Jet::variable(&ring, Variable::Base(place), value).unwrap();
    let (r, u) = (x(1, Exact::from_integer(3)), x(2, half()));
    let f = number(1).minus(&number(2).over(&r).unwrap()).unwrap();
    let w = number(1).minus(&u.times(&u).unwrap()).unwrap();
    let square = r.times(&r).unwrap();
    let diagonal = [f.scaled(-Exact::ONE), f.inverse().unwrap(), square.over(&w).unwrap(), square.times(&w).unwrap()];
    let entry = |place: usize| if place.is_multiple_of(5) { diagonal[place / 5].clone() } else { number(0) };
    let metric = Tensor::from_jets(&[4, 4], &(0..16).map(entry).collect::<Vec<_>>()).unwrap();
    Geometry::new(metric, Signs::default()).unwrap()
}

/// The published invariant `R_{abcd} R^{abcd} = 48 m^2 / r^6` (Misner, Thorne and Wheeler, section 31.7; from
/// memory).
#[test]
fn the_field_of_a_mass_point_has_no_ricci_tensor_and_the_published_invariant() {
    let space = schwarzschild();
    zero(space.ricci().unwrap());
    let mut lower = space.lowered(space.riemann().unwrap(), 0).unwrap();
    let all_down = lower.clone();
    for slot in 0..4 {
        lower = space.raised(&lower, slot).unwrap();
    }
    let invariant = contract(&[(&all_down, &[0, 1, 2, 3]), (&lower, &[0, 1, 2, 3])], &[]).unwrap();
    let expected = Exact::from_integer(48) * Exact::from_integer(729).inverse().unwrap();
    assert_eq!(invariant.to_jet().unwrap().value(), expected);
}

#[test]
fn what_is_no_metric_is_refused() {
    let ring = Ring::new(2, 1).unwrap();
    let of = |entries: [i64; 4]| {
        let entry = |component: &[usize]| Exact::from_integer(entries[component[0] * 2 + component[1]]);
        Geometry::new(Tensor::from_numbers(&ring, &[2, 2], entry).unwrap(), Signs::default())
    };
    assert_eq!(of([1, 2, 3, 4]).unwrap_err(), Trouble::Shape);
    assert_eq!(of([1, 2, 2, 4]).unwrap_err(), Trouble::ZeroDivisor);
    assert_eq!(of([1, 0, 0, 2]).unwrap().volume().unwrap_err(), Trouble::NoRoot);
    assert!(of([1, 0, 0, -4]).unwrap().volume().is_ok());
    let cube = Tensor::<Exact>::zero(&ring, ring.top(), &[3, 3]).unwrap();
    assert_eq!(Geometry::new(cube, Signs::default()).unwrap_err(), Trouble::Shape);
}

#[test]
fn derivatives_that_are_not_known_are_not_made_up() {
    let space = space::<Plain>(2, 0, 1);
    assert_eq!(space.riemann().unwrap_err(), Trouble::Order);
    assert_eq!(space.scalar().unwrap_err(), Trouble::Order);
    assert!(space.christoffel().is_ok());
    assert_eq!(space.covariant(space.metric(), &[Level::Down]).unwrap_err(), Trouble::Shape);
    assert_eq!(space.raised(space.metric(), 2).unwrap_err(), Trouble::Shape);
}
