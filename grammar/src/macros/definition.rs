//! Reads one defining command: `\newcommand`, `\def`, `\let`, `\DeclareMathOperator`, `\NewDocumentCommand` and kin.
//!
//! The reader takes what it is sure to understand and nothing else: a definition with an argument type it does not
//! know, a body past the budget or a truncated text gives nothing, and the name stays unknown to the formula reader.
//! An environment is kept as TeX keeps it: `\newenvironment{eq}{A}{B}` defines `\eq` as `A` and `\endeq` as `B`.
//!
//! Traps: `\newcommand\x{..}` and `\newcommand{\x}{..}` are both usual; a body's comments are removed, since the
//! body outlives its lines; `\let\a\b` copies the meaning `\b` has now, not the one it gets later.

use std::sync::Arc;

use super::cursor::{ARGUMENT_BUDGET, Cursor, without_comments};
use super::{Definition, Macro, Macros, Parameter};
use crate::span::Span;

/// TeX numbers the parameters of a macro with one digit.
const MOST_PARAMETERS: usize = 9;

/// The ways to define that are understood.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Way {
    New,
    Provide,
    Def,
    Let,
    Operator,
    Paired,
    PairedWithBody,
    Document,
    ProvideDocument,
}

/// The way of a defining command, by its name without backslash.
fn way(name: &str) -> Option<Way> {
    Some(match name {
        "newcommand" | "renewcommand" | "DeclareRobustCommand" | "newrobustcmd" | "renewrobustcmd" => Way::New,
        "providecommand" | "providerobustcmd" => Way::Provide,
        "def" | "gdef" | "edef" | "xdef" => Way::Def,
        "let" => Way::Let,
        "DeclareMathOperator" => Way::Operator,
        "DeclarePairedDelimiter" => Way::Paired,
        "DeclarePairedDelimiterX" => Way::PairedWithBody,
        "NewDocumentCommand" | "RenewDocumentCommand" | "DeclareDocumentCommand" => Way::Document,
        "NewExpandableDocumentCommand" | "RenewExpandableDocumentCommand" => Way::Document,
        "ProvideDocumentCommand" => Way::ProvideDocument,
        _ => return None,
    })
}

/// Whether a command (without backslash) defines a macro in one of the ways understood here.
pub(crate) fn defines(name: &str) -> bool {
    way(name).is_some()
}

/// Reads the definition that starts at byte `at` (a backslash); nothing if none that is understood starts there.
/// `known` resolves `\let\a\b` where `\b` is a macro.
pub fn read_definition(text: &str, at: usize, known: &Macros) -> Option<Definition> {
    let mut cursor = Cursor::new(text, at);
    let way = way(cursor.control()?)?;
    if !matches!(way, Way::Def | Way::Let) {
        cursor.eat_after_space(b'*');
    }
    let name = defined_name(&mut cursor)?;
    let meaning = match way {
        Way::New | Way::Provide => new_command(&mut cursor, name)?,
        Way::Def => def(&mut cursor, name)?,
        Way::Let => let_name(&mut cursor, name, known)?,
        Way::Operator => operator(&mut cursor, name)?,
        Way::Paired => paired(&mut cursor, name)?,
        Way::PairedWithBody => paired_with_body(&mut cursor, name)?,
        Way::Document | Way::ProvideDocument => document_command(&mut cursor, name)?,
    };
    let provide = matches!(way, Way::Provide | Way::ProvideDocument);
    Some(Definition { span: Span::new(at, cursor.at), meaning: Arc::new(meaning), provide })
}

/// Reads the environment definition that starts at byte `at`, as the definitions of its begin and its end.
///
/// `\NewEnviron` has no end part: its body says `\BODY` for what stands in the environment. The listing
/// environments of `listings` and `fancyvrb` become environments that begin one of those.
pub fn read_environment(text: &str, at: usize) -> Option<[Definition; 2]> {
    let mut cursor = Cursor::new(text, at);
    let command = cursor.control()?;
    cursor.eat_after_space(b'*');
    let name = cursor.group()?.of(text).trim();
    let (parameters, begin, end) = match command {
        "newenvironment" | "renewenvironment" | "provideenvironment" => {
            let parameters = counted_parameters(&mut cursor)?;
            (parameters, body(&mut cursor)?, body(&mut cursor)?)
        }
        "NewDocumentEnvironment" | "RenewDocumentEnvironment" | "DeclareDocumentEnvironment" => {
            let parameters = document_parameters(cursor.group()?.of(text))?;
            (parameters, body(&mut cursor)?, body(&mut cursor)?)
        }
        "NewEnviron" | "RenewEnviron" => (counted_parameters(&mut cursor)?, body(&mut cursor)?, String::new()),
        "lstnewenvironment" => {
            let parameters = counted_parameters(&mut cursor)?;
            body(&mut cursor)?;
            body(&mut cursor)?;
            (parameters, "\\begin{lstlisting}".to_owned(), "\\end{lstlisting}".to_owned())
        }
        "DefineVerbatimEnvironment" => {
            cursor.group()?;
            cursor.group()?;
            (Vec::new(), "\\begin{Verbatim}".to_owned(), "\\end{Verbatim}".to_owned())
        }
        _ => return None,
    };
    let define = |name: String, parameters, body| {
        let meaning = Arc::new(Macro { name, parameters, body, operator: false });
        Definition { span: Span::new(at, cursor.at), meaning, provide: command.starts_with("provide") }
    };
    Some([define(name.to_owned(), parameters, begin), define(format!("end{name}"), Vec::new(), end)])
}

