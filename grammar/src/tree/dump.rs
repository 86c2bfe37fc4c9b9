//! A tree as one line of text, for tests and for people who debug the reader.

use std::fmt::Write;

use super::{Atom, Factor, Formula, Item, ItemKind, Level, Script, Statement, Sum, Term};

/// The statements of a formula, one a line.
pub fn dump(formula: &Formula) -> String {
    formula.statements.iter().map(statement).collect::<Vec<_>>().join("\n")
}

fn statement(statement: &Statement) -> String {
    let mut out = String::new();
    for (n, side) in statement.sides.iter().enumerate() {
        if let Some(relation) = n.checked_sub(1).and_then(|n| statement.relations.get(n)) {
            let _ = write!(out, " {:?} ", relation.kind);
        }
        out.push_str(&sum(side));
    }
    out
}

fn sum(sum: &Sum) -> String {
    sum.terms.iter().map(term).collect::<Vec<_>>().join(" + ")
}

fn term(term: &Term) -> String {
    let factors = term.factors.iter().map(factor).collect::<Vec<_>>().join(" ");
    if factors.is_empty() { "∅".to_owned() } else { factors }
}

fn factor(factor: &Factor) -> String {
    let mut out = match &factor.atom {
        Atom::Kernel(kernel) if kernel.word => format!("“{}”", kernel.name),
        Atom::Kernel(kernel) => kernel.name.to_string(),
        Atom::Number(number) => number.to_string(),
        Atom::Group(group) => {
            let parts: Vec<String> = group.parts.iter().map(statement).collect();
            format!("{:?}({})", group.bracket, parts.join(", "))
        }
        Atom::Fraction(fraction) => format!("[{} / {}]", sum(&fraction.over), sum(&fraction.under)),
        Atom::Root(body) => format!("√({})", sum(body)),
        Atom::Big(big) => format!("{big:?}"),
        Atom::Function(name) => format!("fn:{name}"),
        Atom::Matrix => "matrix".to_owned(),
        Atom::Text(_) => "text".to_owned(),
        Atom::Dots => "…".to_owned(),
        Atom::Order => "O(..)".to_owned(),
        Atom::Wrapped(body) | Atom::Labelled(body) | Atom::Struck(body) => format!("⟨{}⟩", sum(body)),
        Atom::Unknown(name, sums) => {
            let sums: Vec<String> = sums.iter().map(sum).collect();
            format!("?{name}({})", sums.join(", "))
        }
        Atom::Unread(reason) => format!("!{reason}!"),
    };
    for script in &factor.scripts {
        out.push_str(&self::script(script));
    }
    out
}

fn script(script: &Script) -> String {
    let mark = if script.level == Level::Up { '^' } else { '_' };
    let items: Vec<String> = script.items.iter().map(item).collect();
    format!("{mark}{{{}}}", items.join(" "))
}

fn item(item: &Item) -> String {
    match &item.kind {
        ItemKind::Letter(name) | ItemKind::Number(name) | ItemKind::Mark(name) => name.to_string(),
        ItemKind::Label(name) => format!("“{name}”"),
        ItemKind::Styled(name) => format!("‹{name}›"),
        ItemKind::Comma => ",".to_owned(),
        ItemKind::Semicolon => ";".to_owned(),
        ItemKind::Bar => "|".to_owned(),
        ItemKind::Open(sign) | ItemKind::Close(sign) => sign.to_string(),
        ItemKind::Sign => "±".to_owned(),
        ItemKind::Relation => "rel".to_owned(),
        ItemKind::Dots => "…".to_owned(),
        ItemKind::Operator => "op".to_owned(),
        ItemKind::Factor(inner) => format!("⟨{}⟩", factor(inner)),
    }
}
