//! What is reported: plain data with byte spans into the text of one document.

use indexwise_grammar::span::Span;

/// How sure and how grave.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Severity {
    /// Certainly wrong as index notation.
    Error,
    /// Almost surely not meant, or wrong under the conventions in force.
    Warning,
    /// Worth a look.
    Hint,
}

impl Severity {
    /// The word used in every report.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Error => "error",
            Self::Warning => "warning",
            Self::Hint => "hint",
        }
    }
}

/// One thing reported.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Finding {
    /// The name of the rule, as in the registry.
    pub rule: &'static str,
    /// How grave.
    pub severity: Severity,
    /// The exact place to blame.
    pub span: Span,
    /// One sentence that names the letters and the levels.
    pub message: String,
    /// Partners and disagreeing terms.
    pub related: Vec<Related>,
    /// Edits that the checker has tried: each removes the finding and adds none; best first.
    pub fixes: Vec<Fix>,
    /// The ledger of the statement, for the ledger view; nothing for findings that are not about balance.
    pub ledger: Option<Ledger>,
    /// What was found out about a step; nothing for findings that are not about steps.
    pub verdict: Option<StepVerdict>,
}

impl Finding {
    /// A finding that one sentence says in full: no further places, no fixes, no ledger.
    pub(crate) fn plain(rule: &'static str, severity: Severity, span: Span, message: String) -> Self {
        Self { rule, severity, span, message, related: Vec::new(), fixes: Vec::new(), ledger: None, verdict: None }
    }

    /// Takes every place to where it stands in another text.
    pub(crate) fn move_spans(&mut self, to: impl Fn(Span) -> Span) {
        let edits = self.fixes.iter_mut().flat_map(|fix| fix.edits.iter_mut().map(|edit| &mut edit.span));
        let ledger = self.ledger.iter_mut().flat_map(|ledger| {
            std::iter::once(&mut ledger.statement).chain(ledger.rows.iter_mut().map(|row| &mut row.span))
        });
        let spans = std::iter::once(&mut self.span)
            .chain(self.related.iter_mut().map(|related| &mut related.span))
            .chain(edits)
            .chain(ledger);
        spans.for_each(|span| *span = to(*span));
    }
}

/// What was found out about a step.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct StepVerdict {
    /// "holds by form", "holds", "fails", "differs", "needs dimension", "undecided".
    pub verdict: &'static str,
    /// Dimensions in which it was to be tried.
    pub tried: Vec<usize>,
    /// Dimensions in which the step holds.
    pub holds: Vec<usize>,
    /// Dimensions in which it does not.
    pub fails: Vec<usize>,
    /// Dimensions in which a side has no meaning.
    pub undefined: Vec<usize>,
    /// Of what holds at points that were drawn: the chance that it does not hold is at most `2^-error_bits`.
    pub error_bits: Option<u32>,
    /// Kernels of unknown meaning, and givens, that it rests on.
    pub assumptions: Vec<String>,
    /// What was taken for want of a declaration and matters here, as sentences without a full stop.
    pub defaults: Vec<String>,
    /// Numbers for which the sides differ.
    pub counterexample: Option<Counterexample>,
}

/// Numbers that a person can check.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Counterexample {
    /// The dimension.
    pub dimension: usize,
    /// Components that are not zero: `g_{11}` and `1 + 2 x_1`.
    pub values: Vec<(String, String)>,
    /// The same in full, for a program: every component that is not zero.
    pub fields: Vec<FieldComponent>,
    /// The variables of the terms in their order: coordinates about the point, from `x_1` on, then parameters.
    pub variables: Vec<String>,
    /// The free indices of the component, each with its value; none for a scalar.
    pub component: Vec<(String, String)>,
    /// The left side there, a fraction in lowest terms.
    pub left: String,
    /// The right side there.
    pub right: String,
}

