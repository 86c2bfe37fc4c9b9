//! Commands: what an editor may have done by a key or a menu, and the request of our own.
//!
//! A command names its place as all requests do: `{"textDocument": {"uri": ..}, "position": {..}}` as its first
//! argument. Those that change a text have the client make the edit; the answer tells what it does.

use indexwise_checker::editing::actions::{Action, ActionKind, insertions};
use indexwise_checker::editing::ledger_view::ledger_at;
use indexwise_checker::editing::write_out::{Forms, WrittenOut, write_out};
use indexwise_checker::finding::{Edit, LedgerIndex, Outcome};
use indexwise_checker::paper::{Cancel, Settings, StepMode};
use indexwise_checker::rules::find;
use serde::Deserialize;
use serde_json::{Value, json};
use tower_lsp::jsonrpc::{Error, Result};
use tower_lsp::lsp_types::{Position, TextDocumentIdentifier, WorkspaceEdit};

use super::actions::{edit, offered};
use super::looking::Look;
use crate::commands::explain;

/// The contraction at a place, written out.
pub const WRITE_OUT: &str = "indexwise.writeOut";
/// Has the derivation at a place verified from now on.
pub const CHECK_DERIVATION: &str = "indexwise.checkDerivation";
/// The page of a rule.
pub const EXPLAIN: &str = "indexwise.explain";
/// The symbols of a document.
pub const SYMBOL_TABLE: &str = "indexwise.symbolTable";
/// The labelled equations that may be put in at a place; with `label`, puts that one in.
pub const INSERT: &str = "indexwise.insertEquation";
/// Makes an edit; for clients that take commands alone.
pub const APPLY: &str = "indexwise.apply";

/// The commands that are offered.
pub const COMMANDS: [&str; 6] = [WRITE_OUT, CHECK_DERIVATION, EXPLAIN, SYMBOL_TABLE, INSERT, APPLY];

/// What a command is about.
#[derive(Debug, Deserialize)]
#[serde(rename_all = "camelCase")]
pub struct About {
    /// The document.
    pub text_document: TextDocumentIdentifier,
    /// The place; the beginning where none is named.
    #[serde(default)]
    pub position: Position,
    /// The equation that is put in.
    pub label: Option<String>,
}

impl About {
    /// Reads the arguments of a command.
    pub fn read(arguments: &[Value]) -> Result<Self> {
        let first = arguments.first().cloned().unwrap_or_default();
        serde_json::from_value(first).map_err(|error| Error::invalid_params(error.to_string()))
    }
}

/// The page of a rule, in Markdown; its name alone, or as the member `rule`.
pub fn page(arguments: &[Value]) -> Result<Value> {
    let named = arguments.first().and_then(|first| first.as_str().or_else(|| first.get("rule")?.as_str()));
    let rule = named.and_then(find).ok_or_else(|| Error::invalid_params("there is no such rule"))?;
    Ok(json!({ "rule": rule.name, "markdown": explain::page(rule) }))
}

/// A title and the edit that goes with it, as `APPLY` is given them.
pub fn given_edit(arguments: &[Value]) -> Result<(String, WorkspaceEdit)> {
    let title = arguments.first().and_then(Value::as_str).unwrap_or("indexwise").to_owned();
    let edit = serde_json::from_value(arguments.get(1).cloned().unwrap_or_default());
    Ok((title, edit.map_err(|error| Error::invalid_params(error.to_string()))?))
}

/// The contraction at the place, or why there is none to write out.
pub fn written_out(look: &Look) -> Value {
    match write_out(look.view(), look.document, look.offset()) {
        Ok(written) => told(look, &written),
        Err(refusal) => json!({ "refused": refusal.to_string() }),
    }
}

