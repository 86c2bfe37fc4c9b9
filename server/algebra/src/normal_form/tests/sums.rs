//! Sums, brackets and the exchange of free labels.

use super::*;
use crate::draws::Draws;
use crate::rational::Rational;

fn fraction(numerator: i128, denominator: i128) -> Rational {
    Rational::new(numerator, denominator).unwrap()
}

fn sum(terms: &[(Rational, Monomial, &[Bracket])]) -> Sum {
    let term = |(coefficient, monomial, brackets): &(Rational, Monomial, &[Bracket])| {
        Term::new(*coefficient, monomial.clone(), brackets.to_vec()).unwrap()
    };
    normal_sum(&terms.iter().map(term).collect::<Vec<_>>(), &mut Budget::default()).unwrap()
}

fn plain(terms: &[(i64, &[(&Kernel, &str)])]) -> Sum {
    let term = |(coefficient, factors): &(i64, &[(&Kernel, &str)])| {
        (Rational::from_integer(*coefficient), monomial(factors), &[][..])
    };
    sum(&terms.iter().map(term).collect::<Vec<_>>())
}

fn bracket(antisymmetric: bool, places: &[(usize, usize)]) -> Bracket {
    Bracket { antisymmetric, slots: places.iter().map(|&(factor, slot)| Place { factor, slot }).collect() }
}

fn bracketed(factors: &[(&Kernel, &str)], brackets: &[Bracket]) -> Sum {
    sum(&[(Rational::ONE, monomial(factors), brackets)])
}

fn exchanged(sum: &Sum, a: char, b: char) -> Option<Sign> {
    exchange(sum, u32::from(a), u32::from(b), &mut Budget::default()).unwrap()
}

#[test]
fn like_terms_are_collected_and_zeros_dropped() {
    let (s, f, t) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 2), Kernel::new(3, SlotSymmetry::none(2)));
    assert_eq!(plain(&[(1, &[(&s, "ab")]), (2, &[(&s, "ba")])]), plain(&[(3, &[(&s, "ab")])]));
    assert!(plain(&[(1, &[(&f, "ab")]), (1, &[(&f, "ba")])]).is_zero());
    assert!(plain(&[(5, &[(&s, "ij"), (&f, "ij")])]).is_zero());
    assert_eq!(plain(&[(1, &[(&t, "ab")]), (1, &[(&t, "ba")])]).terms().len(), 2);
    let difference = plain(&[(1, &[(&t, "ij"), (&s, "jk"), (&t, "ki")]), (-1, &[(&t, "ij"), (&t, "ik"), (&s, "jk")])]);
    assert!(!difference.is_zero());
    assert!(
        plain(&[(1, &[(&t, "ij"), (&s, "jk"), (&t, "ki")]), (-1, &[(&t, "kj"), (&s, "ji"), (&t, "ik")])]).is_zero()
    );
}

#[test]
fn a_bracket_across_factors_expands_into_as_few_terms_as_symmetries_leave() {
    let (d, r) = (Kernel::new(1, SlotSymmetry::none(1)), Kernel::riemann());
    let across = bracket(true, &[(0, 0), (1, 0), (1, 1)]);
    let found = bracketed(&[(&d, "a"), (&r, "bcde")], &[across]);
    let third = fraction(1, 3);
    let cyclic = ["a bcde", "b cade", "c abde"].map(|letters| {
        let (first, rest) = letters.split_once(' ').unwrap();
        (third, monomial(&[(&d, first), (&r, rest)]), &[][..])
    });
    assert_eq!(found, sum(&cyclic));
    assert_eq!(found.terms().len(), 3);
    let f = Kernel::antisymmetric(2, 12);
    let all: Vec<(usize, usize)> = (0..12).map(|slot| (0, slot)).collect();
    assert_eq!(bracketed(&[(&f, "abcdefghijkl")], &[bracket(true, &all)]), plain(&[(1, &[(&f, "abcdefghijkl")])]));
}

