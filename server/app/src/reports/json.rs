//! JSON, version 1: one document, or one object for each file, one a line.
//!
//! The shapes here are a promise to other programs: fields may be added, none may change its meaning.

use std::io::{self, Write};

use indexwise_checker::finding::{Edit, FieldComponent, Finding, Fix, JudgedStep, Related, StepVerdict};
use indexwise_checker::paper::Steps;
use indexwise_checker::symbols::{DoubleUse, Part, Symbol, SymbolTable};
use serde::Serialize;

use super::FileReport;
use super::places::{Place, Places};

/// The version of the format.
const VERSION: u8 = 1;

#[derive(Serialize)]
struct Report<'a> {
    report: u8,
    tool: Tool,
    files: Vec<FileObject<'a>>,
}

#[derive(Serialize)]
struct Tool {
    name: &'static str,
    version: &'static str,
}

#[derive(Serialize)]
struct FileObject<'a> {
    path: &'a str,
    statistics: StatisticsObject,
    findings: Vec<FindingObject<'a>>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    steps: Vec<StepObject<'a>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    symbols: Option<SymbolsObject<'a>>,
}

#[derive(Serialize)]
struct StepObject<'a> {
    start: Place,
    end: Place,
    verdict: VerdictObject<'a>,
}

#[derive(Serialize)]
struct StatisticsObject {
    formulas: usize,
    indexed: usize,
    unread: usize,
    unknown_macros: usize,
    #[serde(skip_serializing_if = "Option::is_none")]
    steps: Option<StepsObject>,
}

/// Only where steps were judged.
#[derive(Serialize)]
struct StepsObject {
    holds: usize,
    fails: usize,
    undecided: usize,
}

#[derive(Serialize)]
struct VerdictObject<'a> {
    verdict: &'a str,
    tried: &'a [usize],
    holds: &'a [usize],
    fails: &'a [usize],
    undefined: &'a [usize],
    #[serde(skip_serializing_if = "Option::is_none")]
    error_bits: Option<u32>,
    assumptions: &'a [String],
    defaults: &'a [String],
    #[serde(skip_serializing_if = "Option::is_none")]
    counterexample: Option<CounterexampleObject<'a>>,
}

#[derive(Serialize)]
struct CounterexampleObject<'a> {
    dimension: usize,
    values: Vec<NamedValue<'a>>,
    variables: &'a [String],
    fields: Vec<FieldObject<'a>>,
    component: Vec<NamedValue<'a>>,
    left: &'a str,
    right: &'a str,
}

#[derive(Serialize)]
struct FieldObject<'a> {
    name: &'a str,
    levels: &'a [&'static str],
    component: &'a [usize],
    terms: Vec<TermObject<'a>>,
}

#[derive(Serialize)]
struct TermObject<'a> {
    coefficient: &'a str,
    exponents: &'a [u8],
}

#[derive(Serialize)]
struct NamedValue<'a> {
    name: &'a str,
    value: &'a str,
}

#[derive(Serialize)]
struct FindingObject<'a> {
    rule: &'a str,
    severity: &'a str,
    message: &'a str,
    start: Place,
    end: Place,
    related: Vec<RelatedObject<'a>>,
    fixes: Vec<FixObject<'a>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    verdict: Option<VerdictObject<'a>>,
}

#[derive(Serialize)]
struct RelatedObject<'a> {
    message: &'a str,
    start: Place,
    end: Place,
}

#[derive(Serialize)]
struct FixObject<'a> {
    title: &'a str,
    bulk: bool,
    edits: Vec<EditObject<'a>>,
}

#[derive(Serialize)]
struct EditObject<'a> {
    start: Place,
    end: Place,
    text: &'a str,
}

#[derive(Serialize)]
struct SymbolsObject<'a> {
    kernels: Vec<KernelObject<'a>>,
    letters: Vec<LetterObject<'a>>,
}

#[derive(Serialize)]
struct KernelObject<'a> {
    kernel: &'a str,
    slots: usize,
    uses: usize,
    declared: bool,
    symmetries: &'a [String],
    first: Place,
}

#[derive(Serialize)]
struct LetterObject<'a> {
    letter: &'a str,
    parts: Vec<PartObject>,
}

#[derive(Serialize)]
struct PartObject {
    part: String,
    uses: usize,
    first: Place,
}

/// Writes one document.
pub fn write(files: &[FileReport], out: &mut dyn Write) -> io::Result<()> {
    let tool = Tool { name: env!("CARGO_PKG_NAME"), version: env!("CARGO_PKG_VERSION") };
    let report = Report { report: VERSION, tool, files: files.iter().map(object).collect() };
    serde_json::to_writer(&mut *out, &report)?;
    writeln!(out)
}

/// Writes one object for each file, one a line.
pub fn write_lines(files: &[FileReport], out: &mut dyn Write) -> io::Result<()> {
    for file in files {
        serde_json::to_writer(&mut *out, &object(file))?;
        writeln!(out)?;
    }
    Ok(())
}

fn object(file: &FileReport) -> FileObject<'_> {
    let places = Places::new(&file.text);
    let counts = file.statistics;
    FileObject {
        path: &file.path,
        statistics: StatisticsObject {
            formulas: counts.formulas,
            indexed: counts.indexed,
            unread: counts.unread,
            unknown_macros: counts.unknown_macros,
            steps: (counts.steps != Steps::default()).then_some(StepsObject {
                holds: counts.steps.holds,
                fails: counts.steps.fails,
                undecided: counts.steps.undecided,
            }),
        },
        findings: file.findings.iter().map(|finding| finding_object(finding, &places)).collect(),
        steps: file.steps.iter().map(|step| step_object(step, &places)).collect(),
        symbols: file.symbols.as_ref().map(|symbols| symbols_object(symbols, &places)),
    }
}

