//! Checks a JSON value against a schema, for the part of JSON Schema (draft 2020-12) that `report-1.schema.json` uses.
//!
//! The tests of the program include this file by its path, since the program depends on no crate of tests. It is
//! stricter than the standard where that keeps the schema honest: a keyword that is not known here is a complaint,
//! and so is a property that the schema does not describe, although other readers have to pass over such.

use serde_json::Value;

/// Keywords that say nothing about the value.
const NOTES: &[&str] = &["$schema", "$defs", "title", "description"];

/// Where a value does not fit the schema; a part of the schema is named as in `#/$defs/file`, the whole is `#`.
pub fn complaints(schema: &Value, part: &str, value: &Value) -> Vec<String> {
    let mut checker = Checker { root: schema, complaints: Vec::new() };
    match checker.find(part) {
        Some(own) => checker.check(own, value, "$"),
        None => checker.complain("$", &format!("there is no {part} in the schema")),
    }
    checker.complaints
}

struct Checker<'s> {
    root: &'s Value,
    complaints: Vec<String>,
}

impl<'s> Checker<'s> {
    /// A part of the schema by its reference.
    fn find(&self, reference: &str) -> Option<&'s Value> {
        self.root.pointer(reference.strip_prefix('#')?)
    }

    fn complain(&mut self, at: &str, what: &str) {
        self.complaints.push(format!("{at}: {what}"));
    }

    fn demand(&mut self, holds: bool, at: &str, what: impl FnOnce() -> String) {
        if !holds {
            self.complain(at, &what());
        }
    }

    fn check(&mut self, schema: &'s Value, value: &Value, at: &str) {
        let Some(keywords) = schema.as_object() else { return self.complain(at, "the schema is no object") };
        for (keyword, asked) in keywords {
            self.keyword(keyword, asked, value, at);
        }
        if let (Value::Object(fields), Some(known)) = (value, schema.get("properties")) {
            for name in fields.keys() {
                self.demand(known.get(name).is_some(), at, || format!("{name} is not described"));
            }
        }
    }

    /// One keyword with what it asks for. Keywords about one type pass over values of another, as in the standard.
    fn keyword(&mut self, keyword: &str, asked: &'s Value, value: &Value, at: &str) {
        let number = asked.as_u64().unwrap_or(u64::MAX);
        match (keyword, value) {
            ("$ref", _) => match asked.as_str().and_then(|reference| self.find(reference)) {
                Some(part) => self.check(part, value, at),
                None => self.complain(at, &format!("{asked} refers to nothing")),
            },
            ("type", _) => self.demand(has_type(value, asked), at, || format!("{value} is no {asked}")),
            ("const", _) => self.demand(value == asked, at, || format!("{value} is not {asked}")),
            ("enum", _) => {
                let listed = asked.as_array().is_some_and(|values| values.contains(value));
                self.demand(listed, at, || format!("{value} is none of {asked}"));
            }
            ("minimum", Value::Number(own)) => {
                let enough = own.as_u64().is_some_and(|own| own >= number);
                self.demand(enough, at, || format!("{value} is below {asked}"));
            }
            ("minLength", Value::String(text)) => {
                let enough = text.chars().count() as u64 >= number;
                self.demand(enough, at, || format!("{value} is shorter than {asked}"));
            }
            ("minItems", Value::Array(items)) => {
                self.demand(items.len() as u64 >= number, at, || format!("fewer than {asked} items"));
            }
            ("items", Value::Array(items)) => {
                for (number, item) in items.iter().enumerate() {
                    self.check(asked, item, &format!("{at}[{number}]"));
                }
            }
            ("required", Value::Object(fields)) => {
                for name in asked.as_array().into_iter().flatten().filter_map(Value::as_str) {
                    self.demand(fields.contains_key(name), at, || format!("{name} is missing"));
                }
            }
            ("properties", Value::Object(fields)) => {
                for (name, own) in asked.as_object().into_iter().flatten() {
                    if let Some(field) = fields.get(name) {
                        self.check(own, field, &format!("{at}.{name}"));
                    }
                }
            }
            ("minimum" | "minLength" | "minItems" | "items" | "required" | "properties", _) => {}
            (note, _) if NOTES.contains(&note) => {}
            _ => self.complain(at, &format!("the keyword {keyword} is not known here")),
        }
    }
}

fn has_type(value: &Value, asked: &Value) -> bool {
    match asked.as_str() {
        Some("object") => value.is_object(),
        Some("array") => value.is_array(),
        Some("string") => value.is_string(),
        Some("boolean") => value.is_boolean(),
        Some("integer") => value.is_u64() || value.is_i64(),
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    /// One complaint for a value, or none.
    #[track_caller]
    fn say(schema: &Value, value: &Value, want: &[&str]) {
        assert_eq!(complaints(schema, "#", value), want, "{schema} {value}");
    }

    #[test]
    fn each_keyword_is_asked_for() {
        for (schema, good, bad, complaint) in [
            (json!({"type": "string"}), json!("a"), json!(1), "$: 1 is no \"string\""),
            (json!({"type": "integer"}), json!(1), json!(1.5), "$: 1.5 is no \"integer\""),
            (json!({"type": "boolean"}), json!(true), json!(0), "$: 0 is no \"boolean\""),
            (json!({"type": "object"}), json!({}), json!([]), "$: [] is no \"object\""),
            (json!({"type": "array"}), json!([]), json!({}), "$: {} is no \"array\""),
            (json!({"const": 1}), json!(1), json!(2), "$: 2 is not 1"),
            (json!({"enum": ["a", "b"]}), json!("b"), json!("c"), "$: \"c\" is none of [\"a\",\"b\"]"),
            (json!({"minimum": 1}), json!(1), json!(0), "$: 0 is below 1"),
            (json!({"minLength": 2}), json!("μν"), json!("μ"), "$: \"μ\" is shorter than 2"),
            (json!({"minItems": 1}), json!([0]), json!([]), "$: fewer than 1 items"),
            (json!({"items": {"const": 1}}), json!([1, 1]), json!([1, 2]), "$[1]: 2 is not 1"),
            (json!({"required": ["a"]}), json!({"a": 1}), json!({}), "$: a is missing"),
            (json!({"properties": {"a": {"const": 1}}}), json!({"a": 1}), json!({"a": 2}), "$.a: 2 is not 1"),
        ] {
            say(&schema, &good, &[]);
            say(&schema, &bad, &[complaint]);
        }
    }

    #[test]
    fn references_are_followed() {
        let schema = json!({"items": {"$ref": "#/$defs/one"}, "$defs": {"one": {"const": 1}}});
        say(&schema, &json!([1]), &[]);
        say(&schema, &json!([2]), &["$[0]: 2 is not 1"]);
        assert_eq!(complaints(&schema, "#/$defs/one", &json!(2)), ["$: 2 is not 1"]);
        say(&json!({"$ref": "#/$defs/two"}), &json!(1), &["$: \"#/$defs/two\" refers to nothing"]);
        assert_eq!(complaints(&schema, "#/$defs/two", &json!(2)).len(), 1);
    }

    #[test]
    fn what_is_not_known_is_not_passed_over() {
        say(&json!({"maximum": 1}), &json!(1), &["$: the keyword maximum is not known here"]);
        say(&json!({"properties": {}}), &json!({"a": 1}), &["$: a is not described"]);
        say(&json!(true), &json!(1), &["$: the schema is no object"]);
    }
}
