//! The words of a sentence, each with its place and with what it says as mathematics.
//!
//! Blanks and commas outside brackets part words, dollars are passed over. Traps: `\tilde g_{ij}` and `R^i {}_{jkl}`
//! are one word though a blank stands in them, `n-1` and `-+++` are several though none does, `dummy-levels` is one.
//! What a word says as mathematics is asked of the reader of formulas, so that it is read as it is in the text.

use std::ops::Range;

use compact_str::CompactString;

use crate::formula::{Draft, numbered, prepare, prepare_note};
use crate::hosts::Host;
use crate::macros::{Macros, Parameter};
use crate::span::Span;
use crate::tree::{Atom, Factor, Formula, Kernel};
use crate::vocabulary::{Class, class, greek_word};

use super::forms::canonical;
use super::{Name, Tensor};

/// Words that end the list of names a sentence begins with; the only ones that cannot be names there.
pub(super) const VERBS: &[&str] = &["is", "are", "run", "runs", "range", "ranges", "raise", "raises", "do", "does"];

/// Why a word with a lone brace is no kernel.
pub(super) const UNCLOSED: &str = "has a brace without its partner";

/// A word of a sentence.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Word<'t> {
    /// As written.
    pub text: &'t str,
    /// Its place in the document.
    pub span: Span,
    /// The kernel with its scripts that it is, or why it is none.
    pub kernel: Result<Box<Factor>, &'static str>,
}

impl Word<'_> {
    /// Whether it is this word of the language; its first letter may be a capital, unless it is its only one.
    pub(super) fn says(&self, word: &str) -> bool {
        says(self.text, word)
    }

    /// Whether it is a verb of the language.
    pub(super) fn is_verb(&self) -> bool {
        VERBS.iter().any(|verb| self.says(verb))
    }

    /// Whether it is a word of more than a letter or two that sentences are made of.
    pub(super) fn is_of_the_language(&self) -> bool {
        self.text.len() > 2 && canonical(&self.text.to_ascii_lowercase()).is_some()
    }

    /// One letter, perhaps primed, numbered or accented.
    pub(super) fn letter(&self) -> Option<Name> {
        let factor = self.kernel.as_ref().ok()?;
        let Atom::Kernel(Kernel { name, word: false, .. }) = &factor.atom else { return None };
        numbered(name, &factor.scripts).map(|text| self.name(text))
    }

    /// The name of a kernel; what scripts it has does not matter.
    pub(super) fn kernel_name(&self) -> Option<Name> {
        match &self.kernel.as_ref().ok()?.atom {
            Atom::Kernel(kernel) => Some(self.name(kernel.name.clone())),
            _ => None,
        }
    }

    /// A letter or any other word without scripts, as it may stand in a script by its own.
    pub(super) fn label(&self) -> Option<Name> {
        let plain = !self.text.contains(['_', '^', '(', '[']) && self.kernel != Err(UNCLOSED);
        let word = || plain.then(|| self.name(crate::latex_letter(self.text).into()));
        let kernel = || match &self.kernel.as_ref().ok()?.atom {
            Atom::Kernel(kernel) if kernel.word => numbered(&kernel.name, &self.kernel.as_ref().ok()?.scripts),
            _ => None,
        };
        self.letter().or_else(|| kernel().map(|text| self.name(text))).or_else(word)
    }

    /// A kernel with its scripts.
    pub(super) fn tensor(&self) -> Option<Tensor> {
        self.kernel.as_ref().ok().map(|factor| Tensor { factor: (**factor).clone(), span: self.span })
    }

    /// A number without sign or point.
    pub(super) fn number(&self) -> Option<u32> {
        is_number(self.text).then(|| self.text.parse().ok()).flatten()
    }

    fn name(&self, text: CompactString) -> Name {
        Name { text, span: self.span }
    }
}

fn says(text: &str, word: &str) -> bool {
    let capital = || text.len() > 1 && text.len() == word.len() && text.get(1..) == word.get(1..);
    text == word || (capital() && text.get(..1).is_some_and(|first| word.get(..1) == Some(&first.to_ascii_lowercase())))
}