/// A component of a field that is not zero, as a polynomial.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct FieldComponent {
    /// The kernel in LaTeX; `x` for the coordinates of the point.
    pub name: String,
    /// "up", "down" or "" where the level does not matter, of each slot.
    pub levels: Vec<&'static str>,
    /// Which component, counted from 1.
    pub component: Vec<usize>,
    /// Coefficients, fractions in lowest terms, each with the exponents of the variables.
    pub terms: Vec<(String, Vec<u8>)>,
}

/// A step and what was found out about it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct JudgedStep {
    /// The relation sign.
    pub span: Span,
    /// What was found out.
    pub verdict: StepVerdict,
    /// The same in one sentence: the message of the finding, or that the step holds.
    pub said: String,
}

/// A verdict as a mark beside the step tells it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// It holds, in every dimension that was tried.
    Holds,
    /// It fails, or holds in certain dimensions only.
    Fails,
    /// It is not shown or not decided.
    Open,
}

impl JudgedStep {
    /// The verdict in short.
    pub fn outcome(&self) -> Outcome {
        match self.verdict.verdict {
            "holds" | "holds by form" => Outcome::Holds,
            "fails" | "needs dimension" => Outcome::Fails,
            _ => Outcome::Open,
        }
    }
}

/// A further place that a finding speaks of.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Related {
    /// The place.
    pub span: Span,
    /// What is there.
    pub message: String,
}

/// A mend.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fix {
    /// What it does, as an imperative sentence without a full stop.
    pub title: String,
    /// Non-overlapping edits of the document, in order.
    pub edits: Vec<Edit>,
    /// Whether it may be applied in bulk; if not, why it is left to a person.
    pub bulk: Result<(), &'static str>,
}

/// Replaces the text of a span.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Edit {
    /// What is replaced.
    pub span: Span,
    /// By what.
    pub text: String,
}

impl Edit {
    /// The edit that puts a text at a place, set apart from words that it would run into.
    pub(crate) fn pasted(text: &str, span: Span, by: &str) -> Self {
        let before = text.get(..span.start as usize).unwrap_or_default();
        let after = text.get(span.end as usize..).unwrap_or_default();
        let word = |letter: Option<char>| letter.is_some_and(char::is_alphabetic);
        let in_command =
            before.trim_end_matches(char::is_alphabetic).ends_with('\\') && word(before.chars().next_back());
        let command = by.trim_end_matches(char::is_alphabetic).ends_with('\\') && word(by.chars().next_back());
        let mut put = String::new();
        if in_command && word(by.chars().next()) {
            put.push(' ');
        }
        put.push_str(by);
        if command && word(after.chars().next()) {
            put.push(' ');
        }
        Self { span, text: put }
    }
}

/// A text with edits made; nothing unless they are in order, apart, and in the text.
pub fn edited(text: &str, edits: &[Edit]) -> Option<String> {
    let (mut out, mut at) = (String::with_capacity(text.len()), 0);
    for edit in edits {
        let range = edit.span.range();
        out.push_str(text.get(at..range.start)?);
        text.get(range.clone())?;
        out.push_str(&edit.text);
        at = range.end;
    }
    out.push_str(text.get(at..)?);
    Some(out)
}

/// The ledger of a statement as people see it: one row a side, or a term of a side.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Ledger {
    /// The statement in the document.
    pub statement: Span,
    /// Its rows.
    pub rows: Vec<LedgerRow>,
}

/// One side or term: which indices are free, which are summed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LedgerRow {
    /// "left side", "right side", "side 3", "term 2 of the right side".
    pub title: String,
    /// Where it stands.
    pub span: Span,
    /// Free indices in order of first appearance.
    pub free: Vec<LedgerIndex>,
    /// Letters summed over.
    pub summed: Vec<LedgerIndex>,
}

/// A letter of a ledger row.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LedgerIndex {
    /// The letter as printed for people: `k`, `μ`, `μ'`.
    pub letter: String,
    /// "up", "down" or "" where the level does not matter.
    pub level: &'static str,
    /// Whether the finding is about this entry.
    pub odd: bool,
}
