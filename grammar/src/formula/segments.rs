//! Cuts a formula into statements: rows are joined into chains, commas and `\quad` part statements.
//!
//! A row that begins with a relation or a sign goes on with the statement above; a second pair of columns, a comma
//! or a wide blank outside brackets begins another. Groups that hold a whole relation (`\boxed{A = B}`) open up.

use super::lexeme::Prepared;
use super::lexeme::{Kind, Lexeme};
use super::tidy::Tidied;

/// Cuts into statements.
pub(crate) fn cut(tidied: Tidied) -> Prepared {
    let lexemes = open_up(tidied.lexemes);
    let mut cutter = Cutter::default();
    for (at, lexeme) in lexemes.iter().enumerate() {
        cutter.take(lexeme, lexemes.get(at + 1..).unwrap_or_default());
    }
    cutter.finish();
    Prepared {
        lexemes: cutter.out,
        statements: cutter.statements,
        labels: tidied.labels,
        reasons: Vec::new(),
        unknown: tidied.unknown,
        no_sum: tidied.no_sum,
        passed_over: tidied.passed_over,
    }
}

/// Takes away the braces (and the wrapping command) of groups outside all brackets that hold a relation or rows, or
/// that begin with a sign.
fn open_up(lexemes: Vec<Lexeme>) -> Vec<Lexeme> {
    let partners = relation_groups(&lexemes);
    if partners.is_empty() {
        return lexemes;
    }
    let mut keep = vec![true; lexemes.len()];
    let mut depth = 0_usize;
    let mut opened: Vec<usize> = Vec::new();
    for (at, lexeme) in lexemes.iter().enumerate() {
        match lexeme.kind {
            Kind::BraceOpen => {
                let before = at.checked_sub(1).and_then(|n| lexemes.get(n)).map(|l| l.kind);
                let wrapped = matches!(before, Some(Kind::Wrap | Kind::Unknown | Kind::Accent | Kind::Brace));
                let free = wrapped || !before.is_some_and(takes_group);
                if let Some((_, close)) = partners.iter().find(|(open, _)| *open == at && depth == 0 && free) {
                    opened.push(*close);
                    [Some(at), Some(*close), at.checked_sub(1).filter(|_| wrapped)].into_iter().flatten().for_each(
                        |n| {
                            if let Some(flag) = keep.get_mut(n) {
                                *flag = false
                            }
                        },
                    );
                } else {
                    depth += 1;
                }
            }
            Kind::BraceClose if opened.contains(&at) => {}
            Kind::BraceClose | Kind::Close => depth = depth.saturating_sub(1),
            Kind::Open => depth += 1,
            _ => {}
        }
    }
    lexemes.into_iter().zip(keep).filter_map(|(lexeme, keep)| keep.then_some(lexeme)).collect()
}

/// Brace groups that hold a relation, a row or a cell at their own level, or begin with a sign.
fn relation_groups(lexemes: &[Lexeme]) -> Vec<(usize, usize)> {
    const GROUPS: usize = 64;
    let mut open: Vec<(usize, bool, usize)> = Vec::new();
    let mut found = Vec::new();
    for (at, lexeme) in lexemes.iter().enumerate() {
        match lexeme.kind {
            // A group that begins with a sign goes on with the sum around it: `a {- b}`.
            Kind::BraceOpen => {
                let signed = lexemes.get(at + 1).is_some_and(|next| next.kind == Kind::Plus);
                open.push((at, signed, 0));
            }
            Kind::BraceClose => {
                if let Some((start, true, _)) = open.pop() {
                    found.push((start, at));
                }
            }
            Kind::Open => open.iter_mut().rev().take(1).for_each(|(.., depth)| *depth += 1),
            Kind::Close => open.iter_mut().rev().take(1).for_each(|(.., depth)| *depth = depth.saturating_sub(1)),
            Kind::Equal | Kind::Loose | Kind::Row | Kind::Cell => {
                open.iter_mut().rev().take(1).for_each(|(_, holds, depth)| *holds |= *depth == 0);
            }
            _ => {}
        }
    }
    found.truncate(GROUPS);
    found
}

/// Whether a brace group after this is its argument or its script.
fn takes_group(kind: Kind) -> bool {
    use Kind::*;
    matches!(
        kind,
        Up | Down
            | Function
            | Fraction
            | Derivative
            | Differential
            | Root
            | Bold
            | Roman
            | Norm
            | Average
            | Pair
            | Order
            | Tensor
            | Indices
            | Slashed
            | BraceClose
            | Close
    )
}

fn is_operator(kind: Kind) -> bool {
    matches!(kind, Kind::Equal | Kind::Loose | Kind::Arrow | Kind::Plus | Kind::Times | Kind::Slash)
}

fn is_relation(kind: Kind) -> bool {
    matches!(kind, Kind::Equal | Kind::Loose | Kind::Arrow)
}

