//! `--fix`: applies what may be applied without a person, round by round, in memory.
//!
//! In a round each file gets the fixes that do not meet one another; then the whole paper is checked again, and
//! a file that came out worse gets its text back and is left alone. Writing is the caller's, after all papers
//! are done, because another paper may read the same file.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use indexwise_checker::finding::{Edit, Finding, Fix, Severity};
use indexwise_checker::paper::{Analysis, DocumentAnalysis, Paper};
use indexwise_grammar::span::Span;

use crate::configuration::Scope;
use crate::files::Text;
use crate::project::{Loaded, Overlay, PaperKey, Texts, load};
use crate::reports::FileReport;
use crate::reports::places::Places;

/// A fix may make another one possible; after so many rounds the rest is left.
const ROUNDS: usize = 10;

/// Of longer lines, in bytes, only what a fix touches is kept to be shown, and some of what stands around it.
const LONGEST_SHOWN: usize = 300;

/// So many bytes of a long line are shown before and after what a fix touches.
const AROUND: usize = 30;

/// What judges a paper in its scope, as it stands and as it is mended.
pub type Checker<'a> = dyn Fn(&Paper, &Scope) -> Analysis + Sync + 'a;

/// What became of a file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Mended {
    /// As the user gave it.
    pub shown: String,
    /// Its real path.
    pub path: PathBuf,
    /// Its text before.
    pub before: Text,
    /// Its text after.
    pub after: Text,
    /// What was done, in the order in which it was done.
    pub done: Vec<Done>,
    /// What was left.
    pub left: Vec<Left>,
    /// What there is to report of the text after.
    pub report: FileReport,
}

/// A fix that was applied.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Done {
    /// The line of the place to blame, in the text as it was at that moment.
    pub line: usize,
    /// What the fix did.
    pub title: String,
    /// The lines that it touched.
    pub old: String,
    /// What it made of them.
    pub new: String,
}

/// A finding that still stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Left {
    /// Its line in the text after.
    pub line: usize,
    /// What it says.
    pub message: String,
    /// Why it was not mended.
    pub reason: &'static str,
}

/// A file in the midst of being mended.
struct Work<'a> {
    shown: &'a str,
    path: PathBuf,
    before: Text,
    done: Vec<Done>,
    given_up: Option<&'static str>,
}

/// The fixes of a round for one file.
struct Plan {
    work: usize,
    old: Text,
    done: Vec<Done>,
}

/// Mends the wanted files (real path and shown path) of a paper that was loaded and checked already.
pub fn mend(
    texts: &dyn Texts,
    (key, scope): (&PaperKey, &Scope),
    wanted: &[(PathBuf, &str)],
    checker: &Checker,
    (mut loaded, mut analysis): (Loaded, Analysis),
) -> Result<Vec<Mended>, String> {
    let mut overlay = Overlay::new(texts);
    let mut works: Vec<Work> = wanted.iter().map(|(path, shown)| Work::new(&loaded, path, shown)).collect();
    for _ in 0..ROUNDS {
        let mut plans = plan(&works, &loaded, &analysis, &mut overlay);
        if plans.is_empty() {
            break;
        }
        let mut next = load(&overlay, key, scope)?;
        let mut found = checker(&next.paper, scope);
        while let Some(worse) = worse(&plans, &works, (&loaded, &analysis), (&next, &found)) {
            give_up(&mut plans, &worse, &mut works, &mut overlay);
            next = load(&overlay, key, scope)?;
            found = checker(&next.paper, scope);
        }
        for plan in plans {
            if let Some(work) = works.get_mut(plan.work) {
                work.done.extend(plan.done);
            }
        }
        (loaded, analysis) = (next, found);
    }
    Ok(works.into_iter().map(|work| work.finish(&loaded, &analysis)).collect())
}

