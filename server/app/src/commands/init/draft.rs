//! The text of a new `indexwise.toml`.
//!
//! Sentences hold LaTeX, so that they are literal strings where they can be. What comes from documents (letters,
//! paths) stands in strings or behind a `#`, with control characters taken out, so that it cannot become anything
//! else.

use indexwise_checker::conventions::implied::Implied;

use crate::output::printable;

const HEAD: &str = "\
# Conventions of the documents in this folder and below, begun by `indexwise init`.
# As it was written, this file changes no report: sentences that would are comments.

[conventions]
lines = [
";

/// What stands between the brackets when nothing is implied.
const EXAMPLES: &str = r"    # Sentences as a paper has them in its paragraph on conventions, for instance:
    # 'i j k run from 1 to 3',
    # '\alpha \beta \gamma \delta run from 1 to 2',
    # 'i j k are cartesian',
    # 'a_{\alpha \beta} is the metric',
    # 'b_{\alpha \beta} is symmetric',
    # 'B, m are labels',
";

const TAIL: &str = r#"]

# The level of a rule: off, hint, warning or error. `indexwise explain` lists the rules.
# [rules]
# dummy-levels = "off"

# Names are relative to this folder: what of a folder is checked, and files whose macros are known in every document.
# [files]
# include = ["paper/**", "*.inote"]
# exclude = ["paper/old"]
# macros = ["style/shell.sty"]
"#;

/// The file in the making.
#[derive(Clone, Debug, Default)]
pub(super) struct Draft {
    /// Its sentences.
    pub(super) lines: Vec<Line>,
}

/// A sentence with what is said of it.
#[derive(Clone, Debug)]
pub(super) struct Line {
    implied: Implied,
    /// What it would change, if it is left out.
    changes: Option<String>,
}

impl Line {
    pub(super) fn in_force(implied: Implied) -> Self {
        Self { implied, changes: None }
    }

    pub(super) fn left_out(implied: Implied, changes: String) -> Self {
        Self { implied, changes: Some(changes) }
    }

    fn text(&self) -> String {
        let place = self.implied.place.as_ref().map(|(path, line)| format!(": {path}, line {line}"));
        let reason = printable(&format!("{}{}", self.implied.reason, place.unwrap_or_default()));
        let sentence = quoted(&self.implied.sentence);
        match &self.changes {
            None => format!("    # {reason}\n    {sentence},\n"),
            Some(changes) => format!("    # {reason}\n    # left out, since it {changes}:\n    # {sentence},\n"),
        }
    }
}

impl Draft {
    /// The text.
    pub(super) fn text(&self) -> String {
        let lines: String = self.lines.iter().map(Line::text).collect();
        format!("{HEAD}{}{TAIL}", if lines.is_empty() { EXAMPLES } else { &lines })
    }

    /// What became of the sentences, in words.
    pub(super) fn summary(&self) -> String {
        let out = self.lines.iter().filter(|line| line.changes.is_some()).count();
        let sentences = |count: usize| format!("{count} {}", if count == 1 { "sentence" } else { "sentences" });
        match (self.lines.len() - out, out) {
            (0, 0) => "written with examples; the documents imply nothing".to_owned(),
            (force, 0) => format!("written with {} in force", sentences(force)),
            (force, out) => format!("written with {} in force and {out} left out", sentences(force)),
        }
    }
}

/// A TOML string. A literal one has no escapes and so cannot hold its own quotation mark.
fn quoted(sentence: &str) -> String {
    let sentence = printable(sentence).replace('\t', " ");
    if !sentence.contains('\'') {
        return format!("'{sentence}'");
    }
    format!("\"{}\"", sentence.replace('\\', "\\\\").replace('"', "\\\""))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::configuration::{FILE_NAME, read_as};
    use crate::files::Text;
    use indexwise_checker::paper::{SharedConventions, problems};
    use std::path::Path;

    fn conventions(text: &str) -> SharedConventions {
        let text = Text { text: text.into(), marked: false };
        read_as(text, Path::new(FILE_NAME), FILE_NAME).unwrap().conventions
    }

    fn sentences(text: &str) -> Vec<String> {
        conventions(text).sentences.into_iter().map(|(sentence, _)| sentence).collect()
    }

    fn implied(sentence: &str) -> Implied {
        Implied { sentence: sentence.into(), reason: "so".into(), place: Some(("a\n]b.tex".into(), 3)) }
    }

    #[test]
    fn what_is_in_force_is_read_back_and_nothing_else() {
        let kept = ["T_{i j} is symmetric", "T'_{\\mu \\nu} is symmetric", "\"_{i j} and '\\\" is # odd"];
        let mut lines: Vec<Line> = kept.iter().map(|sentence| Line::in_force(implied(sentence))).collect();
        lines.insert(1, Line::left_out(implied("S_{i j} is symmetric"), "adds 1 finding".into()));
        let draft = Draft { lines };
        assert_eq!(sentences(&draft.text()), kept);
        assert!(
            draft.text().contains("# so: a\u{fffd}]b.tex, line 3\n    # left out, since it adds 1 finding:\n    # 'S_")
        );
        assert_eq!(draft.summary(), "written with 3 sentences in force and 1 left out");
    }

    #[test]
    fn the_examples_declare_nothing_until_they_are_uncommented() {
        let text = Draft::default().text();
        assert_eq!(sentences(&text), [""; 0]);
        let uncomment = |line: &str| line.replacen("# '", "'", 1) + "\n";
        let text: String = text.lines().map(uncomment).collect();
        let conventions = conventions(&text);
        assert_eq!(conventions.sentences.len(), 6);
        assert_eq!(problems(&conventions), []);
    }
}
