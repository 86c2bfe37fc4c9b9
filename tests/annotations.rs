//! Fixtures: documents with the expected findings written under the lines that they are about.
//!
//! ```text
//! $ \nabla_a T^{ab} = J^c $
//! %~                    ^ error free-index-mismatch: c is free on the right
//! ```
//!
//! A line that begins with `%~` is an annotation and is taken out before the document is checked. Carets stand
//! under the exact place (columns are characters); severity and rule follow, and after a colon the message or
//! its beginning. A `>` right after the carets says that the place goes on beyond the line. Several annotations
//! may follow one line. The first two columns cannot be pointed at: indent the source.
//!
//! Everything here is pure: text and findings go in, mismatches come out, so that the harness itself is tested
//! on findings made by hand.

use std::fmt;
use std::ops::Range;

use indexwise_checker::finding::Finding;

/// How an annotation line begins.
const MARK: &str = "%~";

/// A document and what is expected of it.
#[derive(Debug, Default)]
pub struct Fixture {
    /// The document without its annotations; byte offsets of findings refer to it.
    pub text: String,
    /// In the order written.
    expectations: Vec<Expectation>,
    /// Annotations that cannot be read.
    unreadable: Vec<Mismatch>,
    /// For each line of `text`: its number in the annotated file, and its first byte in `text`.
    lines: Vec<(usize, usize)>,
}

/// One annotation.
#[derive(Debug, PartialEq, Eq)]
struct Expectation {
    /// One-based line of the annotated file that the carets point at.
    line: usize,
    /// Bytes of the text without annotations.
    place: Range<usize>,
    /// Whether the place ends on a later line; then `place.end` is not compared.
    goes_on: bool,
    severity: String,
    rule: String,
    /// The beginning of the message; empty if nothing is asked of it.
    message: String,
}

/// Something that is not as the fixture says.
#[derive(Debug, PartialEq, Eq)]
pub struct Mismatch {
    /// One-based line of the annotated file.
    pub line: usize,
    /// What is wrong.
    pub message: String,
}

impl fmt::Display for Mismatch {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}: {}", self.line, self.message)
    }
}

impl Fixture {
    /// Takes the annotations out of a document.
    pub fn read(annotated: &str) -> Self {
        let mut fixture = Self::default();
        for (number, line) in (1..).zip(annotated.split_inclusive('\n')) {
            match line.strip_prefix(MARK) {
                Some(annotation) => fixture.annotate(number, annotation.trim_end()),
                None => {
                    fixture.lines.push((number, fixture.text.len()));
                    fixture.text.push_str(line);
                }
            }
        }
        fixture
    }

    /// Reads one annotation, without its mark, as one about the line last seen.
    fn annotate(&mut self, number: usize, annotation: &str) {
        match self.expectation(annotation) {
            Ok(expectation) => self.expectations.push(expectation),
            Err(message) => self.unreadable.push(Mismatch { line: number, message: message.to_owned() }),
        }
    }

