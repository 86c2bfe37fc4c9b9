//! Factors: an atom, what stands on it, its scripts.

use crate::tree::{Atom, Bracket, Factor, Group, Kernel, Root, Script, Statement, Sum};
use crate::vocabulary::{Class, TYPED_FUNCTIONS, class, command};

use super::letters::{decorated, kernel};
use super::{Around, Dialect, Writer, signs};

/// Functions that LaTeX itself has a command for.
const LATEX_FUNCTIONS: &[&str] = &[
    "sin", "cos", "tan", "cot", "sec", "csc", "sinh", "cosh", "tanh", "coth", "arcsin", "arccos", "arctan", "log",
    "ln", "lg", "exp", "det", "dim", "ker", "hom", "deg", "arg", "gcd", "Pr",
];

/// Functions that a note knows as words.
const NOTE_FUNCTIONS: &[&str] = &["log", "ln", "exp", "sin", "cos", "tan", "det", "tr"];

impl Writer {
    /// A factor with its marks and scripts.
    pub(super) fn factor(&mut self, factor: &Factor, around: Around<'_>) -> String {
        let cut = factor.scripts.iter().take_while(|script| script.before).count();
        let (before, after) = factor.scripts.split_at_checked(cut).unwrap_or((&[], &factor.scripts));
        let text = self.marked(factor, after, around);
        if before.is_empty() {
            return text;
        }
        // Scripts before a kernel would go to the factor before it.
        let before = self.scripts(before);
        if self.unicode() { format!("{before}{text}") } else { format!("{{{before} {text}}}") }
    }

    /// The atom with accents, primes, scripts and factorial signs.
    fn marked(&mut self, factor: &Factor, scripts: &[Script], around: Around<'_>) -> String {
        let cut = factor.marks.rfind(' ').map_or(0, |blank| blank + 1);
        let (accents, tail) = factor.marks.split_at_checked(cut).unwrap_or(("", &factor.marks));
        let primes = tail.len() - tail.trim_start_matches('\'').len();
        let (primes, rest) = tail.split_at_checked(primes).unwrap_or((tail, ""));
        let mut text =
            if accents.is_empty() { self.atom(factor, scripts, around) } else { self.accented(factor, accents) };
        text.push_str(primes);
        // In the usual order of typing; a prime after a factorial sign is neither.
        let after = rest.chars().all(|mark| mark == '!');
        text.push_str(if after { "" } else { rest });
        text.push_str(&self.scripts(scripts));
        text.push_str(if after { rest } else { "" });
        text
    }

    /// `\overline{a + b}`, `\dd{x}`: commands around more than a kernel.
    fn accented(&mut self, factor: &Factor, accents: &str) -> String {
        let is_differential = |name: &str| class(name.trim_start_matches('\\')) == Some(Class::Differential);
        let commands: Vec<&str> = accents.split_ascii_whitespace().rev().collect();
        let differential = commands.first().is_some_and(|name| is_differential(name));
        let inner = match &factor.atom {
            Atom::Wrapped(sum) if differential || holds_several(sum) => self.sum(sum),
            // Decorated letters are a word, as they came.
            Atom::Kernel(kernel) if kernel.word => kernel.name.chars().map(|letter| format!("{letter} ")).collect(),
            _ => self.atom(factor, &[], Around::default()),
        };
        let inner = inner.trim_end();
        commands.into_iter().fold(inner.to_owned(), |inner, name| match self.dialect {
            Dialect::Unicode if is_differential(name) && !inner.contains(' ') => format!("d{inner}"),
            Dialect::Unicode if is_differential(name) => format!("d({inner})"),
            Dialect::Unicode if inner.chars().count() > 1 => format!("{}({inner})", name.trim_start_matches('\\')),
            _ => decorated(name, &inner, self.dialect),
        })
    }

    fn atom(&mut self, factor: &Factor, scripts: &[Script], around: Around<'_>) -> String {
        match &factor.atom {
            Atom::Kernel(Kernel { name, word, .. }) => kernel(name, *word, self.dialect),
            Atom::Number(number) if number.starts_with('\\') => {
                self.complete = false;
                if self.unicode() { "[quantity]".to_owned() } else { "\\SI{}{}".to_owned() }
            }
            Atom::Number(number) => number.to_string(),
            Atom::Group(group) => self.group(group, scripts),
            Atom::Fraction(fraction) => self.fraction(fraction, scripts, around),
            Atom::Root(root) => self.root(root),
            Atom::Big(_, command) if self.unicode() => signs::shown(command).to_owned(),
            Atom::Big(_, "\\sum") if self.dialect == Dialect::Note => "sum".to_owned(),
            Atom::Big(_, "\\int") if self.dialect == Dialect::Note => "int".to_owned(),
            Atom::Big(_, command) => (*command).to_owned(),
            Atom::Function(name) => self.function(name),
            Atom::Matrix => {
                self.complete = false;
                if self.unicode() { "[matrix]" } else { "\\begin{matrix}\\cdots\\end{matrix}" }.to_owned()
            }
            Atom::Text(words) => self.text(words),
            Atom::Dots => if self.unicode() { "…" } else { "\\dots" }.to_owned(),
            Atom::Order(body) => {
                let body = body.as_ref().map(|body| self.sum(body));
                match (body, self.dialect) {
                    (Some(body), Dialect::Unicode) => format!("O({body})"),
                    (Some(body), _) => format!("\\order{{{body}}}"),
                    (None, Dialect::Unicode) => "O".to_owned(),
                    (None, _) => "\\order".to_owned(),
                }
            }
            Atom::Wrapped(sum) => self.wrapped(sum, factor, around),
            Atom::Labelled(sum) => self.passed_through("\\underbrace", sum),
            Atom::Struck(sum) => {
                let sum = self.sum(sum);
                if self.unicode() { format!("cancel({sum})") } else { format!("\\cancel{{{sum}}}") }
            }
            Atom::Unknown(name, sums) => {
                let sums: String = sums.iter().map(|sum| format!("{{{}}}", self.sum(sum))).collect();
                format!("\\{name}{sums}")
            }
            Atom::Unread(reason) => {
                self.complete = false;
                if self.unicode() { format!("[{reason}]") } else { "\\text{[not read]}".to_owned() }
            }
        }
    }