impl<'a> Work<'a> {
    fn new(loaded: &Loaded, path: &Path, shown: &'a str) -> Self {
        let before = text_at(loaded, path).cloned().unwrap_or_default();
        Self { shown, path: path.to_owned(), before, done: Vec::new(), given_up: None }
    }

    fn finish(self, loaded: &Loaded, analysis: &Analysis) -> Mended {
        let found = found_in(loaded, analysis, &self.path).cloned().unwrap_or_default();
        let after = text_at(loaded, &self.path).cloned().unwrap_or_default();
        let host = loaded.document(&self.path).and_then(|at| loaded.paper.documents.get(at)).map(|source| source.host);
        let places = Places::new(&after);
        let left = |finding: &Finding| Left {
            line: places.start(finding.span).line,
            message: finding.message.clone(),
            reason: reason(finding, self.given_up),
        };
        let left = found.findings.iter().map(left).collect();
        let report = FileReport {
            path: self.shown.to_owned(),
            host: Some(host.unwrap_or(indexwise_grammar::hosts::Host::Latex)),
            statistics: found.statistics,
            findings: found.findings,
            symbols: found.symbols,
            steps: found.steps,
            text: after.clone(),
        };
        let Self { shown, path, before, done, .. } = self;
        Mended { shown: shown.to_owned(), path, before, after, done, left, report }
    }
}

/// Why a finding was not mended.
fn reason(finding: &Finding, given_up: Option<&'static str>) -> &'static str {
    let bulk = finding.fixes.iter().any(|fix| fix.bulk.is_ok());
    match finding.fixes.first() {
        None => "no fix is known",
        Some(_) if bulk => given_up.unwrap_or("still there after all rounds"),
        Some(fix) => fix.bulk.err().unwrap_or("a person must choose"),
    }
}

/// Chooses fixes for each file and lays the mended texts over the others.
fn plan(works: &[Work], loaded: &Loaded, analysis: &Analysis, overlay: &mut Overlay) -> Vec<Plan> {
    let mut plans = Vec::new();
    for (work, file) in works.iter().enumerate().filter(|(_, file)| file.given_up.is_none()) {
        let Some(found) = found_in(loaded, analysis, &file.path) else { continue };
        let Some(old) = text_at(loaded, &file.path) else { continue };
        let chosen = choose(&old.text, &found.findings);
        if chosen.is_empty() {
            continue;
        }
        let places = Places::new(old);
        let done = chosen.iter().map(|(finding, fix)| done(&old.text, &places, finding, fix)).collect();
        let edits = chosen.iter().flat_map(|(_, fix)| &fix.edits);
        let new = Text { text: apply(&old.text, edits).into(), marked: old.marked };
        overlay.lay(file.path.clone(), new);
        plans.push(Plan { work, old: old.clone(), done });
    }
    plans
}

/// The fixes that may be applied together, first come first served in the order of place.
///
/// Two fixes in one statement were each tried alone, so only one of them is applied in a round.
fn choose<'a>(text: &str, findings: &'a [Finding]) -> Vec<(&'a Finding, &'a Fix)> {
    let mut chosen: Vec<(&Finding, &Fix)> = Vec::new();
    let mut taken = Taken::default();
    let mut in_order: Vec<&Finding> = findings.iter().collect();
    in_order.sort_by_key(|finding| finding.span.start);
    for finding in in_order {
        let Some(fix) = finding.fixes.iter().find(|fix| fix.bulk.is_ok() && fits(text, fix)) else { continue };
        let statement = finding.ledger.as_ref().map(|ledger| ledger.statement);
        let claims: Vec<Span> = fix.edits.iter().map(|edit| edit.span).chain(statement).collect();
        if !claims.iter().any(|claim| taken.meets(*claim)) {
            claims.into_iter().for_each(|claim| taken.add(claim));
            chosen.push((finding, fix));
        }
    }
    chosen
}

/// Spans that are spoken for, start to end, kept apart from one another.
#[derive(Default)]
struct Taken(BTreeMap<u32, u32>);

