//! Where the free letters of terms differ, in words.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use rustc_hash::FxHashSet;

use crate::balance::{Compared, Event};
use crate::finding::Related;
use crate::ledger::{Judged, shown, side_title};

/// Where free letters differ: the compared terms of the gravest disagreement.
pub(super) struct Disagreement {
    terms: Vec<(Compared, CompactString)>,
}

impl Disagreement {
    pub(super) fn of(judged: &Judged<'_>, odd: &[CompactString]) -> Self {
        let mut terms = Vec::new();
        for letter in odd {
            for event in judged.events(letter) {
                if let Event::Terms(compared) = event
                    && compared.iter().any(|term| term.free.is_none())
                {
                    terms.extend(compared.into_iter().map(|term| (term, letter.clone())));
                    break;
                }
            }
        }
        Self { terms }
    }

    /// A place of an odd letter that stands in the minority of the terms.
    pub(super) fn odd_place(&self, judged: &Judged<'_>) -> Option<Span> {
        let free =
            |letter: &CompactString| self.terms.iter().filter(|(term, l)| l == letter && term.free.is_some()).count();
        let all = |letter: &CompactString| self.terms.iter().filter(|(_, l)| l == letter).count();
        // The terms stand letter by letter.
        let letters = self.terms.chunk_by(|one, two| one.1 == two.1).filter_map(|chunk| chunk.first());
        let rarest = letters.map(|(_, letter)| letter).min_by_key(|letter| free(letter) * 100 / all(letter).max(1))?;
        let holder = self.terms.iter().filter(|(_, letter)| letter == rarest).find_map(|(term, _)| term.free)?;
        Some(judged.span(holder))
    }

    pub(super) fn message(&self, judged: &Judged<'_>, odd: &[CompactString], span: Span) -> String {
        if let Some(tie) = self.tie(judged, odd, span) {
            return tie;
        }
        // Letters that stand in the same terms are named together.
        let mut clauses: Vec<(Vec<String>, String)> = Vec::new();
        for letter in odd {
            let Some((name, places)) = self.clause(judged, letter) else { continue };
            match clauses.iter_mut().find(|(_, known)| *known == places) {
                Some((names, _)) => names.push(name),
                None => clauses.push((vec![name], places)),
            }
        }
        if clauses.is_empty() {
            return "the terms differ in their free indices".to_owned();
        }
        let words = clauses.iter().take(3).map(|(names, places)| {
            format!("{} {} free {places}", listed(names), if names.len() > 1 { "are" } else { "is" })
        });
        words.collect::<Vec<_>>().join("; ")
    }

    /// Of two letters each is free where the other is not: "l is free (down) in the right side, but k in the left side".
    fn tie(&self, judged: &Judged<'_>, odd: &[CompactString], span: Span) -> Option<String> {
        let [one, two] = odd else { return None };
        let free = |letter: &CompactString| -> Vec<&Compared> {
            self.terms.iter().filter(|(term, l)| l == letter && term.free.is_some()).map(|(term, _)| term).collect()
        };
        let (first, second) = (free(one), free(two));
        let all = self.terms.iter().filter(|(_, letter)| letter == one).count();
        let spans: FxHashSet<Span> = first.iter().map(|term| term.span).collect();
        let apart = second.iter().all(|term| !spans.contains(&term.span));
        if !apart || first.len() + second.len() != all || first.is_empty() || second.is_empty() {
            return None;
        }
        let blamed_first = first.iter().filter_map(|term| term.free).any(|place| judged.span(place) == span);
        let (blamed, theirs, other, others) =
            if blamed_first { (one, first, two, second) } else { (two, second, one, first) };
        let words = |letter: &CompactString, terms: &[&Compared]| {
            let place = terms.iter().find_map(|term| term.free).unwrap_or_default();
            let level = judged.level(place);
            let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
            let names = gather(terms.iter().map(|term| self.name(judged, term, judged.sketch.sides.len())));
            let names = match names.len() {
                0..=2 => listed(&names),
                _ if letter == blamed => format!("{} terms", terms.len()),
                _ => "the others".to_owned(),
            };
            (format!("{}{level}", shown(letter)), names)
        };
        let ((blamed, here), (other, there)) = (words(blamed, &theirs), words(other, &others));
        Some(format!("{blamed} is free in {here}, but {other} in {there}"))
    }

    /// "k (down)" and "in the left side, but not in the right side".
    fn clause(&self, judged: &Judged<'_>, letter: &CompactString) -> Option<(String, String)> {
        let mine = || self.terms.iter().filter(|(_, l)| l == letter).map(|(term, _)| term);
        let sides = judged.sketch.sides.len();
        let name = |term: &Compared| self.name(judged, term, sides);
        let level = mine().find_map(|term| term.free).map_or("", |place| judged.level(place));
        let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
        let held = gather(mine().filter(|term| term.free.is_some()).map(name));
        let lacking = gather(mine().filter(|term| term.free.is_none()).map(name));
        if held.is_empty() || lacking.is_empty() {
            return None;
        }
        let both = if held.len() <= lacking.len() && held.len() < 3 {
            format!(
                "in {}, but not in {}",
                listed(&held),
                if lacking.len() > 2 { "the others".to_owned() } else { listed(&lacking) }
            )
        } else if lacking.len() < 3 {
            format!("everywhere but in {}", listed(&lacking))
        } else {
            "in some terms, but not in others".to_owned()
        };
        Some((format!("{}{level}", shown(letter)), both))
    }

    /// The name of a compared term: its side where the whole side agrees.
    fn name(&self, judged: &Judged<'_>, term: &Compared, sides: usize) -> String {
        let Some(side) = term.side.map(|side| side as usize) else {
            return format!("{} in brackets", excerpt(term.span.of(judged.text)));
        };
        let title = if sides == 1 {
            "the expression".to_owned()
        } else {
            format!("the {}", side_title(sides, side)).replace("the side", "side")
        };
        let terms = judged.sketch.sides.get(side).map_or(0, |side| side.terms);
        if terms < 2 { title } else { format!("{} of {title}", excerpt(term.span.of(judged.text))) }
    }

    pub(super) fn related(&self, judged: &Judged<'_>, span: Span) -> Vec<Related> {
        let mut out: Vec<Related> = Vec::new();
        for (term, letter) in &self.terms {
            let Some(place) = term.free else { continue };
            let at = judged.span(place);
            if at != span && !out.iter().any(|related| related.span == at) && out.len() < 6 {
                out.push(Related { span: at, message: free_here(letter, judged.level(place)) });
            }
        }
        out
    }
}

fn free_here(letter: &str, level: &str) -> String {
    let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
    format!("{} is free here{level}", shown(letter))
}

fn gather(names: impl Iterator<Item = String>) -> Vec<String> {
    let mut seen = FxHashSet::default();
    names.filter(|name| seen.insert(name.clone())).collect()
}

fn listed(names: &[String]) -> String {
    names.join(" and ")
}

/// A term in the author's words, cut short.
pub(super) fn excerpt(text: &str) -> String {
    const LENGTH: usize = 32;
    let text = text.split_whitespace().collect::<Vec<_>>().join(" ");
    if text.chars().count() <= LENGTH {
        return text;
    }
    text.chars().take(LENGTH - 1).collect::<String>() + "…"
}