#[derive(Default)]
struct Cutter {
    out: Vec<Lexeme>,
    statements: Vec<std::ops::Range<usize>>,
    start: usize,
    depth: usize,
    row_has_relation: bool,
    row_begins: bool,
}

impl Cutter {
    fn take(&mut self, lexeme: &Lexeme, rest: &[Lexeme]) {
        match lexeme.kind {
            Kind::BraceOpen | Kind::Open => self.depth += 1,
            Kind::BraceClose | Kind::Close => self.depth = self.depth.saturating_sub(1),
            Kind::Row | Kind::Cell | Kind::Separator if self.depth > 0 => return,
            Kind::Stagger
                if self.depth == 0 && !rest.first().is_some_and(|l| matches!(l.kind, Kind::Up | Kind::Down)) =>
            {
                return;
            }
            _ => {}
        }
        if self.depth == 0 {
            // A run of the same mark is one mark: looking past it again and again would take quadratic time.
            let mark = matches!(lexeme.kind, Kind::Row | Kind::Cell | Kind::Separator);
            if mark && rest.first().is_some_and(|next| next.kind == lexeme.kind && next.text == lexeme.text) {
                return;
            }
            match lexeme.kind {
                Kind::Row => return self.row(rest),
                Kind::Cell => return self.cell(rest),
                Kind::Separator => return self.separator(lexeme, rest),
                Kind::Comma | Kind::Semicolon | Kind::Text => return self.part(),
                kind if is_relation(kind) => self.row_has_relation = true,
                _ => {}
            }
        }
        self.row_begins = false;
        self.out.push(lexeme.clone());
    }

    fn finish(&mut self) {
        self.part();
    }

    fn part(&mut self) {
        if self.out.len() > self.start {
            self.statements.push(self.start..self.out.len());
        }
        self.start = self.out.len();
        self.row_has_relation = false;
    }

    fn last(&self) -> Option<Kind> {
        self.out.get(self.start..)?.last().map(|lexeme| lexeme.kind)
    }

    fn row(&mut self, rest: &[Lexeme]) {
        if !self.goes_on(rest) {
            self.part();
        }
        self.row_has_relation = false;
        self.row_begins = true;
    }

    /// Whether the row that begins at `rest` goes on with the statement above.
    fn goes_on(&self, rest: &[Lexeme]) -> bool {
        let blank = |kind| matches!(kind, Kind::Cell | Kind::Stagger | Kind::Row | Kind::Separator);
        let Some(at) = rest.iter().position(|lexeme| !blank(lexeme.kind)) else { return false };
        let cell_first = rest.iter().take(at).any(|lexeme| lexeme.kind == Kind::Cell);
        let Some(next) = rest.get(at).map(|lexeme| lexeme.kind) else { return false };
        if self.last().is_none() {
            return false;
        }
        if self.last().is_some_and(is_operator) || is_relation(next) || matches!(next, Kind::Times | Kind::Slash) {
            return true;
        }
        let row = rest.get(at..).unwrap_or_default();
        let (relation, cell) = (first_outside(row, is_relation), first_outside(row, |kind| kind == Kind::Cell));
        if next == Kind::Plus {
            return cell_first || relation.is_none() || cell.is_none() || cell > relation;
        }
        cell_first && relation.is_none()
    }

    /// A second pair of columns begins another statement.
    fn cell(&mut self, rest: &[Lexeme]) {
        let next = rest.iter().find(|lexeme| !matches!(lexeme.kind, Kind::Cell | Kind::Stagger)).map(|l| l.kind);
        let joined = self.last().is_none_or(is_operator) || next.is_none_or(is_operator);
        if self.row_has_relation && !joined {
            self.part();
        }
    }

    fn separator(&mut self, lexeme: &Lexeme, rest: &[Lexeme]) {
        let soft = matches!(lexeme.text.as_str(), "quad" | "qquad" | "hfill" | "hfil");
        let next =
            rest.iter().find(|l| !matches!(l.kind, Kind::Cell | Kind::Stagger | Kind::Separator)).map(|l| l.kind);
        let joined = self.row_begins || self.last().is_some_and(is_operator) || next.is_some_and(is_operator);
        if !(soft && joined) {
            self.part();
        }
    }
}

/// The first lexeme of a row, outside brackets, that satisfies a test.
fn first_outside(row: &[Lexeme], test: impl Fn(Kind) -> bool) -> Option<usize> {
    let mut depth = 0_usize;
    for (at, lexeme) in row.iter().enumerate() {
        match lexeme.kind {
            Kind::BraceOpen | Kind::Open => depth += 1,
            Kind::BraceClose | Kind::Close => depth = depth.saturating_sub(1),
            Kind::Row if depth == 0 => return None,
            kind if depth == 0 && test(kind) => return Some(at),
            _ => {}
        }
    }
    None
}
