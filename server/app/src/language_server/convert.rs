//! From the checker's data to the protocol's: places, findings, edits.
//!
//! Nothing is decided here but how a thing is said in the protocol. Positions count in the encoding that client and
//! server agreed on.

use indexwise_checker::finding::{Edit, Finding, Severity};
use indexwise_grammar::lines::{ByteColumn, Lines, ScalarColumn, Utf16Column};
use indexwise_grammar::span::Span;
use serde_json::json;
use tower_lsp::lsp_types::{
    CodeDescription, Diagnostic, DiagnosticRelatedInformation, DiagnosticSeverity, DiagnosticTag, Location,
    NumberOrString, Position, PositionEncodingKind, Range, TextEdit, Url,
};

use super::capabilities::Client;

/// The name under which findings are shown.
pub const SOURCE: &str = "indexwise";

/// What a column counts.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Encoding {
    /// Bytes.
    Utf8,
    /// Units of UTF-16: what holds where nothing was agreed on.
    #[default]
    Utf16,
    /// Unicode scalars.
    Utf32,
}

impl Encoding {
    /// The best of those that the client offers: bytes need no counting.
    pub fn agreed(offered: Option<&[PositionEncodingKind]>) -> Self {
        let offers = |kind: PositionEncodingKind| offered.is_some_and(|offered| offered.contains(&kind));
        if offers(PositionEncodingKind::UTF8) {
            return Self::Utf8;
        }
        // A client that offers only this one can do nothing else.
        let only_scalars = offers(PositionEncodingKind::UTF32) && !offers(PositionEncodingKind::UTF16);
        if only_scalars { Self::Utf32 } else { Self::Utf16 }
    }

    /// Its name in the protocol.
    pub const fn kind(self) -> PositionEncodingKind {
        match self {
            Self::Utf8 => PositionEncodingKind::UTF8,
            Self::Utf16 => PositionEncodingKind::UTF16,
            Self::Utf32 => PositionEncodingKind::UTF32,
        }
    }
}

/// The places of a text that stands still.
#[derive(Clone, Copy, Debug)]
pub struct Places<'a> {
    /// The text.
    pub text: &'a str,
    /// Its index.
    pub lines: &'a Lines,
    /// What columns count.
    pub encoding: Encoding,
}

impl Places<'_> {
    /// The position of a byte offset.
    pub fn position(&self, offset: u32) -> Position {
        let (line, character) = match self.encoding {
            Encoding::Utf8 => {
                let (line, ByteColumn(column)) = self.lines.in_bytes(self.text, offset);
                (line, column)
            }
            Encoding::Utf16 => {
                let (line, Utf16Column(column)) = self.lines.in_utf16(self.text, offset);
                (line, column)
            }
            Encoding::Utf32 => {
                let (line, ScalarColumn(column)) = self.lines.in_scalars(self.text, offset);
                (line, column)
            }
        };
        Position { line, character }
    }

    /// The range of a span.
    pub fn range(&self, span: Span) -> Range {
        Range { start: self.position(span.start), end: self.position(span.end) }
    }

    /// The byte offset of a position.
    #[cfg_attr(not(test), expect(dead_code, reason = "what is asked comes through the ropes, which tests compare"))]
    pub fn offset(&self, position: Position) -> u32 {
        let (line, column) = (position.line, position.character);
        match self.encoding {
            Encoding::Utf8 => self.lines.from_bytes(self.text, line, ByteColumn(column)),
            Encoding::Utf16 => self.lines.from_utf16(self.text, line, Utf16Column(column)),
            Encoding::Utf32 => self.lines.from_scalars(self.text, line, ScalarColumn(column)),
        }
    }

    /// Edits. New lines end as those of the text do.
    pub fn edits(&self, edits: &[Edit]) -> Vec<TextEdit> {
        edits.iter().map(|edit| TextEdit { range: self.range(edit.span), new_text: self.written(&edit.text) }).collect()
    }

    /// A text as it is written into this one.
    pub fn written(&self, text: &str) -> String {
        if self.text.contains("\r\n") {
            return text.replace("\r\n", "\n").replace('\n', "\r\n");
        }
        text.to_owned()
    }
}

/// A finding as the client can take it. `pages` is the address under which the pages of the rules stand.
pub fn diagnostic(
    finding: &Finding,
    places: &Places<'_>,
    uri: &Url,
    client: &Client,
    pages: Option<&str>,
) -> Diagnostic {
    let related = finding.related.iter().map(|related| DiagnosticRelatedInformation {
        location: Location { uri: uri.clone(), range: places.range(related.span) },
        message: related.message.clone(),
    });
    let related: Vec<_> = related.collect();
    let page = pages.filter(|_| client.code_description).and_then(|pages| page(pages, finding.rule));
    Diagnostic {
        range: places.range(finding.span),
        severity: Some(severity(finding.severity)),
        code: Some(NumberOrString::String(finding.rule.to_owned())),
        code_description: page.map(|href| CodeDescription { href }),
        source: Some(SOURCE.to_owned()),
        message: finding.message.clone(),
        related_information: (client.related && !related.is_empty()).then_some(related),
        tags: tags(finding, client),
        data: client.data.then(|| data(finding)),
    }
}

/// What a client may hand back with a diagnostic, and show beside it.
fn data(finding: &Finding) -> serde_json::Value {
    let titles: Vec<&str> = finding.fixes.iter().map(|fix| fix.title.as_str()).collect();
    json!({ "rule": finding.rule, "fixes": titles })
}

/// An `allow` that silences nothing is faded out.
fn tags(finding: &Finding, client: &Client) -> Option<Vec<DiagnosticTag>> {
    (client.unnecessary_tag && finding.rule == "idle-allow").then(|| vec![DiagnosticTag::UNNECESSARY])
}

const fn severity(severity: Severity) -> DiagnosticSeverity {
    match severity {
        Severity::Error => DiagnosticSeverity::ERROR,
        Severity::Warning => DiagnosticSeverity::WARNING,
        Severity::Hint => DiagnosticSeverity::HINT,
    }
}

/// The page of a rule under an address.
fn page(pages: &str, rule: &str) -> Option<Url> {
    Url::parse(&format!("{}/{rule}.md", pages.trim_end_matches('/'))).ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_best_offered_encoding_is_agreed_on() {
        let [eight, sixteen, scalars] =
            [PositionEncodingKind::UTF8, PositionEncodingKind::UTF16, PositionEncodingKind::UTF32];
        let agreed = |offered: &[PositionEncodingKind]| Encoding::agreed(Some(offered));
        assert_eq!(agreed(&[sixteen.clone(), eight]), Encoding::Utf8);
        assert_eq!(agreed(&[scalars.clone(), sixteen]), Encoding::Utf16);
        assert_eq!(agreed(&[scalars]), Encoding::Utf32);
        assert_eq!(agreed(&[]), Encoding::Utf16);
        assert_eq!(Encoding::agreed(None), Encoding::Utf16);
    }

    #[test]
    fn a_page_stands_under_the_address() {
        let page = |pages| page(pages, "index-thrice").map(String::from);
        assert_eq!(page("https://example.org/rules/").as_deref(), Some("https://example.org/rules/index-thrice.md"));
        assert_eq!(page("not an address"), None);
    }
}
