//! Whether a statement is worth the look at its terms: most are not, and their trees are gone by then.
//!
//! Everything here is read off the sketch. It may say yes too often, which costs time, but not no where a rule about
//! terms could speak.

use crate::ledger::Judged;
use crate::sketch::{Op, Place, Sketch};

/// Whether a rule about terms could speak in a statement.
pub fn asks_for_terms(sketch: &Sketch, judged: &Judged<'_>) -> bool {
    !judged.prices.declared.meanings.is_empty()
        || has_antisymmetric(sketch) && joins_twice(sketch)
        || has_brackets(sketch, judged.text)
        || has_like_terms(sketch)
        || derives_no_tensor(sketch)
        || moves_metric(sketch)
}

/// The kernel of a place.
fn kernel<'s>(sketch: &'s Sketch, place: &Place) -> &'s str {
    sketch.units.get(place.unit as usize).map_or("", |unit| unit.kernel_letter.as_str())
}

/// Whether a kernel is antisymmetric by custom: without one, and without brackets and declarations, nothing vanishes.
fn has_antisymmetric(sketch: &Sketch) -> bool {
    sketch.places.iter().any(|place| {
        let slots = sketch.forms.get(place.form as usize).map_or(0, |(_, up, down)| up.saturating_add(*down));
        match kernel(sketch, place) {
            "\\epsilon" | "\\varepsilon" => slots > 2,
            "R" => slots == 4,
            _ => false,
        }
    })
}

/// Whether two uses of kernels share two letters, or one holds a letter twice; derivatives count with one another.
fn joins_twice(sketch: &Sketch) -> bool {
    let mut pairs: Vec<(u16, u16)> = Vec::new();
    for (number, one) in sketch.places.iter().enumerate() {
        let others = sketch.places.iter().skip(number + 1).take_while(|other| other.span.start <= sketch.span.end);
        for two in others.filter(|two| two.number == one.number) {
            let own = |place: &Place| if is_derivative(sketch, place) { u16::MAX } else { place.form };
            let pair = (own(one).min(own(two)), own(one).max(own(two)));
            if pair.0 == pair.1 || pairs.contains(&pair) {
                return true;
            }
            pairs.push(pair);
        }
        if number > PLACES {
            return true;
        }
    }
    false
}

/// Places from which a statement is looked at without counting.
const PLACES: usize = 64;

fn is_derivative(sketch: &Sketch, place: &Place) -> bool {
    crate::conventions::built_in::is_derivative(kernel(sketch, place))
}

fn has_brackets(sketch: &Sketch, text: &str) -> bool {
    let written = |place: &Place| place.script.of(text);
    sketch
        .places
        .iter()
        .any(|place| place.company > 1 && written(place).contains(['(', '[']) || written(place).contains('['))
}

/// Whether two terms of one side hold the same kernels.
fn has_like_terms(sketch: &Sketch) -> bool {
    sketch.sides.iter().filter(|side| side.terms > 1).any(|side| {
        let terms = sketch.side_terms(side).map(|(_, inside)| {
            let code = sketch.code.get(inside.start as usize..inside.end as usize).unwrap_or_default();
            let mut kernels: Vec<&str> = code
                .iter()
                .filter_map(|op| match op {
                    Op::Place(place) => sketch.place(*place).map(|place| kernel(sketch, place)),
                    _ => None,
                })
                .collect();
            kernels.sort_unstable();
            kernels
        });
        let mut terms: Vec<Vec<&str>> = terms.filter(|kernels| !kernels.is_empty()).collect();
        terms.sort_unstable();
        terms.windows(2).any(|pair| matches!(pair, [one, two] if one == two))
    })
}

/// `\nabla` beside `\Gamma` or `\partial`.
fn derives_no_tensor(sketch: &Sketch) -> bool {
    let has = |letter: &str| sketch.places.iter().any(|place| kernel(sketch, place) == letter);
    has("\\nabla") && (has("\\Gamma") || has("\\partial"))
}

/// A metric beside partial derivatives.
fn moves_metric(sketch: &Sketch) -> bool {
    let partial = sketch.places.iter().filter(|place| kernel(sketch, place) == "\\partial").count();
    partial > 1 && sketch.sides.len() > 1 && sketch.places.iter().any(|place| kernel(sketch, place) == "g")
}