    fn passed_through(&mut self, command: &str, sum: &Sum) -> String {
        let text = self.sum(sum);
        if self.unicode() { format!("({text})") } else { format!("{command}{{{text}}}") }
    }

    /// Several factors or terms that stay together without a bracket.
    fn wrapped(&mut self, sum: &Sum, factor: &Factor, around: Around<'_>) -> String {
        let signed = sum.terms.first().is_some_and(|term| term.sign.is_some());
        if self.unicode() {
            let text = self.sum(sum);
            let loose = sum.terms.len() < 2 && !signed && factor.scripts.is_empty() && factor.marks.is_empty();
            return if loose || text.is_empty() { text } else { format!("({text})") };
        }
        let text = self.sum(sum);
        // Braces around one factor are nothing, and after a command they would be its argument.
        if around.before.is_some_and(takes_braces) || !(sum.terms.is_empty() || holds_several(sum)) {
            return format!("\\smash{{{text}}}");
        }
        // Braces that begin with a sign go on with the sum around them, and empty ones before a script are a gap.
        let guarded = signed || (sum.terms.is_empty() && !factor.scripts.is_empty() && around.before.is_some());
        if guarded { format!("{{{{{text}}}}}") } else { format!("{{{text}}}") }
    }

    fn text(&mut self, words: &str) -> String {
        if class(words) == Some(Class::Mark) {
            let command = format!("\\{words}");
            return if self.unicode() { signs::shown(&command).to_owned() } else { command };
        }
        self.complete &= !words.is_empty();
        match (self.unicode(), words) {
            (true, "") => "[words]".to_owned(),
            (true, words) => words.to_owned(),
            (false, "") => "\\text{...}".to_owned(),
            (false, words) => format!("\\text{{{words}}}"),
        }
    }

    fn function(&mut self, name: &str) -> String {
        match self.dialect {
            Dialect::Unicode => name.to_owned(),
            Dialect::Note if NOTE_FUNCTIONS.contains(&name) || TYPED_FUNCTIONS.contains(&name) => name.to_owned(),
            Dialect::Note if class(name) == Some(Class::Function) => format!("\\{name}"),
            Dialect::Latex if LATEX_FUNCTIONS.contains(&name) => format!("\\{name}"),
            _ => format!("\\operatorname{{{name}}}"),
        }
    }

    fn root(&mut self, root: &Root) -> String {
        let body = self.sum(&root.body);
        let degree = root.degree.as_ref().map(|degree| self.sum(degree));
        let bare = body.chars().count() == 1;
        match (self.dialect, degree) {
            (Dialect::Latex, None) => format!("\\sqrt{{{body}}}"),
            (Dialect::Latex, Some(degree)) => format!("\\sqrt[{degree}]{{{body}}}"),
            (Dialect::Note, Some(degree)) => format!("sqrt[{degree}]{{{body}}}"),
            (Dialect::Note, None) if bare => format!("sqrt {body}"),
            (Dialect::Note, None) if is_round_group(&root.body) => format!("sqrt{body}"),
            (Dialect::Note, None) => format!("sqrt{{{body}}}"),
            (Dialect::Unicode, degree) => {
                let sign = match degree.as_deref() {
                    None => "√".to_owned(),
                    Some("3") => "∛".to_owned(),
                    Some("4") => "∜".to_owned(),
                    Some(degree) => format!("[{degree}]√"),
                };
                let closed = bare || is_round_group(&root.body);
                if closed { format!("{sign}{body}") } else { format!("{sign}({body})") }
            }
        }
    }

