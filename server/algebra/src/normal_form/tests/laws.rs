//! What must not change a normal form, and what equal normal forms promise.

use std::collections::BTreeMap;

use super::*;
use crate::draws::Draws;
use crate::symmetry::SignedPermutation;

/// How many random monomials a law is tried on.
const TRIES: usize = 1500;

fn kernels() -> Vec<Kernel> {
    let mixed = SlotSymmetry::symmetric(4, &[0, 2]).unwrap().and(&SlotSymmetry::antisymmetric(4, &[1, 3]).unwrap());
    vec![
        Kernel::riemann(),
        Kernel::symmetric(1, 2),
        Kernel::antisymmetric(2, 3),
        Kernel::new(3, SlotSymmetry::christoffel()),
        Kernel::new(4, SlotSymmetry::none(1)),
        Kernel::odd(5, 1),
        Kernel { parity: Parity::Anticommuting, ..Kernel::antisymmetric(6, 2) },
        Kernel::new(7, mixed),
        Kernel::new(8, SlotSymmetry::none(2)),
    ]
}

fn shuffled<T>(mut items: Vec<T>, draws: &mut Draws) -> Vec<T> {
    for place in (1..items.len()).rev() {
        items.swap(place, draws.below(place as u64 + 1) as usize);
    }
    items
}

/// Labels for so many slots: dummies of two families, movable and not, free labels and components.
fn draw_slots(slots: usize, draws: &mut Draws) -> Vec<Slot> {
    let mut held = Vec::new();
    while held.len() < slots {
        let number = held.len() as u32;
        let level = [Level::Up, Level::Down][draws.below(2) as usize];
        let kind = draws.below(8);
        if kind < 5 && held.len() + 2 <= slots {
            let label = Label::Dummy { family: u16::from(kind == 4), number, movable: kind != 3 };
            held.extend([Level::Up, Level::Down].map(|level| Slot { label, level }));
        } else if kind < 7 {
            held.push(Slot { label: Label::Free(number), level });
        } else {
            held.push(Slot { label: Label::Component(draws.below(2) as u32), level });
        }
    }
    shuffled(held, draws)
}

pub(super) fn draw_monomial(draws: &mut Draws, most_factors: u64) -> Monomial {
    let kernels = kernels();
    let pool = 1 + draws.below(2);
    let first = draws.below(kernels.len() as u64);
    let chosen: Vec<&Kernel> = (0..1 + draws.below(most_factors))
        .map(|_| &kernels[((first + draws.below(pool)) % kernels.len() as u64) as usize])
        .collect();
    let slots: usize = chosen.iter().map(|kernel| kernel.symmetry.slots()).sum();
    let mut held = draw_slots(slots, draws).into_iter();
    let factors = chosen.iter().map(|kernel| kernel.holding(held.by_ref().take(kernel.symmetry.slots()).collect()));
    Monomial::new(factors.collect()).unwrap()
}

/// The same value up to the sign returned, by all means at once: symmetries of the slots, another order of the
/// factors, other names of the dummies, other levels of movable ends.
fn scrambled(monomial: &Monomial, draws: &mut Draws) -> (Monomial, Sign) {
    let mut sign = Sign::Plus;
    let mut factors = monomial.factors().to_vec();
    for factor in &mut factors {
        let generators = factor.symmetry.generators().to_vec();
        for _ in 0..draws.below(6) {
            if !generators.is_empty() {
                let generator = &generators[draws.below(generators.len() as u64) as usize];
                factor.slots = generator.rearranged(&factor.slots);
                sign *= generator.sign();
            }
        }
    }
    for _ in 0..draws.below(6) {
        let place = draws.below(factors.len() as u64) as usize;
        if place > 0 {
            let odd = |place: usize| factors[place].parity == Parity::Anticommuting;
            sign *= if odd(place) && odd(place - 1) { Sign::Minus } else { Sign::Plus };
            factors.swap(place, place - 1);
        }
    }
    let offset = draws.below(100) as u32;
    for slot in factors.iter_mut().flat_map(|factor| &mut factor.slots) {
        if let Label::Dummy { number, movable, .. } = &mut slot.label {
            *number = offset + 50 - *number;
            if *movable {
                slot.level = [Level::Up, Level::Down, Level::Neutral][draws.below(3) as usize];
            }
        }
    }
    (Monomial::new(factors).unwrap(), sign)
}

#[test]
fn scrambling_changes_the_sign_alone() {
    let mut draws = Draws::from_seed(31);
    let mut zeros = 0;
    for _ in 0..TRIES {
        let monomial = draw_monomial(&mut draws, 4);
        let (other, between) = scrambled(&monomial, &mut draws);
        match (form(&monomial), form(&other)) {
            (None, None) => zeros += 1,
            (Some((sign, one)), Some((opposite, another))) => {
                assert_eq!(one, another, "{monomial:?}");
                assert_eq!(sign, opposite * between, "{monomial:?}");
            }
            (one, another) => panic!("{one:?} {another:?}"),
        }
    }
    assert!((TRIES / 20..TRIES / 2).contains(&zeros), "{zeros}");
}

#[test]
fn a_normal_form_is_its_own() {
    let mut draws = Draws::from_seed(32);
    for _ in 0..TRIES {
        if let Some((_, once)) = form(&draw_monomial(&mut draws, 4)) {
            assert_eq!(form(once.monomial()), Some((Sign::Plus, once.clone())));
            assert!(Monomial::new(once.monomial().factors().to_vec()).is_ok());
        }
    }
}

/// Component values of kernels with their symmetries, modulo 2^64: a random function of kernel and indices, summed
/// over the group with signs.
struct Values {
    seed: u64,
    groups: BTreeMap<u32, Vec<SignedPermutation>>,
}

