//! Sentences of the conventions in a directive: the forms that what is typed may become, rules after `allow`, labels
//! after `using`.
//!
//! Words are matched against the forms from the left; a word in capitals stands for what the author puts there, which is
//! never a word of the language itself. What is left of a form is put in as its example has it.

use indexwise_grammar::conventions::{FORMS, Form};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::paper::View;
use crate::rules::RULES;

use super::labels::labels;
use super::{Suggestion, SuggestionKind, before};

const MARK: &str = "indexwise:";

/// What may follow in the sentence at a place; nothing outside of directives.
pub(super) fn sentences(view: &View, document: usize, offset: u32) -> Option<Vec<Suggestion>> {
    let line = said(view, document, offset)?;
    let sentence = line.rsplit("; ").next().unwrap_or_default().trim_start();
    let sentence = sentence.strip_prefix(';').unwrap_or(sentence);
    let mut words: Vec<&str> = sentence.split_whitespace().collect();
    let open = sentence.ends_with(char::is_whitespace) || sentence.is_empty();
    let partial = if open { "" } else { words.pop().unwrap_or_default() };
    let typing = Typing { words, partial, offset };
    if typing.begins(&["allow"]) {
        return Some(typing.rules());
    }
    if typing.begins(&["check", "this", "using"]) {
        let typed = partial.rsplit(',').next().unwrap_or_default();
        return Some(labels(view, offset, typed, |label| format!("({label})")));
    }
    Some(FORMS.iter().filter_map(|form| typing.form(form, view.host(document))).collect())
}

/// What the line says up to a place, without the marks of its comment; nothing outside of directives.
fn said(view: &View, document: usize, offset: u32) -> Option<&str> {
    let before = before(view, document, offset);
    let start = before.rfind('\n').map_or(0, |at| at + 1);
    let line = before.get(start..)?;
    if let Some((lead, said)) = line.split_once(MARK) {
        let lead = lead.trim();
        let comment = match view.host(document) {
            Host::Latex => !lead.is_empty() && lead.chars().all(|sign| sign == '%'),
            Host::Markdown => lead.ends_with("<!--"),
            Host::Note => lead.is_empty(),
        };
        return (comment && !said.contains("-->")).then_some(said);
    }
    let goes_on = |span: Span| {
        let between = before.get((span.end as usize).min(before.len())..).unwrap_or_default();
        let blank = between.trim_matches([' ', '\t', '\r', '\n', '%']).is_empty();
        (span.start as usize) < start && (offset <= span.end || blank && between.matches('\n').count() == 1)
    };
    let directives = &view.scan(document)?.directives;
    let held = directives.iter().any(|directive| goes_on(directive.span));
    let deeper = match view.host(document) {
        Host::Latex => line.trim_start().strip_prefix("%   "),
        Host::Markdown => Some(line.trim_start()),
        Host::Note => line.starts_with([' ', '\t']).then(|| line.trim_start()),
    };
    deeper.filter(|_| held)
}

/// A sentence that is being typed: its whole words, and the one at the cursor.
struct Typing<'t> {
    words: Vec<&'t str>,
    partial: &'t str,
    offset: u32,
}

impl Typing<'_> {
    fn begins(&self, words: &[&str]) -> bool {
        self.words.len() >= words.len() && words.iter().zip(&self.words).all(|(one, two)| one == two)
    }

    fn replaces(&self) -> Span {
        Span::new((self.offset as usize).saturating_sub(self.partial.len()), self.offset as usize)
    }

    /// Rules after `allow`, and after the rule how far it is silent.
    fn rules(&self) -> Vec<Suggestion> {
        let suggestion = |label: &str, text: &str, detail: &str, kind| Suggestion {
            label: label.to_owned(),
            detail: detail.to_owned(),
            documentation: None,
            replaces: self.replaces(),
            text: text.to_owned(),
            kind,
            rank: 0,
        };
        if self.words.len() > 1 {
            let ends = [("here", "for the formula after the sentence"), ("in this file", "in the whole file")];
            let ends = ends.into_iter().filter(|(end, _)| end.starts_with(self.partial));
            return ends.map(|(end, detail)| suggestion(end, end, detail, SuggestionKind::Sentence)).collect();
        }
        let rules = RULES.iter().filter(|rule| rule.name.starts_with(self.partial));
        rules.map(|rule| suggestion(rule.name, rule.name, rule.summary, SuggestionKind::Rule)).collect()
    }

    /// What is left of a form, if what is typed is its beginning.
    fn form(&self, form: &'static Form, host: Host) -> Option<Suggestion> {
        let tokens: Vec<&str> = form.form.split(' ').collect();
        let example = form.example_note.filter(|_| host == Host::Note).unwrap_or(form.example);
        let next = if self.words.is_empty() && self.partial.is_empty() { 0 } else { self.next(&tokens)? };
        let label = tokens.get(next..)?.join(" ");
        let text = rest_of(example, &tokens, next)?;
        Some(Suggestion {
            label,
            detail: form.meaning.to_owned(),
            documentation: Some(format!("{}\n{example}", form.form)),
            replaces: self.replaces(),
            text,
            kind: SuggestionKind::Sentence,
            rank: 0,
        })
    }

    /// The word of a form that comes next: one of the language that begins as the word at the cursor.
    fn next(&self, tokens: &[&str]) -> Option<usize> {
        let mut reached = vec![0];
        for word in &self.words {
            let mut further: Vec<usize> = Vec::new();
            for at in reached {
                match tokens.get(at) {
                    Some(token) if is_open(token) && !is_of_the_language(word) => further.extend([at, at + 1]),
                    Some(token) if plain(token).eq_ignore_ascii_case(plain(word)) => further.push(at + 1),
                    _ => {}
                }
            }
            further.sort_unstable();
            further.dedup();
            reached = further;
        }
        let begins = |at: &usize| {
            let token = tokens.get(*at).filter(|token| !is_open(token));
            token.is_some_and(|token| token.to_lowercase().starts_with(&self.partial.to_lowercase()))
        };
        reached.into_iter().find(begins)
    }
}

/// A word without the comma after it.
fn plain(word: &str) -> &str {
    word.trim_end_matches(',')
}

/// Whether a word of a form stands for what the author puts there.
fn is_open(token: &str) -> bool {
    plain(token).len() > 1 && plain(token).chars().all(|letter| letter.is_ascii_uppercase())
}

fn is_of_the_language(word: &str) -> bool {
    let literal = |form: &Form| form.form.split(' ').any(|token| !is_open(token) && plain(token) == plain(word));
    FORMS.iter().any(literal)
}

/// What an example says from a word of its form on, which is one of the language, or from the start.
fn rest_of(example: &str, tokens: &[&str], from: usize) -> Option<String> {
    if from == 0 {
        return Some(example.to_owned());
    }
    let words: Vec<&str> = example.split(' ').collect();
    let mut at = 0;
    for (number, token) in tokens.iter().enumerate().filter(|(_, token)| !is_open(token)) {
        at += words.get(at..)?.iter().position(|word| word == token)?;
        if number == from {
            return Some(words.get(at..)?.join(" "));
        }
        at += 1;
    }
    None
}
