//! A tree as one line of text, for tests and for people who debug the reader.

use std::fmt::Write;

use super::{
    Atom, Bracket, Factor, Formula, Fraction, FractionKind, Group, Item, ItemKind, Joint, Level, Operator, Relation,
    Script, Statement, Sum, Term,
};

/// The statements of a formula, one a line.
pub fn dump(formula: &Formula) -> String {
    formula.statements.iter().map(statement).collect::<Vec<_>>().join("\n")
}

fn statement(statement: &Statement) -> String {
    let mut out = String::new();
    for (n, side) in statement.sides.iter().enumerate() {
        if let Some(relation) = n.checked_sub(1).and_then(|n| statement.relations.get(n)) {
            out.push_str(&self::relation(relation));
        }
        out.push_str(&sum(side));
    }
    out
}

/// The plain sign of equality goes without saying.
fn relation(relation: &Relation) -> String {
    match relation.sign.as_str() {
        "=" => format!(" {:?} ", relation.kind),
        sign => format!(" {:?}({sign}) ", relation.kind),
    }
}

fn sum(sum: &Sum) -> String {
    let mut out = String::new();
    for (n, term) in sum.terms.iter().enumerate() {
        let sign = term.sign.map(|sign| sign.kind.latex());
        let _ = match (n, sign) {
            (0, sign) => write!(out, "{}", sign.unwrap_or_default()),
            (_, sign) => write!(out, " {} ", sign.unwrap_or("&")),
        };
        out.push_str(&self::term(term));
    }
    out
}

fn term(term: &Term) -> String {
    let mut out = String::new();
    for (n, factor) in term.factors.iter().enumerate() {
        match joint(factor.joint) {
            "" if n == 0 => {}
            "" => out.push(' '),
            sign if n == 0 => out.push_str(&format!("{sign} ")),
            sign => out.push_str(&format!(" {sign} ")),
        }
        out.push_str(&self::factor(factor));
    }
    if term.factors.is_empty() {
        out.push('∅');
    }
    if term.dangling != Joint::Beside {
        let _ = write!(out, " {} ∅", joint(term.dangling));
    }
    out
}

fn joint(joint: Joint) -> &'static str {
    match joint {
        Joint::Beside => "",
        Joint::Times(product) => product.latex(),
        Joint::Slash => "/",
        Joint::Set(sign) => sign,
        Joint::Apart => ",",
    }
}

fn factor(factor: &Factor) -> String {
    let mut out = match &factor.atom {
        Atom::Kernel(kernel) if kernel.word => format!("“{}”", kernel.name),
        Atom::Kernel(kernel) => kernel.name.to_string(),
        Atom::Number(number) => number.to_string(),
        Atom::Group(group) => self::group(group),
        Atom::Fraction(fraction) => self::fraction(fraction),
        Atom::Root(root) => match &root.degree {
            Some(degree) => format!("√[{}]({})", sum(degree), sum(&root.body)),
            None => format!("√({})", sum(&root.body)),
        },
        Atom::Big(big, "\\sum" | "\\int" | "\\lim") => format!("{big:?}"),
        Atom::Big(big, command) => format!("{big:?}({command})"),
        Atom::Function(name) => format!("fn:{name}"),
        Atom::Matrix => "matrix".to_owned(),
        Atom::Text(_) => "text".to_owned(),
        Atom::Dots => "…".to_owned(),
        Atom::Order(None) => "O(..)".to_owned(),
        Atom::Order(Some(body)) => format!("O({})", sum(body)),
        Atom::Wrapped(body) | Atom::Labelled(body) | Atom::Struck(body) => format!("⟨{}⟩", sum(body)),
        Atom::Unknown(name, sums) => {
            let sums: Vec<String> = sums.iter().map(sum).collect();
            format!("?{name}({})", sums.join(", "))
        }
        Atom::Unread(reason) => format!("!{reason}!"),
    };
    out.push_str(&factor.marks);
    for script in &factor.scripts {
        out.push_str(&self::script(script));
    }
    out
}

/// The brackets are named by their shape, and shown where several have one shape.
fn group(group: &Group) -> String {
    let parts: Vec<String> = group.parts.iter().map(statement).collect();
    let usual = match group.bracket {
        Bracket::Round => "(",
        Bracket::Square => "[",
        Bracket::Curly => "\\{",
        Bracket::Bars => "|",
        Bracket::Angle => "\\langle",
        Bracket::Pair => "\\comm",
    };
    let left = if group.left == usual { String::new() } else { format!("‹{}›", group.left) };
    format!("{:?}{left}({})", group.bracket, parts.join(", "))
}

fn fraction(fraction: &Fraction) -> String {
    let kind = match fraction.kind {
        FractionKind::Quotient => String::new(),
        FractionKind::Binomial => "\\binom ".to_owned(),
        FractionKind::Stacked => "\\atop ".to_owned(),
        FractionKind::Derivative(command) => {
            let order = fraction.order.as_ref().map_or_else(String::new, |order| format!("^{{{}}}", sum(order)));
            format!("{command}{order} ")
        }
    };
    format!("[{kind}{} / {}]", sum(&fraction.over), sum(&fraction.under))
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
        ItemKind::Sign(sign) => sign.latex().to_owned(),
        ItemKind::Relation(sign) => sign.to_string(),
        ItemKind::Dots => "…".to_owned(),
        ItemKind::Operator(Operator::Joint(sign)) => joint(*sign).to_owned(),
        ItemKind::Operator(Operator::Over) => "\\over".to_owned(),
        ItemKind::Operator(Operator::Break) => "&".to_owned(),
        ItemKind::Factor(inner) => format!("⟨{}⟩", factor(inner)),
    }
}