fn is_number(text: &str) -> bool {
    !text.is_empty() && text.bytes().all(|byte| byte.is_ascii_digit())
}

/// The words of a text that starts at byte `base` of the document, with drafts of what each says as mathematics.
pub(super) struct Cut<'t> {
    /// Places in the text, in order.
    pub words: Vec<(Range<usize>, &'t str)>,
    base: usize,
}

impl<'t> Cut<'t> {
    /// Cuts a text into words; linear in its length.
    pub(super) fn new(text: &'t str, base: usize, macros: &Macros) -> Self {
        let mut words: Vec<(Range<usize>, &str)> = Vec::new();
        for piece in pieces(text) {
            let said = text.get(piece.range.clone()).unwrap_or_default();
            match words.last_mut() {
                Some((before, joined)) if !piece.after_comma && joins(joined, said, base + before.start, macros) => {
                    before.end = piece.range.end;
                    *joined = text.get(before.clone()).unwrap_or_default();
                }
                _ => words.push((piece.range, said)),
            }
        }
        Self { words, base }
    }

    /// The draft of each word, in order.
    pub(super) fn drafts(&self, host: Host, macros: &Macros) -> Vec<(Span, bool, Draft)> {
        self.words.iter().map(|(range, text)| draft(text, self.base + range.start, host, macros)).collect()
    }

    /// The words with their formulas, which stand in the order of the drafts.
    pub(super) fn read(&self, formulas: &mut impl Iterator<Item = Formula>) -> Vec<Word<'t>> {
        let word = |((range, text), formula): (&(Range<usize>, &'t str), Formula)| Word {
            text,
            span: self.span(range),
            kernel: kernel_of(text, formula).map(Box::new),
        };
        self.words.iter().zip(formulas).map(word).collect()
    }

    fn span(&self, range: &Range<usize>) -> Span {
        Span::new(self.base + range.start, self.base + range.end)
    }
}

/// The draft of a text that starts at byte `base`.
pub(super) fn draft(text: &str, base: usize, host: Host, macros: &Macros) -> (Span, bool, Draft) {
    // A Greek name is one letter in every host.
    let note = host == Host::Note || greek_word(text).is_some();
    let draft = if note { prepare_note(text, base) } else { prepare(text, base, macros) };
    (Span::new(base, base + text.len()), true, draft)
}

/// The one kernel that a formula consists of, or why it is none.
fn kernel_of(text: &str, mut formula: Formula) -> Result<Factor, &'static str> {
    if !is_closed(text) {
        return Err(UNCLOSED);
    }
    if !formula.unknown.is_empty() {
        return Err("holds a command that is not defined");
    }
    let unread = !formula.unread.is_empty();
    let mut sides = formula.statements.pop().filter(|_| formula.statements.is_empty() && !unread).map(|s| s.sides);
    let mut terms = sides.as_mut().filter(|sides| sides.len() == 1).and_then(Vec::pop).map(|side| side.terms);
    let term = terms.as_mut().filter(|terms| terms.len() == 1).and_then(Vec::pop).filter(|term| term.sign.is_none());
    let mut factors = term.map(|term| term.factors).unwrap_or_default();
    let kernel = |factor: &Factor| matches!(factor.atom, Atom::Kernel(_));
    match factors.pop() {
        Some(factor) if factors.is_empty() && kernel(&factor) => Ok(factor),
        Some(factor) if !factors.is_empty() && kernel(&factor) && factors.iter().all(kernel) => {
            Err("is several letters in one word; blanks part them")
        }
        _ => Err("is neither a letter nor a tensor"),
    }
}

/// Whether every brace of a text has its partner.
fn is_closed(text: &str) -> bool {
    let mut depth = 0_i32;
    let mut escaped = false;
    for byte in text.bytes() {
        match byte {
            _ if escaped => escaped = false,
            b'\\' => escaped = true,
            b'{' => depth += 1,
            b'}' if depth == 0 => return false,
            b'}' => depth -= 1,
            _ => {}
        }
    }
    depth == 0
}

