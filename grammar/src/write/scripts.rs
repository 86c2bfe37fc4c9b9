//! Scripts: each item of its own, and how closely they may stand.

use crate::tree::{Atom, Factor, Group, Item, ItemKind, Level, Operator, Script};
use crate::vocabulary::{class, greek_word};

use super::letters::{index, label, spells_a_word};
use super::{Around, Dialect, Writer, signs};

impl Writer {
    /// Scripts after what carries them; what sets a script apart is kept.
    pub(super) fn scripts(&mut self, scripts: &[Script]) -> String {
        let mut out = String::new();
        for script in scripts {
            if script.staggered && !script.before {
                out.push_str("{}");
            }
            out.push(if script.level == Level::Up { '^' } else { '_' });
            out.push_str(&self.held(&script.items));
        }
        out
    }

    /// What a script holds, in braces unless it can do without.
    fn held(&mut self, items: &[Item]) -> String {
        let held = match self.dialect {
            Dialect::Unicode => self.items_shown(items),
            // Inside the braces of a note words are letters in a row, so that it is LaTeX but for Greek names.
            Dialect::Note => match note_run(items) {
                Some(run) => return run,
                None => self.items(items),
            },
            Dialect::Latex => self.items(items),
        };
        if stands_bare(items, self.dialect) { held } else { format!("{{{held}}}") }
    }

    /// Items in LaTeX or in the braces of a note: as close as the reader tells them apart.
    fn items(&mut self, items: &[Item]) -> String {
        let written: Vec<String> = items.iter().enumerate().map(|(n, item)| self.item(item, n == 0)).collect();
        // Notes have names in their braces, which blanks part.
        let blanks = self.dialect == Dialect::Note || letters_spell(items);
        let mut out = String::new();
        for (n, (text, item)) in written.iter().zip(items).enumerate() {
            let before = n.checked_sub(1).and_then(|n| items.get(n));
            let apart = needs_blank(&out, text);
            if apart && self.dialect == Dialect::Latex && before.is_some_and(|before| both_numbers(before, item)) {
                // A blank is lost in print: `9 10` would look like 910.
                out.push_str("\\,");
            } else if apart || before.is_some_and(|before| blanks && lettered(before) && lettered(item)) {
                out.push(' ');
            }
            let structured = |item: &Item| matches!(item.kind, ItemKind::Factor(_));
            let loose = structured(item) || before.is_some_and(structured);
            if loose && !out.is_empty() && !out.ends_with(' ') {
                out.push(' ');
            }
            out.push_str(text);
        }
        out
    }

    fn item(&mut self, item: &Item, first: bool) -> String {
        match &item.kind {
            ItemKind::Letter(name) | ItemKind::Styled(name) => index(name, self.dialect),
            ItemKind::Number(number) => number.to_string(),
            ItemKind::Label(name) => {
                self.complete &= !name.is_empty();
                label(name, self.dialect)
            }
            ItemKind::Comma => ",".to_owned(),
            ItemKind::Semicolon => ";".to_owned(),
            ItemKind::Bar => "|".to_owned(),
            ItemKind::Open(sign) => open(*sign).to_owned(),
            ItemKind::Close(sign) => close(*sign).to_owned(),
            ItemKind::Sign(sign) => sign.latex().to_owned(),
            // A blank keeps a typed mark from the letter before it.
            ItemKind::Mark(mark) if matches!(mark.as_str(), "'" | "!") && !first => format!("\\,{mark}"),
            ItemKind::Mark(mark) if class(mark).is_some() => format!("\\{mark}"),
            ItemKind::Mark(mark) => mark.to_string(),
            ItemKind::Relation(sign) => signs::relation(sign, self.dialect),
            ItemKind::Dots => "\\dots".to_owned(),
            ItemKind::Operator(Operator::Joint(joint)) => signs::joint(*joint, Dialect::Latex),
            ItemKind::Operator(Operator::Over) => "\\over".to_owned(),
            ItemKind::Operator(Operator::Break) => {
                self.complete = false;
                "\\quad".to_owned()
            }
            ItemKind::Factor(factor) => self.in_script(factor),
        }
    }

