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
use super::colours::{self, Colours};
use super::group::{Group, Motion};
use super::monomial::{Canonical, Factor, Label, Level, Monomial, Parity, Slot};
use crate::symmetry::Sign;

/// Steps for each slot of an arrangement that is kept. With it a budget of some ten million steps holds less than
/// a hundred megabytes.
const STATE_PRICE: usize = 8;

/// Steps for making a form legible that colours have chosen.
const LEGIBLE_BUDGET: u64 = 300_000;

/// What a slot holds, read in order. Free labels and components come first, then dummies that stand before.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Code {
    /// A free label or a component, by its rank in `Content::fixed`.
    Fixed(usize),
    /// A dummy, by the order of first places, and its rank in `Content::kinds`.
    Dummy { number: usize, kind: usize },
}

/// What no renaming changes in a dummy's end; a movable one has no level.
type Kind = (u16, bool, Level);

/// One end of a label, named by the slot in which it stood at first.
#[derive(Clone, Copy, Debug)]
enum End {
    Fixed(usize),
    Dummy { dummy: usize, kind: usize, partner: usize },
}

/// The labels of the monomial.
struct Content {
    ends: Vec<End>,
    dummies: usize,
    fixed: Vec<Slot>,
    kinds: Vec<Kind>,
}

fn kind(slot: &Slot) -> Option<Kind> {
    match slot.label {
        Label::Dummy { family, movable: true, .. } => Some((family, true, Level::Neutral)),
        Label::Dummy { family, movable: false, .. } => Some((family, false, slot.level)),
        Label::Free(_) | Label::Component(_) => None,
    }
}

impl Content {
    fn new(slots: &[Slot]) -> Self {
        let mut kinds: Vec<Kind> = slots.iter().filter_map(kind).collect();
        let mut fixed: Vec<Slot> = slots.iter().filter(|slot| kind(slot).is_none()).copied().collect();
        kinds.sort_unstable();
        kinds.dedup();
        fixed.sort_unstable();
        fixed.dedup();
        let mut places: BTreeMap<Label, (usize, Vec<usize>)> = BTreeMap::new();
        for (place, slot) in slots.iter().enumerate().filter(|(_, slot)| kind(slot).is_some()) {
            let dummy = places.len();
            places.entry(slot.label).or_insert((dummy, Vec::new())).1.push(place);
        }
        let end = |(place, slot): (usize, &Slot)| {
            let Some(own) = kind(slot) else { return End::Fixed(rank(&fixed, slot)) };
            let (dummy, ends) = places.get(&slot.label).map_or((0, &[][..]), |(dummy, ends)| (*dummy, &ends[..]));
            let partner = ends.iter().copied().find(|&other| other != place).unwrap_or(place);
            End::Dummy { dummy, kind: rank(&kinds, &own), partner }
        };
        Self { ends: slots.iter().enumerate().map(end).collect(), dummies: places.len(), fixed, kinds }
    }

    fn end(&self, end: usize) -> End {
        self.ends.get(end).copied().unwrap_or(End::Fixed(0))
    }

    /// The slots that a word's codes stand for; dummies are numbered from 0 in each family.
    fn slots(&self, codes: &[Code]) -> Vec<Slot> {
        let mut numbers = BTreeMap::new();
        let mut counts = BTreeMap::new();
        let mut slots = Vec::new();
        for code in codes {
            match *code {
                Code::Fixed(rank) => slots.extend(self.fixed.get(rank)),
                Code::Dummy { number, kind } => {
                    let Some(&(family, movable, level)) = self.kinds.get(kind) else { continue };
                    let number = *numbers.entry(number).or_insert_with(|| {
                        let count = counts.entry(family).or_insert(0);
                        *count += 1;
                        *count - 1
                    });
                    slots.push(Slot { label: Label::Dummy { family, number, movable }, level });
                }
            }
        }
        slots
    }
}

