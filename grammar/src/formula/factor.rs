//! Factors: an atom with its scripts.
//!
//! Every lexeme that is not a sign of a sum, a relation, a comma or a closing bracket begins some atom, so that a
//! sum never stops before its end: what has no meaning here becomes `Unread` and the rest is read on.

use chumsky::prelude::*;
use compact_str::{CompactString, format_compact};

use crate::span::Span;
use crate::tree::{
    Atom, Big, Bracket, Factor, Fraction, FractionKind, Group, Item, ItemKind, Joint, Kernel, Root, Script, Statement,
    Sum, Term,
};

use super::lexeme::{Kind, Lexeme};
use super::script::{Postfix, scripts};
use super::{Extra, Input, join_all, kind, relation, spelling};
use crate::vocabulary::{Class, class, command};

/// Atoms with scripts. `sum` is what stands in brackets.
pub(super) fn factor<'a>(
    sum: impl Parser<'a, Input<'a>, Sum, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    let parts = relation::statement(sum).separated_by(comma()).collect::<Vec<_>>().boxed();
    recursive(move |factor| {
        let atom = recursive(|atom| {
            let postfix = scripts(factor.clone(), atom.clone()).boxed();
            atoms(atom, parts.clone(), postfix)
        })
        .boxed();
        let postfix = scripts(factor, atom.clone()).boxed();
        let after = postfix.clone().repeated().collect::<Vec<_>>().boxed();
        let before = script_before(postfix).repeated().collect::<Vec<_>>();
        let plain = atom.clone().then(after.clone()).map(|(atom, after)| with_scripts(atom, after));
        let led = kind(Kind::Up)
            .or(kind(Kind::Down))
            .rewind()
            .ignore_then(before)
            .then(atom.then(after).or_not())
            .map(|(before, rest)| led_by(before, rest));
        plain.or(led)
    })
}

fn comma<'a>() -> impl Parser<'a, Input<'a>, (), Extra> + Clone {
    kind(Kind::Comma).or(kind(Kind::Semicolon)).ignored()
}

fn script_before<'a>(
    postfix: impl Parser<'a, Input<'a>, Postfix, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Script, Extra> + Clone + 'a {
    kind(Kind::Up).or(kind(Kind::Down)).rewind().ignore_then(postfix).map(|postfix| match postfix {
        Postfix::Script(script) => Script { before: true, ..script },
        _ => Script {
            span: Span::default(),
            level: crate::tree::Level::Up,
            staggered: false,
            before: true,
            items: Vec::new(),
        },
    })
}

/// All atoms; scripts may come with them from inside braces.
fn atoms<'a>(
    atom: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
    parts: impl Parser<'a, Input<'a>, Vec<Statement>, Extra> + Clone + 'a,
    postfix: impl Parser<'a, Input<'a>, Postfix, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    let braces = braced(parts.clone()).boxed();
    let option = option(parts.clone()).boxed();
    // `{..}` or one atom, as a sum.
    let argument = braces.clone().or(atom.clone().map(lone_sum)).boxed();
    choice((
        simple(),
        braces.clone().map(unwrap_braces),
        bracketed(parts),
        commands(argument.clone(), braces.clone(), option.clone()),
        big(),
        derivative(argument.clone(), braces, option.clone()),
        tensor(argument, option, postfix),
        leftover(),
    ))
}

/// Atoms of one lexeme.
fn simple<'a>() -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone {
    select_ref! {
        Lexeme { kind: Kind::Letter, text, span } => letter(text, *span),
        Lexeme { kind: Kind::Number, text, span } => plain(Atom::Number(text.clone()), *span),
        Lexeme { kind: Kind::Word, text, span } => plain(Atom::Kernel(Kernel {
            name: text.clone(), letter: text.clone(), bold: false, word: true,
        }), *span),
        Lexeme { kind: Kind::Function, text, span } => plain(Atom::Function(text.clone()), *span),
        Lexeme { kind: Kind::Dots, span, .. } => plain(Atom::Dots, *span),
        Lexeme { kind: Kind::Matrix, span, .. } => plain(Atom::Matrix, *span),
        Lexeme { kind: Kind::Text, text, span } => plain(Atom::Text(text.clone()), *span),
        Lexeme { kind: Kind::Bar, span, .. } => plain(empty_bars(), *span),
    }
}

