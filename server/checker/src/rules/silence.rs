//! Where the author says that a term is zero: then it needs no finding.

use crate::terms::{Flattened, Product, Side};

/// Letters after a formula in which words may say that it vanishes.
const WORDS: usize = 90;

/// Whether the statement says itself that a product of a side is zero: it stands alone without a relation, another
/// side is zero, a later side drops it, or the words after the formula speak of zero.
pub(super) fn says_zero(terms: &Flattened<'_>, side: usize, product: &Product) -> bool {
    let sides = &terms.sides;
    if sides.iter().any(|side| side.zero) {
        return true;
    }
    let single = sides.len() == 1 && sides.first().is_some_and(|side| side.products.len() < 2);
    if single || later_drops(terms, side, product) {
        return true;
    }
    words_say_zero(terms)
}

/// Whether a later side of the chain is read in full and has no product of the same kernels; the row between may show
/// the term struck out.
fn later_drops(terms: &Flattened<'_>, side: usize, product: &Product) -> bool {
    // A side without terms of its own, as after `= (`, says nothing.
    let drops = |later: &Side| {
        later.complete
            && !later.products.is_empty()
            && later.products.iter().all(|other| !other.has_kernels_of(product))
    };
    side > 0 && terms.sides.iter().skip(side + 1).any(drops)
}

fn words_say_zero(terms: &Flattened<'_>) -> bool {
    let from = terms.judged.formula.span.end as usize;
    let after: String = terms.judged.text.get(from..).unwrap_or_default().chars().take(WORDS).collect();
    let sentence = after.split(". ").next().unwrap_or_default();
    let paragraph = sentence.split("\n\n").next().unwrap_or_default().to_lowercase();
    ["vanish", "zero", "cancel", "drops out", "drop out", "is 0", "nothing"].iter().any(|word| paragraph.contains(word))
}
