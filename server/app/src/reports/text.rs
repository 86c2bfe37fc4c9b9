//! The report for people: the author's own source with the place marked, and under it the ledger of the
//! statement, so that one sees which index is odd and not only that one is.

mod excerpt;
mod label;
mod ledger;
mod symbols;

use std::io::{self, Write};
use std::time::Duration;

use indexwise_checker::finding::{Counterexample, Finding, Severity, StepVerdict};
use unicode_width::UnicodeWidthStr;

use super::places::Places;
use super::{FileReport, Totals};
use crate::output::printable;

/// The columns of a page; what stands at the right ends here.
const PAGE: usize = 78;

/// What stands before everything but the heading of a finding.
const INDENT: &str = "    ";

/// A style: the codes that switch it on. Plain text has none.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Style {
    Place,
    Error,
    Warning,
    Hint,
    Mark,
    Quiet,
}

/// Colours, or none.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Palette {
    /// Whether any escape code is written.
    pub coloured: bool,
}

impl Palette {
    fn paint(self, style: Style, text: &str) -> String {
        if !self.coloured || text.is_empty() {
            return text.to_owned();
        }
        let code = match style {
            Style::Place => "1",
            Style::Error => "1;31",
            Style::Warning => "1;33",
            Style::Hint => "36",
            Style::Mark => "35",
            Style::Quiet => "2",
        };
        format!("\u{1b}[{code}m{text}\u{1b}[0m")
    }
}

/// Writes the report.
pub fn write(files: &[FileReport], palette: Palette, elapsed: Duration, out: &mut dyn Write) -> io::Result<()> {
    for file in files.iter().filter(|file| !file.findings.is_empty() || file.symbols.is_some()) {
        let places = Places::new(&file.text);
        for finding in &file.findings {
            write_finding(file, &places, finding, palette, out)?;
        }
        write_symbols(file, &places, palette, out)?;
    }
    write_closing(files, elapsed, out)
}

/// The symbol table of a file, after its findings; nothing for a file without symbols.
fn write_symbols(file: &FileReport, places: &Places, palette: Palette, out: &mut dyn Write) -> io::Result<()> {
    let Some(symbols) = file.symbols.as_ref().filter(|symbols| !symbols.is_empty()) else { return Ok(()) };
    let heading = format!("{}, symbols", printable(&file.path));
    writeln!(out, "{}", palette.paint(Style::Place, &heading))?;
    for line in symbols::lines(symbols, places) {
        let indent = if line.is_empty() { "" } else { INDENT };
        writeln!(out, "{indent}{line}")?;
    }
    writeln!(out)
}

fn write_finding(
    file: &FileReport,
    places: &Places,
    finding: &Finding,
    palette: Palette,
    out: &mut dyn Write,
) -> io::Result<()> {
    let text = &*file.text.text;
    let ledger = finding.ledger.as_ref().filter(|ledger| !ledger.rows.is_empty());
    let statement = finding.ledger.as_ref().map_or(finding.span, |ledger| ledger.statement.join(finding.span));
    let heading = format!("{}, line {}", printable(&file.path), places.start(finding.span).line);
    let label = label::of(file, places, statement).map(|label| format!("({})", printable(label)));
    let label = label.unwrap_or_default();
    writeln!(
        out,
        "{}{}",
        palette.paint(Style::Place, &heading),
        at_right(&heading, &palette.paint(Style::Quiet, &label), &label)
    )?;
    let mut rule = Some(finding.rule);
    for line in excerpt::lines(text, places, statement, finding.span) {
        match line {
            excerpt::Line::Source(line) => writeln!(out, "{INDENT}{line}")?,
            excerpt::Line::Mark(mark) if ledger.is_none() => {
                let name = rule.take().unwrap_or_default();
                let right = at_right(&format!("{INDENT}{mark}"), &palette.paint(Style::Quiet, name), name);
                writeln!(out, "{INDENT}{}{right}", palette.paint(Style::Mark, &mark))?;
            }
            excerpt::Line::Mark(mark) => writeln!(out, "{INDENT}{}", palette.paint(Style::Mark, &mark))?,
        }
    }
    writeln!(out)?;
    if let Some(ledger) = ledger {
        write_ledger(&ledger::lines(ledger), finding.rule, palette, out)?;
    }
    write_words(places, finding, palette, out)
}

/// The rows, with the name of the rule at the right of the last line.
fn write_ledger(lines: &[ledger::Line], rule: &str, palette: Palette, out: &mut dyn Write) -> io::Result<()> {
    for (at, line) in lines.iter().enumerate() {
        let style = if line.is_mark { Style::Mark } else { Style::Place };
        let painted = if line.is_mark { palette.paint(style, &line.text) } else { line.text.clone() };
        let right = if at + 1 == lines.len() {
            at_right(&format!("{INDENT}{}", line.text), &palette.paint(Style::Quiet, rule), rule)
        } else {
            String::new()
        };
        writeln!(out, "{INDENT}{painted}{right}")?;
    }
    writeln!(out)
}