impl Taken {
    /// Spans that touch meet, since two insertions at one place have no order.
    fn meets(&self, span: Span) -> bool {
        self.0.range(..=span.end).next_back().is_some_and(|(_, end)| *end >= span.start)
    }

    fn add(&mut self, mut span: Span) {
        while let Some((&start, &end)) = self.0.range(..=span.end).next_back().filter(|(_, end)| **end >= span.start) {
            self.0.remove(&start);
            span = Span { start: start.min(span.start), end: end.max(span.end) };
        }
        self.0.insert(span.start, span.end);
    }
}

/// Whether the edits are in order, apart, and lie on the text.
fn fits(text: &str, fix: &Fix) -> bool {
    let on_text = |edit: &Edit| text.get(edit.span.range()).is_some();
    let apart = fix.edits.windows(2).all(|pair| matches!(pair, [a, b] if a.span.end <= b.span.start));
    !fix.edits.is_empty() && apart && fix.edits.iter().all(on_text)
}

/// The text with edits that do not overlap, in any order. New lines end as those of the text do.
fn apply<'a>(text: &str, edits: impl Iterator<Item = &'a Edit>) -> String {
    let mut edits: Vec<&Edit> = edits.collect();
    edits.sort();
    let windows = text.contains("\r\n");
    let mut new = String::with_capacity(text.len());
    let mut at = 0;
    for edit in edits {
        new.push_str(text.get(at..edit.span.range().start).unwrap_or_default());
        if windows {
            new.push_str(&edit.text.replace("\r\n", "\n").replace('\n', "\r\n"));
        } else {
            new.push_str(&edit.text);
        }
        at = edit.span.range().end;
    }
    new.push_str(text.get(at..).unwrap_or_default());
    new
}

fn done(text: &str, places: &Places, finding: &Finding, fix: &Fix) -> Done {
    let touched = fix.edits.iter().map(|edit| edit.span).reduce(Span::join).unwrap_or(finding.span);
    let whole = places.lines_of(touched).reduce(Span::join).filter(|whole| whole.len() <= LONGEST_SHOWN);
    let whole = whole.unwrap_or_else(|| widened(text, touched));
    let (start, lines) = (whole.range().start, whole.of(text));
    let moved: Vec<Edit> = fix
        .edits
        .iter()
        .map(|edit| Edit {
            span: Span::new(edit.span.range().start - start, edit.span.range().end - start),
            text: edit.text.clone(),
        })
        .collect();
    Done {
        line: places.start(finding.span).line,
        title: fix.title.clone(),
        old: lines.to_owned(),
        new: apply(lines, moved.iter()),
    }
}

/// A span with some of what stands around it on its lines.
fn widened(text: &str, span: Span) -> Span {
    let (before, after) = (text.get(..span.range().start), text.get(span.range().end..));
    let on_line = |c: &char| !matches!(c, '\n' | '\r');
    let within = |bytes: &mut usize, c: char| {
        *bytes += c.len_utf8();
        (*bytes <= AROUND).then_some(c.len_utf8())
    };
    let before: usize = before.unwrap_or_default().chars().rev().take_while(on_line).scan(0, within).sum();
    let after: usize = after.unwrap_or_default().chars().take_while(on_line).scan(0, within).sum();
    Span::new(span.range().start - before, span.range().end + after)
}

/// Which plans must be taken back: those whose file has more errors and warnings than before; all of them if
/// another file of the paper has.
fn worse(
    plans: &[Plan],
    works: &[Work],
    (loaded, analysis): (&Loaded, &Analysis),
    (next, found): (&Loaded, &Analysis),
) -> Option<Vec<usize>> {
    let grew = |path: &Path| {
        let count = |loaded, analysis| found_in(loaded, analysis, path).map_or(0, grave);
        count(next, found) > count(loaded, analysis)
    };
    let planned = |plan: &Plan| works.get(plan.work).is_some_and(|work| grew(&work.path));
    let worse: Vec<usize> = plans.iter().filter(|plan| planned(plan)).map(|plan| plan.work).collect();
    if !worse.is_empty() {
        return Some(worse);
    }
    let elsewhere = next.origins.iter().any(|origin| grew(&origin.path));
    (elsewhere && !plans.is_empty()).then(|| plans.iter().map(|plan| plan.work).collect())
}

