//! What the formula parsers read: tokens with a meaning in mathematics.
//!
//! Spacing, labels, layout and words are gone or folded by then (`tidy.rs`), brackets are matched
//! (`brackets.rs`), rows are joined (`segments.rs`). So the parsers never need to look back.

use compact_str::CompactString;

use crate::span::Span;

/// The kind of a lexeme.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub(crate) enum Kind {
    /// A letter that may carry scripts.
    Letter,
    /// A word in roman type.
    Word,
    /// A number.
    Number,
    /// Takes an argument and decorates it.
    Accent,
    /// As an accent, and makes it a vector.
    Bold,
    /// Takes an argument and sets it roman.
    Roman,
    /// The rest of the group is roman.
    RomanSwitch,
    /// Takes two arguments.
    Fraction,
    /// Between numerator and denominator of the group.
    Over,
    /// Takes one to three arguments.
    Derivative,
    /// `\dd`.
    Differential,
    /// Takes an argument, perhaps a degree.
    Root,
    /// `\sum`.
    Sum,
    /// `\int`.
    Integral,
    /// `\lim`.
    Limit,
    /// A function's name.
    Function,
    /// `=` and kin.
    Equal,
    /// `<` and kin.
    Loose,
    /// An arrow or a membership.
    Arrow,
    /// `+`, `-`.
    Plus,
    /// A sign of multiplication.
    Times,
    /// `/`
    Slash,
    /// `{`
    BraceOpen,
    /// `}`
    BraceClose,
    /// A matched opening bracket.
    Open,
    /// A matched closing bracket.
    Close,
    /// A bar, until the brackets are matched; then a lone bar, which also evaluates.
    Bar,
    /// A bracket without a partner.
    Lone,
    /// `_`
    Down,
    /// `^`
    Up,
    /// Primes after a letter or its scripts.
    Prime,
    /// `!` after an atom.
    Factorial,
    /// `\dagger`, `*` and kin.
    Mark,
    /// `,`
    Comma,
    /// `;`
    Semicolon,
    /// An ellipsis.
    Dots,
    /// Words between statements or instead of a term.
    Text,
    /// A matrix, passed over.
    Matrix,
    /// Sets apart what follows in a script.
    Stagger,
    /// A row ends.
    Row,
    /// `&`
    Cell,
    /// `\quad`, `\Rightarrow`.
    Separator,
    /// Passes its argument through.
    Wrap,
    /// Passes its argument through; its script is a label.
    Brace,
    /// Brackets by command, one argument.
    Norm,
    /// As brackets, angle.
    Average,
    /// Several arguments in a bracket.
    Pair,
    /// `\order`.
    Order,
    /// `\tensor`.
    Tensor,
    /// `\indices`.
    Indices,
    /// `\slashed`.
    Slashed,
    /// A command that nobody knows.
    Unknown,
}

/// A lexeme with its text and place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Lexeme {
    /// What it is.
    pub kind: Kind,
    /// The letter in LaTeX spelling, the number, the word, the bracket.
    pub text: CompactString,
    /// Its place in the document.
    pub span: Span,
}

/// A formula cut into statements, ready for the parsers.
#[derive(Clone, Debug, Default)]
pub(crate) struct Prepared {
    /// Lexemes of all statements, one after the other.
    pub lexemes: Vec<Lexeme>,
    /// Where each statement stands in `lexemes`.
    pub statements: Vec<std::ops::Range<usize>>,
    /// Labels found.
    pub labels: Vec<(CompactString, Span)>,
    /// What stands in the trailing `[reason]`s of a note's lines.
    pub reasons: Vec<(CompactString, Span)>,
    /// Unknown commands found.
    pub unknown: Vec<(CompactString, Span)>,
    /// Whether words in the formula say that no sum is meant.
    pub no_sum: bool,
    /// Whether something was passed over that may change the value.
    pub passed_over: bool,
}