fn big<'a>() -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone {
    select_ref! {
        Lexeme { kind: Kind::Sum, text, span } => big_command(Big::Sum, text, *span),
        Lexeme { kind: Kind::Integral, text, span } => big_command(Big::Integral, text, *span),
        Lexeme { kind: Kind::Limit, text, span } => big_command(Big::Limit, text, *span),
    }
}

fn big_command(big: Big, name: &str, span: Span) -> Factor {
    let usual = match big {
        Big::Sum => "\\sum",
        Big::Integral => "\\int",
        Big::Limit => "\\lim",
    };
    plain(Atom::Big(big, command(name).unwrap_or(usual)), span)
}

/// What begins no atom of its own but must not stop the reader.
fn leftover<'a>() -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone {
    select_ref! {
        Lexeme { kind: Kind::Mark, text, span } => plain(Atom::Text(text.clone()), *span),
        Lexeme { kind: Kind::Row | Kind::Cell | Kind::Separator, span, .. } => plain(Atom::Text(CompactString::default()), *span),
        Lexeme { kind: Kind::Indices | Kind::Accent | Kind::Bold | Kind::Roman | Kind::Fraction | Kind::Root, span, .. }
            => plain(Atom::Unread("a command without its argument"), *span),
        Lexeme { kind: Kind::Wrap | Kind::Brace | Kind::Norm | Kind::Average | Kind::Slashed | Kind::Tensor, span, .. }
            => plain(Atom::Unread("a command without its argument"), *span),
        Lexeme { kind: Kind::Derivative | Kind::Pair, span, .. }
            => plain(Atom::Unread("a command without its argument"), *span),
    }
}

/// `{..}` with its content as one sum; `a \over b` inside becomes a fraction.
fn braced<'a>(
    parts: impl Parser<'a, Input<'a>, Vec<Statement>, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a {
    let over = kind(Kind::Over).then(parts.clone()).or_not();
    kind(Kind::BraceOpen).then(parts).then(over).then(kind(Kind::BraceClose)).map(|(((open, parts), over), close)| {
        let span = open.span.join(close.span);
        let sum = one_sum(parts);
        match over {
            None => (sum, span),
            Some((command, under)) => (lone_sum(stacked(command, sum, one_sum(under), span)).0, span),
        }
    })
}

/// `\frac`, `\binom`, `\over`, ...: one sum above another.
fn stacked(command: &Lexeme, over: Sum, under: Sum, span: Span) -> Factor {
    let kind = match command.text.as_str() {
        "binom" | "dbinom" | "tbinom" | "choose" => FractionKind::Binomial,
        "atop" => FractionKind::Stacked,
        _ => FractionKind::Quotient,
    };
    plain(Atom::Fraction(Box::new(Fraction { over, under, kind, order: None })), span)
}

/// `[..]` after a command.
fn option<'a>(
    parts: impl Parser<'a, Input<'a>, Vec<Statement>, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Option<Sum>, Extra> + Clone + 'a {
    any_ref()
        .filter(|lexeme: &&Lexeme| lexeme.kind == Kind::Open && lexeme.text == "[")
        .ignore_then(parts)
        .then_ignore(kind(Kind::Close))
        .map(one_sum)
        .or_not()
}

fn bracketed<'a>(
    parts: impl Parser<'a, Input<'a>, Vec<Statement>, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    kind(Kind::Open).then(parts).then(kind(Kind::Close)).map(|((open, parts), close): ((&Lexeme, _), &Lexeme)| {
        let (bracket, left) = spelling::bracket(&open.text);
        plain(Atom::Group(Group { bracket, left, parts }), open.span.join(close.span))
    })
}

