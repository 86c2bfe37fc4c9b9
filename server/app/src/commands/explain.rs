//! `indexwise explain [RULE]`: the page of a rule, or the list of rules. The page about sentences that cannot be read
//! goes on with the forms of those that can.

use std::fmt::Write;

use indexwise_checker::rules::{RULES, Rule, find};
use indexwise_grammar::conventions::FORMS;

use crate::commands::check::unknown_rule;
use crate::output::{Status, complain, print};

/// Prints the page or the list.
pub fn run(name: Option<&str>) -> Status {
    let Some(name) = name else { return print(&list(RULES)) };
    match find(name) {
        Some(rule) => print(&page(rule)),
        None => {
            complain(&unknown_rule(name));
            Status::Trouble
        }
    }
}

/// The page of a rule, in Markdown.
pub fn page(rule: &Rule) -> String {
    let forms = if rule.name == SENTENCES { forms() } else { String::new() };
    format!("{}\n{forms}", rule.page.trim_end())
}

/// The rule about sentences that have no known form.
const SENTENCES: &str = "convention-unreadable";

/// The forms of sentences with an example each, as a section of a page.
fn forms() -> String {
    FORMS.iter().fold("\n## Forms\n\n".to_owned(), |mut text, form| {
        let _ = writeln!(text, "- {}\n      {}", form.form, form.example);
        text
    })
}

/// One rule a line: name, severity, summary.
fn list(rules: &[Rule]) -> String {
    let width = rules.iter().map(|rule| rule.name.len()).max().unwrap_or_default();
    rules.iter().fold(String::new(), |mut text, rule| {
        let off = if rule.on { "" } else { " (off unless asked for with --only)" };
        // Writing to a string does not fail.
        let _ = writeln!(text, "{:width$}  {:7}  {}{off}", rule.name, rule.severity.word(), rule.summary);
        text
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_list_has_a_line_for_each_rule() {
        let list = list(RULES);
        assert_eq!(list.lines().count(), RULES.len());
        for (line, rule) in list.lines().zip(RULES) {
            assert!(line.starts_with(rule.name) && line.contains(rule.severity.word()), "{line}");
            assert_eq!(line.ends_with("--only)"), !rule.on, "{line}");
        }
    }

    #[test]
    fn the_page_about_sentences_lists_their_forms() {
        let listed = |rule: &Rule| FORMS.iter().filter(|form| page(rule).contains(form.example)).count();
        for rule in RULES {
            assert_eq!(listed(rule) == FORMS.len(), rule.name == SENTENCES, "{}", rule.name);
        }
    }

    #[test]
    fn a_page_ends_with_one_line_break() {
        for rule in RULES {
            let page = page(rule);
            assert!(page.ends_with('\n') && !page.ends_with("\n\n") && page.len() > 1, "{}", rule.name);
        }
    }
}
