//! The rows of a formula, read off its text: a row ends with `\\`, in a note with its line.
//!
//! Rows inside of braces or of an environment in the formula (a matrix, cases) are none of its own, but those of `aligned`
//! and kin, which set the whole formula, are. Labels, tags and comments at the ends of a row are left out.

use indexwise_grammar::span::Span;

/// Environments whose rows are those of the formula around them.
const SET_THE_WHOLE: [&str; 5] = ["aligned", "split", "gathered", "alignedat", "multlined"];

/// The rows of a formula's body, without blanks around them; those without anything in them are left out.
pub(super) fn rows_of(text: &str, body: Span) -> Vec<Span> {
    let mut rows = Vec::new();
    split(body.of(text), body.start as usize, &mut rows);
    rows.into_iter().filter_map(|row| trimmed(text, row)).collect()
}

/// The lines of a note's formula.
pub(super) fn lines_of(text: &str, body: Span) -> Vec<Span> {
    let mut at = body.start as usize;
    let mut out = Vec::new();
    for line in body.of(text).split_inclusive('\n') {
        out.extend(trimmed(text, Span::new(at, at + line.len())));
        at += line.len();
    }
    out
}

fn split(said: &str, base: usize, rows: &mut Vec<Span>) {
    let (mut from, mut at, mut depth) = (0, 0, 0_i32);
    let mut transparent: Vec<bool> = Vec::new();
    while let Some(rest) = said.get(at..).filter(|rest| !rest.is_empty()) {
        if let Some(name) = rest.strip_prefix("\\begin{").and_then(|rest| rest.split('}').next()) {
            let whole = SET_THE_WHOLE.contains(&name.trim_end_matches('*'))
                && depth == 0
                && transparent.iter().all(|open| *open);
            transparent.push(whole);
            at += "\\begin{}".len() + name.len();
            from = if whole { at } else { from };
        } else if let Some(name) = rest.strip_prefix("\\end{").and_then(|rest| rest.split('}').next()) {
            if transparent.pop() == Some(true) {
                rows.push(Span::new(base + from, base + at));
                from = (at + "\\end{}".len() + name.len()).min(said.len());
            }
            at += "\\end{}".len() + name.len();
        } else if rest.starts_with("\\\\") {
            if depth == 0 && transparent.iter().all(|open| *open) {
                rows.push(Span::new(base + from, base + at));
                from = at + 2;
            }
            at += 2;
        } else {
            let sign = rest.chars().next().unwrap_or_default();
            let escaped = sign == '\\';
            depth += match sign {
                '{' => 1,
                '}' => -1,
                _ => 0,
            };
            at += sign.len_utf8();
            if escaped {
                at += said.get(at..).and_then(|rest| rest.chars().next()).map_or(0, char::len_utf8);
            }
        }
    }
    rows.push(Span::new(base + from.min(said.len()), base + said.len()));
}

/// A row without what stands around its formula: blanks, signs of alignment, a label, a tag, a stretch of blank space.
fn trimmed(text: &str, row: Span) -> Option<Span> {
    let (mut start, mut end) = (row.start as usize, row.end as usize);
    loop {
        let said = text.get(start..end)?;
        let begun = said.trim_start_matches(|sign: char| sign.is_whitespace() || sign == '&');
        let begun = without_command(begun).unwrap_or(begun);
        let stripped = begun.trim_end();
        let ended = ["\\nonumber", "\\notag"].iter().find_map(|word| stripped.strip_suffix(word)).unwrap_or(stripped);
        let ended = without_last_command(ended).unwrap_or(ended);
        let next = (end - begun.len(), end - begun.len() + ended.len());
        if next == (start, end) {
            break;
        }
        (start, end) = next;
    }
    (start < end).then(|| Span::new(start, end))
}

/// What follows a label, a tag or the space after a row.
fn without_command(said: &str) -> Option<&str> {
    let rest = ["\\label{", "\\tag{", "\\tag*{"].iter().find_map(|command| said.strip_prefix(command));
    match rest {
        Some(rest) => rest.split_once('}').map(|(_, after)| after),
        None => {
            let (space, after) = said.strip_prefix('[')?.split_once(']')?;
            let length = space.starts_with(|sign: char| sign.is_ascii_digit() || sign == '-' || sign == '.');
            (length && space.ends_with(char::is_alphabetic)).then_some(after)
        }
    }
}

/// What stands before a label or a tag at the end.
fn without_last_command(said: &str) -> Option<&str> {
    let inner = said.strip_suffix('}')?;
    let open = inner.rfind('{')?;
    let before = inner.get(..open)?;
    ["\\label", "\\tag", "\\tag*"].iter().find_map(|command| before.strip_suffix(command))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn rows(body: &str, want: &[&str]) {
        let found = rows_of(body, Span::new(0, body.len()));
        assert_eq!(found.iter().map(|row| row.of(body)).collect::<Vec<_>>(), want);
    }

    #[test]
    fn rows_end_at_their_breaks() {
        rows(" a &= b \\\\[2pt]\n &= c \\nonumber \\\\\n \\label{x} d = e \\tag{3} ", &["a &= b", "= c", "d = e"]);
        rows(" a = b ", &["a = b"]);
        rows("  ", &[]);
        rows("\\label{eq:a}\n a \\\\ ", &["a"]);
    }

    #[test]
    fn inner_environments_keep_theirs_unless_they_set_the_whole() {
        rows("A = \\begin{pmatrix} 1 \\\\ 2 \\end{pmatrix}", &["A = \\begin{pmatrix} 1 \\\\ 2 \\end{pmatrix}"]);
        rows("\\begin{aligned} a &= b \\\\ &= c \\end{aligned}", &["a &= b", "= c"]);
        rows("{a \\\\ b} \\\\ c", &["{a \\\\ b}", "c"]);
        rows("\\end{x} \\\\ c", &["\\end{x}", "c"]);
    }
}
