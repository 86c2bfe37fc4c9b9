//! The tree of a formula: notation only, no meaning.
//!
//! A formula is a list of statements, a statement a chain of sides with relations between them, a side a sum of
//! terms, a term a product of factors, a factor an atom with scripts. What a script means (index, label, power)
//! is not decided here. Every node knows its place in the document; where a macro produced it, the place is the
//! macro call, so that several nodes may share a span.

mod dump;
mod pieces;
mod signs;

use compact_str::CompactString;

use crate::span::Span;

pub use dump::dump;
pub use pieces::{each_item_mut, each_script_mut, substitute_letter, written_out};
pub use signs::{Claim, Joint, Operator, Product, Relation, RelationKind, Sign, SignKind};

/// The level of a script: up (contravariant) or down (covariant).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Level {
    /// `^`
    Up,
    /// `_`
    Down,
}

impl Level {
    /// The other level.
    pub const fn flipped(self) -> Self {
        match self {
            Self::Up => Self::Down,
            Self::Down => Self::Up,
        }
    }

    /// The word for it.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Up => "up",
            Self::Down => "down",
        }
    }
}

/// One mathematical region, read.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Formula {
    /// The region with its delimiters.
    pub span: Span,
    /// Its statements in order.
    pub statements: Vec<Statement>,
    /// Parts that could not be read.
    pub unread: Vec<Unread>,
    /// Commands that are neither built in nor defined.
    pub unknown: Vec<(CompactString, Span)>,
    /// `\label`s, and the leading `(name)` of a note's formula.
    pub labels: Vec<(CompactString, Span)>,
    /// The trailing `[reason]`s of a note's lines, without their brackets, in order.
    pub reasons: Vec<(CompactString, Span)>,
    /// Whether words in it say that no sum is meant.
    pub no_sum: bool,
    /// Whether something was passed over that may change the value: a bracket without a partner, words set over a
    /// letter, a sign that nobody knows. Balance does not ask for it, evaluation must.
    pub passed_over: bool,
    /// Whether the region is set on its own.
    pub display: bool,
}

impl Formula {
    /// Takes every place to where it stands in another text. The statements are left as they are: this is for a formula
    /// that was read for something else than its statements.
    pub fn move_spans(&mut self, to: impl Fn(Span) -> Span) {
        let spans = std::iter::once(&mut self.span)
            .chain(self.unread.iter_mut().map(|part| &mut part.span))
            .chain(self.unknown.iter_mut().map(|(_, span)| span))
            .chain(self.labels.iter_mut().map(|(_, span)| span))
            .chain(self.reasons.iter_mut().map(|(_, span)| span));
        spans.for_each(|span| *span = to(*span));
    }
}

/// A part that could not be read, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unread {
    /// The part.
    pub span: Span,
    /// The cause, as a phrase.
    pub reason: &'static str,
}

/// `side rel side rel side`; a lone side has no relation.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Statement {
    /// From the first side to the last.
    pub span: Span,
    /// At least one.
    pub sides: Vec<Sum>,
    /// One fewer than sides.
    pub relations: Vec<Relation>,
}

/// A sum of terms.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Sum {
    /// From the first term to the last.
    pub span: Span,
    /// None for an empty side.
    pub terms: Vec<Term>,
}

/// A product of factors, with the sign before it.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Term {
    /// Without the sign.
    pub span: Span,
    /// The sign before it, if one is written.
    pub sign: Option<Sign>,
    /// Factors in order; none after a lone sign.
    pub factors: Vec<Factor>,
    /// A sign of multiplication after the last factor with nothing behind it (`a \cdot - b`), else `Beside`.
    pub dangling: Joint,
}

/// An atom with its scripts.
#[derive(Clone, Debug, PartialEq)]
pub struct Factor {
    /// Atom, scripts and primes.
    pub span: Span,
    /// What it is.
    pub atom: Atom,
    /// In the order written.
    pub scripts: Vec<Script>,
    /// How it hangs on the factor before.
    pub joint: Joint,
    /// What else stands on it and changes its value, unless a kernel's name says so: accents over more than a
    /// kernel, outermost first, each with a blank after it (`\overline `), then primes and factorial signs.
    pub marks: CompactString,
}

