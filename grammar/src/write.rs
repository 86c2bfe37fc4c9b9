//! From tree to text, in three dialects: LaTeX, Unicode for a terminal, the notation of plain notes.
//!
//! Pure functions of the tree: the same tree gives the same text, on one line. LaTeX and notes are written to be
//! read again: reading gives the same tree but for places, so that spaces and brackets stand where the reader needs
//! them and the order of slots is kept (`{}` before a staggered script). Unicode text is for people; brackets stand
//! where a fraction in a line would be read otherwise. What a dialect cannot say (a matrix, an unread part) becomes a
//! visible placeholder, and `complete` is false.
//!
//! Traps: several letters side by side may spell a function or a Greek name, a bracket after a command may be its
//! option, braces may be its argument. The recursion is as deep as the tree, which the reader bounds.

mod atoms;
mod fractions;
mod letters;
mod scripts;
mod signs;

use crate::tree::{Atom, Factor, Joint, SignKind, Statement, Sum, Term};

/// How a formula is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Dialect {
    /// For a LaTeX document.
    Latex,
    /// For people who read a terminal: `Γ^i_{ik} = ½ g^{ij} ∂_k g_{ij}`.
    Unicode,
    /// For a plain note: `Gamma^i_ik = 1/2 g^ij partial_k g_ij`.
    Note,
}

/// A text, and whether it says all that the tree says.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Written {
    /// On one line, without delimiters.
    pub text: String,
    /// False if a placeholder stands for something that the tree or the dialect does not know.
    pub complete: bool,
}

/// Writes a statement with its relations.
pub fn write_statement(statement: &Statement, dialect: Dialect) -> Written {
    written(dialect, |writer| {
        let text = writer.statement(statement);
        if dialect == Dialect::Note { guarded(text) } else { text }
    })
}

/// Writes a sum.
pub fn write_sum(sum: &Sum, dialect: Dialect) -> Written {
    written(dialect, |writer| writer.sum(sum))
}

/// Writes a term with its sign, if it has one.
pub fn write_term(term: &Term, dialect: Dialect) -> Written {
    written(dialect, |writer| writer.signed(term, true))
}

/// Writes a factor with its scripts.
pub fn write_factor(factor: &Factor, dialect: Dialect) -> Written {
    written(dialect, |writer| writer.factor(factor, Around::default()))
}

fn written(dialect: Dialect, write: impl FnOnce(&mut Writer) -> String) -> Written {
    let mut writer = Writer { dialect, complete: true };
    let text = write(&mut writer);
    Written { text, complete: writer.complete }
}

/// A note takes `(name)` at the start for a label and `[words]` at the end for a reason.
fn guarded(mut text: String) -> String {
    let name = text.strip_prefix('(').and_then(|rest| rest.split_once(") ")).map(|(name, _)| name);
    if name.is_some_and(|name| name.chars().all(|sign| sign.is_alphanumeric() || "-_:.".contains(sign))) {
        text.insert(1, ' ');
    }
    if let Some(open) = text.rfind(" [").filter(|_| text.ends_with(']')) {
        text.insert_str(open + 1, "\\left");
    }
    text
}

/// What stands beside a factor in its term.
#[derive(Clone, Copy, Default)]
struct Around<'t> {
    /// The factor before, joined by nothing.
    before: Option<&'t Factor>,
    /// Whether a factor follows that is joined by nothing.
    followed: bool,
}

struct Writer {
    dialect: Dialect,
    complete: bool,
}

impl Writer {
    fn unicode(&self) -> bool {
        self.dialect == Dialect::Unicode
    }

    fn statement(&mut self, statement: &Statement) -> String {
        let mut out = String::new();
        for (n, side) in statement.sides.iter().enumerate() {
            if let Some(relation) = n.checked_sub(1).and_then(|n| statement.relations.get(n)) {
                let sign = signs::relation(&relation.sign, self.dialect);
                out.push_str(if out.is_empty() { "" } else { " " });
                out.push_str(&sign);
                out.push(' ');
            }
            out.push_str(&self.sum(side));
        }
        out.trim_end().to_owned()
    }

    fn sum(&mut self, sum: &Sum) -> String {
        let mut out = String::new();
        for (n, term) in sum.terms.iter().enumerate() {
            if n > 0 {
                out.push(' ');
            }
            out.push_str(&self.signed(term, n == 0));
        }
        out
    }

    /// A term with its sign; between two terms some sign has to stand.
    fn signed(&mut self, term: &Term, first: bool) -> String {
        let body = self.term(term);
        let sign = match term.sign {
            Some(sign) => signs::plus(sign.kind, self.dialect),
            None if first => return body,
            None => signs::plus(SignKind::Plus, self.dialect),
        };
        let tight = first && sign.len() == 1;
        if tight { format!("{sign}{body}") } else { format!("{sign} {body}") }
    }

    fn term(&mut self, term: &Term) -> String {
        let apart = term.factors.iter().any(|factor| factor.joint == Joint::Apart);
        let mut out = String::new();
        let mut before = None;
        for (n, factor) in term.factors.iter().enumerate() {
            let next = term.factors.get(n + 1);
            let beside = factor.joint == Joint::Beside;
            let followed = next.is_some_and(|next| next.joint == Joint::Beside);
            let around = Around { before: before.filter(|_| beside), followed };
            out.push_str(&self.joint(factor, before));
            out.push_str(&match &factor.atom {
                Atom::Wrapped(sum) if apart && factor.scripts.is_empty() => self.sum(sum),
                _ => self.factor(factor, around),
            });
            before = Some(factor);
        }
        if term.dangling != Joint::Beside {
            let sign = signs::joint(term.dangling, self.dialect);
            out.push_str(if out.is_empty() { "" } else { " " });
            out.push_str(&sign);
        }
        out
    }

    /// What stands between a factor and the one before it.
    fn joint(&self, factor: &Factor, before: Option<&Factor>) -> String {
        match factor.joint {
            Joint::Beside => match before {
                None => String::new(),
                Some(before) if self.unicode() && stands_close(before, factor) => String::new(),
                Some(_) => " ".to_owned(),
            },
            Joint::Slash if before.is_some() => "/".to_owned(),
            Joint::Apart => ", ".to_owned(),
            joint => {
                let sign = signs::joint(joint, self.dialect);
                if before.is_some() { format!(" {sign} ") } else { format!("{sign} ") }
            }
        }
    }
}

/// `∂f`, `φ(x)`, `sin(x)`: a bare sign of derivation before a kernel, an argument in brackets.
fn stands_close(before: &Factor, factor: &Factor) -> bool {
    let operator = |name: &str| matches!(name, "\\partial" | "\\nabla");
    match (&before.atom, &factor.atom) {
        // `^{(3)}R`: scripts on nothing belong to what follows.
        (Atom::Wrapped(sum), Atom::Kernel(_)) => sum.terms.is_empty(),
        (Atom::Kernel(one), Atom::Kernel(_)) => operator(&one.letter) && before.scripts.is_empty(),
        (Atom::Kernel(_) | Atom::Function(_), Atom::Group(group)) => {
            let lone_terms = group.parts.iter().flat_map(|part| &part.sides).all(|side| side.terms.len() < 2);
            group.left == "(" && (lone_terms || matches!(before.atom, Atom::Function(_)))
        }
        _ => false,
    }
}

#[cfg(test)]
mod tests;
