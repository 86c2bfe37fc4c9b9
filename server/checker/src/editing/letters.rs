//! Letters that a person may take next: those of a family that the statement does not use.

use compact_str::CompactString;

use crate::changes;
use crate::conventions::built_in::is_usual_coordinate;
use crate::ledger::Judged;

/// Letters of the family of one, the likeliest first, that neither the statement nor `taken` has: those of a declared
/// family in their order, else those of the same class that nothing else is declared of.
pub(super) fn fresh_letters(judged: &Judged<'_>, like: &str, taken: &[CompactString]) -> Vec<CompactString> {
    let meanings = &judged.prices.declared.meanings;
    let sketch = &judged.sketch;
    let used = |letter: &str| {
        sketch.places.iter().any(|place| place.letter == letter)
            || sketch.quantities.iter().any(|(name, _)| name == letter)
            || taken.iter().any(|other| other == letter)
    };
    let family = meanings.family_number(like);
    let own = family.and_then(|number| meanings.families.get(number));
    let mut out: Vec<CompactString> = own.map(|family| family.letters.clone()).unwrap_or_default();
    let dimension = |letter: &str| {
        let of_family = meanings.families.iter().filter_map(|family| family.dimension.as_deref());
        of_family.chain(meanings.dimensions.iter().map(CompactString::as_str)).any(|other| other == letter)
    };
    let free = |letter: &CompactString| {
        meanings.family_number(letter) == family && !meanings.is_not_index(letter) && !dimension(letter)
    };
    // Where a family is declared, a letter outside of it would be of unknown range.
    if own.is_none() {
        let usual = changes::fresh_letters(judged, like).into_iter().filter(free);
        out.extend(usual.filter(|letter| !is_usual_coordinate(letter) || letter == like));
    }
    out.retain(|letter| !used(letter));
    out
}