/// Commands with arguments in braces or of one atom.
fn commands<'a>(
    argument: impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a,
    braces: impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a,
    option: impl Parser<'a, Input<'a>, Option<Sum>, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    let accent = kind(Kind::Accent).or(kind(Kind::Bold)).or(kind(Kind::Roman));
    let accent = accent.then(argument.clone()).map(|(accent, (sum, end))| decorated(accent, sum, end));
    let slashed = kind(Kind::Slashed).then(argument.clone()).map(|(accent, (sum, end))| decorated(accent, sum, end));
    let fraction = kind(Kind::Fraction).then(argument.clone()).then(argument.clone()).map(
        |((command, (over, _)), (under, end)): ((&Lexeme, _), _)| stacked(command, over, under, command.span.join(end)),
    );
    let root = kind(Kind::Root).then(option.clone()).then(argument.clone()).map(
        |((command, degree), (body, end)): ((&Lexeme, _), _)| {
            plain(Atom::Root(Box::new(Root { body, degree })), command.span.join(end))
        },
    );
    let wrap = kind(Kind::Wrap).or(kind(Kind::Brace)).then_ignore(option.clone()).then(argument.clone()).map(
        |(command, (sum, end)): (&Lexeme, _)| {
            let body = Box::new(sum);
            let atom = match command.kind {
                Kind::Brace => Atom::Labelled(body),
                _ if command.text.contains("cancel") || command.text == "sout" => Atom::Struck(body),
                _ => Atom::Wrapped(body),
            };
            plain(atom, command.span.join(end))
        },
    );
    let norm =
        kind(Kind::Norm).or(kind(Kind::Average)).then(argument.clone()).map(|(command, (sum, end)): (&Lexeme, _)| {
            group(spelling::bracket_command(command.kind, &command.text), vec![sum], command.span.join(end))
        });
    let several = braces.clone().repeated().at_least(1).collect::<Vec<_>>();
    let pair = kind(Kind::Pair).then(several).map(|(command, sums): (&Lexeme, Vec<(Sum, Span)>)| {
        let span = join_all([command.span].into_iter().chain(sums.iter().map(|(_, span)| *span)));
        let bracket = spelling::bracket_command(command.kind, &command.text);
        group(bracket, sums.into_iter().map(|(sum, _)| sum).collect(), span)
    });
    let order = kind(Kind::Order).then(argument.or_not()).map(|(command, held): (&Lexeme, Option<(Sum, Span)>)| {
        plain(Atom::Order(held.map(|(sum, _)| Box::new(sum))), command.span)
    });
    let unknown = kind(Kind::Unknown).then(braces.clone().repeated().collect::<Vec<_>>()).map(
        |(command, sums): (&Lexeme, Vec<(Sum, Span)>)| {
            let span = join_all([command.span].into_iter().chain(sums.iter().map(|(_, span)| *span)));
            plain(Atom::Unknown(command.text.clone(), sums.into_iter().map(|(sum, _)| sum).collect()), span)
        },
    );
    let differential = kind(Kind::Differential).then_ignore(option).then(braces.or_not()).map(
        |(command, sum): (&Lexeme, Option<(Sum, Span)>)| match sum {
            Some((sum, end)) => Factor {
                marks: spelling::mark(&command.text),
                ..plain(Atom::Wrapped(Box::new(sum)), command.span.join(end))
            },
            None => letter("d", command.span),
        },
    );
    choice((accent, fraction, root, wrap, norm, pair, order, unknown, differential, slashed))
}

/// `\dv[2]{f}{x}`, `\pdv{f}{x}{y}`, `\pdv{x}`: one argument is what one differentiates by.
fn derivative<'a>(
    argument: impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a,
    braces: impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a,
    option: impl Parser<'a, Input<'a>, Option<Sum>, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    let rest = braces.repeated().at_most(2).collect::<Vec<_>>();
    kind(Kind::Derivative).then(option).then(argument).then(rest).map(
        |(((command, order), (first, end)), mut rest): (((&Lexeme, _), _), Vec<(Sum, Span)>)| {
            let span = join_all([command.span, end].into_iter().chain(rest.iter().map(|(_, span)| *span)));
            let (over, under) = match rest.len() {
                0 => (Sum::default(), first),
                1 => (first, rest.pop().map(|(sum, _)| sum).unwrap_or_default()),
                _ => (first, product(rest.into_iter().map(placed).collect(), Joint::Beside)),
            };
            let kind = FractionKind::Derivative(spelling::derivative(&command.text));
            plain(Atom::Fraction(Box::new(Fraction { over, under, kind, order })), span)
        },
    )
}

