//! The formula around a place, read without what is being typed there.
//!
//! What is being typed is taken out, and the text is scanned again: a brace that is still open would hide the end of
//! the formula, or of all formulas after it. Where no formula holds the place even then, its end is not typed yet: it is
//! put in where the cursor stands.

use indexwise_grammar::hosts::{Region, scan};
use indexwise_grammar::read_region;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, Statement};

use crate::paper::View;

/// How far before the cursor an opening delimiter is looked for, in bytes.
const REACH: usize = 4000;

/// A formula without what is being typed in it.
pub(super) struct Probe {
    /// The text that its places lie in.
    pub text: String,
    pub formula: Formula,
    /// Where something was taken out.
    pub at: u32,
}

impl Probe {
    /// The formula at a place without a span that touches it.
    pub fn without(view: &View, document: usize, cut: Span) -> Option<Self> {
        let text = view.text(document);
        let (before, after) = (text.get(..cut.start as usize)?, text.get(cut.end as usize..)?);
        let at = cut.start;
        Self::read(view, document, format!("{before}{after}"), at).or_else(|| {
            let close = closer(before)?;
            Self::read(view, document, format!("{before}{close}{after}"), at)
        })
    }

    fn read(view: &View, document: usize, text: String, at: u32) -> Option<Self> {
        let (host, macros) = (view.host(document), view.prices(document)?.macros);
        let scan = scan(&text, host, macros);
        let holds = |region: &&Region| region.body.start <= at && at <= region.body.end;
        let region = scan.regions.iter().find(holds)?;
        let formula = read_region(region, &text, host, macros);
        Some(Self { formula, at, text })
    }

    /// The statement that the place belongs to: the last that begins before it.
    pub fn statement(&self) -> Option<&Statement> {
        let before = self.formula.statements.iter().filter(|statement| statement.span.start <= self.at);
        before.max_by_key(|statement| statement.span.start)
    }
}

/// What would close the formula that is opened last before a place.
fn closer(before: &str) -> Option<String> {
    let mut from = before.len().saturating_sub(REACH);
    while !before.is_char_boundary(from) {
        from += 1;
    }
    let near = before.get(from..)?;
    let paragraph = near.get(near.rfind("\n\n").map_or(0, |at| at + 2)..)?;
    let dollars = paragraph.matches('$').count();
    let open = |opener: &str, closer: &str| {
        let at = near.rfind(opener)?;
        near.get(at..).is_some_and(|rest| !rest.contains(closer)).then_some(at)
    };
    let environment = near.rfind("\\begin{").and_then(|at| {
        let name = near.get(at + 7..)?.split('}').next()?;
        let end = format!("\\end{{{name}}}");
        near.get(at..).is_some_and(|rest| !rest.contains(&end)).then_some((at, end))
    });
    let dollar = paragraph.rfind('$').filter(|_| dollars % 2 == 1 && !paragraph.contains("$$"));
    let double = near.rfind("$$").filter(|_| near.matches("$$").count() % 2 == 1);
    let offset = near.len() - paragraph.len();
    let candidates = [
        dollar.map(|at| (at + offset, "$".to_owned())),
        double.map(|at| (at, "$$".to_owned())),
        open("\\[", "\\]").map(|at| (at, "\\]".to_owned())),
        open("\\(", "\\)").map(|at| (at, "\\)".to_owned())),
        environment,
    ];
    candidates.into_iter().flatten().max_by_key(|(at, _)| *at).map(|(_, closer)| closer)
}