/// All orders of the numbers below `count`, each with its sign.
fn orders(count: usize) -> Vec<(Vec<usize>, Sign)> {
    let mut found = vec![(Vec::new(), Sign::Plus)];
    for last in 0..count {
        let put = |(order, sign): &(Vec<usize>, Sign)| {
            let (order, sign) = (order.clone(), *sign);
            (0..=last).map(move |place| {
                let mut longer = order.clone();
                longer.insert(place, last);
                (longer, if (last - place) % 2 == 0 { sign } else { sign * Sign::Minus })
            })
        };
        found = found.iter().flat_map(put).collect();
    }
    found
}

#[test]
fn brackets_are_the_average_over_all_permutations_of_the_slots() {
    let mut draws = Draws::from_seed(41);
    let mut terms = 0;
    for _ in 0..150 {
        let monomial = laws::draw_monomial(&mut draws, 3);
        let mut places: Vec<Place> = monomial
            .factors()
            .iter()
            .enumerate()
            .flat_map(|(factor, content)| (0..content.slots.len()).map(move |slot| Place { factor, slot }))
            .collect();
        while places.len() > 4 || (places.len() > 2 && draws.below(3) == 0) {
            places.remove(draws.below(places.len() as u64) as usize);
        }
        let antisymmetric = draws.below(2) == 0;
        let held: Vec<Slot> = places.iter().map(|place| monomial.factors()[place.factor].slots[place.slot]).collect();
        let orders = orders(held.len());
        let share = fraction(1, orders.len() as i128);
        let direct: Vec<(Rational, Monomial, &[Bracket])> = orders
            .iter()
            .map(|(order, sign)| {
                let mut factors = monomial.factors().to_vec();
                for (place, &from) in places.iter().zip(order) {
                    factors[place.factor].slots[place.slot] = held[from];
                }
                let negative = antisymmetric && *sign == Sign::Minus;
                (if negative { -share } else { share }, Monomial::new(factors).unwrap(), &[][..])
            })
            .collect();
        let bracket = [Bracket { antisymmetric, slots: places }];
        let found = sum(&[(Rational::ONE, monomial.clone(), &bracket)]);
        assert_eq!(found, sum(&direct), "{monomial:?} {bracket:?}");
        terms += found.terms().len();
    }
    assert!(terms > 150, "{terms}");
}

#[test]
fn brackets_over_dummies_and_nested_brackets() {
    let (s, f, t) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 2), Kernel::new(3, SlotSymmetry::none(2)));
    let (round, square) = (bracket(false, &[(0, 0), (0, 1)]), bracket(true, &[(0, 0), (0, 1)]));
    assert!(bracketed(&[(&t, "ij"), (&s, "ij")], std::slice::from_ref(&square)).is_zero());
    assert_eq!(
        bracketed(&[(&t, "ij"), (&s, "ij")], std::slice::from_ref(&round)),
        plain(&[(1, &[(&t, "ij"), (&s, "ij")])])
    );
    assert_eq!(
        bracketed(&[(&t, "ij"), (&f, "ij")], std::slice::from_ref(&square)),
        plain(&[(1, &[(&t, "ij"), (&f, "ij")])])
    );
    assert!(bracketed(&[(&t, "ii")], std::slice::from_ref(&square)).is_zero());
    assert_eq!(bracketed(&[(&t, "ii")], std::slice::from_ref(&round)), plain(&[(1, &[(&t, "ii")])]));
    let once = bracketed(&[(&t, "ab")], std::slice::from_ref(&square));
    assert_eq!(bracketed(&[(&t, "ab")], &[square.clone(), square.clone()]), once);
    assert!(bracketed(&[(&t, "ab")], &[square, round]).is_zero());
    // Averages over S_3 and over its subgroup, in the order given: the larger one takes the smaller one in.
    let bare = Kernel::new(4, SlotSymmetry::none(3));
    let (inner, outer) = (bracket(true, &[(0, 1), (0, 2)]), bracket(true, &[(0, 0), (0, 1), (0, 2)]));
    let whole = bracketed(&[(&bare, "abc")], std::slice::from_ref(&outer));
    assert_eq!(whole.terms().len(), 6);
    assert_eq!(bracketed(&[(&bare, "abc")], &[inner, outer]), whole);
    // The order counts where brackets overlap: symmetric in the first two last, antisymmetric in the last two last.
    let (first, last) = (bracket(false, &[(0, 0), (0, 1)]), bracket(true, &[(0, 1), (0, 2)]));
    let one = bracketed(&[(&bare, "abc")], &[last.clone(), first.clone()]);
    assert_eq!((exchanged(&one, 'a', 'b'), exchanged(&one, 'b', 'c')), (Some(Sign::Plus), None));
    let other = bracketed(&[(&bare, "abc")], &[first, last]);
    assert_eq!((exchanged(&other, 'a', 'b'), exchanged(&other, 'b', 'c')), (None, Some(Sign::Minus)));
}