/// An argument in braces; an empty one stands where its braces do.
fn placed((sum, braces): (Sum, Span)) -> Sum {
    if sum.span.is_empty() { Sum { span: braces, ..sum } } else { sum }
}

/// `\tensor{R}{^\rho_\sigma}`: the second argument holds scripts in plain order.
fn tensor<'a>(
    argument: impl Parser<'a, Input<'a>, (Sum, Span), Extra> + Clone + 'a,
    option: impl Parser<'a, Input<'a>, Option<Sum>, Extra> + Clone + 'a,
    postfix: impl Parser<'a, Input<'a>, Postfix, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a {
    let scripts =
        kind(Kind::BraceOpen).ignore_then(postfix.repeated().collect::<Vec<_>>()).then(kind(Kind::BraceClose)).or_not();
    kind(Kind::Tensor).then_ignore(option).then(argument).then(scripts).map(
        |((command, (sum, end)), scripts): ((&Lexeme, _), Option<(Vec<Postfix>, &Lexeme)>)| {
            let (after, end) = scripts.map_or((Vec::new(), end), |(after, close)| (after, close.span));
            let mut factor = with_scripts(unwrap_braces((sum, end)), after);
            factor.scripts.iter_mut().for_each(|script| script.staggered = true);
            Factor { span: command.span.join(end), ..factor }
        },
    )
}

fn plain(atom: Atom, span: Span) -> Factor {
    Factor { span, atom, scripts: Vec::new(), joint: Joint::Beside, marks: CompactString::default() }
}

fn letter(text: &str, span: Span) -> Factor {
    let kernel = Kernel { name: text.into(), letter: text.into(), bold: false, word: false };
    plain(Atom::Kernel(kernel), span)
}

fn empty_bars() -> Atom {
    Atom::Group(Group { bracket: Bracket::Bars, left: "|", parts: Vec::new() })
}

