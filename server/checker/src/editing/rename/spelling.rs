//! How a new letter is written where an old one stood: in the author's way, with blanks where they are needed.
//!
//! A Greek letter is a command in LaTeX, and in a note a name or a sign, as the note does; where the old letter is a sign,
//! the new one is. Traps: a command swallows letters that follow it (`\mua`) and is prolonged by those before it; without
//! braces a script holds one sign or command in LaTeX, and in a note a run of letters or one name.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, Formula, ItemKind};
use indexwise_grammar::{latex_letter, read_formula, read_note_formula, unicode_sign};

/// The index letter that a text names, in LaTeX spelling; nothing if it is no letter.
pub(super) fn index_letter(text: &str) -> Option<CompactString> {
    let formula = read_formula(&format!("A_{{{}}}", latex_letter(text)), &Macros::default());
    let [script] = lone_factor(&formula)?.scripts.as_slice() else { return None };
    match script.items.as_slice() {
        [item] => match &item.kind {
            ItemKind::Letter(letter) => Some(letter.clone()),
            _ => None,
        },
        _ => None,
    }
}

/// The kernel that a text names, in LaTeX spelling; nothing if it names none.
pub(super) fn kernel_name(text: &str, host: Host) -> Option<CompactString> {
    let formula = match host {
        Host::Note => read_note_formula(text),
        Host::Latex | Host::Markdown => read_formula(latex_letter(text), &Macros::default()),
    };
    let factor = lone_factor(&formula).filter(|factor| factor.scripts.is_empty())?;
    match &factor.atom {
        Atom::Kernel(kernel) => Some(kernel.name.clone()),
        _ => None,
    }
}

/// The one factor that a formula is.
fn lone_factor(formula: &Formula) -> Option<&Factor> {
    let whole = formula.unread.is_empty() && formula.unknown.is_empty() && !formula.passed_over;
    let [statement] = formula.statements.as_slice() else { return None };
    let [side] = statement.sides.as_slice() else { return None };
    let [term] = side.terms.as_slice() else { return None };
    let [factor] = term.factors.as_slice() else { return None };
    (whole && term.sign.is_none()).then_some(factor)
}

/// An index letter as it is to be written in place of what stands at a span.
pub(super) fn respelled(letter: &str, span: Span, text: &str, host: Host) -> String {
    let (before, own, after) = around(span, text);
    let unbraced = before.ends_with(['_', '^']);
    let mut written = spelled(letter, own, text, host);
    let is_name = written.chars().nth(1).is_some() && written.chars().all(|sign| sign.is_ascii_alphabetic());
    let beside = after.starts_with(char::is_alphanumeric) || !unbraced && before.ends_with(char::is_alphanumeric);
    if host == Host::Note && is_name && beside && !in_braces(before) {
        // A name in a run of letters would be so many letters.
        written = unicode_sign(letter).map_or(written, str::to_owned);
    }
    let simple = written.chars().nth(1).is_none() || is_command(&written) || is_name && host == Host::Note;
    if unbraced && !simple {
        return format!("{{{written}}}");
    }
    apart(&written, before, after, host)
}

/// A kernel's name as it is to be written in place of what stands at a span.
pub(super) fn spelled_kernel(name: &str, span: Span, text: &str, host: Host) -> String {
    let (before, own, after) = around(span, text);
    // A word of a note is set in one type in LaTeX spelling.
    let plain = name.strip_prefix("\\mathit ").filter(|_| host == Host::Note).unwrap_or(name);
    apart(&spelled(plain, own, text, host), before, after, host)
}

/// What stands before a span, in it and after it.
fn around(span: Span, text: &str) -> (&str, &str, &str) {
    let before = text.get(..span.start as usize).unwrap_or_default();
    (before, span.of(text), text.get(span.end as usize..).unwrap_or_default())
}

/// A letter in the author's way: `\mu`, `mu` or `μ`.
fn spelled(letter: &str, own: &str, text: &str, host: Host) -> String {
    let Some(sign) = unicode_sign(letter) else { return letter.to_owned() };
    let is_sign = |text: &str| text.chars().any(|one| latex_letter(one.encode_utf8(&mut [0; 4])).starts_with('\\'));
    if own.starts_with('\\') {
        return letter.to_owned();
    }
    if !own.is_ascii() {
        return sign.to_owned();
    }
    match host {
        // A name for a name; for a letter, what the note has elsewhere.
        Host::Note if own.len() > 1 || !is_sign(text) => letter.trim_start_matches('\\').to_owned(),
        Host::Note => sign.to_owned(),
        Host::Latex | Host::Markdown => letter.to_owned(),
    }
}

/// A text with the blanks that keep it apart from its neighbours.
fn apart(written: &str, before: &str, after: &str, host: Host) -> String {
    let is_letter = |sign: char| sign.is_ascii_alphabetic();
    let word = written.chars().rev().take_while(|sign| is_letter(*sign)).count();
    let ends_in_word = match host {
        Host::Note => word > 1,
        Host::Latex | Host::Markdown => written.len() > word && written.trim_end_matches(is_letter).ends_with('\\'),
    };
    let behind = if ends_in_word && after.starts_with(char::is_alphanumeric) { " " } else { "" };
    let command = before.trim_end_matches(is_letter).ends_with('\\') && before.ends_with(is_letter);
    let name = host == Host::Note && before.ends_with(is_letter) && (word > 1 || is_name_before(before));
    let front = if written.starts_with(is_letter) && (command || name) { " " } else { "" };
    format!("{front}{written}{behind}")
}

/// Whether a name of several letters ends there.
fn is_name_before(before: &str) -> bool {
    let letters = before.len() - before.trim_end_matches(|sign: char| sign.is_ascii_alphabetic()).len();
    let word = before.get(before.len() - letters..).unwrap_or_default();
    letters > 1 && latex_letter(word).starts_with('\\')
}

fn is_command(text: &str) -> bool {
    text.strip_prefix('\\').is_some_and(|name| !name.is_empty() && name.chars().all(|sign| sign.is_ascii_alphabetic()))
}

/// Whether the end of a text stands in braces that are not closed.
fn in_braces(before: &str) -> bool {
    let line = before.rsplit('\n').next().unwrap_or_default();
    line.matches('{').count() > line.matches('}').count()
}