    /// A factor in a script. Braces would be spliced in there, so that a command has to hold several factors.
    fn in_script(&mut self, factor: &Factor) -> String {
        let mut latex = Writer { dialect: Dialect::Latex, complete: true };
        let text = match &factor.atom {
            Atom::Wrapped(sum) if factor.marks.is_empty() => {
                format!("\\smash{{{}}}{}", latex.sum(sum), latex.scripts(&factor.scripts))
            }
            // Typed brackets are signs of their own there.
            Atom::Group(Group { left: left @ ("|" | "\\|" | "\\langle"), parts, .. }) if factor.marks.is_empty() => {
                let command = match *left {
                    "|" => "\\abs",
                    "\\|" => "\\norm",
                    _ => "\\expval",
                };
                let parts: Vec<String> = parts.iter().map(|part| latex.statement(part)).collect();
                format!("{command}{{{}}}{}", parts.join(", "), latex.scripts(&factor.scripts))
            }
            _ => latex.factor(factor, Around::default()),
        };
        self.complete &= latex.complete;
        text
    }

    /// Items for people.
    fn items_shown(&mut self, items: &[Item]) -> String {
        let mut out = String::new();
        let mut before: Option<&Item> = None;
        for item in items {
            let text = self.item_shown(item);
            let long = |item: &Item| matches!(item.kind, ItemKind::Label(_) | ItemKind::Factor(_));
            let numbers = before.is_some_and(|before| both_numbers(before, item));
            let apart = |one: &Item, other: &Item| long(one) && (lettered(other) || long(other));
            if numbers || before.is_some_and(|before| apart(before, item) || apart(item, before)) {
                out.push(' ');
            }
            out.push_str(&text);
            before = Some(item);
        }
        out
    }

    fn item_shown(&mut self, item: &Item) -> String {
        match &item.kind {
            ItemKind::Letter(name) | ItemKind::Styled(name) => index(name, Dialect::Unicode),
            ItemKind::Label(name) => label(name, Dialect::Unicode),
            ItemKind::Open('<') => "⟨".to_owned(),
            ItemKind::Close('>') => "⟩".to_owned(),
            ItemKind::Open(sign) | ItemKind::Close(sign) => sign.to_string(),
            ItemKind::Sign(sign) => signs::plus(*sign, Dialect::Unicode).to_owned(),
            ItemKind::Mark(mark) if mark == "circ" => "°".to_owned(),
            ItemKind::Mark(mark) if class(mark).is_some() => signs::shown(&format!("\\{mark}")).to_owned(),
            ItemKind::Dots => "…".to_owned(),
            ItemKind::Operator(Operator::Joint(joint)) => signs::joint(*joint, Dialect::Unicode),
            ItemKind::Operator(Operator::Over) => "/".to_owned(),
            ItemKind::Factor(factor) => self.factor(factor, Around::default()),
            _ => self.item(item, true),
        }
    }
}

/// Whether an item is a letter or a number, so that it may run into its neighbour.
fn lettered(item: &Item) -> bool {
    matches!(item.kind, ItemKind::Letter(_) | ItemKind::Styled(_) | ItemKind::Number(_))
}

/// Whether some run of plain letters in a script would be read as a word.
fn letters_spell(items: &[Item]) -> bool {
    let letter = |item: &Item| match &item.kind {
        ItemKind::Letter(name) if name.len() == 1 => name.to_string(),
        _ => " ".to_owned(),
    };
    items.iter().map(letter).collect::<String>().split(' ').any(spells_a_word)
}

/// Whether two texts would run together: a command with a letter, a number with a number.
fn needs_blank(before: &str, next: &str) -> bool {
    let tail = before.rsplit('\\').next().filter(|_| before.contains('\\')).unwrap_or_default();
    let command = !tail.is_empty() && tail.bytes().all(|byte| byte.is_ascii_alphabetic());
    let letter = next.starts_with(|sign: char| sign.is_ascii_alphabetic());
    let digit = |sign: char| sign.is_ascii_digit() || sign == '.';
    (command && letter) || (before.ends_with(digit) && next.starts_with(digit))
}