/// A stretch of the text between blanks and commas.
struct Piece {
    range: Range<usize>,
    after_comma: bool,
}

fn pieces(text: &str) -> Vec<Piece> {
    let mut cutter = Cutter { found: Vec::new(), start: None, after_comma: false };
    let mut letters = text.char_indices().peekable();
    let (mut depth, mut previous) = (0_usize, ' ');
    while let Some((at, letter)) = letters.next() {
        let next = letters.peek().map(|(_, next)| *next);
        match letter {
            '\\' if next.is_some_and(|next| !next.is_ascii_alphabetic() && next != '@') => {
                // `\,`, `\ ` and `\(` part words, `\{` stands in one.
                if depth == 0 && next.is_some_and(|next| " ,;:!>()".contains(next)) {
                    cutter.end(at);
                } else {
                    cutter.begin(at);
                }
                letters.next();
            }
            ',' if depth == 0 => {
                cutter.end(at);
                cutter.after_comma = true;
            }
            '~' | '$' if depth == 0 => cutter.end(at),
            _ if depth == 0 && letter.is_whitespace() => cutter.end(at),
            '+' | '-' | '\u{2212}' if depth == 0 && cutter.is_sign(previous, next) => {
                cutter.end(at);
                cutter.begin(at);
                cutter.end(at + letter.len_utf8());
            }
            _ => {
                cutter.begin(at);
                depth = match letter {
                    '{' | '(' | '[' => depth + 1,
                    '}' | ')' | ']' => depth.saturating_sub(1),
                    _ => depth,
                };
            }
        }
        previous = letter;
    }
    cutter.end(text.len());
    cutter.found
}

struct Cutter {
    found: Vec<Piece>,
    start: Option<usize>,
    after_comma: bool,
}

impl Cutter {
    fn begin(&mut self, at: usize) {
        self.start.get_or_insert(at);
    }

    fn end(&mut self, at: usize) {
        if let Some(start) = self.start.take() {
            self.found.push(Piece { range: start..at, after_comma: self.after_comma });
            self.after_comma = false;
        }
    }

    /// Whether a sign between these two is a word by itself: at the start of a word or before a digit.
    fn is_sign(&self, previous: char, next: Option<char>) -> bool {
        let digit = next.is_some_and(|next| next.is_ascii_digit());
        self.start.is_none() || (digit && !matches!(previous, '_' | '^'))
    }
}

/// Whether a word goes on with the next piece over a blank: a script follows, or a command wants its argument.
fn joins(before: &str, after: &str, place: usize, macros: &Macros) -> bool {
    let script = |text: &str| text.starts_with(['_', '^', '{']) || text.starts_with("\\indices");
    script(after) || before.ends_with(['_', '^']) || (!is_verb(after) && wants_argument(before, place, macros))
}

fn is_verb(text: &str) -> bool {
    VERBS.iter().any(|verb| says(text, verb))
}

/// Whether a text ends with a command that decorates what follows, or with a macro that takes an argument.
fn wants_argument(text: &str, place: usize, macros: &Macros) -> bool {
    let Some((_, name)) = text.rsplit_once('\\') else { return false };
    if name.is_empty() || !name.bytes().all(|byte| byte.is_ascii_alphabetic() || byte == b'@') {
        return false;
    }
    match macros.at(name, u32::try_from(place).unwrap_or(u32::MAX)) {
        Some(found) => found.parameters.contains(&Parameter::Mandatory),
        None => matches!(class(name), Some(Class::Accent | Class::Font | Class::Bold | Class::Roman)),
    }
}

/// Whether a word is a sign of a signature: `+`, `-` or the long minus.
pub(super) fn sign(text: &str) -> Option<bool> {
    match text {
        "+" => Some(true),
        "-" | "\u{2212}" => Some(false),
        _ => None,
    }
}