    fn expectation(&self, annotation: &str) -> Result<Expectation, &'static str> {
        let &(line, start) = self.lines.last().ok_or("an annotation without a line above it")?;
        let blanks = annotation.chars().take_while(|sign| *sign == ' ').count();
        let rest = annotation.trim_start_matches(' ');
        let carets = rest.chars().take_while(|sign| *sign == '^').count();
        let rest = rest.trim_start_matches('^');
        let goes_on = rest.starts_with('>');
        if carets == 0 {
            return Err("an annotation begins with carets under the place");
        }
        let column = MARK.len() + blanks;
        let source = self.text.get(start..).unwrap_or_default().trim_end_matches(['\n', '\r']);
        let byte = |column| byte_of_column(source, column).map(|byte| start + byte);
        let place = byte(column).zip(byte(column + carets)).ok_or("carets beyond the end of the line")?;
        let (head, message) = rest.trim_start_matches('>').split_once(':').unwrap_or((rest, ""));
        let mut words = head.trim_start_matches('>').split_whitespace();
        let (Some(severity), Some(rule), None) = (words.next(), words.next(), words.next()) else {
            return Err("after the carets: severity, rule, and a message after a colon");
        };
        if !["error", "warning", "hint"].contains(&severity) {
            return Err("a severity is error, warning or hint");
        }
        Ok(Expectation {
            line,
            place: place.0..place.1,
            goes_on,
            severity: severity.to_owned(),
            rule: rule.to_owned(),
            message: message.trim().to_owned(),
        })
    }

    /// Compares the annotations with findings, whose spans refer to `self.text`; mismatches in order of lines.
    pub fn compare(&self, findings: &[Finding]) -> Vec<Mismatch> {
        let mut pending: Vec<&Expectation> = self.expectations.iter().collect();
        // The most particular annotation takes its finding first, so that a vaguer one cannot take it away.
        pending.sort_by_key(|expectation| std::cmp::Reverse(expectation.message.len()));
        let mut left: Vec<&Finding> = findings.iter().collect();
        pending.retain(|expectation| match left.iter().position(|finding| expectation.is_met_by(finding)) {
            Some(at) => {
                left.remove(at);
                false
            }
            None => true,
        });
        let missing = pending.iter().map(|expectation| Mismatch {
            line: expectation.line,
            message: format!("not found: {}", self.written(expectation)),
        });
        let surplus = left.iter().map(|finding| Mismatch {
            line: self.line_at(finding.span.start as usize).0,
            message: format!("not annotated:\n{}", self.annotation_of(finding)),
        });
        let unreadable = self.unreadable.iter().map(|at| Mismatch { line: at.line, message: at.message.clone() });
        let mut mismatches: Vec<Mismatch> = unreadable.chain(missing).chain(surplus).collect();
        mismatches.sort_by_key(|mismatch| mismatch.line);
        mismatches
    }

    fn written(&self, expectation: &Expectation) -> String {
        let Expectation { severity, rule, message, place, .. } = expectation;
        let at = self.text.get(place.clone()).unwrap_or_default();
        format!("{severity} {rule} at `{at}`{}{message}", if message.is_empty() { "" } else { ": " })
    }

    /// The line of a byte: its number in the annotated file and its first byte.
    fn line_at(&self, byte: usize) -> (usize, usize) {
        let after = self.lines.partition_point(|(_, start)| *start <= byte);
        after.checked_sub(1).and_then(|at| self.lines.get(at)).copied().unwrap_or((1, 0))
    }

    /// The source line and the annotation that would meet a finding, ready to be copied into the fixture.
    fn annotation_of(&self, finding: &Finding) -> String {
        let (_, start) = self.line_at(finding.span.start as usize);
        let line = self.text.get(start..).unwrap_or_default().lines().next().unwrap_or_default();
        let count = |range: Range<usize>| line.get(range).map_or(0, |part| part.chars().count());
        let (from, to) = (finding.span.start as usize - start, finding.span.end as usize - start);
        let column = count(0..from);
        let carets = "^".repeat(count(from..to.min(line.len())).max(1));
        let beyond = if to > line.len() { ">" } else { "" };
        let blanks = " ".repeat(column.saturating_sub(MARK.len()));
        let (severity, rule, message) = (finding.severity.word(), finding.rule, &finding.message);
        format!("{line}\n{MARK}{blanks}{carets}{beyond} {severity} {rule}: {message}")
    }
}

impl Expectation {
    fn is_met_by(&self, finding: &Finding) -> bool {
        let (start, end) = (finding.span.start as usize, finding.span.end as usize);
        // Nothing narrower than a caret can be drawn, so that one caret may also mark an empty place.
        let ends = if self.goes_on { end > self.place.end } else { end == self.place.end || start == end };
        start == self.place.start
            && ends
            && finding.severity.word() == self.severity
            && finding.rule == self.rule
            && finding.message.starts_with(&self.message)
    }
}

/// The byte at which the character of a zero-based column begins; the column after the last one counts.
fn byte_of_column(line: &str, column: usize) -> Option<usize> {
    line.char_indices().map(|(byte, _)| byte).chain([line.len()]).nth(column)
}

#[cfg(test)]
mod tests {
    use super::*;
    use indexwise_checker::finding::Severity;
    use indexwise_grammar::span::Span;

    const SLIP: &str = "The flux is\n$ \\nabla_a T^{ab} = J^c $\n\
                        %~                    ^ error free-index-mismatch: c is free\nat the rim.\n";

    fn finding(rule: &'static str, span: Range<usize>, message: &str) -> Finding {
        Finding {
            rule,
            severity: Severity::Error,
            span: Span::new(span.start, span.end),
            message: message.to_owned(),
            related: Vec::new(),
            fixes: Vec::new(),
            ledger: None,
            verdict: None,
        }
    }

    fn slip() -> Finding {
        finding("free-index-mismatch", 34..35, "c is free on the right, b on the left")
    }

    fn messages(annotated: &str, findings: &[Finding]) -> Vec<String> {
        Fixture::read(annotated).compare(findings).iter().map(ToString::to_string).collect()
    }

    #[test]
    fn annotations_are_taken_out() {
        assert_eq!(Fixture::read(SLIP).text, "The flux is\n$ \\nabla_a T^{ab} = J^c $\nat the rim.\n");
    }