/// What a factor is.
#[derive(Clone, Debug, PartialEq)]
pub enum Atom {
    /// A letter or word that may carry indices.
    Kernel(Kernel),
    /// A number in decimal digits, or `\SI` for a quantity with a unit, which is not looked into.
    Number(CompactString),
    /// Something in brackets: one statement, or several separated by commas.
    Group(Group),
    /// `\frac{over}{under}`, `\dv`, `\pdv`, `\binom`.
    Fraction(Box<Fraction>),
    /// A root.
    Root(Box<Root>),
    /// `\sum`, `\int`, `\lim`: its scripts are bounds. With the command, since `\prod` is no sum.
    Big(Big, &'static str),
    /// A named function: `\sin`, `\det`, `\operatorname{tr}`.
    Function(CompactString),
    /// A matrix, a list of cases or the like, not looked into.
    Matrix,
    /// Words.
    Text(CompactString),
    /// An ellipsis.
    Dots,
    /// `\order{..}`: terms of an order, not written out.
    Order(Option<Box<Sum>>),
    /// A wrapped part that carries no bracket: a box, a strike, a group in braces.
    Wrapped(Box<Sum>),
    /// An under- or overbrace: its scripts are words about it.
    Labelled(Box<Sum>),
    /// Struck out, or braced to zero.
    Struck(Box<Sum>),
    /// A command that is neither built in nor defined, with its arguments.
    Unknown(CompactString, Vec<Sum>),
    /// Not read.
    Unread(&'static str),
}

/// The letter or word that carries indices, with its decorations.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Kernel {
    /// Decorations and fonts, outermost first, then the letter: `\bar h`, `\mathcal L`, `\Gamma`, `T''`.
    pub name: CompactString,
    /// The letter alone.
    pub letter: CompactString,
    /// Whether it is set bold or with an arrow (a vector written without indices).
    pub bold: bool,
    /// Whether it is a word in roman type rather than a letter.
    pub word: bool,
}

/// Brackets of a group.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Bracket {
    /// `( )`
    Round,
    /// `[ ]`
    Square,
    /// `\{ \}`
    Curly,
    /// `| |`, `\lVert \rVert`, `\abs`
    Bars,
    /// `\langle \rangle`, averages
    Angle,
    /// A commutator or a Poisson bracket by command.
    Pair,
}

/// Something in brackets.
#[derive(Clone, Debug, PartialEq)]
pub struct Group {
    /// The shape of the opening bracket.
    pub bracket: Bracket,
    /// The opening bracket in LaTeX (`(`, `\{`, `|`, `\|`, `\langle`, `\lfloor`), or the command that stands for the
    /// brackets (`\comm`, `\ceil`).
    pub left: &'static str,
    /// What stands between commas.
    pub parts: Vec<Statement>,
}

/// A root.
#[derive(Clone, Debug, PartialEq)]
pub struct Root {
    /// What stands under it.
    pub body: Sum,
    /// `\sqrt[3]{..}`; none for a square root.
    pub degree: Option<Sum>,
}

/// One sum above another.
#[derive(Clone, Debug, PartialEq)]
pub struct Fraction {
    /// Above the line.
    pub over: Sum,
    /// Below the line.
    pub under: Sum,
    /// What the two mean together.
    pub kind: FractionKind,
    /// `\dv[2]{f}{t}`: the order of a derivative by command, where it is said.
    pub order: Option<Sum>,
}

/// What two sums above one another mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum FractionKind {
    /// A quotient, or a derivative spelled out (`\frac{\partial f}{\partial x}`).
    Quotient,
    /// `\binom`, `\choose`.
    Binomial,
    /// `\atop`: no value.
    Stacked,
    /// A derivative by command, and which: `\dv`, `\pdv`, `\fdv`. Below stand the variables alone, without their
    /// `\partial`; several arguments (`\pdv{f}{x}{y}`) are several factors. Nothing above: an operator.
    Derivative(&'static str),
}

