//! The search for the least word of a double coset `S w D`.
//!
//! A word is read slot by slot into `Code`s in which dummies are numbered as they come: that is the least word of
//! its coset under renaming, and its first codes depend on its first slots alone. So the search goes down the
//! stabiliser chain of `S`, a slot at a time, and keeps the arrangements (`State`) whose codes so far are least;
//! among these, those whose `Colours` are least, which is a choice that no symmetry or renaming can influence.
//!
//! Symmetric monomials leave many arrangements in a tie. Each is completed greedily; two that complete to the
//! same word are images of each other, and one of them is enough. If the signs differ, the monomial is zero. That
//! merging is what keeps the search short where the double coset is huge; where it fails, the budget ends it.

use std::collections::BTreeMap;

use super::Outcome;
use super::budget::{Budget, Unfinished};
use super::colours::Colours;
use super::content::{Code, Content};
use super::group::{Group, Motion};
use super::monomial::{Canonical, Factor, Monomial, Parity, Slot};
use super::state::State;
use crate::symmetry::Sign;

/// Steps for each slot of an arrangement that is kept, so that the budget bounds the memory too: a slot of an
/// arrangement takes some 16 bytes.
const STATE_PRICE: usize = 8;

/// Steps for making a form legible that colours have chosen.
const LEGIBLE_BUDGET: u64 = 300_000;

/// The group by levels, with the orbitals of those levels that were asked for.
struct Levels<'a> {
    steps: Vec<Vec<(usize, Motion<'a>)>>,
    orbitals: Vec<Option<Vec<u32>>>,
    group: &'a Group<'a>,
}

impl<'a> Levels<'a> {
    fn new(group: &'a Group<'a>) -> Self {
        let steps: Vec<_> = (0..group.slots()).map(|base| group.steps(base)).collect();
        Self { orbitals: vec![None; steps.len() + 1], steps, group }
    }

    fn steps(&self, base: usize) -> &[(usize, Motion<'a>)] {
        self.steps.get(base).map_or(&[], |steps| steps)
    }

    fn orbitals(&mut self, base: usize, budget: &mut Budget) -> Result<&[u32], Unfinished> {
        let Some(place) = self.orbitals.get_mut(base) else { return Ok(&[]) };
        if place.is_none() {
            budget.spend(self.group.slots() * self.group.slots())?;
        }
        Ok(place.get_or_insert_with(|| self.group.orbitals(base)))
    }
}

/// What a search works on.
struct Search<'a, 'b> {
    content: Content,
    levels: Levels<'a>,
    budget: &'b mut Budget,
}

impl Search<'_, '_> {
    /// All arrangements that the states lead to and whose code at `base` is least, and that code.
    fn least(&mut self, states: &[State], base: usize) -> Result<(Option<Code>, Vec<State>), Unfinished> {
        let mut best = None;
        let mut found = Vec::new();
        for state in states {
            self.budget.spend(self.levels.steps(base).len() + self.content.slots())?;
            for (slot, motion) in self.levels.steps(base) {
                let code = state.code(&self.content, *slot);
                if best.is_none_or(|best| code < best) {
                    best = Some(code);
                    found.clear();
                }
                if best == Some(code) {
                    self.budget.spend(self.content.slots() * STATE_PRICE)?;
                    found.push(state.moved(&self.content, base, motion));
                }
            }
        }
        Ok((best, found))
    }

    /// The colours of an arrangement whose slots before `base` are settled.
    fn coloured(&mut self, state: &State, base: usize) -> Result<Colours, Unfinished> {
        let colours = state.colours(&self.content, self.levels.orbitals(base, self.budget)?);
        self.budget.spend(colours.cost)?;
        Ok(colours)
    }

    /// Leaves those arrangements whose colours are least in sum. The slots before `base` are settled.
    fn least_coloured(&mut self, mut states: Vec<State>, base: usize) -> Result<Vec<State>, Unfinished> {
        if states.len() < 2 {
            return Ok(states);
        }
        let mut summaries = Vec::new();
        for state in &states {
            summaries.push(self.coloured(state, base)?.summary);
        }
        let least = summaries.iter().min().copied();
        let mut summaries = summaries.into_iter();
        states.retain(|_| summaries.next() == least);
        Ok(states)
    }

    /// Leaves one of all arrangements that are found to be images of each other; nothing if two of them have
    /// opposite signs. The slots before `base` are settled.
    fn merged(&mut self, states: Vec<State>, base: usize) -> Result<Option<Vec<State>>, Unfinished> {
        if states.len() < 2 {
            return Ok(Some(states));
        }
        let mut kept = Vec::new();
        let mut signs: BTreeMap<Vec<Code>, Sign> = BTreeMap::new();
        for state in states {
            let (codes, sign) = self.completed(state.clone(), base)?;
            match signs.get(&codes) {
                Some(known) if *known != sign => return Ok(None),
                Some(_) => {}
                None => {
                    signs.insert(codes, sign);
                    kept.push(state);
                }
            }
        }
        Ok(Some(kept))
    }

