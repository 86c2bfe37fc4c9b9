//! The label of a statement, for the heading of a finding: found by looking around it, left out in doubt.

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use super::super::FileReport;
use super::super::places::Places;

const LABEL: &str = "\\label{";

/// Longer lines, in bytes, are not searched: they hold more than one formula, and each finding would search them.
const LONGEST_SEARCHED: usize = 4000;

/// The one label on the lines of the statement, or at its opening before or its closing after.
pub(super) fn of<'a>(file: &'a FileReport, places: &Places<'a>, statement: Span) -> Option<&'a str> {
    let (host, text) = (file.host?, &*file.text.text);
    let (first, last) = (places.lines_of(statement).next()?, places.lines_of(statement).next_back()?);
    let lines = first.join(last).of(text);
    if lines.len() > LONGEST_SEARCHED {
        return None;
    }
    if host == Host::Note {
        return in_note(lines);
    }
    if let Some((_, after)) = lines.split_once(LABEL) {
        // With several labels it is not clear which is meant.
        return if after.contains(LABEL) { None } else { name(after) };
    }
    let near = |offset, step| places.neighbour(offset, step).filter(|line| line.len() <= LONGEST_SEARCHED);
    let begins = |line: &&str| line.contains("\\begin{");
    let is_label = |line: &&str| line.trim_start().starts_with(LABEL);
    let opening = near(first.start, -1).filter(begins).filter(|line| line.contains(LABEL));
    let own_line = near(first.start, -1).filter(is_label).filter(|_| near(first.start, -2).is_some_and(|l| begins(&l)));
    let closing = near(last.start, 1).filter(is_label);
    name(opening.or(own_line).or(closing)?.split_once(LABEL)?.1)
}

fn name(after: &str) -> Option<&str> {
    after.split_once('}').map(|(name, _)| name.trim()).filter(|name| !name.is_empty())
}

/// `(trace)  Gamma^i_ik = ...`: the name stands first and a blank follows.
fn in_note(lines: &str) -> Option<&str> {
    let (name, after) = lines.trim_start().strip_prefix('(')?.split_once(')')?;
    let is_name = !name.is_empty() && name.chars().all(|c| c.is_alphanumeric() || matches!(c, ':' | '-' | '_' | '.'));
    (is_name && after.starts_with([' ', '\t'])).then_some(name)
}

#[cfg(test)]
mod tests {
    use super::super::super::samples;
    use super::*;

    #[track_caller]
    fn label(text: &str, host: Host) -> Option<String> {
        let mut file = samples::file("a", text, false);
        file.host = Some(host);
        let places = Places::new(&file.text);
        of(&file, &places, samples::span(text, "A_i = B_i")).map(str::to_owned)
    }

    #[test]
    fn a_label_is_found_around_the_statement() {
        for text in [
            "$$ A_i = B_i \\label{eq:a} $$",
            "\\begin{equation}\\label{eq:a}\nA_i = B_i\n\\end{equation}",
            "\\begin{equation}\nA_i = B_i\n\\label{eq:a}\n\\end{equation}",
            "\\begin{equation}\n  \\label{eq:a}\n  A_i = B_i\n\\end{equation}",
        ] {
            assert_eq!(label(text, Host::Latex).as_deref(), Some("eq:a"), "{text}");
        }
        assert_eq!(label("  (eq:a)  A_i = B_i", Host::Note).as_deref(), Some("eq:a"));
    }

    #[test]
    fn a_doubtful_label_is_left_out() {
        for text in [
            "$A_i = B_i$",
            "A_i = B_i \\label{a}\\label{b}",
            "\\section{S}\\label{s}\n$A_i = B_i$",
            "\\section{S}\n\\label{s}\n$A_i = B_i$",
            "A_i = B_i\\label{",
        ] {
            assert_eq!(label(text, Host::Latex), None, "{text}");
        }
        assert_eq!(label("  (x + y) A_i = B_i", Host::Note), None);
    }
}
