//! The cheapest reading that balances.
//!
//! Every unit has a score: positive if the evidence speaks for an index, negative for a label or a component. Its
//! size is the price of reading the unit the other way; switches have prices too. A statement is clean if some
//! reading within the margin balances. The balance of one letter does not depend on the others, so the search is a
//! sum over letters of small searches, once for each setting of the few switches.

use crate::balance::{Choice, Odd, judge};
use crate::conventions::built_in::{LetterClass, class_of, is_derivative};
use crate::sketch::{Shape, Sketch};

/// Readings dearer than this do not excuse a statement, in tenths of a unit of price. Smaller than the price of
/// calling an established index a label. Chosen by measurement on real documents: at 30 noise rises by half, at 55
/// recall falls by two points.
pub const MARGIN: i32 = 40;
/// A letter that this little puts in balance is not blamed beside others.
const CHEAP: i32 = 15;
/// How much it speaks against an index that nothing in the statement repeats.
const LONE_DOUBT: i32 = 16;
/// Price of taking a third letter in a product for a label of that name.
const COINCIDENCE: i32 = 15;
/// Price of another letter on a kernel whose scripts are labels already.
const REPEATED: i32 = 3;
/// Units of one letter that are tried in all combinations; further ones keep their likelier reading.
const UNITS_TRIED: usize = 6;
/// Switches that are tried singly and in pairs.
const SWITCHES_TRIED: usize = 10;
/// Switches that are taken one after the other, and those that are looked at for it.
const SWITCHES_CLIMBED: usize = 4;
const SWITCHES_SEEN: usize = 24;

/// A reading of a statement.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Reading {
    /// The choice.
    pub choice: Choice,
    /// What it costs above the likeliest reading.
    pub cost: i32,
    /// Letters out of balance in it; none if the statement is clean.
    pub odd: Vec<(compact_str::CompactString, Odd)>,
    /// Letters that are in balance only because some place of theirs is read against the evidence.
    pub excused: Vec<u16>,
    /// The likeliest choice, before anything was read against the evidence.
    pub likely: Choice,
}

/// Reads a statement by the scores of its units, in their order.
pub fn read(sketch: &Sketch, mut scores: Vec<i32>) -> Reading {
    doubt_lone_letters(sketch, &mut scores);
    let likely = Choice {
        index: scores.iter().map(|score| *score > 0).collect(),
        on: sketch.switches.iter().map(|switch| switch.on).collect(),
    };
    let mut best = try_letters(sketch, &scores, likely.clone(), 0);
    if best.odd.is_empty() && best.cost == 0 || sketch.unjudged.is_some() {
        return best;
    }
    let mut tried = |flips: &[usize], best: &mut Reading| {
        let mut choice = likely.clone();
        let mut cost = 0;
        for switch in flips {
            if let (Some(on), Some(price)) = (choice.on.get_mut(*switch), sketch.switches.get(*switch)) {
                *on = !*on;
                cost += price.price;
            }
        }
        if cost > MARGIN || (best.odd.is_empty() && cost >= best.cost) {
            return false;
        }
        let reading = try_letters(sketch, &scores, choice, cost);
        let better = rank(&reading) < rank(best);
        if better {
            *best = reading;
        }
        better
    };
    climb(sketch, &mut best, &mut tried);
    for flips in switch_flips(sketch) {
        tried(&flips, &mut best);
    }
    best
}

/// Takes the best switch, then the best one more, as long as that helps.
fn climb(sketch: &Sketch, best: &mut Reading, tried: &mut impl FnMut(&[usize], &mut Reading) -> bool) {
    let mut taken: Vec<usize> = Vec::new();
    while !best.odd.is_empty() && taken.len() < SWITCHES_CLIMBED {
        let mut next = None;
        for switch in (0..sketch.switches.len().min(SWITCHES_SEEN)).filter(|switch| !taken.contains(switch)) {
            let with: Vec<usize> = taken.iter().copied().chain([switch]).collect();
            if tried(&with, best) {
                next = Some(switch);
            }
        }
        match next {
            Some(switch) => taken.push(switch),
            None => return,
        }
    }
}

/// `Z = a_f / a_i`: where no letter stands twice and none shares its kernel, letters are labels more readily.
fn doubt_lone_letters(sketch: &Sketch, scores: &mut [i32]) {
    let twice = |letter: &str| sketch.places.iter().filter(|place| place.letter == letter).count() > 1;
    let labels = sketch
        .units
        .iter()
        .all(|unit| unit.shape == Shape::Lone && !twice(&unit.letter) && class_of(&unit.letter) != LetterClass::Greek);
    if labels && sketch.sides.len() > 1 {
        for (score, unit) in scores.iter_mut().zip(&sketch.units) {
            *score -= if is_derivative(&unit.kernel_letter) { 0 } else { LONE_DOUBT };
        }
    }
}

/// Clean readings come first, then those with fewer odd letters, then the cheaper ones.
fn rank(reading: &Reading) -> (usize, i32) {
    (reading.odd.len(), reading.cost)
}

/// Single switches, pairs, and all at once.
fn switch_flips(sketch: &Sketch) -> Vec<Vec<usize>> {
    let count = sketch.switches.len().min(SWITCHES_TRIED);
    let mut out: Vec<Vec<usize>> = (0..count).map(|one| vec![one]).collect();
    for first in 0..count {
        out.extend((first + 1..count).map(|second| vec![first, second]));
    }
    let free = (0..sketch.switches.len()).filter(|n| sketch.switches.get(*n).is_some_and(|switch| switch.price == 0));
    out.push(free.collect());
    out
}