fn group((bracket, left): (Bracket, &'static str), sums: Vec<Sum>, span: Span) -> Factor {
    let part = |sum: Sum| Statement { span: sum.span, sides: vec![sum], relations: Vec::new() };
    plain(Atom::Group(Group { bracket, left, parts: sums.into_iter().map(part).collect() }), span)
}

/// A factor as a sum of one term.
fn lone_sum(factor: Factor) -> (Sum, Span) {
    let span = factor.span;
    (Sum { span, terms: vec![Term { span, factors: vec![factor], ..Term::default() }] }, span)
}

/// A product of sums, or several sums where one is asked for.
fn product(sums: Vec<Sum>, joint: Joint) -> Sum {
    let span = join_all(sums.iter().map(|sum| sum.span));
    let factor = |(n, sum): (usize, Sum)| Factor {
        joint: if n == 0 { Joint::Beside } else { joint },
        ..plain(Atom::Wrapped(Box::new(sum.clone())), sum.span)
    };
    let factors = sums.into_iter().enumerate().map(factor).collect();
    Sum { span, terms: vec![Term { span, factors, ..Term::default() }] }
}

/// What stands in braces, as one sum; several parts become factors that stand apart.
fn one_sum(mut parts: Vec<Statement>) -> Sum {
    if parts.len() == 1 && parts.iter().all(|part| part.sides.len() == 1) {
        return parts.pop().and_then(|mut part| part.sides.pop()).unwrap_or_default();
    }
    let sides = parts.into_iter().flat_map(|part| part.sides).filter(|side| !side.terms.is_empty());
    product(sides.collect(), Joint::Apart)
}

/// `{x}` is `x`; several factors or terms in braces stay together.
fn unwrap_braces((mut sum, span): (Sum, Span)) -> Factor {
    let plain_joints =
        |term: &Term| term.dangling == Joint::Beside && term.factors.iter().all(|factor| factor.joint == Joint::Beside);
    let lone = matches!(sum.terms.as_slice(),
        [term] if term.sign.is_none() && term.factors.len() == 1 && plain_joints(term));
    let factor = if lone { sum.terms.pop().and_then(|mut term| term.factors.pop()) } else { None };
    match factor {
        Some(factor) => Factor { span, joint: Joint::Beside, ..factor },
        None => plain(Atom::Wrapped(Box::new(sum)), span),
    }
}

/// `\hat{h}`: a decorated kernel where the argument is one, else the argument passed through.
fn decorated(command: &Lexeme, sum: Sum, end: Span) -> Factor {
    let span = command.span.join(end);
    let mut factor = unwrap_braces((sum, span));
    if let Atom::Kernel(kernel) = &mut factor.atom {
        kernel.name = format_compact!("\\{} {}", command.text, kernel.name);
        kernel.bold |= command.kind == Kind::Bold || matches!(command.text.as_str(), "vec" | "overrightarrow");
        return factor;
    }
    // A word such as `\mathit{Re}` arrives as a product of letters.
    let word = spelled(&factor).filter(|_| matches!(command.kind, Kind::Roman | Kind::Accent));
    let font = class(&command.text) != Some(Class::Accent);
    // A font says nothing of a function, and of a word only that it is one.
    if !font || !(word.is_some() || matches!(factor.atom, Atom::Function(_))) {
        factor.marks = format_compact!("{}{}", spelling::mark(&command.text), factor.marks);
    }
    if let Some(word) = word {
        factor.atom = Atom::Kernel(Kernel { name: word.clone(), letter: word, bold: false, word: true });
    }
    factor
}

/// The word that a product of plain letters spells, if it is nothing else.
fn spelled(factor: &Factor) -> Option<CompactString> {
    let Atom::Wrapped(sum) = &factor.atom else { return None };
    let [term] = sum.terms.as_slice() else { return None };
    let letter = |factor: &Factor| match &factor.atom {
        Atom::Kernel(kernel) if factor.scripts.is_empty() && kernel.letter.len() == 1 => Some(kernel.letter.clone()),
        _ => None,
    };
    term.factors.iter().map(letter).collect::<Option<Vec<_>>>().map(|letters| letters.concat().into())
}

/// `\underbrace{..}_{= 0}`.
fn braced_to_zero(script: &Script) -> bool {
    let zero = |item: &Item| matches!(&item.kind, ItemKind::Number(number) if number == "0");
    match script.items.as_slice() {
        [item] => zero(item),
        [first, second, ..] => matches!(first.kind, ItemKind::Relation(_)) && zero(second),
        [] => false,
    }
}

/// Adds what follows an atom: primes to a kernel's name, scripts to its scripts.
fn with_scripts(mut factor: Factor, after: Vec<Postfix>) -> Factor {
    // What follows braces around a kernel with scripts stands beside them, `{T^a}_b`.
    let mut gap = !factor.scripts.is_empty();
    for postfix in after {
        match postfix {
            Postfix::Gap => gap = true,
            Postfix::Prime(text, span) => {
                factor.span = factor.span.join(span);
                match &mut factor.atom {
                    Atom::Kernel(kernel) if factor.marks.is_empty() => kernel.name.push_str(&text),
                    _ => factor.marks.push_str(&text),
                }
            }
            Postfix::Factorial(span) => {
                factor.span = factor.span.join(span);
                factor.marks.push('!');
            }
            Postfix::Script(script) => {
                factor.span = factor.span.join(script.span);
                if let (Atom::Labelled(body), true) = (&mut factor.atom, braced_to_zero(&script)) {
                    factor.atom = Atom::Struck(std::mem::take(body));
                }
                factor.scripts.push(Script { staggered: script.staggered || gap, ..script });
                gap = false;
            }
            Postfix::Scripts(scripts) => {
                factor.span = join_all([factor.span].into_iter().chain(scripts.iter().map(|script| script.span)));
                factor.scripts.extend(scripts);
            }
        }
    }
    factor
}

/// Scripts before an atom (`^{(3)}R`), or on nothing.
fn led_by(before: Vec<Script>, rest: Option<(Factor, Vec<Postfix>)>) -> Factor {
    let span = join_all(before.iter().map(|script| script.span));
    let (atom, after) = rest.unwrap_or_else(|| (plain(Atom::Wrapped(Box::default()), span), Vec::new()));
    let mut factor = with_scripts(atom, after);
    factor.span = factor.span.join(span);
    factor.scripts.splice(0..0, before);
    factor
}