fn step_object<'a>(step: &'a JudgedStep, places: &Places) -> StepObject<'a> {
    StepObject { start: places.start(step.span), end: places.end(step.span), verdict: verdict_object(&step.verdict) }
}

fn symbols_object<'a>(symbols: &'a SymbolTable, places: &Places) -> SymbolsObject<'a> {
    let kernel = |symbol: &'a Symbol| KernelObject {
        kernel: &symbol.kernel,
        slots: symbol.slots,
        uses: symbol.uses,
        declared: symbol.declared,
        symmetries: &symbol.symmetries,
        first: places.start(symbol.first),
    };
    let part = |part: &Part| PartObject { part: part.role.words(), uses: part.uses, first: places.start(part.first) };
    let letter =
        |letter: &'a DoubleUse| LetterObject { letter: &letter.letter, parts: letter.parts.iter().map(part).collect() };
    SymbolsObject {
        kernels: symbols.kernels.iter().map(kernel).collect(),
        letters: symbols.letters.iter().map(letter).collect(),
    }
}

fn finding_object<'a>(finding: &'a Finding, places: &Places) -> FindingObject<'a> {
    let related = |related: &'a Related| RelatedObject {
        message: &related.message,
        start: places.start(related.span),
        end: places.end(related.span),
    };
    FindingObject {
        rule: finding.rule,
        severity: finding.severity.word(),
        message: &finding.message,
        start: places.start(finding.span),
        end: places.end(finding.span),
        related: finding.related.iter().map(related).collect(),
        fixes: finding.fixes.iter().map(|fix| fix_object(fix, places)).collect(),
        verdict: finding.verdict.as_ref().map(verdict_object),
    }
}

fn verdict_object(verdict: &StepVerdict) -> VerdictObject<'_> {
    VerdictObject {
        verdict: verdict.verdict,
        tried: &verdict.tried,
        holds: &verdict.holds,
        fails: &verdict.fails,
        undefined: &verdict.undefined,
        error_bits: verdict.error_bits,
        assumptions: &verdict.assumptions,
        defaults: &verdict.defaults,
        counterexample: verdict.counterexample.as_ref().map(|numbers| CounterexampleObject {
            dimension: numbers.dimension,
            values: named(&numbers.values),
            variables: &numbers.variables,
            fields: numbers.fields.iter().map(field_object).collect(),
            component: named(&numbers.component),
            left: &numbers.left,
            right: &numbers.right,
        }),
    }
}

fn field_object(field: &FieldComponent) -> FieldObject<'_> {
    FieldObject {
        name: &field.name,
        levels: &field.levels,
        component: &field.component,
        terms: field.terms.iter().map(|(coefficient, exponents)| TermObject { coefficient, exponents }).collect(),
    }
}

fn named(values: &[(String, String)]) -> Vec<NamedValue<'_>> {
    values.iter().map(|(name, value)| NamedValue { name, value }).collect()
}

fn fix_object<'a>(fix: &'a Fix, places: &Places) -> FixObject<'a> {
    let edit =
        |edit: &'a Edit| EditObject { start: places.start(edit.span), end: places.end(edit.span), text: &edit.text };
    FixObject { title: &fix.title, bulk: fix.bulk.is_ok(), edits: fix.edits.iter().map(edit).collect() }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::indexing_slicing)]
    use super::super::samples::{SHELL, file};
    use super::*;
    use serde_json::{Value, json};

    #[test]
    fn a_finding_has_all_its_parts() {
        let mut out = Vec::new();
        write(&[file("shell.tex", SHELL, true)], &mut out).unwrap();
        let report: Value = serde_json::from_slice(&out).unwrap();
        assert_eq!(report["report"], 1);
        assert_eq!(report["tool"]["name"], "indexwise");
        let file = &report["files"][0];
        let want = json!({"formulas": 1, "indexed": 1, "unread": 0, "unknown_macros": 0});
        assert_eq!(file["statistics"], want);
        let finding = &file["findings"][0];
        let offset = SHELL.find("m g_").unwrap() + 3;
        let (start, end) = (
            json!({"line": 3, "column": 43, "offset": offset}),
            json!({"line": 3, "column": 44, "offset": offset + 1}),
        );
        assert_eq!((&finding["start"], &finding["end"]), (&start, &end));
        assert_eq!(finding["related"][0]["message"], "k stands here");
        let edits = json!([{"start": start, "end": end, "text": "k"}]);
        let fix = json!({"title": "Write k for m in \\partial_m", "bulk": true, "edits": edits});
        assert_eq!(finding["fixes"], json!([fix]));
    }

    #[test]
    fn lines_hold_the_same_objects() {
        let files = [file("a.tex", SHELL, false), file("b.tex", SHELL, false)];
        let (mut whole, mut lines) = (Vec::new(), Vec::new());
        write(&files, &mut whole).unwrap();
        write_lines(&files, &mut lines).unwrap();
        let whole: Value = serde_json::from_slice(&whole).unwrap();
        let lines = String::from_utf8(lines).unwrap();
        let lines: Vec<Value> = lines.lines().map(|line| serde_json::from_str(line).unwrap()).collect();
        assert_eq!(whole["files"], Value::Array(lines));
    }
}