    #[test]
    fn a_met_annotation_is_no_mismatch() {
        assert_eq!(slip().span.of(&Fixture::read(SLIP).text), "c");
        assert!(messages(SLIP, &[slip()]).is_empty());
    }

    #[test]
    fn silence_is_expected_where_nothing_is_annotated() {
        let found = messages("Thin shell\n$ A_i $", &[finding("index-thrice", 15..16, "i stands thrice")]);
        assert_eq!(found, ["line 2: not annotated:\n$ A_i $\n%~  ^ error index-thrice: i stands thrice"]);
    }

    #[test]
    fn an_annotation_without_a_finding_is_reported_at_its_line() {
        assert_eq!(messages(SLIP, &[]), ["line 2: not found: error free-index-mismatch at `c`: c is free"]);
    }

    #[test]
    fn place_severity_rule_and_message_all_count() {
        let wrong = [
            finding("free-index-mismatch", 33..35, "c is free on the right"),
            finding("free-index-mismatch", 34..36, "c is free on the right"),
            Finding { severity: Severity::Warning, ..slip() },
            finding("free-index-levels", 34..35, "c is free on the right"),
            finding("free-index-mismatch", 34..35, "b is free on the left"),
        ];
        for finding in wrong {
            assert_eq!(messages(SLIP, &[finding]).len(), 2);
        }
    }

    #[test]
    fn lines_after_an_annotation_keep_their_numbers() {
        let found = messages(SLIP, &[slip(), finding("unread", 41..44, "odd")]);
        assert_eq!(found, ["line 4: not annotated:\nat the rim.\n%~ ^^^ error unread: odd"]);
    }

    #[test]
    fn several_annotations_may_follow_one_line() {
        let text = "  A_i B_i\n%~  ^ error index-thrice\n%~      ^ error index-thrice: second\n";
        let (first, second) = (finding("index-thrice", 4..5, "first"), finding("index-thrice", 8..9, "second"));
        assert!(messages(text, &[first.clone(), second.clone()]).is_empty());
        assert_eq!(messages(text, &[first.clone(), first]).len(), 2);
        assert_eq!(messages(text, &[second]).len(), 1);
    }

    #[test]
    fn the_vaguer_annotation_of_one_place_leaves_the_other_its_finding() {
        let text = "  A_i B_i\n%~  ^ error index-thrice\n%~  ^ error index-thrice: here\n";
        let findings = [finding("index-thrice", 4..5, "here"), finding("index-thrice", 4..5, "there")];
        assert!(messages(text, &findings).is_empty());
    }

    #[test]
    fn columns_are_characters() {
        let text = "  ∂_μ φ_σ\n%~      ^ error unread\n";
        let sigma = text.find('σ').unwrap();
        assert!(messages(text, &[finding("unread", sigma..sigma + 2, "")]).is_empty());
        assert_eq!(messages(text, &[finding("unread", sigma - 1..sigma, "")]).len(), 2);
    }

    #[test]
    fn a_place_may_go_on_beyond_its_line_or_be_empty() {
        let text = "  A_i\n%~ ^^> error unread\n  B_j\n";
        assert!(messages(text, &[finding("unread", 3..9, "")]).is_empty());
        assert_eq!(messages(text, &[finding("unread", 3..5, "")]).len(), 2);
        assert!(messages("  A_i\n%~^ hint unread\n", &[]).len() == 1);
        assert!(messages("  A_i\n%~^ error unread\n", &[finding("unread", 2..2, "")]).is_empty());
    }

    #[test]
    fn line_ends_of_two_characters_do_not_shift_places() {
        let text = SLIP.replace('\n', "\r\n");
        assert!(messages(&text, &[finding("free-index-mismatch", 35..36, "c is free")]).is_empty());
    }

    #[test]
    fn an_annotation_that_cannot_be_read_is_a_mismatch() {
        for annotation in ["%~ error unread", "%~  ^ grave unread", "%~  ^ error", "%~            ^ error unread"] {
            assert_eq!(messages(&format!("  A_i\n{annotation}\n"), &[]).len(), 1, "{annotation}");
        }
        assert_eq!(messages("%~  ^ error unread\n  A_i\n", &[]).len(), 1);
    }

    #[test]
    fn a_suggested_annotation_meets_its_finding() {
        let source = "  \\nabla_μ T^{μν} = J^ρ\n";
        let at = source.find('ρ').unwrap();
        let found = finding("free-index-mismatch", at..at + 2, "ρ is free on the right");
        let suggestion = Fixture::read(source).annotation_of(&found);
        assert!(messages(&format!("{suggestion}\n"), &[found]).is_empty());
    }
}