fn told(look: &Look, written: &WrittenOut) -> Value {
    let letters = written.letters.iter().map(|letter| {
        let values: Vec<&str> = letter.values.iter().map(|value| value.as_str()).collect();
        json!({ "letter": letter.letter.as_str(), "values": values, "declared": letter.range_declared() })
    });
    let vanished = written.vanished.iter().map(|one| forms(&one.term));
    json!({
        "range": look.range(written.span),
        "term": forms(&written.term),
        "letters": letters.collect::<Vec<_>>(),
        "sum": forms(&written.sum),
        "terms": written.terms.iter().map(forms).collect::<Vec<_>>(),
        "vanished": vanished.collect::<Vec<_>>(),
        "choices": written.choices,
        "collected": written.collected,
    })
}

fn forms(forms: &Forms) -> Value {
    json!({ "latex": forms.latex, "unicode": forms.unicode, "note": forms.note })
}

/// What a command answers, and the edit that it makes.
pub type Done = (Value, Option<(String, WorkspaceEdit)>);

/// Has the derivation at the place verified.
pub fn checked(look: &Look) -> Done {
    let action = offered(look).into_iter().find(|action| action.kind == ActionKind::Check);
    match action {
        Some(Action { title, edits, .. }) => done(look, title, &edits),
        None => (json!({ "refused": "no derivation stands here that is not verified already" }), None),
    }
}

/// The labels of equations that may be put in at the place; with a label, puts its equation in.
pub fn inserted(look: &Look, label: Option<&str>) -> Done {
    let offered = insertions(look.view(), look.document, look.offset());
    let Some(label) = label else {
        let labels: Vec<&String> = offered.iter().map(|(label, _)| label).collect();
        return (json!({ "labels": labels }), None);
    };
    match offered.iter().find(|(name, _)| name == label) {
        Some((_, edits)) => done(look, format!("Insert ({label})"), edits),
        None => (json!({ "refused": format!("({label}) cannot be put in here") }), None),
    }
}

fn done(look: &Look, title: String, edits: &[Edit]) -> Done {
    (json!({ "title": title }), Some((title, edit(look, edits))))
}

/// The ledger of the statement at the place.
pub fn ledger(look: &Look) -> Option<Value> {
    let ledger = ledger_at(look.view(), look.document, look.offset(), look.found())?;
    let letters = |letters: &[LedgerIndex]| {
        let letters = letters.iter().map(|one| json!({ "letter": one.letter, "level": one.level, "odd": one.odd }));
        letters.collect::<Vec<_>>()
    };
    let rows = ledger.rows.iter().map(|row| {
        json!({ "title": row.title, "range": look.range(row.span), "free": letters(&row.free),
            "summed": letters(&row.summed), "any": row.any, "vanishes": row.vanishes })
    });
    let marks = ledger.marks.iter().map(|mark| {
        let outcome = match mark.outcome() {
            Outcome::Holds => "holds",
            Outcome::Fails => "fails",
            Outcome::Open => "undecided",
        };
        json!({ "range": look.range(mark.span), "outcome": outcome, "said": mark.said })
    });
    Some(json!({ "range": look.range(ledger.span), "text": ledger.text, "rows": rows.collect::<Vec<_>>(),
        "marks": marks.collect::<Vec<_>>() }))
}

/// The symbols of the document.
pub fn symbol_table(look: &Look) -> Value {
    let settings = Settings { symbols: true, steps: StepMode::Off, ..Settings::default() };
    let analysis = look.view().judge(&settings, &Cancel::default());
    let table = analysis.documents.get(look.document).and_then(|document| document.symbols.as_ref());
    let Some(table) = table else { return Value::Null };
    let kernels = table.kernels.iter().map(|symbol| {
        json!({ "kernel": symbol.kernel.as_str(), "slots": symbol.slots, "uses": symbol.uses,
            "declared": symbol.declared, "symmetries": symbol.symmetries, "first": look.range(symbol.first) })
    });
    let letters = table.letters.iter().map(|letter| {
        let parts = letter
            .parts
            .iter()
            .map(|part| json!({ "part": part.role.words(), "uses": part.uses, "first": look.range(part.first) }));
        json!({ "letter": letter.letter.as_str(), "parts": parts.collect::<Vec<_>>() })
    });
    json!({ "kernels": kernels.collect::<Vec<_>>(), "letters": letters.collect::<Vec<_>>() })
}