fn rank<T: Ord>(sorted: &[T], item: &T) -> usize {
    sorted.partition_point(|other| other < item)
}

/// An arrangement: the word that an element of `S` makes of the monomial, with its sign.
#[derive(Clone)]
struct State {
    /// The end that stands in each slot.
    word: Vec<usize>,
    /// The numbers of the dummies that stand in the slots settled so far.
    numbers: Vec<Option<usize>>,
    settled_dummies: usize,
    sign: Sign,
}

impl State {
    /// The word as it is given, nothing settled.
    fn new(slots: usize, dummies: usize) -> Self {
        Self { word: (0..slots).collect(), numbers: vec![None; dummies], settled_dummies: 0, sign: Sign::Plus }
    }

    /// How the end that stands in a slot would be read if it came next.
    fn code(&self, content: &Content, slot: usize) -> Code {
        match self.word.get(slot).map_or(End::Fixed(0), |&end| content.end(end)) {
            End::Fixed(rank) => Code::Fixed(rank),
            End::Dummy { dummy, kind, .. } => {
                let number = self.numbers.get(dummy).copied().flatten().unwrap_or(self.settled_dummies);
                Code::Dummy { number, kind }
            }
        }
    }

    /// The word moved, and the slot `base` settled.
    fn moved(&self, content: &Content, base: usize, motion: &Motion) -> Self {
        let word: Vec<usize> =
            (0..self.word.len()).filter_map(|slot| self.word.get(motion.image(slot)).copied()).collect();
        let mut state = Self { word, sign: self.sign * motion.sign(), ..self.clone() };
        if let Some(End::Dummy { dummy, .. }) = state.word.get(base).map(|&end| content.end(end))
            && let Some(number) = state.numbers.get_mut(dummy).filter(|number| number.is_none())
        {
            *number = Some(state.settled_dummies);
            state.settled_dummies += 1;
        }
        state
    }

    fn colours(&self, content: &Content, orbitals: &[u32]) -> Colours {
        let mut slot_of = vec![0; self.word.len()];
        for (slot, &end) in self.word.iter().enumerate() {
            if let Some(place) = slot_of.get_mut(end) {
                *place = slot;
            }
        }
        let colour = |&end: &usize| match content.end(end) {
            End::Fixed(rank) => colours::mixed(0, rank as u64),
            End::Dummy { dummy, kind, .. } => {
                let number = self.numbers.get(dummy).copied().flatten().map_or(0, |number| number as u64 + 1);
                colours::mixed(number + 1, kind as u64)
            }
        };
        let partner = |&end: &usize| match content.end(end) {
            End::Fixed(_) => None,
            End::Dummy { partner, .. } => slot_of.get(partner).copied(),
        };
        let contents: Vec<u64> = self.word.iter().map(colour).collect();
        let partners: Vec<Option<usize>> = self.word.iter().map(partner).collect();
        colours::refine(&contents, &partners, orbitals)
    }
}

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

/// The colours of an arrangement under the subgroup that fixes the slots before `base`.
fn coloured(
    state: &State,
    base: usize,
    content: &Content,
    levels: &mut Levels,
    budget: &mut Budget,
) -> Result<Colours, Unfinished> {
    let colours = state.colours(content, levels.orbitals(base, budget)?);
    budget.spend(colours.cost)?;
    Ok(colours)
}

/// All arrangements that the states lead to and whose code at `base` is least, and that code.
fn least(
    states: &[State],
    base: usize,
    content: &Content,
    levels: &Levels,
    budget: &mut Budget,
) -> Result<(Option<Code>, Vec<State>), Unfinished> {
    let mut best = None;
    let mut found = Vec::new();
    for state in states {
        budget.spend(levels.steps(base).len() + state.word.len())?;
        for (slot, motion) in levels.steps(base) {
            let code = state.code(content, *slot);
            if best.is_none_or(|best| code < best) {
                best = Some(code);
                found.clear();
            }
            if best == Some(code) {
                // Dear, because the budget bounds the memory too.
                budget.spend(state.word.len() * STATE_PRICE)?;
                found.push(state.moved(content, base, motion));
            }
        }
    }
    Ok((best, found))
}

