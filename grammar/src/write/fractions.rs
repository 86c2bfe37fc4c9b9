//! Fractions, binomials and derivatives by command.
//!
//! LaTeX sets one above the other. In a line a slash takes the next factor alone, and `∂f/∂x` is read as one thing by
//! everybody; all else is put in brackets.

use crate::tree::{Atom, Factor, Fraction, FractionKind, Script, Sum, Term};

use super::atoms::holds_several;
use super::{Around, Dialect, Writer};

/// Fractions that have a sign of their own.
const SIGNS: &[(&str, &str, &str)] = &[
    ("1", "2", "½"),
    ("1", "3", "⅓"),
    ("2", "3", "⅔"),
    ("1", "4", "¼"),
    ("3", "4", "¾"),
    ("1", "6", "⅙"),
    ("1", "8", "⅛"),
];

impl Writer {
    pub(super) fn fraction(&mut self, fraction: &Fraction, scripts: &[Script], around: Around<'_>) -> String {
        if self.dialect == Dialect::Latex {
            return self.stacked(fraction);
        }
        let text = match fraction.kind {
            FractionKind::Quotient => self.slashed(fraction),
            FractionKind::Derivative(_) if self.unicode() => self.derivative_shown(fraction),
            FractionKind::Binomial if self.unicode() => {
                return format!("binom({}, {})", self.sum(&fraction.over), self.sum(&fraction.under));
            }
            FractionKind::Stacked if self.unicode() => {
                return format!("[{} over {}]", self.sum(&fraction.over), self.sum(&fraction.under));
            }
            _ => return self.stacked(fraction),
        };
        let sign = SIGNS.iter().any(|(.., sign)| *sign == text);
        let number = number(&fraction.over).is_some() && number(&fraction.under).is_some();
        // `a/b c` would be asked what stands below; a number, as in `1/2 c`, is not.
        let unclear = around.followed && !number;
        let product = around.before.is_some() && !sign;
        if !scripts.is_empty() || unclear || product { format!("({text})") } else { text }
    }

    fn stacked(&mut self, fraction: &Fraction) -> String {
        let over = self.sum(&fraction.over);
        let under = self.sum(&fraction.under);
        match fraction.kind {
            FractionKind::Quotient => format!("\\frac{{{over}}}{{{under}}}"),
            FractionKind::Binomial => format!("\\binom{{{over}}}{{{under}}}"),
            FractionKind::Stacked => format!("{{{over} \\atop {under}}}"),
            FractionKind::Derivative(command) => {
                let order = fraction.order.as_ref().map(|order| format!("[{}]", self.sum(order))).unwrap_or_default();
                let under = match variables(&fraction.under) {
                    Some([one, other]) => format!("{{{}}}{{{}}}", self.sum(one), self.sum(other)),
                    None => format!("{{{under}}}"),
                };
                let over = if fraction.over.terms.is_empty() && variables(&fraction.under).is_none() {
                    String::new()
                } else {
                    format!("{{{over}}}")
                };
                format!("{command}{order}{over}{under}")
            }
        }
    }

    /// A quotient in a line.
    fn slashed(&mut self, fraction: &Fraction) -> String {
        let (over, under) = (self.sum(&fraction.over), self.sum(&fraction.under));
        let sign = SIGNS.iter().find(|(one, other, _)| *one == over && *other == under);
        if let Some((.., sign)) = sign.filter(|_| self.unicode()) {
            return (*sign).to_owned();
        }
        let over = if stands_alone(&fraction.over, true) { over } else { format!("({over})") };
        let under = if stands_alone(&fraction.under, true) { under } else { format!("({under})") };
        format!("{over}/{under}")
    }

    /// `∂^2 f/∂x ∂y`: a derivative by command, spelled out.
    fn derivative_shown(&mut self, fraction: &Fraction) -> String {
        let sign = match fraction.kind {
            FractionKind::Derivative("\\pdv") => "∂",
            FractionKind::Derivative("\\fdv") => "δ",
            FractionKind::Derivative("\\dv") => "d",
            FractionKind::Derivative(other) => other.trim_start_matches('\\'),
            _ => "",
        };
        let order = fraction.order.as_ref().map(|order| self.sum(order)).filter(|order| order != "1");
        let power = match &order {
            Some(order) if order.chars().count() == 1 => format!("^{order}"),
            Some(order) => format!("^{{{order}}}"),
            None => String::new(),
        };
        let over = self.closed(&fraction.over);
        let blank = if power.is_empty() || over.starts_with('(') || over.is_empty() { "" } else { " " };
        let under = match variables(&fraction.under) {
            Some([one, other]) => {
                let power = if order.is_some() { "" } else { "^2" };
                let blank = if power.is_empty() || over.is_empty() { "" } else { " " };
                let (one, other) = (self.closed(one), self.closed(other));
                return format!("{sign}{power}{blank}{over}/({sign}{one} {sign}{other})");
            }
            None => self.closed(&fraction.under),
        };
        let scripted = under.contains(['^', '_']) && !power.is_empty();
        let under = if scripted { format!("({sign}{under}){power}") } else { format!("{sign}{under}{power}") };
        format!("{sign}{power}{blank}{over}/{under}")
    }

    /// A sum in brackets, unless it is one factor.
    fn closed(&mut self, sum: &Sum) -> String {
        let text = self.sum(sum);
        if sum.terms.is_empty() || stands_alone(sum, false) { text } else { format!("({text})") }
    }
}

/// The two variables of `\pdv{f}{x}{y}`.
fn variables(under: &Sum) -> Option<[&Sum; 2]> {
    let [Term { factors, sign: None, .. }] = under.terms.as_slice() else { return None };
    let [one, other] = factors.as_slice() else { return None };
    let held = |factor: &'_ Factor| factor.scripts.is_empty() && factor.marks.is_empty();
    match (&one.atom, &other.atom) {
        (Atom::Wrapped(first), Atom::Wrapped(second)) if held(one) && held(other) => Some([first, second]),
        _ => None,
    }
}

/// Whether a sum is one factor that a slash cannot tear: no sign, no fraction, no hidden product; with
/// `differential`, also a bare sign of derivation with one factor.
fn stands_alone(sum: &Sum, differential: bool) -> bool {
    let [Term { factors, sign: None, .. }] = sum.terms.as_slice() else { return false };
    match factors.as_slice() {
        [factor] => is_closed(factor),
        [sign, factor] if differential => is_differential(sign) && is_closed(factor) && factor_is_kernel(factor),
        _ => false,
    }
}

fn is_closed(factor: &Factor) -> bool {
    match &factor.atom {
        Atom::Fraction(_) | Atom::Text(_) => false,
        Atom::Wrapped(sum) => !holds_several(sum),
        _ => true,
    }
}

fn factor_is_kernel(factor: &Factor) -> bool {
    matches!(factor.atom, Atom::Kernel(_)) && factor.joint == crate::tree::Joint::Beside
}

/// `∂` or `d`, perhaps with a power.
fn is_differential(factor: &Factor) -> bool {
    matches!(&factor.atom, Atom::Kernel(kernel) if matches!(kernel.name.as_str(), "\\partial" | "d"))
        && factor.scripts.is_empty()
}

/// The number that a sum is, if it is one.
fn number(sum: &Sum) -> Option<&str> {
    let [Term { factors, sign: None, .. }] = sum.terms.as_slice() else { return None };
    match factors.as_slice() {
        [Factor { atom: Atom::Number(number), scripts, .. }] if scripts.is_empty() => Some(number),
        _ => None,
    }
}
