//! The symbol table for people: kernels with slots, uses and symmetries, then letters that mean several things.
//!
//! Columns are as wide as what stands in them, up to a limit, so that one long name does not push the rest away.

use indexwise_checker::ledger::shown;
use indexwise_checker::symbols::{DoubleUse, Symbol, SymbolTable};
use unicode_width::UnicodeWidthStr;

use super::super::places::Places;
use crate::output::printable;

/// Blanks between the columns.
const GAP: usize = 4;
/// A wider name pushes its own line only.
const WIDEST_NAME: usize = 24;

/// The lines of the tables: a heading each, nothing for a table without rows.
pub(super) fn lines(symbols: &SymbolTable, places: &Places) -> Vec<String> {
    let mut lines = kernels(&symbols.kernels, places);
    let letters = letters(&symbols.letters, places);
    if !lines.is_empty() && !letters.is_empty() {
        lines.push(String::new());
    }
    lines.extend(letters);
    lines
}

fn kernels(symbols: &[Symbol], places: &Places) -> Vec<String> {
    let rows = symbols.iter().flat_map(|symbol| {
        let mut remarks: Vec<String> = symbol.declared.then(|| "declared".to_owned()).into_iter().collect();
        remarks.extend(symbol.symmetries.iter().cloned());
        let first = [
            printable(&shown(&symbol.kernel)),
            symbol.slots.to_string(),
            symbol.uses.to_string(),
            place(places, symbol.first),
            remarks.first().cloned().unwrap_or_default(),
        ];
        // One remark a line.
        let more = remarks.into_iter().skip(1).map(|remark| {
            let [name, slots, uses, first] = <[String; 4]>::default();
            [name, slots, uses, first, remark]
        });
        std::iter::once(first).chain(more).collect::<Vec<_>>()
    });
    table(["kernel", "slots", "uses", "first", ""], rows.collect())
}

fn letters(letters: &[DoubleUse], places: &Places) -> Vec<String> {
    let rows = letters.iter().flat_map(|letter| {
        letter.parts.iter().enumerate().map(|(at, part)| {
            // The letter stands before its first part only.
            let name = if at == 0 { printable(&shown(&letter.letter)) } else { String::new() };
            [name, part.role.words(), part.uses.to_string(), place(places, part.first), String::new()]
        })
    });
    table(["letter", "used as", "uses", "first", ""], rows.collect())
}

fn place(places: &Places, span: indexwise_grammar::span::Span) -> String {
    let place = places.start(span);
    format!("{}:{}", place.line, place.column)
}

/// Rows under a heading, each column padded to its widest cell; without rows nothing.
fn table(heading: [&str; 5], rows: Vec<[String; 5]>) -> Vec<String> {
    if rows.is_empty() {
        return Vec::new();
    }
    let rows: Vec<[String; 5]> = std::iter::once(heading.map(str::to_owned)).chain(rows).collect();
    let mut widths = [0; 5];
    for row in &rows {
        for (width, cell) in widths.iter_mut().zip(row) {
            *width = cell.width().min(WIDEST_NAME).max(*width);
        }
    }
    let line = |row: &[String; 5]| {
        let cells = row.iter().zip(widths).map(|(cell, width)| {
            let gap = (width + GAP).saturating_sub(cell.width()).max(1);
            format!("{cell}{}", " ".repeat(gap))
        });
        cells.collect::<String>().trim_end().to_owned()
    };
    rows.iter().map(line).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::files::Text;
    use indexwise_checker::symbols::{LetterRole, Part};
    use indexwise_grammar::span::Span;

    fn symbol(kernel: &str, slots: usize, at: usize, symmetries: &[&str], declared: bool) -> Symbol {
        let symmetries = symmetries.iter().map(|&words| words.to_owned()).collect();
        Symbol { kernel: kernel.into(), slots, uses: 2, first: Span::new(at, at + 1), symmetries, declared }
    }

    #[test]
    fn the_tables_are_aligned() {
        let text = Text { text: "μ E_{ij}\n E h".into(), marked: false };
        let part = |role, at: usize| Part { role, uses: 3, first: Span::new(at, at + 1) };
        let symbols = SymbolTable {
            kernels: vec![
                symbol("E", 2, 3, &["symmetric in slots 1 2"], true),
                symbol("\\mathcal{in-plane membrane}", 0, 11, &[], false),
            ],
            letters: vec![DoubleUse {
                letter: "E".into(),
                parts: vec![part(LetterRole::Kernel(2), 3), part(LetterRole::Kernel(0), 11)],
            }],
        };
        let want = "kernel                      slots    uses    first\n\
                    E                           2        2       1:3      declared\n\
                    \x20                                                     symmetric in slots 1 2\n\
                    \\mathcal{in-plane membrane} 0        2       2:2\n\
                    \n\
                    letter    used as     uses    first\n\
                    E         2 slots     3       1:3\n\
                    \x20         quantity    3       2:2";
        assert_eq!(lines(&symbols, &Places::new(&text)).join("\n"), want);
    }

    #[test]
    fn nothing_is_said_of_nothing() {
        assert_eq!(lines(&SymbolTable::default(), &Places::new(&Text::default())), [""; 0]);
    }
}