/// The sentence, the further places and what is offered.
fn write_words(places: &Places, finding: &Finding, palette: Palette, out: &mut dyn Write) -> io::Result<()> {
    let style = match finding.severity {
        Severity::Error => Style::Error,
        Severity::Warning => Style::Warning,
        Severity::Hint => Style::Hint,
    };
    let word = finding.severity.word();
    let lines = wrapped(&format!("{word}: {}", printable(&finding.message)));
    for (at, line) in lines.iter().enumerate() {
        match line.strip_prefix(word).filter(|_| at == 0) {
            Some(rest) => writeln!(out, "{INDENT}{}{rest}", palette.paint(style, word))?,
            None => writeln!(out, "{INDENT}{INDENT}{line}")?,
        }
    }
    for related in &finding.related {
        let place = places.start(related.span);
        writeln!(out, "{INDENT}{}:{}: {}", place.line, place.column, printable(&related.message))?;
    }
    if let Some(numbers) = finding.verdict.as_ref().and_then(|verdict| verdict.counterexample.as_ref()) {
        write_counterexample(numbers, out)?;
        if !finding.fixes.is_empty() {
            writeln!(out)?;
        }
    }
    if let Some(verdict) = &finding.verdict {
        write_basis(verdict, out)?;
    }
    for fix in &finding.fixes {
        // Two places may be called the same.
        let twins = finding.fixes.iter().filter(|other| other.title == fix.title).count();
        let place = fix.edits.first().filter(|_| twins > 1).map(|edit| places.start(edit.span));
        let place = place.map(|place| format!(", at {}:{}", place.line, place.column)).unwrap_or_default();
        writeln!(out, "{INDENT}Offered: {}{place}.", printable(&fix.title))?;
    }
    writeln!(out)
}

/// In which dimensions a step was tried, and what was taken for want of a declaration.
fn write_basis(verdict: &StepVerdict, out: &mut dyn Write) -> io::Result<()> {
    let tried: Vec<String> = verdict.tried.iter().map(usize::to_string).collect();
    if verdict.tried.len() > 1 {
        writeln!(out, "{INDENT}Tried in dimensions {}.", tried.join(", "))?;
    }
    if !verdict.defaults.is_empty() {
        for line in wrapped(&format!("By default {}.", printable(&verdict.defaults.join("; ")))) {
            writeln!(out, "{INDENT}{line}")?;
        }
    }
    Ok(())
}

/// Numbers that a person can check: one field a line, and both sides.
fn write_counterexample(numbers: &Counterexample, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out)?;
    writeln!(out, "{INDENT}Counterexample in dimension {}, all else 0:", numbers.dimension)?;
    let widest = numbers.values.iter().map(|(name, _)| name.width()).max().unwrap_or(0);
    for (name, value) in &numbers.values {
        let gap = " ".repeat(widest - name.width());
        writeln!(out, "{INDENT}{INDENT}{}{gap} = {}", printable(name), printable(value))?;
    }
    let place: Vec<String> = numbers.component.iter().map(|(letter, value)| format!("{letter} = {value}")).collect();
    let place = if place.is_empty() { String::new() } else { format!(" for {}", place.join(", ")) };
    writeln!(out, "{INDENT}left side {}, right side {}{}", numbers.left, numbers.right, printable(&place))
}

/// A sentence broken at blanks, so that it fits the page; all lines but the first are indented twice.
fn wrapped(sentence: &str) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in sentence.split(' ') {
        let indent = if lines.len() > 1 { 2 * INDENT.len() } else { INDENT.len() };
        match lines.last_mut() {
            Some(line) if indent + line.width() + 1 + word.width() <= PAGE => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.to_owned()),
        }
    }
    lines
}

/// The blanks and the words that stand at the right of a line, at least two blanks after it.
fn at_right(line: &str, painted: &str, plain: &str) -> String {
    if plain.is_empty() {
        return String::new();
    }
    let gap = PAGE.saturating_sub(width(line) + width(plain)).max(2);
    format!("{}{painted}", " ".repeat(gap))
}

/// Columns on a terminal; a tab counts as it does for the eye at worst.
fn width(text: &str) -> usize {
    text.width() + 7 * text.matches('\t').count()
}

fn write_closing(files: &[FileReport], elapsed: Duration, out: &mut dyn Write) -> io::Result<()> {
    let totals = Totals::of(files);
    let [holds, fails, undecided] = totals.steps;
    let steps = match holds + fails + undecided {
        0 => String::new(),
        _ => format!("steps: {holds} hold, {fails} fail, {undecided} undecided; "),
    };
    writeln!(
        out,
        "{}: {}, {} with indices, {} unread; {}{}, {}, {}; {:.1} s",
        counted(totals.files, "file"),
        counted(totals.formulas, "formula"),
        totals.indexed,
        totals.unread,
        steps,
        counted(totals.errors, "error"),
        counted(totals.warnings, "warning"),
        counted(totals.hints, "hint"),
        elapsed.as_secs_f64(),
    )?;
    if let Some(held) = held(files) {
        writeln!(out, "{held}")?;
    }
    writeln!(out, "A clean report is about notation only: it reviews neither physics nor design.")
}