/// Whether a command (without backslash) defines an environment in one of the ways understood here.
pub(crate) fn defines_environment(name: &str) -> bool {
    matches!(
        name,
        "newenvironment"
            | "renewenvironment"
            | "provideenvironment"
            | "NewDocumentEnvironment"
            | "RenewDocumentEnvironment"
            | "DeclareDocumentEnvironment"
            | "NewEnviron"
            | "RenewEnviron"
            | "lstnewenvironment"
            | "DefineVerbatimEnvironment"
    )
}

/// The name that is defined: `\x` or `{\x}`.
fn defined_name(cursor: &mut Cursor) -> Option<String> {
    let mut ahead = *cursor;
    ahead.skip_space();
    let braced = ahead.eat(b'{');
    ahead.skip_space();
    let name = ahead.control()?;
    ahead.skip_space();
    if braced && !ahead.eat(b'}') {
        return None;
    }
    *cursor = ahead;
    Some(name.to_owned())
}

/// A braced body, or a single token, without comments and within the budget.
fn body(cursor: &mut Cursor) -> Option<String> {
    let written = cursor.argument()?.of(cursor.text);
    (written.len() <= ARGUMENT_BUDGET).then(|| without_comments(written))
}

fn plain(name: String, parameters: Vec<Parameter>, body: String) -> Macro {
    Macro { name, parameters, body, operator: false }
}

fn new_command(cursor: &mut Cursor, name: String) -> Option<Macro> {
    let parameters = counted_parameters(cursor)?;
    Some(plain(name, parameters, body(cursor)?))
}

/// `[n][default]`; none if neither stands there.
fn counted_parameters(cursor: &mut Cursor) -> Option<Vec<Parameter>> {
    let Some(count) = cursor.bracket() else { return Some(Vec::new()) };
    let count: usize = count.of(cursor.text).trim().parse().ok()?;
    if count > MOST_PARAMETERS {
        return None;
    }
    let mut parameters = vec![Parameter::Mandatory; count];
    if let (Some(default), Some(first)) = (cursor.bracket(), parameters.first_mut()) {
        *first = Parameter::Optional(without_comments(default.of(cursor.text)));
    }
    Some(parameters)
}

/// `#1#2{..}` or `#1.#2\end{..}`: what follows a parameter delimits it. Text before the first is not understood.
fn def(cursor: &mut Cursor, name: String) -> Option<Macro> {
    cursor.skip_space();
    let head_length = cursor.rest().bytes().take(ARGUMENT_BUDGET).position(|byte| byte == b'{')?;
    let head = without_comments(cursor.rest().get(..head_length)?);
    cursor.at += head_length;
    let mut parts = head.trim_start().split('#');
    if parts.next().is_some_and(|before| !before.is_empty()) {
        return None;
    }
    let mut parameters = Vec::new();
    for part in parts {
        let delimiter = part.strip_prefix((b'1' + parameters.len() as u8) as char)?;
        let free = delimiter.trim().is_empty();
        parameters.push(if free { Parameter::Mandatory } else { Parameter::Until(delimiter.trim().to_owned()) });
        if parameters.len() > MOST_PARAMETERS {
            return None;
        }
    }
    let body = without_comments(cursor.group()?.of(cursor.text));
    Some(plain(name, parameters, body))
}

/// `\let\a\b`, `\let\a=\b`: the macro `\b` under another name, or a macro that stands for that control sequence.
fn let_name(cursor: &mut Cursor, name: String, known: &Macros) -> Option<Macro> {
    cursor.eat_after_space(b'=');
    cursor.skip_space();
    let start = cursor.at;
    if cursor.peek() == Some(b'\\') {
        let target = cursor.control()?;
        if target == name {
            return None;
        }
        if let Some(meaning) = known.at(target, start as u32) {
            return Some(Macro { name, ..Macro::clone(meaning) });
        }
    } else {
        let letter = cursor.rest().chars().next()?;
        if !letter.is_alphanumeric() && !"+-*/=<>|()[].,;:!'".contains(letter) {
            return None;
        }
        cursor.at += letter.len_utf8();
    }
    let body = cursor.text.get(start..cursor.at)?.to_owned();
    Some(plain(name, Vec::new(), body))
}

