//! The registry of rules: one slice, from which everything else derives.

use crate::finding::Severity;

/// What there is to know of a rule without running it.
#[derive(Clone, Copy, Debug)]
pub struct Rule {
    /// Kebab-case, never reused.
    pub name: &'static str,
    /// Its usual severity.
    pub severity: Severity,
    /// One sentence: what it says.
    pub summary: &'static str,
    /// The page that `explain` prints: Markdown, with a wrong and a right example.
    pub page: &'static str,
    /// Whether it is reported unless switched off.
    pub on: bool,
}

/// All rules, in the order of precedence.
pub const RULES: &[Rule] = &[];

/// The rule of a name.
pub fn find(name: &str) -> Option<&'static Rule> {
    RULES.iter().find(|rule| rule.name == name)
}
