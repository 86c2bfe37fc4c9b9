//! The ledger as a table: one row for each side or term, what is free and what is summed, the odd ones marked.

use indexwise_checker::finding::{Ledger, LedgerIndex, LedgerRow};
use unicode_width::UnicodeWidthStr;

use crate::output::printable;

/// Blanks between the columns.
const GAP: usize = 4;
/// The column of the free indices is at least so wide.
const FREE: usize = 20;
/// Of a longer table only one row is shown of each kind.
const ROWS_SHOWN_WHOLE: usize = 3;
/// So many rows are shown at most.
const MOST_ROWS: usize = 12;

/// A line of the table.
#[derive(Debug, PartialEq, Eq)]
pub(super) struct Line {
    /// Its text.
    pub text: String,
    /// Whether it holds carets.
    pub is_mark: bool,
}

/// A cell with the columns of its odd entries.
#[derive(Default)]
struct Cell {
    text: String,
    odd: Vec<usize>,
}

/// The lines of the table.
pub(super) fn lines(ledger: &Ledger) -> Vec<Line> {
    let shown = shown(&ledger.rows);
    let rows: Vec<(String, Cell, Cell)> = shown
        .iter()
        .map(|row| (printable(&row.title), cell("free  ", &row.free), cell("summed  ", &row.summed)))
        .collect();
    let titles = rows.iter().map(|(title, ..)| title.width()).max().unwrap_or_default() + GAP;
    let free = rows.iter().map(|(_, free, _)| free.text.width()).max().unwrap_or_default().max(FREE) + GAP;
    let marks: Vec<Vec<usize>> = rows
        .iter()
        .map(|(_, of_free, of_summed)| {
            let summed = of_summed.odd.iter().map(|at| titles + free + at);
            of_free.odd.iter().map(|at| titles + at).chain(summed).collect()
        })
        .collect();
    let texts = rows.iter().map(|(title, of_free, of_summed)| {
        let line = format!("{}{}{}", padded(title, titles), padded(&of_free.text, free), of_summed.text);
        line.trim_end().to_owned()
    });
    let mut lines = with_marks(texts.collect(), &marks);
    lines.extend(left_out(&ledger.rows, &shown).map(|text| Line { text, is_mark: false }));
    lines
}

/// What is said of the rows that are not shown.
fn left_out(rows: &[LedgerRow], shown: &[&LedgerRow]) -> Option<String> {
    let count = rows.len() - shown.len();
    let first = shown.first().filter(|_| count > 0)?;
    let (thing, are) = if count == 1 { ("row", "is") } else { ("rows", "are") };
    let like_first = rows.iter().filter(|row| alike(row, first)).count() - 1;
    Some(if like_first == count {
        format!("({count} more {thing} {are} like the first)")
    } else if shown.len() < MOST_ROWS {
        format!("({count} more {thing} {are} like one of these)")
    } else {
        format!("({count} more {thing})")
    })
}

/// The first row of each kind. Rows are of one kind if they agree in what is free and in what is odd about the rest.
fn shown(rows: &[LedgerRow]) -> Vec<&LedgerRow> {
    if rows.len() <= ROWS_SHOWN_WHOLE {
        return rows.iter().collect();
    }
    let mut shown: Vec<&LedgerRow> = Vec::new();
    for row in rows {
        if shown.len() < MOST_ROWS && !shown.iter().any(|other| alike(row, other)) {
            shown.push(row);
        }
    }
    shown
}

fn alike(row: &LedgerRow, other: &LedgerRow) -> bool {
    let odd = |row: &'_ LedgerRow| sorted(row.summed.iter().filter(|entry| entry.odd));
    sorted(row.free.iter()) == sorted(other.free.iter()) && odd(row) == odd(other)
}

fn sorted<'a>(entries: impl Iterator<Item = &'a LedgerIndex>) -> Vec<(String, &'static str, bool)> {
    let mut entries: Vec<_> = entries.map(|entry| (entry.letter.clone(), entry.level, entry.odd)).collect();
    entries.sort();
    entries
}

/// Where the same columns are odd in every row that has odd ones, one line of carets under the last row does;
/// else each row gets its own, and the last of them the words.
fn with_marks(texts: Vec<String>, marks: &[Vec<usize>]) -> Vec<Line> {
    let odd: usize = marks.iter().map(Vec::len).sum();
    let mut kinds: Vec<&Vec<usize>> = marks.iter().filter(|columns| !columns.is_empty()).collect();
    kinds.dedup();
    let words = if odd > 1 { "these differ" } else { "here" };
    let shared = match kinds.as_slice() {
        [columns] if marks.last() == Some(columns) => Some(*columns),
        _ => None,
    };
    let mut lines = Vec::new();
    let last = texts.len().saturating_sub(1);
    let last_odd = marks.iter().rposition(|columns| !columns.is_empty());
    for (at, (text, columns)) in texts.into_iter().zip(marks).enumerate() {
        lines.push(Line { text, is_mark: false });
        match shared {
            Some(columns) if at == last => lines.push(mark(columns, words)),
            None if !columns.is_empty() => lines.push(mark(columns, if last_odd == Some(at) { words } else { "" })),
            _ => {}
        }
    }
    lines
}

