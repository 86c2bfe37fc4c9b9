//! An index: its role, level, partner, range and evidence, and its sum written out.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Term;

use crate::ledger::shown;
use crate::paper::{Asked, Unasked, View};
use crate::sketch::Place;

use crate::editing::indices::{Index, Role};
use crate::editing::parts::{Part, What, parts_of};
use crate::editing::under::Held;
use crate::editing::write_out::{Because, Forms, RangeSource, Summed, WrittenOut, range_of, write_out};

use super::{Hover, code, times};

/// Terms of a sum that are shown.
const TERMS_SHOWN: usize = 12;
/// Values of a range that are listed.
const VALUES_SHOWN: usize = 8;

pub(super) fn index(view: &View, document: usize, held: &Held) -> Option<Hover> {
    let (text, span) = (view.text(document), held.part.span);
    let mut said: Option<Vec<String>> = None;
    let no_sum = view.statement_at(document, span.start, |_| ()) == Err(Unasked::WithoutSum);
    view.each_tree(document, Span { start: span.start, end: span.start }, |asked| {
        let parts = parts_of(asked, text);
        if let Some(index) = parts.indices.iter().find(|index| **index == held.index)
            && (asked.number, index.spans(asked.sketch)) == (held.formula, held.spans.clone())
        {
            said = Some(lines(asked, index, span, no_sum));
        }
    });
    let mut said = said?;
    if held.index.role == Role::Summed && !no_sum {
        said.extend(written_out(view, document, held));
    }
    Some(Hover { span, markdown: said.join("\n\n") })
}

/// What the ledger knows of an index at one of its places.
fn lines(asked: &Asked<'_>, index: &Index, span: Span, no_sum: bool) -> Vec<String> {
    let place = index.places.iter().filter_map(|place| asked.sketch.place(*place)).find(|place| place.span == span);
    let role = if no_sum { "index; the text says that no sum is meant".to_owned() } else { role(asked, index, place) };
    let mut out = vec![format!("**{}**: {role}", shown(&index.letter))];
    let mut facts = Vec::new();
    if index.role != Role::Bound {
        facts.extend(term_at(asked, span).map(|term| range(&range_of(&index.letter, term, asked), asked)));
    }
    facts.push(evidence(asked, &index.letter));
    out.push(facts.join("; "));
    out
}

fn role(asked: &Asked<'_>, index: &Index, place: Option<&Place>) -> String {
    let level = place.map_or("", |place| level(asked, place));
    let level = if level.is_empty() { String::new() } else { format!(", {level}") };
    match index.role {
        Role::Free if index.places.len() > 1 => {
            format!("free index{level}; it stands {} in the statement", times(index.places.len()))
        }
        Role::Free => format!("free index{level}"),
        Role::Summed => format!("summed index{level}{}", partners(asked, index, place)),
        Role::Bound => format!("bound by a sum sign; it stands {} under it", times(index.places.len())),
        Role::Thrice => format!("index that stands {} in one product", times(index.places.len())),
        Role::Unjudged => format!("index{level}, where nothing is compared"),
    }
}

/// Where the other ends of a sum stand.
fn partners(asked: &Asked<'_>, index: &Index, own: Option<&Place>) -> String {
    let others = index.places.iter().filter_map(|place| asked.sketch.place(*place)).filter(|place| Some(*place) != own);
    let mut named: Vec<String> = Vec::new();
    for place in others {
        let kernel = asked.sketch.units.get(place.unit as usize).map_or("", |unit| unit.kernel.as_str());
        let on = if kernel.is_empty() { "a bracket".to_owned() } else { code(&shown(kernel)) };
        let words = format!("{} on {on}", level(asked, place)).trim_start().to_owned();
        if !named.contains(&words) {
            named.push(words);
        }
    }
    match named.as_slice() {
        [] if index.places.len() == 1 => "; the square over it closes it".to_owned(),
        [] => "; its partner stands in the same place".to_owned(),
        [one] => format!("; its partner stands {one}"),
        _ => format!("; its partners stand {}", named.join(", ")),
    }
}

/// The level in words, where levels are worth a word.
fn level(asked: &Asked<'_>, place: &Place) -> &'static str {
    if asked.prices.speaks_of_levels(&place.letter) { place.level.word() } else { "" }
}

/// The outermost term of the statement that holds a place.
fn term_at<'t>(asked: &Asked<'t>, span: Span) -> Option<&'t Term> {
    let mut terms = asked.tree.sides.iter().flat_map(|side| &side.terms);
    terms.find(|term| term.span.holds(span))
}

fn range(summed: &Summed, asked: &Asked<'_>) -> String {
    let mut values: Vec<String> = summed.values.iter().map(|value| shown(value)).collect();
    if values.len() > VALUES_SHOWN {
        values.splice(3..values.len() - 1, ["..".to_owned()]);
    }
    let values = values.join(" ");
    let family = asked.eyes.meanings.family(&summed.letter);
    let others = family.map_or(&[][..], |family| &family.letters).iter().filter(|letter| **letter != summed.letter);
    let others: Vec<String> = others.map(|letter| shown(letter)).collect();
    let with = if others.is_empty() { String::new() } else { format!(" like {}", others.join(" ")) };
    match &summed.source {
        RangeSource::Family => format!("runs over {values}{with}, as declared"),
        RangeSource::Coordinates => format!("runs over the declared coordinates {values}{with}"),
        RangeSource::Custom => format!("runs over {values}{with} by custom, since no range is declared"),
        RangeSource::Open(end) => format!("is declared to end with {}{with}, taken as {values}", shown(end)),
    }
}

