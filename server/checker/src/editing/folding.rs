//! What may be folded away, and what a growing selection takes in.
//!
//! The tree of a formula is kept to the text by its places. What one macro call yields stands at one place, so that a
//! selection passes over parts that are no larger than those before.

use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Factor, Formula, Statement, Sum};

use crate::paper::View;

use super::spots::sums_in;

/// Parts of a document that go over several lines: formulas, conventions, runs of directives. In order; none ends
/// in a line break.
pub fn folds(view: &View, document: usize) -> Vec<Span> {
    let text = view.text(document);
    let mut out: Vec<Span> = view.formulas(document).iter().map(|formula| formula.span).collect();
    out.extend(runs(view, document));
    for fold in &mut out {
        let said = fold.of(text);
        *fold = Span::new(fold.start as usize, fold.start as usize + said.trim_end().len());
    }
    out.retain(|fold| fold.of(text).contains('\n'));
    out.sort_unstable();
    out.dedup();
    out
}

/// Directives one right after the other, as one.
fn runs(view: &View, document: usize) -> Vec<Span> {
    let directives = view.scan(document).map_or(&[][..], |scan| &scan.directives);
    let mut out: Vec<Span> = Vec::new();
    for directive in directives {
        let goes_on = |above: &&mut Span| {
            let between = Span { start: above.end, end: directive.span.start.max(above.end) }.of(view.text(document));
            between.trim().is_empty() && between.matches('\n').count() < 2
        };
        match out.last_mut().filter(goes_on) {
            Some(above) => *above = above.join(directive.span),
            None => out.push(directive.span),
        }
    }
    out
}

/// What holds a place, from the innermost on: letter, script, factor, term, side, statement, formula. Each span lies in
/// the next and is smaller.
pub fn selection(view: &View, document: usize, offset: u32) -> Vec<Span> {
    let Some(number) = view.formula_number(document, offset) else { return Vec::new() };
    let Some(formula) = view.tree(document, number) else { return Vec::new() };
    let mut outer = vec![formula.span];
    outer.extend(view.scan(document).and_then(|scan| scan.regions.get(number)).map(|region| region.body));
    path(&formula, offset, &mut outer);
    let mut out: Vec<Span> = Vec::new();
    for span in outer.into_iter().filter(|span| touches(*span, offset)) {
        // From the outside in: what is not inside of the last and smaller is passed over.
        if out.last().is_none_or(|last| last.holds(span) && *last != span && !span.is_empty()) {
            out.push(span);
        }
    }
    out.reverse();
    out
}

fn touches(span: Span, offset: u32) -> bool {
    span.start <= offset && offset <= span.end
}

/// Of several parts the one that holds a place, or else ends there.
fn at_place<T>(parts: impl Iterator<Item = (Span, T)>, offset: u32) -> Option<(Span, T)> {
    let mut ending = None;
    for (span, part) in parts.filter(|(span, _)| touches(*span, offset)) {
        if offset < span.end {
            return Some((span, part));
        }
        ending = Some((span, part));
    }
    ending
}

/// The spans on the way from a formula to a place, the outermost first.
fn path(formula: &Formula, offset: u32, out: &mut Vec<Span>) {
    let statements = formula.statements.iter().map(|statement| (statement.span, statement));
    let Some((span, statement)) = at_place::<&Statement>(statements, offset) else { return };
    out.push(span);
    let sides = statement.sides.iter().map(|side| (side.span, side));
    let mut next = at_place::<&Sum>(sides, offset);
    while let Some((span, sum)) = next {
        out.push(span);
        let terms = sum.terms.iter().map(|term| (term.span, term));
        let Some((span, term)) = at_place(terms, offset) else { return };
        out.push(span);
        let factors = term.factors.iter().map(|factor| (factor.span, factor));
        let Some((span, factor)) = at_place(factors, offset) else { return };
        out.push(span);
        in_scripts(factor, offset, out);
        next = at_place(sums_in(factor).into_iter().map(|(sum, _)| (sum.span, sum)), offset);
    }
}

fn in_scripts(factor: &Factor, offset: u32, out: &mut Vec<Span>) {
    let scripts = factor.scripts.iter().map(|script| (script.span, script));
    let Some((span, script)) = at_place(scripts, offset) else { return };
    out.push(span);
    out.extend(at_place(script.items.iter().map(|item| (item.span, ())), offset).map(|(span, ())| span));
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::editing::cursor::{Placed, view};

    #[track_caller]
    fn grows(text: &str, want: &[&str]) {
        let placed = Placed::new(text, Host::Latex);
        let found = selection(&placed.view, 0, placed.at());
        assert_eq!(found.iter().map(|span| span.of(&placed.text)).collect::<Vec<_>>(), want, "{text}");
    }

    #[test]
    fn a_selection_grows_from_the_letter_to_the_formula() {
        let whole = "$A_i = B_i + C_{ij} D_j , \\quad x = y$";
        grows(
            "$A_i = B_i + C_{i‸j} D_j , \\quad x = y$",
            &[
                "j",
                "_{ij}",
                "C_{ij}",
                "C_{ij} D_j",
                "B_i + C_{ij} D_j",
                "A_i = B_i + C_{ij} D_j",
                &whole[1..whole.len() - 1],
                whole,
            ],
        );
        grows("$x = ‸y$", &["y", "x = y", "$x = y$"]);
        grows("words ‸ here", &[]);
    }

    #[test]
    fn brackets_and_fractions_are_stations() {
        grows(
            "$\\frac{a (b_i + ‸c_i)}{d}$",
            &[
                "c_i",
                "b_i + c_i",
                "(b_i + c_i)",
                "a (b_i + c_i)",
                "\\frac{a (b_i + c_i)}{d}",
                "$\\frac{a (b_i + c_i)}{d}$",
            ],
        );
    }

    #[test]
    fn what_goes_over_lines_folds() {
        let text =
            "% indexwise: h is small\n  % indexwise: k is small\n\n% indexwise: skip this\n$x$ and \\[\n a = b\n\\]\n";
        let view = view(text, Host::Latex);
        let found: Vec<&str> = folds(&view, 0).iter().map(|fold| fold.of(text)).collect();
        assert_eq!(found, ["% indexwise: h is small\n  % indexwise: k is small", "\\[\n a = b\n\\]"]);
    }
}