fn mark(columns: &[usize], words: &str) -> Line {
    let mut text = String::new();
    for column in columns {
        text.push_str(&" ".repeat(column.saturating_sub(text.len())));
        text.push('^');
    }
    Line { text: format!("{text} {words}").trim_end().to_owned(), is_mark: true }
}

/// "free  k down, m up" or "summed  i j"; what has no entries says so for free indices and is empty for others.
fn cell(heading: &str, entries: &[LedgerIndex]) -> Cell {
    if entries.is_empty() {
        let text = if heading.starts_with("free") { format!("{heading}none") } else { String::new() };
        return Cell { text, odd: Vec::new() };
    }
    let separator = if entries.iter().any(|entry| !entry.level.is_empty()) { ", " } else { " " };
    let mut cell = Cell { text: heading.to_owned(), odd: Vec::new() };
    for (at, entry) in entries.iter().enumerate() {
        if at > 0 {
            cell.text.push_str(separator);
        }
        if entry.odd {
            cell.odd.push(cell.text.width());
        }
        cell.text.push_str(&printable(&entry.letter));
        if !entry.level.is_empty() {
            cell.text.push(' ');
            cell.text.push_str(entry.level);
        }
    }
    cell
}

fn padded(text: &str, columns: usize) -> String {
    format!("{text}{}", " ".repeat(columns.saturating_sub(text.width())))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A row from "k down*, m up" and "i j": a star marks an odd entry.
    fn row(title: &str, free: &str, summed: &str) -> LedgerRow {
        let entries = |text: &str, separator: &str| -> Vec<LedgerIndex> {
            text.split(separator)
                .filter(|entry| !entry.is_empty())
                .map(|entry| {
                    let odd = entry.ends_with('*');
                    let (letter, level) =
                        entry.trim_end_matches('*').split_once(' ').unwrap_or((entry.trim_end_matches('*'), ""));
                    let level = ["up", "down"].into_iter().find(|known| *known == level).unwrap_or_default();
                    LedgerIndex { letter: letter.into(), level, odd }
                })
                .collect()
        };
        LedgerRow {
            title: title.into(),
            span: Default::default(),
            free: entries(free, ", "),
            summed: entries(summed, " "),
        }
    }

    #[track_caller]
    fn table(rows: Vec<LedgerRow>) -> String {
        let ledger = Ledger { statement: Default::default(), rows };
        lines(&ledger).into_iter().map(|line| line.text + "\n").collect()
    }

    #[test]
    fn odd_entries_in_one_column_share_a_mark() {
        let want = "left side     free  μ up              summed  i\n\
                    right side    free  ν up\n\
                    \x20                   ^ these differ\n";
        assert_eq!(table(vec![row("left side", "μ up*", "i"), row("right side", "ν up*", "")]), want);
    }

    #[test]
    fn odd_entries_elsewhere_are_marked_row_by_row() {
        let want = "left side     free  k down, m up\n\
                    \x20                           ^\n\
                    right side    free  m down\n\
                    \x20                   ^ these differ\n";
        assert_eq!(table(vec![row("left side", "k down, m up*", ""), row("right side", "m down*", "")]), want);
    }

    #[test]
    fn a_single_odd_entry_is_pointed_at() {
        let want = "left side     free  none\n\
                    right side    free  none              summed  i j\n\
                    \x20                                               ^ here\n";
        assert_eq!(table(vec![row("left side", "", ""), row("right side", "", "i j*")]), want);
    }

    #[test]
    fn of_a_long_table_one_row_of_each_kind_is_shown() {
        let mut rows: Vec<LedgerRow> = (1..=40).map(|at| row(&format!("side {at}"), "k up*", "i")).collect();
        rows.push(row("side 41", "m up*", "i"));
        rows.push(row("side 42", "k up*", "j"));
        let want = "side 1     free  k up              summed  i\n\
                    side 41    free  m up              summed  i\n\
                    \x20                ^ these differ\n\
                    (40 more rows are like the first)\n";
        assert_eq!(table(rows), want);
    }

    #[test]
    fn the_order_of_free_indices_makes_no_kind() {
        let mut rows = vec![row("left side", "k up, m up", "")];
        rows.extend((1..=3).map(|at| row(&format!("right side, term {at}"), "m up, k up", "i j*")));
        let want = "left side             free  k up, m up\n\
                    right side, term 1    free  m up, k up        summed  i j\n\
                    \x20                                                       ^ here\n\
                    (2 more rows are like one of these)\n";
        assert_eq!(table(rows), want);
    }

    #[test]
    fn a_table_of_many_kinds_ends() {
        let rows: Vec<LedgerRow> = (1..=40).map(|at| row(&format!("side {at}"), &format!("k{at} up"), "")).collect();
        let table = table(rows);
        assert_eq!(table.lines().count(), MOST_ROWS + 1);
        assert!(table.ends_with("\n(28 more rows)\n"), "{table}");
    }
}
