//! The client's settings under `indexwise`.
//!
//! Shape: `{"rules": {"like-terms": "off"}, "steps": "auto", "inlayHints": false, "rulePages": "https://..."}`. What
//! the client says comes after what `indexwise.toml` says of a rule. A value that is none of those known is passed over
//! and told of, since the rest still holds: an editor has no run that could end with an error.

use indexwise_checker::finding::Severity;
use indexwise_checker::paper::{Settings as CheckerSettings, StepMode};
use indexwise_checker::rules::find;
use serde_json::{Map, Value};

use crate::configuration::{Levels, Scope};

/// The section that the settings stand in.
pub const SECTION: &str = "indexwise";

/// What the client wants.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Settings {
    /// Rules with their levels.
    pub levels: Levels,
    /// Which steps are judged.
    pub steps: StepMode,
    /// Whether inlay hints are given.
    pub hints: bool,
    /// The address under which the pages of the rules stand.
    pub pages: Option<String>,
}

impl Settings {
    /// Reads a section, and what is wrong with it. What is not said is as it is by default.
    pub fn read(section: &Value) -> (Self, Vec<String>) {
        let mut settings = Self::default();
        let mut wrong = Vec::new();
        let Some(fields) = section.as_object() else {
            if !section.is_null() {
                wrong.push(format!("{SECTION}: settings must be an object"));
            }
            return (settings, wrong);
        };
        let mut tell = |name: &str, cause: String| wrong.push(format!("{SECTION}.{name}: {cause}"));
        for (name, value) in fields {
            match (name.as_str(), value) {
                (_, Value::Null) => {}
                ("rules", Value::Object(rules)) => settings.read_rules(rules, &mut tell),
                ("steps", Value::String(word)) => match steps(word) {
                    Some(mode) => settings.steps = mode,
                    None => tell(name, format!("\"{word}\" is none of auto, all and off")),
                },
                ("inlayHints", Value::Bool(wanted)) => settings.hints = *wanted,
                ("rulePages", Value::String(address)) if address.is_empty() => {}
                ("rulePages", Value::String(address)) => settings.pages = Some(address.clone()),
                ("rules" | "steps" | "inlayHints" | "rulePages", _) => tell(name, "has the wrong type".to_owned()),
                // An editor's part of the section (where the program is, what is traced) is no concern of the server.
                _ => {}
            }
        }
        (settings, wrong)
    }

    fn read_rules(&mut self, rules: &Map<String, Value>, tell: &mut impl FnMut(&str, String)) {
        for (name, level) in rules {
            let place = format!("rules.{name}");
            let Some(rule) = find(name) else {
                tell(&place, "there is no such rule".to_owned());
                continue;
            };
            match level.as_str().and_then(|word| self::level(word, rule.severity)) {
                Some(level) => self.levels.push((name.clone(), level)),
                None => tell(&place, "a level is off, on, hint, warning or error".to_owned()),
            }
        }
    }

    /// What the checker is to do in a scope.
    pub fn in_scope(&self, scope: &Scope, steps: StepMode) -> CheckerSettings {
        let levels = scope.levels().into_iter().chain(self.levels.iter().cloned()).collect();
        CheckerSettings { steps, levels, ..CheckerSettings::default() }
    }
}

fn steps(word: &str) -> Option<StepMode> {
    match word {
        "auto" => Some(StepMode::Asked),
        "all" => Some(StepMode::All),
        "off" => Some(StepMode::Off),
        _ => None,
    }
}

/// A level by its word; `on` is the usual severity.
fn level(word: &str, usual: Severity) -> Option<Option<Severity>> {
    match word {
        "off" => Some(None),
        "on" => Some(Some(usual)),
        "hint" => Some(Some(Severity::Hint)),
        "warning" => Some(Some(Severity::Warning)),
        "error" => Some(Some(Severity::Error)),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[test]
    fn a_section_is_read() {
        let section = json!({"rules": {"like-terms": "off", "unread": "on"}, "steps": "all", "inlayHints": true,
            "rulePages": "https://example.org", "trace": {"server": "off"}});
        let (settings, wrong) = Settings::read(&section);
        let levels = vec![("like-terms".to_owned(), None), ("unread".to_owned(), Some(Severity::Hint))];
        let pages = Some("https://example.org".to_owned());
        assert_eq!(settings, Settings { levels, steps: StepMode::All, hints: true, pages });
        assert_eq!(wrong, [""; 0]);
    }

    #[test]
    fn what_is_wrong_is_told_and_the_rest_holds() {
        let section = json!({"rules": {"likeness": "off", "like-terms": "loud"}, "steps": 3, "inlayHints": true});
        let (settings, wrong) = Settings::read(&section);
        assert!(settings.hints && settings.levels.is_empty());
        let places: Vec<&str> = wrong.iter().filter_map(|line| line.split_once(": ").map(|(place, _)| place)).collect();
        let want = ["indexwise.rules.like-terms", "indexwise.rules.likeness", "indexwise.steps"];
        assert_eq!(places, want);
        assert_eq!(Settings::read(&json!([])).1.len(), 1);
        assert_eq!(Settings::read(&Value::Null), (Settings::default(), Vec::new()));
    }
}