fn give_up(plans: &mut Vec<Plan>, worse: &[usize], works: &mut [Work], overlay: &mut Overlay) {
    for plan in plans.extract_if(.., |plan| worse.contains(&plan.work)) {
        if let Some(work) = works.get_mut(plan.work) {
            overlay.lay(work.path.clone(), plan.old);
            work.given_up = Some("the paper would have more findings than before");
        }
    }
}

/// Errors and warnings.
fn grave(found: &DocumentAnalysis) -> usize {
    found.findings.iter().filter(|finding| finding.severity != Severity::Hint).count()
}

fn text_at<'a>(loaded: &'a Loaded, path: &Path) -> Option<&'a Text> {
    Some(&loaded.origins.get(loaded.document(path)?)?.text)
}

fn found_in<'a>(loaded: &Loaded, analysis: &'a Analysis, path: &Path) -> Option<&'a DocumentAnalysis> {
    analysis.documents.get(loaded.document(path)?)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::indexing_slicing)]
    use super::*;
    use crate::project::Disk;
    use indexwise_checker::finding::Ledger;
    use indexwise_checker::paper::Paper;
    use indexwise_grammar::hosts::Host;

    /// A checker of words: each of these is an error, and this is the fix.
    const WORDS: [(&str, &str, Result<(), &str>); 5] = [
        ("slip", "mend", Ok(())),
        ("nest", "slip", Ok(())),
        ("grow", "slip slip slip", Ok(())),
        ("tie", "mend", Err("two readings are equally good")),
        ("rows", "a\nb", Ok(())),
    ];

    fn words(paper: &Paper, _: &Scope) -> Analysis {
        let documents = paper.documents.iter().map(|source| {
            let mut findings: Vec<Finding> = WORDS.iter().flat_map(|word| found(&source.text, word)).collect();
            findings.sort_by_key(|finding| finding.span);
            DocumentAnalysis { findings, ..Default::default() }
        });
        Analysis { documents: documents.collect() }
    }

    fn found(text: &str, (word, mend, bulk): &(&str, &str, Result<(), &'static str>)) -> Vec<Finding> {
        let finding = |(start, _): (usize, &str)| {
            let span = Span::new(start, start + word.len());
            let edits = vec![Edit { span, text: (*mend).to_owned() }];
            // A statement ends with a full stop.
            let from = text[..start].rfind('.').map_or(0, |at| at + 1);
            let to = text[start..].find('.').map_or(text.len(), |at| start + at);
            Finding {
                rule: "word",
                severity: Severity::Error,
                span,
                message: format!("{word} is wrong"),
                related: Vec::new(),
                fixes: vec![Fix { title: format!("Write {mend}"), edits, bulk: *bulk }],
                ledger: Some(Ledger { statement: Span::new(from, to), rows: Vec::new() }),
                verdict: None,
            }
        };
        text.match_indices(word).map(finding).collect()
    }

    #[track_caller]
    fn mended(text: &str) -> Mended {
        let path = PathBuf::from("/nowhere/a.md");
        let mut overlay = Overlay::new(&Disk);
        overlay.lay(path.clone(), Text { text: text.into(), marked: false });
        let key = PaperKey { root: path.clone(), appended: None, host: Host::Markdown };
        let (loaded, scope) = (load(&overlay, &key, &Scope::default()).unwrap(), Scope::default());
        let analysis = words(&loaded.paper, &scope);
        mend(&overlay, (&key, &scope), &[(path, "a.md")], &words, (loaded, analysis)).unwrap().remove(0)
    }

    #[track_caller]
    fn becomes(before: &str, after: &str) -> Mended {
        let mended = mended(before);
        assert_eq!(&*mended.after.text, after);
        assert_eq!(&*mended.before.text, before);
        mended
    }

    #[test]
    fn all_fixes_are_applied_in_rounds() {
        let mended = becomes("a slip slip. slip\nslip", "a mend mend. mend\nmend");
        assert_eq!(mended.done.len(), 4);
        assert!(mended.left.is_empty() && mended.report.findings.is_empty());
        assert_eq!(mended.done[0].old, "a slip slip. slip");
        assert_eq!(mended.done[0].new, "a mend slip. slip");
    }

    #[test]
    fn of_a_long_line_the_surroundings_of_a_mend_are_shown() {
        let mended = mended(&format!("x\n{}. a slip μ\ny", "μ".repeat(LONGEST_SHOWN)));
        let shown = format!("{}. a slip μ", "μ".repeat((AROUND - 4) / 2));
        assert_eq!((&mended.done[0].old, &mended.done[0].new), (&shown, &shown.replace("slip", "mend")));
    }

    #[test]
    fn a_fix_may_make_another_possible() {
        assert_eq!(becomes("nest", "mend").done.len(), 2);
    }

    #[test]
    fn a_file_that_would_get_worse_keeps_its_text() {
        let mended = becomes("grow. slip", "grow. slip");
        assert!(mended.done.is_empty());
        let reasons: Vec<&str> = mended.left.iter().map(|left| left.reason).collect();
        assert_eq!(reasons, ["the paper would have more findings than before"; 2]);
    }

    #[test]
    fn what_a_person_must_choose_is_left_with_the_reason() {
        let mended = becomes("x\ntie. slip", "x\ntie. mend");
        let left = Left { line: 2, message: "tie is wrong".into(), reason: "two readings are equally good" };
        assert_eq!(mended.left, [left]);
    }

    #[test]
    fn the_rounds_end() {
        let before = "slip ".repeat(ROUNDS + 3);
        let mended = mended(&before);
        assert_eq!(mended.done.len(), ROUNDS);
        assert_eq!(mended.left.len(), 3);
        assert_eq!(mended.left[0].reason, "still there after all rounds");
    }

    #[test]
    fn line_ends_are_those_of_the_file() {
        becomes("x\r\nrows\r\n", "x\r\na\r\nb\r\n");
        becomes("x\nrows\n", "x\na\nb\n");
    }

    #[test]
    fn spans_that_touch_meet() {
        let mut taken = Taken::default();
        taken.add(Span::new(5, 9));
        taken.add(Span::new(1, 2));
        for (start, end, meets) in
            [(0, 0, false), (0, 1, true), (2, 3, true), (3, 4, false), (4, 5, true), (9, 9, true)]
        {
            assert_eq!(taken.meets(Span::new(start, end)), meets, "{start}..{end}");
        }
        taken.add(Span::new(2, 6));
        assert!(taken.meets(Span::new(3, 4)) && !taken.meets(Span::new(10, 11)));
    }

    #[test]
    fn a_fix_that_does_not_lie_on_the_text_is_not_applied() {
        let fix = |edits: &[(usize, usize)]| Fix {
            title: String::new(),
            edits: edits
                .iter()
                .map(|(start, end)| Edit { span: Span::new(*start, *end), text: String::new() })
                .collect(),
            bulk: Ok(()),
        };
        assert!(fits("aμb", &fix(&[(0, 1), (1, 3)])));
        for edits in [&[][..], &[(0, 9)], &[(1, 2)], &[(1, 3), (0, 1)], &[(0, 3), (1, 3)]] {
            assert!(!fits("aμb", &fix(edits)), "{edits:?}");
        }
    }
}
