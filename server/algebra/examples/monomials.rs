//! Prints random monomials with their normal forms, for comparison with arrays (`tests/references/normal_forms.py`).
//!
//! usage: monomials [SEED [GROUPS]]
//!
//! One JSON object a line is a group of monomials with the same kernels and the same free labels, so that any two
//! can be compared: `kernels` with their `slots`, `generators` (images and sign) and `odd` for anticommuting ones;
//! `monomials`, each with `factors` and `form` (null for zero, else `sign` and `factors`); and `brackets`, each
//! with `factors`, `antisymmetric`, `places` (factor and slot) and `sum`, a list of numerator, denominator and
//! factors. A factor is a kernel's number and a list of slots; a slot is a list of kind (`f`ree, `c`omponent,
//! `d`ummy), number, family and level (`n`, `u`, `d`). The same seed gives the same output.

use std::io::Write as _;
use std::sync::Arc;

use indexwise_algebra::draws::Draws;
use indexwise_algebra::normal_form::{
    Bracket, Budget, Factor, Label, Level, Monomial, Outcome, Parity, Place, Slot, Term, normal_form, normal_sum,
};
use indexwise_algebra::rational::Rational;
use indexwise_algebra::symmetry::{Sign, SignedPermutation, SlotSymmetry};

/// Monomials in a group, beside those made of one of them by its symmetries.
const MONOMIALS: usize = 6;

/// The most slots of a monomial: arrays have as many axes.
const MOST: usize = 6;

/// The most slots of a kernel where labels have levels and families, which make each axis longer.
const MOST_WITH_LEVELS: usize = 3;

fn main() -> std::io::Result<()> {
    let mut arguments = std::env::args().skip(1).map(|argument| argument.parse::<u64>().unwrap_or(1));
    let (seed, groups) = (arguments.next().unwrap_or(1), arguments.next().unwrap_or(100));
    let mut draws = Draws::from_seed(seed);
    let mut output = std::io::stdout().lock();
    for _ in 0..groups {
        if let Some(line) = group(&mut draws) {
            writeln!(output, "{line}")?;
        }
    }
    Ok(())
}

fn number(draws: &mut Draws, bound: usize) -> usize {
    usize::try_from(draws.below(bound as u64)).unwrap_or_default()
}

fn shuffle<T>(items: &mut [T], draws: &mut Draws) {
    for place in (1..items.len()).rev() {
        items.swap(place, number(draws, place + 1));
    }
}

/// A random choice of slots, in order.
fn some(slots: usize, draws: &mut Draws) -> Vec<usize> {
    (0..slots).filter(|_| draws.below(3) > 0).collect()
}

fn random_permutation(slots: usize, draws: &mut Draws) -> Option<SignedPermutation> {
    let mut images: Vec<usize> = (0..slots).collect();
    shuffle(&mut images, draws);
    SignedPermutation::new(&images, if draws.below(2) == 0 { Sign::Plus } else { Sign::Minus })
}

fn symmetry(slots: usize, draws: &mut Draws) -> Option<SlotSymmetry> {
    match draws.below(7) {
        0 => Some(SlotSymmetry::none(slots)),
        1 => SlotSymmetry::symmetric(slots, &some(slots, draws)),
        2 => SlotSymmetry::antisymmetric(slots, &some(slots, draws)),
        3 if slots == 3 => Some(SlotSymmetry::christoffel()),
        3 if slots >= 4 => SlotSymmetry::riemann().embedded(number(draws, slots - 3), slots),
        4 => Some(SlotSymmetry::symmetric(slots, &some(slots, draws))?.and(&symmetry_of_rest(slots, draws)?)),
        _ => SlotSymmetry::new(slots, &[random_permutation(slots, draws)?]),
    }
}

fn symmetry_of_rest(slots: usize, draws: &mut Draws) -> Option<SlotSymmetry> {
    let few: Vec<usize> = some(slots, draws).into_iter().take(2).collect();
    SlotSymmetry::antisymmetric(slots, &few)
}

struct Kernel {
    symmetry: Arc<SlotSymmetry>,
    parity: Parity,
}