fn operator(cursor: &mut Cursor, name: String) -> Option<Macro> {
    Some(Macro { name, parameters: Vec::new(), body: body(cursor)?, operator: true })
}

/// What a paired delimiter takes before its own arguments: a star, and a size.
fn paired_parameters(mandatory: usize) -> Vec<Parameter> {
    let mut parameters = vec![Parameter::Star, Parameter::Optional(String::new())];
    parameters.extend(vec![Parameter::Mandatory; mandatory]);
    parameters
}

fn paired(cursor: &mut Cursor, name: String) -> Option<Macro> {
    let (left, right) = (body(cursor)?, body(cursor)?);
    Some(plain(name, paired_parameters(1), format!("\\left{left} #3 \\right{right}")))
}

/// `\DeclarePairedDelimiterX\x[n]{left}{right}{body}`: the body's numbers move up past the star and the size.
fn paired_with_body(cursor: &mut Cursor, name: String) -> Option<Macro> {
    let count = counted_parameters(cursor)?.len();
    if count + 2 > MOST_PARAMETERS {
        return None;
    }
    let (left, right, inside) = (body(cursor)?, body(cursor)?, body(cursor)?);
    let mut moved = String::with_capacity(inside.len());
    let mut after_mark = false;
    for letter in inside.chars() {
        let digit = letter.to_digit(10).filter(|_| after_mark);
        moved.push(digit.and_then(|digit| char::from_digit(digit + 2, 12)).unwrap_or(letter));
        after_mark = letter == '#';
    }
    let moved = moved.replace("\\delimsize", "\\middle");
    Some(plain(name, paired_parameters(count), format!("\\left{left} {moved} \\right{right}")))
}

fn document_command(cursor: &mut Cursor, name: String) -> Option<Macro> {
    let parameters = document_parameters(cursor.group()?.of(cursor.text))?;
    Some(plain(name, parameters, body(cursor)?))
}