    fn group(&mut self, group: &Group, scripts: &[Script]) -> String {
        let parts: Vec<String> = group.parts.iter().map(|part| self.statement(part)).collect();
        let name = group.left.trim_start_matches('\\');
        let by_command = matches!(class(name), Some(Class::Norm | Class::Pair | Class::Ket));
        match (self.dialect, by_command) {
            (Dialect::Unicode, true) => by_command_shown(name, &parts),
            (Dialect::Unicode, false) => {
                let (left, right) = shown_brackets(group.left);
                let (left, right) = if parts.is_empty() { ("|", "") } else { (left, right) };
                format!("{left}{}{right}", parts.join(", "))
            }
            (_, true) => {
                let arguments: String = group.parts.iter().map(|part| self.argument(part)).collect();
                format!("{}{arguments}", group.left)
            }
            (dialect, false) => bracketed(group, &parts.join(", "), scripts, dialect),
        }
    }

    /// A part of a bracket by command, in braces.
    fn argument(&mut self, part: &Statement) -> String {
        format!("{{{}}}", self.statement(part))
    }
}

/// Brackets in LaTeX and in notes; they grow where something tall stands in them, and bars always say which is which.
fn bracketed(group: &Group, content: &str, scripts: &[Script], dialect: Dialect) -> String {
    if group.parts.is_empty() {
        let bare = scripts.first().is_some_and(|script| !script.staggered);
        return if bare { "\\big|" } else { "\\left.\\right|" }.to_owned();
    }
    let right = right_of(group.left);
    let left = group.left;
    let tall = content.contains("\\frac") || content.contains("\\sum") || content.contains("\\int");
    if group.bracket == Bracket::Bars || left == "<" {
        let blank =
            if content.starts_with(|sign: char| sign.is_ascii_alphabetic()) && left.len() > 2 { " " } else { "" };
        // A script of a note would go on with the command.
        let end = if dialect == Dialect::Note { " " } else { "" };
        return format!("\\left{left}{blank}{content}{end}\\right{right}");
    }
    let named = left.ends_with(|sign: char| sign.is_ascii_alphabetic());
    match (tall, named) {
        (true, _) => format!("\\left{left} {content} \\right{right}"),
        (false, true) => format!("{left} {content} {right}"),
        (false, false) => format!("{left}{content}{right}"),
    }
}

/// The partner of an opening bracket.
fn right_of(left: &str) -> &'static str {
    match left {
        "(" => ")",
        "[" => "]",
        "\\{" => "\\}",
        "|" => "|",
        "\\|" => "\\|",
        "\\langle" => "\\rangle",
        "<" => ">",
        _ => {
            let partner = left.strip_prefix("\\l").map(|rest| format!("r{rest}"));
            let corner = left.strip_prefix("\\u").map(|_| "urcorner".to_owned());
            partner.or(corner).and_then(|name| command(&name)).unwrap_or(")")
        }
    }
}

fn shown_brackets(left: &str) -> (&'static str, &'static str) {
    match left {
        "[" => ("[", "]"),
        "\\{" => ("{", "}"),
        "|" => ("|", "|"),
        "\\|" => ("‖", "‖"),
        "\\langle" | "<" => ("⟨", "⟩"),
        "\\lfloor" => ("⌊", "⌋"),
        "\\lceil" => ("⌈", "⌉"),
        _ => ("(", ")"),
    }
}

/// Brackets by command, for people.
fn by_command_shown(name: &str, parts: &[String]) -> String {
    match name {
        "ceil" => format!("⌈{}⌉", parts.concat()),
        "floor" => format!("⌊{}⌋", parts.concat()),
        "comm" => format!("[{}]", parts.join(", ")),
        "acomm" | "pb" => format!("{{{}}}", parts.join(", ")),
        "bra" | "Bra" => format!("⟨{}|", parts.concat()),
        "ket" | "Ket" => format!("|{}⟩", parts.concat()),
        _ => format!("⟨{}⟩", parts.join("|")),
    }
}

/// Whether braces after a factor would be an argument of its command.
fn takes_braces(factor: &Factor) -> bool {
    let by_command = |group: &Group| group.left.len() > 2;
    factor.scripts.is_empty()
        && factor.marks.is_empty()
        && match &factor.atom {
            Atom::Unknown(..) | Atom::Order(None) => true,
            Atom::Fraction(fraction) => matches!(fraction.kind, crate::tree::FractionKind::Derivative(_)),
            Atom::Group(group) => by_command(group),
            _ => false,
        }
}

/// Whether braces around a sum hold it together as one factor.
pub(super) fn holds_several(sum: &Sum) -> bool {
    match sum.terms.as_slice() {
        [] => false,
        [term] => {
            let lone = term.sign.is_none() && term.dangling == crate::tree::Joint::Beside && term.factors.len() == 1;
            !(lone && term.factors.iter().all(|factor| factor.joint == crate::tree::Joint::Beside))
        }
        _ => true,
    }
}

fn is_round_group(sum: &Sum) -> bool {
    let [term] = sum.terms.as_slice() else { return false };
    let [factor] = term.factors.as_slice() else { return false };
    let round = matches!(&factor.atom, Atom::Group(group) if group.left == "(");
    round && term.sign.is_none() && factor.scripts.is_empty() && factor.marks.is_empty()
}
