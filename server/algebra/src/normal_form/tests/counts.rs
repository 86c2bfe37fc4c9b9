//! Numbers of independent things, known from elsewhere.

use std::collections::{BTreeMap, BTreeSet};

use super::*;
use crate::rational::Rational;

fn components(dimension: u32) -> Vec<Monomial> {
    let riemann = Kernel::riemann();
    let digits = |number: u32| (0..4).map(move |place| number / dimension.pow(place) % dimension);
    let text = |number| digits(number).filter_map(|digit| char::from_digit(digit, 10)).collect::<String>();
    (0..dimension.pow(4)).map(|number| monomial(&[(&riemann, &text(number))])).collect()
}

/// The rank of rows over the fractions.
fn rank(mut rows: Vec<Vec<Rational>>) -> usize {
    let columns = rows.first().map_or(0, Vec::len);
    let mut rank = 0;
    for column in 0..columns {
        let Some(pivot) = (rank..rows.len()).find(|&row| rows[row][column] != Rational::ZERO) else { continue };
        rows.swap(rank, pivot);
        let pivot_row = rows[rank].clone();
        for row in rows.iter_mut().skip(rank + 1) {
            let times = row[column].checked_div(pivot_row[column]).unwrap();
            for (entry, above) in row.iter_mut().zip(&pivot_row) {
                *entry = entry.checked_sub(above.checked_mul(times).unwrap()).unwrap();
            }
        }
        rank += 1;
    }
    rank
}

/// Independent components of a tensor with the symmetries of the Riemann tensor: without the cyclic identity
/// `m(m+1)/2` with `m = n(n-1)/2`; with it `n^2(n^2-1)/12`. Source: Misner, Thorne and Wheeler, "Gravitation"
/// (1973), chapter 13 (from memory).
#[test]
fn the_riemann_tensor_has_the_known_number_of_components() {
    for (dimension, without, with) in [(2, 1, 1), (3, 6, 6), (4, 21, 20)] {
        let all = components(dimension);
        let forms: BTreeSet<Canonical> = all.iter().filter_map(form).map(|(_, form)| form).collect();
        assert_eq!(forms.len(), without);
        let places: BTreeMap<&Canonical, usize> = forms.iter().zip(0..).collect();
        let cyclic = |component: &Monomial| {
            let mut row = vec![Rational::ZERO; forms.len()];
            for images in [[0, 1, 2, 3], [0, 2, 3, 1], [0, 3, 1, 2]] {
                let slots = &component.factors()[0].slots;
                let turned = Kernel::riemann().holding(images.map(|place| slots[place]).to_vec());
                if let Some((sign, form)) = form(&Monomial::new(vec![turned]).unwrap()) {
                    let entry = &mut row[places[&form]];
                    let one = if sign == Sign::Plus { Rational::ONE } else { -Rational::ONE };
                    *entry = entry.checked_add(one).unwrap();
                }
            }
            row
        };
        assert_eq!(forms.len() - rank(all.iter().map(cyclic).collect()), with, "dimension {dimension}");
    }
}

/// All ways to contract so many slots in pairs, each as a letter for every slot.
fn pairings(slots: usize) -> Vec<String> {
    let mut found = vec![vec![' '; slots]];
    for letter in ('a'..).take(slots / 2) {
        let mut longer = Vec::new();
        for pairing in found {
            let open: Vec<usize> = (0..slots).filter(|&slot| pairing[slot] == ' ').collect();
            for &other in &open[1..] {
                let mut next = pairing.clone();
                (next[open[0]], next[other]) = (letter, letter);
                longer.push(next);
            }
        }
        found = longer;
    }
    found.into_iter().map(String::from_iter).collect()
}

fn scalars(kernel: &Kernel, factors: usize) -> BTreeSet<Canonical> {
    let each = kernel.symmetry.slots();
    let contracted = |letters: &String| {
        let parts = (0..factors).map(|factor| (kernel, &letters[factor * each..][..each]));
        form(&monomial(&parts.collect::<Vec<_>>())).map(|(_, form)| form)
    };
    if factors * each % 2 == 1 {
        return BTreeSet::new();
    }
    pairings(factors * each).iter().filter_map(contracted).collect()
}