fn both_numbers(one: &Item, other: &Item) -> bool {
    [one, other].iter().all(|item| matches!(item.kind, ItemKind::Number(_)))
}

/// `x^2`, `A_i`, `A_\mu`: one letter or digit needs no braces.
fn stands_bare(items: &[Item], dialect: Dialect) -> bool {
    let [item] = items else { return false };
    match &item.kind {
        ItemKind::Letter(name) if dialect == Dialect::Unicode => index(name, dialect).chars().count() == 1,
        ItemKind::Letter(name) => match name.strip_prefix('\\') {
            Some(name) => name.bytes().all(|byte| byte.is_ascii_alphabetic()),
            None => name.chars().count() == 1,
        },
        ItemKind::Number(number) => number.len() == 1,
        ItemKind::Mark(_) => dialect == Dialect::Unicode,
        _ => false,
    }
}

/// The script of a note without braces: letters, each an index, or one Greek name in a row; numbers; a comma or a
/// semicolon before a letter; brackets around letters.
fn note_run(items: &[Item]) -> Option<String> {
    let mut out = String::new();
    let mut depth = 0_usize;
    let mut run: Vec<&str> = Vec::new();
    for (n, item) in items.iter().enumerate() {
        let next_is_letter = matches!(items.get(n + 1), Some(Item { kind: ItemKind::Letter(_), .. }));
        if !matches!(item.kind, ItemKind::Letter(_)) && !is_run(&std::mem::take(&mut run)) {
            return None;
        }
        match &item.kind {
            ItemKind::Letter(name) => {
                let greek = name.strip_prefix('\\').filter(|word| greek_word(word) == Some(name.as_str()));
                let plain = (name.len() == 1).then_some(name.as_str());
                // A Greek name is a run of its own.
                if run.iter().any(|other| other.len() > 1) || (greek.is_some() && !run.is_empty()) {
                    return None;
                }
                let text = greek.or(plain)?;
                run.push(text);
                out.push_str(text);
            }
            ItemKind::Number(number) if !out.ends_with(|sign: char| sign.is_ascii_digit()) => {
                number.bytes().all(|byte| byte.is_ascii_digit()).then_some(())?;
                out.push_str(number);
            }
            ItemKind::Comma if next_is_letter => out.push(','),
            ItemKind::Semicolon if next_is_letter => out.push(';'),
            ItemKind::Open(sign @ ('(' | '[')) if closes(items, n) => {
                depth += 1;
                out.push(*sign);
            }
            ItemKind::Bar if depth > 0 => out.push('|'),
            ItemKind::Close(sign @ (')' | ']')) if depth > 0 => {
                depth -= 1;
                out.push(*sign);
            }
            _ => return None,
        }
    }
    (!out.is_empty() && depth == 0 && is_run(&run)).then_some(out)
}

/// Whether letters in a row stay letters: several must not spell a word.
fn is_run(letters: &[&str]) -> bool {
    letters.len() < 2 || !spells_a_word(&letters.concat())
}

/// Whether letters and bars alone stand between a bracket and its partner, a letter first.
fn closes(items: &[Item], at: usize) -> bool {
    let rest = items.get(at + 1..).unwrap_or_default();
    let end = rest.iter().find(|item| !matches!(item.kind, ItemKind::Letter(_) | ItemKind::Bar));
    let first = matches!(rest.first(), Some(Item { kind: ItemKind::Letter(_), .. }));
    first && end.is_some_and(|item| matches!(item.kind, ItemKind::Close(')' | ']')))
}

fn open(sign: char) -> &'static str {
    match sign {
        '(' => "(",
        '[' => "[",
        '{' => "\\{",
        _ => "\\langle",
    }
}

fn close(sign: char) -> &'static str {
    match sign {
        ')' => ")",
        ']' => "]",
        '}' => "\\}",
        _ => "\\rangle",
    }
}