impl Values {
    fn new(seed: u64) -> Self {
        let closure = |symmetry: &SlotSymmetry| {
            let mut elements = vec![SignedPermutation::identity(symmetry.slots())];
            let mut next = 0;
            while let Some(element) = elements.get(next).cloned() {
                for product in symmetry.generators().iter().map(|generator| generator.after(&element)) {
                    if !elements.contains(&product) {
                        elements.push(product);
                    }
                }
                next += 1;
            }
            elements
        };
        Self { seed, groups: kernels().iter().map(|kernel| (kernel.number, closure(&kernel.symmetry))).collect() }
    }

    fn of(&self, kernel: u32, indices: &[u64]) -> u64 {
        let raw = |indices: Vec<u64>| {
            let key = indices.iter().fold(u64::from(kernel), |key, &index| key * 1009 + index + 1);
            Draws::from_seed(self.seed ^ key.wrapping_mul(0x5851_F42D_4C95_7F2D)).bits()
        };
        self.groups[&kernel].iter().fold(0, |sum: u64, element| {
            let value = raw(element.rearranged(indices));
            if element.sign() == Sign::Plus { sum.wrapping_add(value) } else { sum.wrapping_sub(value) }
        })
    }
}

/// An index value tells level and, in the units, the number: free labels and components have each a value of
/// their own here, movable dummies run over neutral values, others over values on their level.
fn value(monomial: &Monomial, values: &Values, dimension: u64) -> u64 {
    let dummies: Vec<Label> = {
        let mut labels: Vec<Label> = monomial.slots().map(|slot| slot.label).collect();
        labels.retain(|label| matches!(label, Label::Dummy { .. }));
        labels.sort();
        labels.dedup();
        labels
    };
    let level = |slot: &Slot| slot.level as u64 * 100;
    let mut total: u64 = 0;
    for assignment in 0..dimension.pow(dummies.len() as u32) {
        let index = |slot: &Slot| match slot.label {
            Label::Free(number) => level(slot) + 20 + u64::from(number) % 70,
            Label::Component(number) => level(slot) + u64::from(number),
            Label::Dummy { family, movable, .. } => {
                let place = dummies.iter().position(|label| *label == slot.label).unwrap() as u32;
                let digit = assignment / dimension.pow(place) % dimension;
                digit + u64::from(family) * 1000 + if movable { 0 } else { level(slot) }
            }
        };
        let mut product: u64 = 1;
        for factor in monomial.factors() {
            let indices: Vec<u64> = factor.slots.iter().map(index).collect();
            product = product.wrapping_mul(values.of(factor.kernel, &indices));
        }
        total = total.wrapping_add(product);
    }
    total
}

#[test]
fn equal_forms_have_equal_values() {
    let mut draws = Draws::from_seed(33);
    let values = Values::new(7);
    let mut compared = 0;
    while compared < 150 {
        let monomial = draw_monomial(&mut draws, 3);
        // Numbers commute: what anticommutes is compared with arrays in tests/references/normal_forms.py.
        let odd = monomial.factors().iter().any(|factor| factor.parity == Parity::Anticommuting);
        if odd || monomial.slots().count() > 8 {
            continue;
        }
        compared += 1;
        let own = value(&monomial, &values, 2);
        match form(&monomial) {
            None => assert_eq!(own, 0, "{monomial:?}"),
            Some((Sign::Plus, form)) => assert_eq!(own, value(form.monomial(), &values, 2), "{monomial:?}"),
            Some((Sign::Minus, form)) => {
                assert_eq!(own, value(form.monomial(), &values, 2).wrapping_neg(), "{monomial:?}")
            }
        }
    }
}

#[test]
fn levels_and_families_tell_labels_apart() {
    let kernel = Kernel::new(0, SlotSymmetry::none(1));
    let other = Kernel::new(1, SlotSymmetry::none(1));
    let pair = |family, movable, levels: [Level; 2]| {
        let label = Label::Dummy { family, number: 0, movable };
        let [one, two] = levels.map(|level| vec![Slot { label, level }]);
        form(&Monomial::new(vec![kernel.holding(one), other.holding(two)]).unwrap())
    };
    let (up_down, down_up) = ([Level::Up, Level::Down], [Level::Down, Level::Up]);
    assert_eq!(pair(0, true, up_down), pair(0, true, down_up));
    assert_ne!(pair(0, false, up_down), pair(0, false, down_up));
    assert_ne!(pair(0, true, up_down), pair(1, true, up_down));
    assert_ne!(pair(0, true, up_down), pair(0, false, up_down));
    let free = |level| form(&Monomial::new(vec![kernel.holding(vec![Slot { label: Label::Free(0), level }])]).unwrap());
    assert_ne!(free(Level::Up), free(Level::Down));
}

#[test]
fn what_is_no_monomial_is_refused() {
    let kernel = Kernel::new(0, SlotSymmetry::none(2));
    let slot = |label| Slot { label, level: Level::Neutral };
    let (free, dummy) = (Label::Free(0), Label::Dummy { family: 0, number: 0, movable: true });
    let made = |labels: &[Label]| Monomial::new(vec![kernel.holding(labels.iter().copied().map(slot).collect())]);
    assert_eq!(made(&[free]), Err(Malformed::SlotCount(0)));
    assert_eq!(made(&[free, free]), Err(Malformed::Repetition(free)));
    assert_eq!(made(&[free, dummy]), Err(Malformed::Repetition(dummy)));
    let many = |count| Monomial::new(vec![kernel.holding(vec![slot(Label::Component(0)); 2]); count]);
    assert!(many(MONOMIAL_SLOTS / 2).is_ok());
    assert_eq!(many(MONOMIAL_SLOTS / 2 + 1), Err(Malformed::TooManySlots));
}