/// How the steps hold that do: by form, or at random points with a chance of error; nothing if there are none.
fn held(files: &[FileReport]) -> Option<String> {
    let verdicts = || files.iter().flat_map(|file| &file.steps).map(|step| &step.verdict);
    let by_form = verdicts().filter(|verdict| verdict.verdict == "holds by form").count();
    let bits = verdicts().filter(|verdict| verdict.verdict == "holds").filter_map(|verdict| verdict.error_bits);
    let chance = bits.min().map(|bits| format!("at random points, each wrong with a chance of at most 2^-{bits}"));
    let form = (by_form > 0).then(|| format!("{by_form} by form"));
    let ways: Vec<String> = form.into_iter().chain(chance).collect();
    (!ways.is_empty()).then(|| format!("Steps hold {}.", ways.join(", the others ")))
}

fn counted(number: usize, thing: &str) -> String {
    format!("{number} {thing}{}", if number == 1 { "" } else { "s" })
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::indexing_slicing)]
    use super::super::samples::{SHELL, file};
    use super::*;

    fn report(files: &[FileReport], coloured: bool) -> String {
        let mut out = Vec::new();
        write(files, Palette { coloured }, Duration::from_millis(120), &mut out).unwrap();
        String::from_utf8(out).unwrap()
    }

    #[test]
    fn a_finding_is_shown_with_its_ledger() {
        let want = r"shell.tex, line 3                                                   (eq:trace)
    \Gamma^i_{ik} = \frac12 g^{ij} \partial_m g_{ij}
                                            ^

    left side     free  k down            summed  i
    right side    free  m down            summed  i j
                        ^ these differ                     free-index-mismatch

    error: k is free on the left (down) but the right has m
    3:14: k stands here
    Offered: Write k for m in \partial_m.

1 file: 1 formula, 1 with indices, 0 unread; 1 error, 0 warnings, 0 hints; 0.1 s
A clean report is about notation only: it reviews neither physics nor design.
";
        assert_eq!(report(&[file("shell.tex", SHELL, false)], false), want);
    }

    #[test]
    fn a_finding_without_ledger_names_its_rule_under_the_place() {
        let mut file = file("shell.tex", SHELL, false);
        file.findings.iter_mut().for_each(|finding| finding.ledger = None);
        let text = report(&[file], false);
        assert!(text.lines().any(|line| line.contains('^') && line.ends_with("  free-index-mismatch")), "{text}");
    }

    #[test]
    fn a_long_sentence_is_broken_at_blanks() {
        let mut file = file("shell.tex", SHELL, false);
        file.findings.iter_mut().for_each(|finding| finding.message = "m stands free here, ".repeat(12));
        let text = report(&[file], false);
        let lines: Vec<&str> = text.lines().filter(|line| line.contains("stands free")).collect();
        assert!(lines.len() > 3 && lines.iter().all(|line| line.width() <= PAGE), "{text}");
        assert!(lines.iter().skip(1).all(|line| line.starts_with("        ")), "{text}");
        let words = lines.iter().flat_map(|line| line.split_whitespace());
        assert_eq!(words.filter(|word| *word == "stands").count(), 12, "{text}");
    }

    #[test]
    fn offers_that_are_called_the_same_are_told_apart() {
        let mut file = file("shell.tex", SHELL, false);
        for finding in &mut file.findings {
            let mut twin = finding.fixes[0].clone();
            twin.edits[0].span = super::super::samples::span(SHELL, "j}");
            finding.fixes.push(twin);
        }
        let text = report(&[file], false);
        for place in ["3:43", "3:31"] {
            assert!(text.contains(&format!("Offered: Write k for m in \\partial_m, at {place}.\n")), "{text}");
        }
    }

    #[test]
    fn colours_change_nothing_but_colours() {
        let files = [file("shell.tex", SHELL, false)];
        let (plain, coloured) = (report(&files, false), report(&files, true));
        assert!(!plain.contains('\u{1b}') && coloured.contains('\u{1b}'));
        let bare = coloured.split('\u{1b}').enumerate().fold(String::new(), |text, (at, piece)| {
            text + if at == 0 { piece } else { piece.split_once('m').unwrap().1 }
        });
        assert_eq!(bare, plain);
    }

    #[test]
    fn an_empty_report_still_says_what_it_is() {
        let text = report(&[], false);
        assert!(text.starts_with("0 files: 0 formulas") && text.contains("notation only"), "{text}");
    }
}