/// A letter out of balance in the likeliest choice, and what would put it right.
struct Wanted<'s> {
    number: u16,
    letter: &'s compact_str::CompactString,
    odd: Odd,
    price: i32,
    flips: Option<Vec<usize>>,
}

/// The cheapest balance of each letter under fixed switches.
fn try_letters(sketch: &Sketch, scores: &[i32], choice: Choice, cost: i32) -> Reading {
    let mut total = cost;
    let mut wanted = Vec::new();
    // That a kernel's scripts are labels is one assumption, however many letters stand on it.
    let mut assumed: Vec<(&str, i32)> = Vec::new();
    for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
        let odd = judge(sketch, &choice, number);
        if odd == Odd::Balanced {
            continue;
        }
        // A label that happens to have the letter of a dummy in its product would be a coincidence.
        let coincidence = if matches!(odd, Odd::Thrice | Odd::Captured) { COINCIDENCE } else { 0 };
        let flips = cheapest_flips(sketch, scores, number, &choice);
        let price = flips.as_ref().map_or(MARGIN + 1, |(price, _)| *price + coincidence);
        total += match &flips {
            None => price,
            Some((_, units)) => {
                coincidence + units.iter().map(|unit| assume(sketch, scores, *unit, &mut assumed)).sum::<i32>()
            }
        };
        wanted.push(Wanted { number, letter, odd, price, flips: flips.map(|(_, units)| units) });
    }
    settle(choice, cost, total <= MARGIN, wanted)
}

/// Takes the flips that excuse a letter: all of them if the statement is clean by them. Otherwise a letter that no
/// reading puts in balance is wrong for certain, and letters of other kinds that a label would excuse are no part of
/// it.
fn settle(likely: Choice, cost: i32, clean: bool, wanted: Vec<Wanted<'_>>) -> Reading {
    let certain: Vec<LetterClass> =
        wanted.iter().filter(|one| one.flips.is_none()).map(|one| class_of(one.letter)).collect();
    let mut reading = Reading { choice: likely.clone(), cost, likely, ..Reading::default() };
    for one in wanted {
        let apart = !certain.is_empty() && !certain.contains(&class_of(one.letter));
        let cheap = one.price <= CHEAP && certain.is_empty();
        match one.flips.filter(|_| clean || apart || cheap) {
            Some(units) => {
                reading.cost += one.price;
                reading.excused.push(one.number);
                for unit in units {
                    if let Some(index) = reading.choice.index.get_mut(unit) {
                        *index = !*index;
                    }
                }
            }
            None => reading.odd.push((one.letter.clone(), one.odd)),
        }
    }
    reading
}

/// What reading one more unit the other way adds: the whole price for a new kernel, else what it is dearer than the
/// dearest before, and a little.
fn assume<'s>(sketch: &'s Sketch, scores: &[i32], unit: usize, assumed: &mut Vec<(&'s str, i32)>) -> i32 {
    let price = scores.get(unit).map_or(0, |score| score.abs());
    let kernel = sketch.units.get(unit).map_or("", |unit| unit.kernel.as_str());
    match assumed.iter_mut().find(|(known, _)| *known == kernel && !kernel.is_empty()) {
        None => {
            assumed.push((kernel, price));
            price
        }
        Some((_, dearest)) => {
            let more = (price - *dearest).max(0);
            *dearest = (*dearest).max(price);
            // The usual index letters name no label together.
            let usual =
                sketch.units.get(unit).is_some_and(|unit| matches!(unit.letter.as_str(), "i" | "j" | "k" | "l"));
            more + if usual { price / 3 } else { REPEATED }
        }
    }
}

/// The cheapest set of this letter's units to read the other way so that the letter balances, within the margin.
fn cheapest_flips(sketch: &Sketch, scores: &[i32], letter: u16, likely: &Choice) -> Option<(i32, Vec<usize>)> {
    let name = sketch.letters.get(letter as usize)?;
    let mut units: Vec<(i32, usize)> = sketch
        .units
        .iter()
        .enumerate()
        .filter(|(_, unit)| unit.letter == *name)
        .map(|(n, _)| (scores.get(n).map_or(0, |score| score.abs()), n))
        .filter(|(price, _)| *price <= MARGIN)
        .collect();
    units.sort_unstable();
    units.truncate(UNITS_TRIED);
    let mut best: Option<(i32, Vec<usize>)> = None;
    for set in 1_usize..1 << units.len() {
        let chosen = || units.iter().enumerate().filter(move |(n, _)| set >> n & 1 == 1).map(|(_, unit)| *unit);
        let price: i32 = chosen().map(|(price, _)| price).sum();
        if price > MARGIN || best.as_ref().is_some_and(|(least, _)| price >= *least) {
            continue;
        }
        let mut choice = likely.clone();
        for (_, unit) in chosen() {
            if let Some(index) = choice.index.get_mut(unit) {
                *index = !*index;
            }
        }
        if judge(sketch, &choice, letter) == Odd::Balanced {
            best = Some((price, chosen().map(|(_, unit)| unit).collect()));
        }
    }
    best
}
