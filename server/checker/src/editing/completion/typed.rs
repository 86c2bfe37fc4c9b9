//! What is being typed at a place: a script, or the name of a kernel. Read off the text alone, since nothing else may be
//! whole there.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::latex_letter;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;

/// Bytes of a script beyond which it is not looked at.
const REACH: usize = 80;

/// A script with the cursor in it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct TypedScript {
    /// The whole script with its sign, as far as it goes.
    pub span: Span,
    pub level: Level,
    pub braced: bool,
    /// Its letters in LaTeX's spelling, without the one at the cursor that is not whole.
    pub letters: Vec<CompactString>,
    /// The command at the cursor that may not be whole yet, empty if there is none.
    pub partial: Span,
    /// What stands between the sign or the brace and the cursor.
    pub content: Span,
}

/// The script at a place.
pub(super) fn script_at(text: &str, offset: usize, host: Host) -> Option<TypedScript> {
    let before = text.get(..offset)?;
    let content_at = before.rfind(|sign: char| !may_stand_in_script(sign)).map_or(0, |at| at + width(before, at));
    let content = before.get(content_at..).filter(|content| content.len() < REACH)?;
    let lead = before.get(..content_at)?;
    let (braced, sign_at) = match lead.strip_suffix('{') {
        Some(lead) => (true, lead.len().checked_sub(1)?),
        None => (false, lead.len().checked_sub(1)?),
    };
    let level = match lead.as_bytes().get(sign_at)? {
        b'_' => Level::Down,
        b'^' => Level::Up,
        _ => return None,
    };
    if lead.get(..sign_at)?.ends_with('\\') || !braced && !is_one(content, host) {
        return None;
    }
    let after = text.get(offset..)?;
    let close = if braced { closing(after) } else { None };
    let partial = partial(content, braced, host);
    let whole = content.get(..content.len() - partial.len())?;
    let mut letters = letters(whole, host);
    letters.extend(close.map(|close| letters_after(after, close, host)).unwrap_or_default());
    Some(TypedScript {
        span: Span::new(sign_at, close.map_or(offset, |close| offset + close + 1)),
        level,
        braced,
        letters,
        partial: Span::new(offset - partial.len(), offset),
        content: Span::new(content_at, offset),
    })
}

fn may_stand_in_script(sign: char) -> bool {
    sign.is_alphanumeric() || matches!(sign, '\\' | ' ' | '\'' | ',' | ';')
}

fn width(text: &str, at: usize) -> usize {
    text.get(at..).and_then(|rest| rest.chars().next()).map_or(1, char::len_utf8)
}

/// Whether a script without braces goes on up to the cursor: one letter or command, in a note a run of letters.
fn is_one(content: &str, host: Host) -> bool {
    match host {
        Host::Note => content.chars().all(char::is_alphanumeric),
        _ => {
            content.strip_prefix('\\').unwrap_or(content).chars().all(|letter| letter.is_ascii_alphabetic())
                && (content.starts_with('\\') || content.len() < 2)
        }
    }
}

/// Where the brace closes after the cursor, if only letters stand before it.
fn closing(after: &str) -> Option<usize> {
    let at = after.find(|sign: char| !may_stand_in_script(sign)).filter(|at| *at < REACH)?;
    after.get(at..)?.starts_with('}').then_some(at)
}

/// The command that ends at the cursor; in a script without braces its letter, since another one may be meant.
fn partial(content: &str, braced: bool, host: Host) -> &str {
    if host == Host::Note {
        return "";
    }
    let word = content.trim_end_matches(|letter: char| letter.is_ascii_alphabetic());
    match word.strip_suffix('\\') {
        Some(outside) => content.get(outside.len()..).unwrap_or_default(),
        None if braced => "",
        None => content,
    }
}

fn letters_after(after: &str, close: usize, host: Host) -> Vec<CompactString> {
    letters(after.get(..close).unwrap_or_default(), host)
}

/// The letters of a script's text, in LaTeX's spelling.
fn letters(text: &str, host: Host) -> Vec<CompactString> {
    let mut out: Vec<CompactString> = Vec::new();
    for word in text.split([' ', ',', ';']).filter(|word| !word.is_empty()) {
        if host == Host::Note && latex_letter(word).starts_with('\\') {
            out.push(latex_letter(word).into());
            continue;
        }
        let mut rest = word;
        while let Some(first) = rest.chars().next() {
            let length = match rest.strip_prefix('\\') {
                Some(name) => 1 + name.find(|letter: char| !letter.is_ascii_alphabetic()).unwrap_or(name.len()),
                None => first.len_utf8(),
            };
            let primes = rest.get(length..).map_or(0, |rest| rest.len() - rest.trim_start_matches('\'').len());
            let own = rest.get(..length + primes).unwrap_or_default();
            if first.is_alphabetic() || own.len() > 1 {
                out.push(latex_letter(own).into());
            }
            rest = rest.get(length + primes..).unwrap_or_default();
        }
    }
    out
}

/// The beginning of a kernel's name at a place: a command, a letter, in a note a word. Empty at no letter.
pub(super) fn name_at(text: &str, offset: usize, host: Host) -> Option<Span> {
    let before = text.get(..offset)?;
    let word = before.trim_end_matches(|letter: char| letter.is_ascii_alphabetic());
    let (start, typed) = match word.strip_suffix('\\') {
        Some(outside) => (outside.len(), true),
        None if host == Host::Note => (word.len(), word.len() < offset),
        None => {
            let last = before.chars().next_back().filter(|letter| letter.is_alphabetic());
            (offset - last.map_or(0, char::len_utf8), last.is_some())
        }
    };
    typed.then(|| Span::new(start, offset))
}