/// Kernels, and for each factor which of them it is.
fn kernels(with_levels: bool, draws: &mut Draws) -> Option<(Vec<Kernel>, Vec<usize>)> {
    let most = if with_levels { MOST_WITH_LEVELS } else { MOST };
    let factors = 1 + number(draws, 3);
    let mut kernels = Vec::new();
    let mut chosen: Vec<usize> = Vec::new();
    let mut left = MOST;
    for _ in 0..factors {
        let repeated = chosen.last().copied().filter(|_| draws.below(2) == 0);
        let repeated = repeated
            .filter(|&kernel| kernels.get(kernel).is_some_and(|kernel: &Kernel| kernel.symmetry.slots() <= left));
        let kernel = match repeated {
            Some(kernel) => kernel,
            None if left == 0 => break,
            None => {
                let parity = if draws.below(4) == 0 { Parity::Anticommuting } else { Parity::Commuting };
                let symmetry = Arc::new(symmetry(1 + number(draws, left.min(most)), draws)?);
                kernels.push(Kernel { symmetry, parity });
                kernels.len() - 1
            }
        };
        left -= kernels.get(kernel)?.symmetry.slots();
        chosen.push(kernel);
    }
    Some((kernels, chosen))
}

/// What the slots of all monomials of a group hold, in some order.
fn contents(slots: usize, with_levels: bool, draws: &mut Draws) -> Vec<Slot> {
    let mut held = Vec::new();
    while held.len() < slots {
        let number = u32::try_from(held.len()).unwrap_or_default();
        let level = match draws.below(2) {
            _ if !with_levels => Level::Neutral,
            0 => Level::Up,
            _ => Level::Down,
        };
        match draws.below(8) {
            0..5 if held.len() + 2 <= slots => {
                let kind = if with_levels { draws.below(4) } else { 0 };
                let label = Label::Dummy { family: u16::from(kind == 3), number, movable: kind % 2 == 0 };
                held.extend([Level::Up, Level::Down].map(|level| Slot { label, level }));
            }
            0..7 => held.push(Slot { label: Label::Free(number), level }),
            _ => held.push(Slot { label: Label::Component(u32::from(draws.below(3) == 0)), level }),
        }
    }
    held
}

fn filled(kernels: &[Kernel], chosen: &[usize], held: &[Slot]) -> Option<Monomial> {
    let mut held = held.iter().copied();
    let factor = |&number: &usize| {
        let kernel = kernels.get(number)?;
        let slots = held.by_ref().take(kernel.symmetry.slots()).collect();
        let symmetry = Arc::clone(&kernel.symmetry);
        Some(Factor { kernel: u32::try_from(number).ok()?, slots, parity: kernel.parity, symmetry })
    };
    Monomial::new(chosen.iter().map(factor).collect::<Option<_>>()?).ok()
}

/// The monomial with each factor's labels moved by a random element of its symmetry.
fn moved(monomial: &Monomial, draws: &mut Draws) -> Option<Monomial> {
    let mut factors = monomial.factors().to_vec();
    for factor in &mut factors {
        for _ in 0..draws.below(4) {
            let generators = factor.symmetry.generators();
            if let Some(generator) = generators.get(number(draws, generators.len())) {
                factor.slots = generator.rearranged(&factor.slots);
            }
        }
    }
    shuffle(&mut factors, draws);
    Monomial::new(factors).ok()
}