/// The codes from `base` on, if in each tie the slot of the least colour is taken; and the sign.
fn completed(
    mut state: State,
    base: usize,
    content: &Content,
    levels: &mut Levels,
    budget: &mut Budget,
) -> Result<(Vec<Code>, Sign), Unfinished> {
    let mut codes = Vec::new();
    let mut colours: Option<Colours> = None;
    for base in base..state.word.len() {
        budget.spend(levels.steps(base).len() + state.word.len())?;
        let code = |slot: usize| state.code(content, slot);
        let Some(best) = levels.steps(base).iter().map(|(slot, _)| code(*slot)).min() else { continue };
        let ties: Vec<_> = levels.steps(base).iter().filter(|(slot, _)| code(*slot) == best).copied().collect();
        if ties.len() > 1 {
            colours = Some(coloured(&state, base, content, levels, budget)?);
        }
        let colour = |slot: usize| colours.as_ref().and_then(|colours| colours.of_slots.get(slot)).copied();
        let Some((_, motion)) = ties.iter().min_by_key(|(slot, _)| colour(*slot)) else { continue };
        state = state.moved(content, base, motion);
        codes.push(best);
    }
    Ok((codes, state.sign))
}

/// Leaves those arrangements whose colours are least in sum. The slots before `base` are settled.
fn least_coloured(
    mut states: Vec<State>,
    base: usize,
    content: &Content,
    levels: &mut Levels,
    budget: &mut Budget,
) -> Result<Vec<State>, Unfinished> {
    if states.len() < 2 {
        return Ok(states);
    }
    let mut summaries = Vec::new();
    for state in &states {
        summaries.push(coloured(state, base, content, levels, budget)?.summary);
    }
    let least = summaries.iter().min().copied();
    let mut summaries = summaries.into_iter();
    states.retain(|_| summaries.next() == least);
    Ok(states)
}

/// Leaves one of all arrangements that are found to be images of each other; nothing if two of them have opposite
/// signs. The slots before `base` are settled.
fn merged(
    states: Vec<State>,
    base: usize,
    content: &Content,
    levels: &mut Levels,
    budget: &mut Budget,
) -> Result<Option<Vec<State>>, Unfinished> {
    if states.len() < 2 {
        return Ok(Some(states));
    }
    let mut kept = Vec::new();
    let mut signs: BTreeMap<Vec<Code>, Sign> = BTreeMap::new();
    for state in states {
        let (codes, sign) = completed(state.clone(), base, content, levels, budget)?;
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
    let mut levels = Levels::new(&group);
    let mut states = vec![State::new(slots.len(), content.dummies)];
    let mut codes = Vec::new();
    let mut colours_chose = false;
    for base in 0..slots.len() {
        let (code, mut found) = least(&states, base, &content, &levels, budget)?;
        codes.extend(code);
        if choice == Choice::ByColour {
            let all = found.len();
            found = least_coloured(found, base + 1, &content, &mut levels, budget)?;
            colours_chose |= found.len() < all;
        }
        match merged(found, base + 1, &content, &mut levels, budget)? {
            Some(kept) => states = kept,
            None => return Ok(None),
        }
    }
    let Some(sign) = states.first().map(|state| state.sign) else { return Ok(None) };
    Ok(Some(Word { factors: refilled(factors, content.slots(&codes)), sign, colours_chose }))
}

fn refilled(factors: &[Factor], slots: Vec<Slot>) -> Vec<Factor> {
    let mut slots = slots.into_iter();
    let refill =
        |factor: &Factor| Factor { slots: slots.by_ref().take(factor.slots.len()).collect(), ..factor.clone() };
    factors.iter().map(refill).collect()
}