/// A big operator.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Big {
    /// `\sum`, `\prod` and unions: binds the letters of its bounds.
    Sum,
    /// `\int` and kin.
    Integral,
    /// `\lim`, `\max`, ...
    Limit,
}

/// A sub- or superscript.
#[derive(Clone, Debug, PartialEq)]
pub struct Script {
    /// With its `_` or `^`.
    pub span: Span,
    /// Which level.
    pub level: Level,
    /// Whether something (an empty group, a blank, a phantom) sets it apart from the script before, so that the
    /// order of slots is plain.
    pub staggered: bool,
    /// Whether it stands before its kernel (`{}^{(3)}R`).
    pub before: bool,
    /// In order.
    pub items: Vec<Item>,
}

/// One sign or letter of a script.
#[derive(Clone, Debug, PartialEq)]
pub struct Item {
    /// Where it stands.
    pub span: Span,
    /// What it is.
    pub kind: ItemKind,
}

/// What an item of a script is, by notation.
#[derive(Clone, Debug, PartialEq)]
pub enum ItemKind {
    /// A letter, with its primes, accents and number: `\mu`, `\mu'`, `\dot\alpha`, `i_1`.
    Letter(CompactString),
    /// A number, with its primes: `0`, `12`, `0'`.
    Number(CompactString),
    /// A word in roman type or text: a label.
    Label(CompactString),
    /// A letter set in roman, bold or calligraphic type: a label, unless it is one everywhere.
    Styled(CompactString),
    /// `,`
    Comma,
    /// `;`
    Semicolon,
    /// `|`
    Bar,
    /// `(`, `[` and kin; the text tells which.
    Open(char),
    /// `)`, `]`
    Close(char),
    /// `+`, `-`
    Sign(SignKind),
    /// `*`, `\dagger`, `\prime`, `\circ`, `\top`, `!` and kin; commands without their backslash.
    Mark(CompactString),
    /// `=`, `<`, `\in`, `\to`, ... in LaTeX, as `Relation::sign`.
    Relation(CompactString),
    /// An ellipsis.
    Dots,
    /// A product or division sign.
    Operator(Operator),
    /// Anything with a structure of its own: a kernel with scripts, a fraction, a group.
    Factor(Box<Factor>),
}

/// Notes the unread atoms of a formula's statements in `Formula::unread`.
pub(crate) fn unread_parts(formula: &mut Formula) {
    let mut found = Vec::new();
    for side in formula.statements.iter().flat_map(|statement| &statement.sides) {
        walk(side, &mut |factor| {
            if let Atom::Unread(reason) = factor.atom {
                found.push(Unread { span: factor.span, reason });
            }
        });
    }
    formula.unread.extend(found);
}

/// Visits every factor of a sum, those inside brackets, fractions and scripts among them, outer before inner.
pub fn walk<'t>(sum: &'t Sum, visit: &mut impl FnMut(&'t Factor)) {
    for factor in sum.terms.iter().flat_map(|term| &term.factors) {
        walk_factor(factor, visit);
    }
}

fn walk_factor<'t>(factor: &'t Factor, visit: &mut impl FnMut(&'t Factor)) {
    visit(factor);
    match &factor.atom {
        Atom::Group(group) => {
            group.parts.iter().flat_map(|part| &part.sides).for_each(|side| walk(side, visit));
        }
        Atom::Fraction(fraction) => {
            walk(&fraction.over, visit);
            walk(&fraction.under, visit);
        }
        Atom::Root(root) => {
            root.degree.iter().for_each(|degree| walk(degree, visit));
            walk(&root.body, visit);
        }
        Atom::Order(Some(sum)) | Atom::Wrapped(sum) | Atom::Labelled(sum) | Atom::Struck(sum) => walk(sum, visit),
        Atom::Unknown(_, sums) => sums.iter().for_each(|sum| walk(sum, visit)),
        _ => {}
    }
    for item in factor.scripts.iter().flat_map(|script| &script.items) {
        if let ItemKind::Factor(inner) = &item.kind {
            walk_factor(inner, visit);
        }
    }
}