/// Why a letter is taken for an index.
fn evidence(asked: &Asked<'_>, letter: &CompactString) -> String {
    if asked.eyes.meanings.family(letter).is_some() {
        return "an index by declaration".to_owned();
    }
    match asked.prices.index_votes(letter) {
        0 => "an index by the notation".to_owned(),
        1 => "an index, as one statement of the document uses it".to_owned(),
        votes => format!("an index, as {votes} statements of the document use it"),
    }
}

/// The sum over the letter; and where the term closes several sums, all of them, if they come to few terms.
fn written_out(view: &View, document: usize, held: &Held) -> Vec<String> {
    let Ok(written) = write_out(view, document, held.part.span.start) else { return Vec::new() };
    if !written.letters.iter().any(|summed| summed.letter == held.index.letter) {
        return Vec::new();
    }
    let note = view.host(document) == Host::Note;
    let mut out = told(&written, note);
    let whole = write_out(view, document, written.span.start).ok();
    let is_more = |whole: &WrittenOut| {
        whole.span == written.span && whole.letters.len() > written.letters.len() && whole.terms.len() <= TERMS_SHOWN
    };
    out.extend(whole.filter(is_more).map(|whole| told(&whole, note)).unwrap_or_default());
    out
}

/// A sum written out, with what vanishes struck out.
fn told(written: &WrittenOut, note: bool) -> Vec<String> {
    let form = |forms: &Forms| if note { forms.note.clone() } else { forms.unicode.clone() };
    let letters: Vec<String> = written.letters.iter().map(|summed| shown(&summed.letter)).collect();
    let (term, sum) = (code(&form(&written.term)), code(&sum(written, &form)));
    let mut out = vec![format!("{term} summed over {}:\n{sum}", letters.join(" "))];
    let gone = written.vanished.iter().take(TERMS_SHOWN).map(|one| {
        let why = match &one.because {
            // A factor that is the whole term says nothing new.
            Because::Factor(factor) if *factor == one.term => String::new(),
            Because::Factor(factor) => format!(" ({} is 0)", code(&form(factor))),
            Because::Symmetry => String::new(),
            Because::Cancels => " (cancels)".to_owned(),
        };
        format!("~~{}~~{why}", code(&form(&one.term)))
    });
    let gone: Vec<String> = gone.collect();
    if !gone.is_empty() {
        out.push(format!("{}{}", gone.join(", "), and_more(written.vanished.len())));
    }
    out
}

/// The first terms of a sum.
fn sum(written: &WrittenOut, form: &impl Fn(&Forms) -> String) -> String {
    if written.terms.len() <= TERMS_SHOWN {
        return form(&written.sum);
    }
    let mut out = String::new();
    for term in written.terms.iter().take(TERMS_SHOWN) {
        let term = form(term);
        match term.strip_prefix('-') {
            Some(rest) if !out.is_empty() => out.push_str(&format!(" - {}", rest.trim_start())),
            _ if out.is_empty() => out.push_str(&term),
            _ => out.push_str(&format!(" + {term}")),
        }
    }
    out + &and_more(written.terms.len())
}

fn and_more(count: usize) -> String {
    match count.checked_sub(TERMS_SHOWN) {
        None | Some(0) => String::new(),
        Some(more) => format!(" and {more} more"),
    }
}

/// A letter in a script that is no index, or what differentiates.
pub(super) fn no_index(view: &View, document: usize, part: &Part) -> Option<Hover> {
    let text = view.text(document);
    let meanings = view.declared(document).map(|declared| &declared.meanings);
    let name = shown(part.span.of(text));
    let markdown = match &part.what {
        What::Component(value) => {
            let declared = meanings.is_some_and(|meanings| meanings.is_component(value));
            let why = if declared { " by declaration" } else { "" };
            format!("**{name}**: component; it names a value{why}, no letter to sum")
        }
        What::Label(label) => {
            let declared = meanings.is_some_and(|meanings| meanings.is_not_index(label));
            let why = if declared { ", as declared" } else { "" };
            format!("**{name}**: label; it belongs to the kernel's name and is no index{why}")
        }
        What::Derivative(kernel) => {
            let said = meanings.and_then(|meanings| meanings.derivatives.iter().find(|(name, _)| name == kernel));
            let what = match (kernel.as_str(), said) {
                (_, Some((_, Some(metric)))) => format!("covariant derivative of {}, as declared", shown(metric)),
                (_, Some(_)) => "covariant derivative, as declared".to_owned(),
                ("\\nabla" | "D", None) => "covariant derivative by custom".to_owned(),
                ("\\partial", None) => "partial derivative".to_owned(),
                _ => "differential or derivative".to_owned(),
            };
            format!("**{name}**: {what}")
        }
        What::Index(_) | What::Kernel(_) => return None,
    };
    Some(Hover { span: part.span, markdown })
}