/// One scalar is linear in the Riemann tensor; four are quadratic if the cyclic identity is not used (with it
/// the last is half of the third). The list is from memory; that it is complete is what the enumeration of all
/// 3 and 105 pairings shows.
#[test]
fn scalars_of_the_riemann_tensor_are_the_known_ones() {
    let riemann = Kernel::riemann();
    let listed = |products: &[&[&str]]| -> BTreeSet<Canonical> {
        let one = |parts: &&[&str]| monomial(&parts.iter().map(|letters| (&riemann, *letters)).collect::<Vec<_>>());
        products.iter().map(one).map(|monomial| form(&monomial).unwrap().1).collect()
    };
    assert_eq!(pairings(4).len(), 3);
    assert_eq!(scalars(&riemann, 1), listed(&[&["abab"]]));
    assert_eq!(pairings(8).len(), 105);
    let quadratic = listed(&[&["abab", "cdcd"], &["acbc", "adbd"], &["abcd", "abcd"], &["abcd", "acbd"]]);
    assert_eq!(quadratic.len(), 4);
    assert_eq!(scalars(&riemann, 2), quadratic);
}

/// Scalars of `m` symmetric matrices are products of traces of powers, one for each partition of `m`; of
/// antisymmetric ones the traces of odd powers vanish, which leaves the partitions into even parts. Scalars of
/// totally symmetric tensors of rank `r` are multigraphs with loops in which every point has degree `r`: counted
/// by hand for two points.
#[test]
fn scalars_of_symmetric_tensors_are_counted_like_partitions_and_graphs() {
    let counts = |kernel: &Kernel, most: usize| (1..=most).map(|m| scalars(kernel, m).len()).collect::<Vec<_>>();
    assert_eq!(counts(&Kernel::symmetric(1, 2), 5), [1, 2, 3, 5, 7]);
    assert_eq!(counts(&Kernel::antisymmetric(1, 2), 5), [0, 1, 0, 2, 0]);
    assert_eq!(counts(&Kernel::symmetric(1, 3), 2), [0, 2]);
    assert_eq!(counts(&Kernel::symmetric(1, 4), 2), [1, 3]);
}

/// Monomials with large symmetries stay within the budget: graphs on which arrangements are hard to tell apart,
/// and the largest symmetric kernels.
#[test]
fn symmetric_monomials_do_not_run_away() {
    let points = |kernel: &Kernel, edges: &[(usize, usize)], count: usize| {
        let mut ends = vec![Vec::new(); count];
        for (&(one, other), number) in edges.iter().zip(0..) {
            for point in [one, other] {
                let label = Label::Dummy { family: 0, number, movable: true };
                ends[point].push(Slot { label, level: Level::Neutral });
            }
        }
        Monomial::new(ends.into_iter().map(|slots| kernel.holding(slots)).collect()).unwrap()
    };
    let ring = |count: usize, step: usize| (0..count).map(move |point| (point, (point + step) % count));
    let petersen: Vec<_> = (ring(5, 1).chain((0..5).map(|point| (point, point + 5))))
        .chain(ring(5, 2).map(|(a, b)| (a + 5, b + 5)))
        .collect();
    let prism: Vec<_> = (ring(5, 1).chain((0..5).map(|point| (point, point + 5))))
        .chain(ring(5, 1).map(|(a, b)| (a + 5, b + 5)))
        .collect();
    let cubic = Kernel::symmetric(1, 3);
    let (one, other) = (form(&points(&cubic, &petersen, 10)), form(&points(&cubic, &prism, 10)));
    assert!(one.is_some() && other.is_some() && one != other);
    let all: Vec<(usize, usize)> = (0..6).flat_map(|a| (0..a).map(move |b| (a, b))).collect();
    assert!(form(&points(&Kernel::symmetric(1, 5), &all, 6)).is_some());
    let letters = "abcdefghijkl";
    let pair = (Kernel::symmetric(1, 12), Kernel::symmetric(2, 12));
    assert!(form(&monomial(&[(&pair.0, letters), (&pair.1, letters)])).is_some());
    let mixed = (Kernel::symmetric(1, 12), Kernel::antisymmetric(2, 12));
    assert!(form(&monomial(&[(&mixed.0, letters), (&mixed.1, letters)])).is_none());
    let vector = Kernel::new(1, SlotSymmetry::none(1));
    let mut factors: Vec<(&Kernel, String)> = letters.chars().map(|letter| (&vector, letter.to_string())).collect();
    let bare = Kernel::new(2, SlotSymmetry::none(12));
    factors.push((&bare, letters.into()));
    let factors: Vec<(&Kernel, &str)> = factors.iter().map(|(kernel, letters)| (*kernel, letters.as_str())).collect();
    assert!(form(&monomial(&factors)).is_some());
}

#[test]
fn a_small_budget_ends_the_search() {
    let riemann = Kernel::riemann();
    let monomial = monomial(&[(&riemann, "abcd"), (&riemann, "abcd")]);
    let mut budget = Budget::new(100);
    assert_eq!(normal_form(&monomial, &mut budget), Outcome::OverBudget);
    assert_eq!(budget.left(), 0);
}