#[test]
fn exchange_of_free_labels_tells_the_symmetry_of_a_sum() {
    let (s, t) = (Kernel::symmetric(1, 2), Kernel::new(3, SlotSymmetry::none(2)));
    let both = |sign| plain(&[(1, &[(&t, "ab")]), (sign, &[(&t, "ba")]), (3 * (1 + sign), &[(&s, "ab")])]);
    assert_eq!(exchanged(&both(1), 'a', 'b'), Some(Sign::Plus));
    assert_eq!(exchanged(&both(-1), 'a', 'b'), Some(Sign::Minus));
    assert_eq!(exchanged(&plain(&[(1, &[(&t, "ab")])]), 'a', 'b'), None);
    assert_eq!(exchanged(&plain(&[(1, &[(&t, "ai"), (&t, "bi")])]), 'a', 'b'), Some(Sign::Plus));
    assert_eq!(exchanged(&plain(&[(1, &[(&t, "ai"), (&t, "ib")])]), 'a', 'b'), None);
    assert_eq!(exchanged(&Sum::default(), 'a', 'b'), Some(Sign::Plus));
    let at = |level, letter| Slot { label: Label::Free(u32::from(letter)), level };
    let mixed = Monomial::new(vec![s.holding(vec![at(Level::Up, 'a'), at(Level::Down, 'b')])]).unwrap();
    assert_eq!(exchanged(&sum(&[(Rational::ONE, mixed, &[])]), 'a', 'b'), None);
}

#[test]
fn what_has_no_answer_says_why() {
    let t = Kernel::new(3, SlotSymmetry::none(2));
    let huge = Rational::new(i128::MAX, 1).unwrap();
    let term = |coefficient| Term::new(coefficient, monomial(&[(&t, "ab")]), Vec::new()).unwrap();
    let doubled = [term(huge), term(huge)];
    assert_eq!(normal_sum(&doubled, &mut Budget::default()), Err(Unfinished::CoefficientTooLarge));
    assert_eq!(normal_sum(&doubled, &mut Budget::new(10)), Err(Unfinished::OverBudget));
    let with = |bracket| Term::new(Rational::ONE, monomial(&[(&t, "ab")]), vec![bracket]);
    assert_eq!(with(bracket(true, &[(0, 0), (0, 2)])), None);
    assert_eq!(with(bracket(true, &[(0, 0), (0, 0)])), None);
    // All orders of fourteen labels are beyond every budget, and are given up in time.
    let bare = Kernel::new(4, SlotSymmetry::none(14));
    let all: Vec<(usize, usize)> = (0..14).map(|slot| (0, slot)).collect();
    let wide = Term::new(Rational::ONE, monomial(&[(&bare, "abcdefghijklmn")]), vec![bracket(true, &all)]).unwrap();
    assert_eq!(normal_sum(&[wide], &mut Budget::new(200_000)), Err(Unfinished::OverBudget));
}