    /// The codes from `base` on, if in each tie the slot of the least colour is taken; and the sign.
    fn completed(&mut self, mut state: State, base: usize) -> Result<(Vec<Code>, Sign), Unfinished> {
        let mut codes = Vec::new();
        let mut colours: Option<Colours> = None;
        for base in base..self.content.slots() {
            self.budget.spend(self.levels.steps(base).len() + self.content.slots())?;
            let code = |(slot, _): &(usize, Motion)| state.code(&self.content, *slot);
            let Some(best) = self.levels.steps(base).iter().map(code).min() else { continue };
            let ties: Vec<_> = self.levels.steps(base).iter().filter(|step| code(step) == best).copied().collect();
            if ties.len() > 1 {
                colours = Some(self.coloured(&state, base)?);
            }
            let colour = |slot: usize| colours.as_ref().and_then(|colours| colours.of_slots.get(slot)).copied();
            let Some((_, motion)) = ties.iter().min_by_key(|(slot, _)| colour(*slot)) else { continue };
            state = state.moved(&self.content, base, motion);
            codes.push(best);
        }
        Ok((codes, state.sign))
    }
}

/// The factors sorted by kind, and the sign that sorting anticommuting ones costs.
fn sorted(factors: &[Factor]) -> (Vec<Factor>, Sign) {
    let mut sign = Sign::Plus;
    let odd: Vec<&Factor> = factors.iter().filter(|factor| factor.parity == Parity::Anticommuting).collect();
    for (place, later) in odd.iter().enumerate() {
        for earlier in odd.iter().take(place) {
            if earlier.kind() > later.kind() {
                sign *= Sign::Minus;
            }
        }
    }
    let mut sorted = factors.to_vec();
    sorted.sort_by(|one, other| one.kind().cmp(&other.kind()));
    (sorted, sign)
}

/// See `normal_form`.
pub(super) fn normal_form(monomial: &Monomial, budget: &mut Budget) -> Result<Outcome, Unfinished> {
    let (factors, mut sign) = sorted(monomial.factors());
    let Some(word) = least_word(&factors, Choice::ByColour, budget)? else { return Ok(Outcome::Zero) };
    sign *= word.sign;
    let mut factors = word.factors;
    if word.colours_chose {
        // Begins from a form that is the same for all equal monomials, with a purse of its own: so the outcome is
        // the same for all of them too, whether the purse lasts or not.
        let mut purse = Budget::new(LEGIBLE_BUDGET);
        let legible = least_word(&factors, Choice::ByCode, &mut purse);
        budget.spend(LEGIBLE_BUDGET.saturating_sub(purse.left()) as usize)?;
        if let Ok(Some(legible)) = legible {
            sign *= legible.sign;
            factors = legible.factors;
        }
    }
    Ok(Outcome::Form { sign, form: Canonical::new(Monomial::trusted(factors)) })
}

/// How arrangements in a tie are chosen from.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Choice {
    /// Those of the least colours alone are pursued: fast, but the word is least in an order that looks random.
    ByColour,
    /// All are pursued: the word is the least by its codes, as a reader would choose it.
    ByCode,
}

/// The least word of a double coset.
struct Word {
    /// The factors, filled by it.
    factors: Vec<Factor>,
    sign: Sign,
    /// Whether arrangements were dropped for their colours.
    colours_chose: bool,
}

/// The least word for sorted factors; nothing if it is reached with both signs.
fn least_word(factors: &[Factor], choice: Choice, budget: &mut Budget) -> Result<Option<Word>, Unfinished> {
    let slots: Vec<Slot> = factors.iter().flat_map(|factor| factor.slots.iter().copied()).collect();
    let content = Content::new(&slots);
    let group = Group::new(factors);
    if group.vanishes() {
        return Ok(None);
    }
    let mut states = vec![State::new(slots.len(), content.dummies)];
    let mut search = Search { content, levels: Levels::new(&group), budget };
    let mut codes = Vec::new();
    let mut colours_chose = false;
    for base in 0..slots.len() {
        let (code, mut found) = search.least(&states, base)?;
        codes.extend(code);
        if choice == Choice::ByColour {
            let all = found.len();
            found = search.least_coloured(found, base + 1)?;
            colours_chose |= found.len() < all;
        }
        match search.merged(found, base + 1)? {
            Some(kept) => states = kept,
            None => return Ok(None),
        }
    }
    let Some(sign) = states.first().map(|state| state.sign) else { return Ok(None) };
    Ok(Some(Word { factors: refilled(factors, search.content.filled(&codes)), sign, colours_chose }))
}

fn refilled(factors: &[Factor], slots: Vec<Slot>) -> Vec<Factor> {
    let mut slots = slots.into_iter();
    let refill =
        |factor: &Factor| Factor { slots: slots.by_ref().take(factor.slots.len()).collect(), ..factor.clone() };
    factors.iter().map(refill).collect()
}
