//! A place in a formula where something may be put in: what stands around it, read off the text.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, ItemKind, Statement, Sum, walk};

use crate::paper::View;

/// The place where something is to be put in.
pub(super) struct Spot<'v> {
    pub number: usize,
    pub at: usize,
    pub text: &'v str,
    body: Span,
    pub formula: Formula,
    /// Letters that stand in scripts of the statement there.
    pub letters: Vec<CompactString>,
}

impl<'v> Spot<'v> {
    pub fn of(view: &'v View, document: usize, offset: u32) -> Option<Self> {
        let number = view.formula_number(document, offset)?;
        let body = view.scan(document)?.regions.get(number)?.body;
        let formula = view.tree(document, number)?;
        let text = view.text(document);
        let inside = body.start <= offset && offset <= body.end && text.is_char_boundary(offset as usize);
        let letters = letters_at(&formula, offset);
        let spot = Self { number, at: offset as usize, text, body, formula, letters };
        (inside && !spot.is_in_script() && !spot.is_in_word()).then_some(spot)
    }

    fn before(&self) -> &'v str {
        self.text.get(self.body.start as usize..self.at).unwrap_or_default().trim_end()
    }

    fn after(&self) -> &'v str {
        self.text.get(self.at..self.body.end as usize).unwrap_or_default().trim_start()
    }

    pub fn is_empty(&self) -> bool {
        self.before().is_empty() && self.after().is_empty()
    }

    /// Whether the place lies in a script or right after its sign.
    fn is_in_script(&self) -> bool {
        let at = self.at as u32;
        let mut inside = self.before().ends_with(['_', '^', '\\']);
        let sides = self.formula.statements.iter().flat_map(|statement| &statement.sides);
        for side in sides {
            walk(side, &mut |factor| {
                inside |= factor.scripts.iter().any(|script| script.span.start < at && at < script.span.end);
            });
        }
        inside
    }

    /// Whether the place lies inside of a command, a word or a number.
    fn is_in_word(&self) -> bool {
        let before = self.text.get(..self.at).unwrap_or_default();
        let command = before.trim_end_matches(|letter: char| letter.is_ascii_alphabetic()).ends_with('\\');
        let next = self.text.get(self.at..).and_then(|after| after.chars().next());
        let joined = |letter: Option<char>| letter.is_some_and(char::is_alphanumeric);
        joined(next) && (command || joined(before.chars().next_back()))
    }

    /// Whether a term may begin here: at the start, or after a relation, a sign or an opening bracket.
    fn may_begin_term(&self) -> bool {
        let before = self.before();
        let begins = before.is_empty() || before.ends_with(['=', '+', '-', '(', '[', '&', '<', '>']);
        begins || ["\\equiv", "\\approx", "\\sim", "\\\\"].iter().any(|sign| before.ends_with(sign))
    }

    /// Whether a term may end here: at the end, or before a relation, a sign or a closing bracket.
    fn may_end_term(&self) -> bool {
        let after = self.after();
        let ends = after.is_empty() || after.starts_with(['=', '+', '-', ')', ']', '}', ',', '.', ';', '&', '<', '>']);
        let words = ["\\\\", "\\label", "\\end", "\\qquad", "\\quad", "\\equiv", "\\right"];
        ends || words.iter().any(|end| after.starts_with(end))
    }

    /// Whether the author leaves room for a term here; right before a factor nobody waits for one.
    pub fn has_room(&self) -> bool {
        let next = self.text.get(self.at..).and_then(|after| after.chars().next());
        self.may_begin_term() && (self.may_end_term() || next.is_none_or(char::is_whitespace))
    }

    /// Whether what stands around would take a part of a sum only.
    pub fn wants_brackets(&self, side: &Sum, text: &str) -> bool {
        let sum = side.terms.len() > 1;
        let signed = text.starts_with(['-', '+', '\\']) && side.terms.first().is_some_and(|term| term.sign.is_some());
        let between = self.may_begin_term() && self.may_end_term();
        let before = self.before();
        (sum || signed) && (!between || signed && before.ends_with('+') || before.ends_with('-'))
    }

    /// Blanks where the text would stand close to its neighbours.
    pub fn space_out(&self, text: &mut String) {
        let close = |letter: Option<char>| letter.is_some_and(|letter| !letter.is_whitespace());
        let before = self.text.get(self.body.start as usize..self.at).unwrap_or_default().chars().next_back();
        let after = self.text.get(self.at..self.body.end as usize).unwrap_or_default().chars().next();
        if close(before) && before.is_some_and(|letter| !"([{".contains(letter)) && !text.starts_with(' ') {
            text.insert(0, ' ');
        }
        if close(after) && after.is_some_and(|letter| !")]},.;".contains(letter)) && !text.ends_with(' ') {
            text.push(' ');
        }
    }
}

/// The letters of the statement at an offset; of all statements where none holds it.
fn letters_at(formula: &Formula, offset: u32) -> Vec<CompactString> {
    let holds = |statement: &&Statement| statement.span.start <= offset && offset <= statement.span.end;
    let near: Vec<&Statement> = formula.statements.iter().filter(holds).collect();
    let statements = if near.is_empty() { formula.statements.iter().collect() } else { near };
    let mut letters: Vec<CompactString> = Vec::new();
    for side in statements.into_iter().flat_map(|statement| &statement.sides) {
        walk(side, &mut |factor| {
            for item in factor.scripts.iter().flat_map(|script| &script.items) {
                if let ItemKind::Letter(letter) = &item.kind
                    && !letters.contains(letter)
                {
                    letters.push(letter.clone());
                }
            }
        });
    }
    letters
}