fn group(draws: &mut Draws) -> Option<String> {
    let with_levels = draws.below(3) == 0;
    let (kernels, chosen) = kernels(with_levels, draws)?;
    let slots = chosen.iter().filter_map(|&kernel| kernels.get(kernel)).map(|kernel| kernel.symmetry.slots()).sum();
    let mut held = contents(slots, with_levels, draws);
    let mut monomials = Vec::new();
    let mut order = chosen.clone();
    for _ in 0..MONOMIALS {
        shuffle(&mut held, draws);
        shuffle(&mut order, draws);
        monomials.push(filled(&kernels, &order, &held)?);
    }
    for place in 0..2 {
        monomials.push(moved(monomials.get(place)?, draws)?);
    }
    let brackets: Option<Vec<String>> =
        monomials.iter().take(2).map(|monomial| bracket_line(monomial, draws)).collect();
    let monomials: Option<Vec<String>> = monomials.iter().map(monomial_line).collect();
    let kernels: Vec<String> = kernels.iter().map(kernel_line).collect();
    let (monomials, brackets) = (monomials?.join(", "), brackets?.join(", "));
    Some(format!("{{\"kernels\": [{}], \"monomials\": [{monomials}], \"brackets\": [{brackets}]}}", kernels.join(", ")))
}

fn listed<T>(items: &[T], shown: impl Fn(&T) -> String) -> String {
    format!("[{}]", items.iter().map(shown).collect::<Vec<_>>().join(", "))
}

fn kernel_line(kernel: &Kernel) -> String {
    let generator = |generator: &SignedPermutation| {
        let images: Vec<usize> = (0..generator.slots()).map(|slot| generator.image(slot)).collect();
        format!("[{images:?}, {}]", sign(generator.sign()))
    };
    let generators = listed(kernel.symmetry.generators(), generator);
    let odd = kernel.parity == Parity::Anticommuting;
    format!("{{\"slots\": {}, \"generators\": {generators}, \"odd\": {odd}}}", kernel.symmetry.slots())
}

fn sign(sign: Sign) -> i32 {
    if sign == Sign::Plus { 1 } else { -1 }
}

fn factors_line(monomial: &Monomial) -> String {
    let slot = |slot: &Slot| {
        let level = match slot.level {
            Level::Neutral => "n",
            Level::Up => "u",
            Level::Down => "d",
        };
        match slot.label {
            Label::Free(number) => format!("[\"f\", {number}, 0, \"{level}\"]"),
            Label::Component(number) => format!("[\"c\", {number}, 0, \"{level}\"]"),
            Label::Dummy { family, number, movable } => {
                format!("[\"d\", {number}, {family}, \"{}\"]", if movable { "n" } else { level })
            }
        }
    };
    listed(monomial.factors(), |factor| format!("[{}, {}]", factor.kernel, listed(&factor.slots, slot)))
}

fn monomial_line(monomial: &Monomial) -> Option<String> {
    let form = match normal_form(monomial, &mut Budget::default()) {
        Outcome::Zero => "null".to_owned(),
        Outcome::Form { sign: own, form } => {
            format!("{{\"sign\": {}, \"factors\": {}}}", sign(own), factors_line(form.monomial()))
        }
        Outcome::OverBudget => return None,
    };
    Some(format!("{{\"factors\": {}, \"form\": {form}}}", factors_line(monomial)))
}

fn bracket_line(monomial: &Monomial, draws: &mut Draws) -> Option<String> {
    let factors = monomial.factors().iter().enumerate();
    let places = |(factor, content): (usize, &Factor)| (0..content.slots.len()).map(move |slot| Place { factor, slot });
    let mut slots: Vec<Place> = factors.flat_map(places).collect();
    shuffle(&mut slots, draws);
    slots.truncate(2 + number(draws, 3));
    let bracket = Bracket { antisymmetric: draws.below(2) == 0, slots };
    let named = listed(&bracket.slots, |place| format!("[{}, {}]", place.factor, place.slot));
    let antisymmetric = bracket.antisymmetric;
    let term = Term::new(Rational::ONE, monomial.clone(), vec![bracket])?;
    let sum = normal_sum(&[term], &mut Budget::default()).ok()?;
    let terms: Vec<String> = sum
        .terms()
        .map(|(form, coefficient)| {
            let (above, below) = (coefficient.numerator(), coefficient.denominator());
            format!("[{above}, {below}, {}]", factors_line(form.monomial()))
        })
        .collect();
    Some(format!(
        "{{\"factors\": {}, \"antisymmetric\": {antisymmetric}, \"places\": {named}, \"sum\": [{}]}}",
        factors_line(monomial),
        terms.join(", ")
    ))
}
