//! What a letter runs over: as declared for it or for a slot that it fills, else over the coordinates, else by custom.
//!
//! Custom is common practice, no source: Latin letters, and all letters whose levels do not matter, run from 1 to 3;
//! Greek letters whose levels are kept run from 0 to 3. Where coordinates are named but no range is, letters run over
//! the coordinates; Latin letters from i on leave out a leading `t`, as they do where Greek letters count time.

use compact_str::{CompactString, format_compact};
use indexwise_grammar::conventions::{Bound, Range};
use indexwise_grammar::tree::Term;

use crate::conventions::built_in::{LetterClass, class_of};
use crate::conventions::inferred::LevelHabit;
use crate::conventions::meanings::{Family, Meanings};
use crate::paper::Asked;
use crate::terms::uses::Use;
use crate::terms::{Eyes, all_products};

use super::{RangeSource, Summed};

/// Values by custom of letters in space.
pub(super) const DEFAULT_RANGE: [u32; 2] = [1, 3];
/// Values by custom of letters in space and time.
const DEFAULT_RANGE_WITH_TIME: [u32; 2] = [0, 3];
/// Members of a range that are listed. More than can be written out, so that what is said of their number is true of
/// all ranges but absurd ones.
const MOST_MEMBERS: u32 = 65_536;

/// The values of a letter that is summed in a term.
pub(in crate::editing) fn range_of(letter: &CompactString, term: &Term, asked: &Asked<'_>) -> Summed {
    let meanings = asked.eyes.meanings;
    let family = meanings.family(letter).or_else(|| family_of_slot(letter, term, asked.eyes));
    let (values, source) = match family.and_then(|family| members(family, meanings)) {
        Some(Members::Values(values)) if !values.is_empty() => (values, RangeSource::Family),
        Some(Members::Open(bound)) => (by_custom(letter, asked), RangeSource::Open(bound)),
        _ => match coordinates(letter, meanings) {
            Some(names) => (names, RangeSource::Coordinates),
            None => (by_custom(letter, asked), RangeSource::Custom),
        },
    };
    let primes = primes(letter);
    let values = values.into_iter().map(|value| format_compact!("{value}{primes}")).collect();
    Summed { letter: letter.clone(), values, source }
}

/// The primes that end a letter: `i'` runs over `1' 2' 3'`, since its components are those in another frame.
fn primes(letter: &str) -> String {
    letter.chars().rev().take_while(|sign| matches!(sign, '\'' | '’' | '′')).map(|_| '\'').collect()
}

/// The family of the slots of a declared kernel that the letter fills one of. Which slot it is the reader of stacked
/// scripts cannot tell, so that all of them have to be of one family.
fn family_of_slot<'a>(letter: &str, term: &Term, eyes: &Eyes<'a>) -> Option<&'a Family> {
    let products = all_products(term, eyes)?;
    let uses = products.iter().flat_map(|product| &product.pieces).map(|piece| &piece.made);
    let fills = |made: &&Use| made.own_slots().any(|slot| slot.letter().is_some_and(|other| other == letter));
    uses.filter(fills).find_map(|made| {
        let known = eyes.meanings.known(&made.kernel, made.own_slots().count())?;
        let mut numbers = known.slots.iter().map(|slot| eyes.meanings.family_number(&slot.letter));
        let first = numbers.next()?;
        numbers.all(|number| number == first).then(|| eyes.meanings.family(&known.slots.first()?.letter))?
    })
}

/// The members of a declared range.
enum Members {
    Values(Vec<CompactString>),
    /// They end with a letter.
    Open(CompactString),
}

/// The members of a family's range; those of a spatial part are the whole's without the first.
fn members(family: &Family, meanings: &Meanings) -> Option<Members> {
    if let Some(range) = &family.range {
        return Some(listed(range, meanings));
    }
    // One step only: a spatial part of a spatial part is nobody's habit.
    let whole = family.part_of.as_ref().and_then(|letter| meanings.family(letter))?;
    match listed(whole.range.as_ref()?, meanings) {
        Members::Values(values) => Some(Members::Values(values.into_iter().skip(1).collect())),
        open => Some(open),
    }
}

fn listed(range: &Range, meanings: &Meanings) -> Members {
    match range {
        Range::Between(first, Bound::Number(last)) => Members::Values(numbers(*first, *last)),
        Range::Members(names) => Members::Values(names.iter().map(|name| name.text.clone()).collect()),
        Range::Size(Bound::Number(size)) if meanings.coordinates.len() == *size as usize => {
            Members::Values(meanings.coordinates.clone())
        }
        Range::Size(Bound::Number(size)) => Members::Values(numbers(1, *size)),
        Range::Between(_, Bound::Letter(name, less)) | Range::Size(Bound::Letter(name, less)) => {
            Members::Open(if *less == 0 { name.text.clone() } else { format_compact!("{}-{less}", name.text) })
        }
    }
}

fn numbers(first: u32, last: u32) -> Vec<CompactString> {
    (first..=last.min(first.saturating_add(MOST_MEMBERS))).map(|number| format_compact!("{number}")).collect()
}

/// The names of the coordinates that a letter runs over.
fn coordinates(letter: &str, meanings: &Meanings) -> Option<Vec<CompactString>> {
    let names = &meanings.coordinates;
    let spatial = class_of(letter) == LetterClass::LatinLate && names.first().is_some_and(|name| name == "t");
    let own: Vec<CompactString> = names.iter().skip(usize::from(spatial)).cloned().collect();
    (!own.is_empty()).then_some(own)
}

fn by_custom(letter: &CompactString, asked: &Asked<'_>) -> Vec<CompactString> {
    let flat = asked.eyes.is_cartesian(letter) || asked.prices.level_habit(letter) == LevelHabit::Cartesian;
    let with_time = class_of(letter) == LetterClass::Greek && !flat;
    let [first, last] = if with_time { DEFAULT_RANGE_WITH_TIME } else { DEFAULT_RANGE };
    numbers(first, last)
}