/// An argument specification of `m`, `o`, `O{..}` and `s`; the marks `+` and `!` change nothing here.
fn document_parameters(specification: &str) -> Option<Vec<Parameter>> {
    let mut parameters = Vec::new();
    let mut cursor = Cursor::new(specification, 0);
    while let Some(byte) = cursor.peek() {
        cursor.at += 1;
        match byte {
            b' ' | b'\t' | b'\n' | b'\r' | b'+' | b'!' => {}
            b'm' => parameters.push(Parameter::Mandatory),
            b'o' => parameters.push(Parameter::Optional(String::new())),
            b'O' => parameters.push(Parameter::Optional(cursor.group()?.of(specification).to_owned())),
            b's' => parameters.push(Parameter::Star),
            _ => return None,
        }
    }
    (parameters.len() <= MOST_PARAMETERS).then_some(parameters)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    /// The definition as one line: name, parameters (`m`, `[default]`, `*`, `<until>`), body, and what follows it.
    fn read(text: &str) -> Option<String> {
        let definition = read_definition(text, 0, &Macros::default())?;
        let meaning = &definition.meaning;
        let parameters: String = meaning.parameters.iter().map(show).collect();
        Some(format!("{} {parameters} {}|{}", meaning.name, meaning.body, &text[definition.span.end as usize..]))
    }

    fn show(parameter: &Parameter) -> String {
        match parameter {
            Parameter::Mandatory => "m".to_owned(),
            Parameter::Optional(default) => format!("[{default}]"),
            Parameter::Star => "*".to_owned(),
            Parameter::Until(text) => format!("<{text}>"),
        }
    }

    #[track_caller]
    fn reads(text: &str, expected: &str) {
        assert_eq!(read(text).as_deref(), Some(expected));
    }

    #[track_caller]
    fn silent(text: &str) {
        assert_eq!(read(text), None, "{text}");
    }

    #[test]
    fn what_is_not_understood_defines_nothing() {
        silent("\\strain{a}");
        silent("\\newcommand{strain}{a}");
        silent("\\newcommand{\\strain}[many]{a}");
        silent("\\NewDocumentCommand{\\strain}{m r()}{a}");
        silent("\\def\\strain(#1){a}");
        silent("\\def\\strain#2{a}");
        silent("\\let\\strain\\strain");
        silent("\\let\\strain{");
        silent("plain words");
        silent("");
    }

    #[test]
    fn a_truncated_definition_defines_nothing() {
        let whole = "\\DeclareRobustCommand*{\\strain}[2][x]{\\varepsilon_{#1#2}}";
        for end in 0..whole.len() {
            silent(&whole[..end]);
        }
        silent("\\newcommand{\\strain}{\\");
        silent("\\def\\strain#");
        silent("\\def\\");
        silent("\\let\\a=");
    }

    #[test]
    fn a_long_body_defines_nothing() {
        silent(&format!("\\def\\strain{{{}}}", "x".repeat(ARGUMENT_BUDGET + 1)));
    }

    #[test]
    fn new_commands() {
        reads("\\newcommand{\\dd}{\\mathrm{d}} x", "dd  \\mathrm{d}| x");
        reads("\\newcommand\\dd{\\mathrm{d}}", "dd  \\mathrm{d}|");
        reads("\\renewcommand*\\strain[2]{\\epsilon_{#1#2}}", "strain mm \\epsilon_{#1#2}|");
        reads("\\providecommand{\\curv}[2][g]{K[#1]_{#2}}", "curv [g]m K[#1]_{#2}|");
        reads("\\newcommand{\\eps}\\varepsilon x", "eps  \\varepsilon| x");
        reads("\\newcommand{\\a}{x \\{ y}z", "a  x \\{ y|z");
    }

    #[test]
    fn comments_leave_the_body() {
        reads("\\newcommand{\\a}{% first\n  x_i % } second\r\n  y\\% z}", "a  x_i y\\% z|");
    }

    #[test]
    fn plain_definitions() {
        reads("\\def\\strain#1#2{e_{#1#2}}", "strain mm e_{#1#2}|");
        reads("\\gdef\\at #1.#2\\stop{#1}", "at <.><\\stop> #1|");
        reads("\\def\\ee{\\end{equation}}!", "ee  \\end{equation}|!");
    }

    #[test]
    fn let_copies_what_is_known() {
        reads("\\let\\eps\\varepsilon x", "eps  \\varepsilon| x");
        reads("\\let\\eps = \\varepsilon", "eps  \\varepsilon|");
        let mut known = Macros::default();
        let strain = read_definition("\\newcommand{\\strain}[1]{e_{#1}}", 0, &known).unwrap();
        known.define(strain.meaning, 0, false);
        let copied = read_definition("\\let\\s\\strain", 0, &known).unwrap().meaning;
        assert_eq!((copied.name.as_str(), copied.body.as_str(), copied.parameters.len()), ("s", "e_{#1}", 1));
    }

    #[test]
    fn operators_and_pairs() {
        let operator = read_definition("\\DeclareMathOperator*{\\Tr}{Tr}", 0, &Macros::default()).unwrap();
        assert!(operator.meaning.operator);
        assert_eq!(operator.meaning.body, "Tr");
        reads("\\DeclarePairedDelimiter\\abs{\\lvert}{\\rvert}", "abs *[]m \\left\\lvert #3 \\right\\rvert|");
        reads(
            "\\DeclarePairedDelimiterX{\\ip}[2]{\\langle}{\\rangle}{#1\\delimsize\\vert#2}",
            "ip *[]mm \\left\\langle #3\\middle\\vert#4 \\right\\rangle|",
        );
    }

    #[test]
    fn document_commands() {
        reads("\\NewDocumentCommand{\\curv}{s O{g} +m o}{K}", "curv *[g]m[] K|");
        reads("\\NewDocumentCommand\\curv{}{K}", "curv  K|");
        let provided = read_definition("\\ProvideDocumentCommand\\curv{m}{#1}", 0, &Macros::default()).unwrap();
        assert!(provided.provide);
    }

    #[test]
    fn environments_define_their_begin_and_end() {
        let text = "\\newenvironment{eq}[1][x]{\\begin{equation}}{\\end{equation}}.";
        let [begin, end] = read_environment(text, 0).unwrap();
        assert_eq!((begin.meaning.name.as_str(), begin.meaning.body.as_str()), ("eq", "\\begin{equation}"));
        assert_eq!((end.meaning.name.as_str(), end.meaning.body.as_str()), ("endeq", "\\end{equation}"));
        assert_eq!(begin.meaning.parameters, [Parameter::Optional("x".to_owned())]);
        assert_eq!(begin.span.of(text), &text[..text.len() - 1]);
        assert!((0..text.len() - 1).all(|cut| read_environment(&text[..cut], 0).is_none()));
        let [listing, _] = read_environment("\\lstnewenvironment{code}[1][]{\\lstset{#1}}{}", 0).unwrap();
        assert_eq!(listing.meaning.body, "\\begin{lstlisting}");
    }
}
