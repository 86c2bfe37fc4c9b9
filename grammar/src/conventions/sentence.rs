//! From the form of a sentence to the sentence: whether its names are what the form speaks of.
//!
//! A family has letters, a metric two slots, a scalar none. What is asked here is only what one sentence can tell by
//! itself; whether letters belong to a family that is declared elsewhere is the checker's business.

use compact_str::CompactString;

use crate::span::Span;
use crate::tree::{Atom, Factor, Joint, Kernel};

use super::grammar::{Clause, Predicate, shown};
use super::words::Word;
use super::{Bound, Curvature, Kind, Name, Range, Sentence, Tensor};

/// A word that cannot be what its sentence takes it for, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Trouble {
    pub at: Span,
    pub reason: String,
}

type Said<'a> = &'a Word<'a>;

impl Trouble {
    fn new(at: Span, reason: impl Into<String>) -> Self {
        Self { at, reason: reason.into() }
    }
}

/// The sentence that a clause makes.
pub(super) fn sentence(clause: Clause<'_>) -> Result<Sentence, Trouble> {
    let (names, predicate) = match clause {
        Clause::Directive(sentence) => return Ok(sentence),
        Clause::Of(names, predicate) => (names, predicate),
    };
    Ok(match predicate {
        Predicate::Range(range) => Sentence::Family { letters: letters(&names)?, range: in_order(range, &names)? },
        Predicate::Dimension(of) => Sentence::Dimension { letter: only(&names, letter)?, of },
        Predicate::Cartesian => Sentence::Cartesian(letters(&names)?),
        Predicate::Spatial(of) => spatial(&names, of)?,
        Predicate::Frame(raised_by) => Sentence::Frame { letters: letters(&names)?, raised_by },
        Predicate::Metric(constant, signature) => {
            Sentence::Metric { tensor: only(&names, |word| slotted(word, 2, "a metric"))?, constant, signature }
        }
        Predicate::Raises(kernels) => Sentence::Raises { metric: only(&names, kernel)?, kernels },
        Predicate::Coordinates => coordinates(&names)?,
        Predicate::Labels => Sentence::Labels(each(&names, label)?),
        Predicate::Christoffel(of) => {
            Sentence::Christoffel { tensor: only(&names, |word| slotted(word, 3, "a Christoffel symbol"))?, of }
        }
        Predicate::CovariantDerivative(of) => Sentence::CovariantDerivative { kernel: only(&names, kernel)?, of },
        Predicate::Symmetry(antisymmetric, slots) => symmetry(&names, antisymmetric, slots)?,
        Predicate::Traceless => Sentence::Traceless(each(&names, tensor)?),
        Predicate::Curvature(kind, of) => {
            let (slots, thing) = curvature(kind);
            Sentence::Curvature { tensor: only(&names, |word| slotted(word, slots, thing))?, kind, of }
        }
        Predicate::Kind(kind) => of_kind(&names, kind)?,
    })
}

fn each<O>(names: &[Said<'_>], take: impl Fn(&Word<'_>) -> Result<O, Trouble>) -> Result<Vec<O>, Trouble> {
    names.iter().map(|word| take(word)).collect()
}

/// The one name of a sentence that speaks of one thing.
fn only<O>(names: &[Said<'_>], take: impl Fn(&Word<'_>) -> Result<O, Trouble>) -> Result<O, Trouble> {
    match names {
        [word] => take(word),
        [_, second, ..] => Err(Trouble::new(second.span, "this can be said of one thing only")),
        // Invariant: the grammar asks for a name.
        [] => Err(Trouble::new(Span::default(), "a name is missing")),
    }
}

fn letters(names: &[Said<'_>]) -> Result<Vec<Name>, Trouble> {
    each(names, letter)
}

fn letter(word: &Word<'_>) -> Result<Name, Trouble> {
    let reason = word.kernel.as_ref().err().copied().unwrap_or("is not a single letter");
    word.letter().ok_or_else(|| Trouble::new(word.span, format!("{} {reason}", shown(word.text))))
}

fn label(word: &Word<'_>) -> Result<Name, Trouble> {
    word.label().ok_or_else(|| Trouble::new(word.span, format!("{} is not a single letter", shown(word.text))))
}

fn tensor(word: &Word<'_>) -> Result<Tensor, Trouble> {
    let reason = word.kernel.as_ref().err().copied().unwrap_or_default();
    word.tensor().ok_or_else(|| Trouble::new(word.span, format!("{} {reason}", shown(word.text))))
}

fn kernel(word: &Word<'_>) -> Result<Name, Trouble> {
    let found = tensor(word)?;
    Ok(Name { text: found.name().into(), span: word.span })
}

/// A tensor with so many slots.
fn slotted(word: &Word<'_>, slots: usize, thing: &str) -> Result<Tensor, Trouble> {
    let found = tensor(word)?;
    let count = found.slots().len();
    if count == slots {
        return Ok(found);
    }
    let number = |n: usize| match n {
        0 => "no indices".to_owned(),
        1 => "one index".to_owned(),
        2 => "two indices".to_owned(),
        3 => "three indices".to_owned(),
        4 => "four indices".to_owned(),
        n => format!("{n} indices"),
    };
    let reason = format!("{thing} has {}, but {} has {}", number(slots), shown(word.text), number(count));
    Err(Trouble::new(word.span, reason))
}

/// A kernel without slots.
fn bare(word: &Word<'_>, thing: &str) -> Result<Tensor, Trouble> {
    slotted(word, 0, thing)
}

/// A part is not the whole.
fn spatial(names: &[Said<'_>], of: Vec<Name>) -> Result<Sentence, Trouble> {
    let letters = letters(names)?;
    match letters.iter().find(|letter| of.iter().any(|other| other.text == letter.text)) {
        Some(both) => Err(Trouble::new(both.span, format!("{} cannot be a part of itself", shown(&both.text)))),
        None => Ok(Sentence::Spatial { letters, of }),
    }
}

/// A range of numbers ends after it begins, and one of names has each name once.
fn in_order(range: Range, names: &[Said<'_>]) -> Result<Range, Trouble> {
    let at = names.iter().map(|word| word.span).reduce(Span::join).unwrap_or_default();
    match range {
        Range::Between(from, Bound::Number(to)) if to < from => {
            Err(Trouble::new(at, format!("a range from {from} to {to} has no members")))
        }
        Range::Size(Bound::Number(0)) => Err(Trouble::new(at, "a range over no dimensions has no members")),
        Range::Members(names) => match repeated(&names) {
            Some(name) => Err(Trouble::new(name.span, format!("{} is named twice", shown(&name.text)))),
            None => Ok(Range::Members(names)),
        },
        range => Ok(range),
    }
}

/// The first name that stands before.
fn repeated(names: &[Name]) -> Option<&Name> {
    let mut numbered = names.iter().enumerate();
    numbered.find(|(at, name)| names.iter().take(*at).any(|other| other.text == name.text)).map(|(_, name)| name)
}

/// `x^i are the coordinates`, or letters.
fn coordinates(names: &[Said<'_>]) -> Result<Sentence, Trouble> {
    match names {
        [word] if word.label().is_none() => Ok(Sentence::Coordinates(slotted(word, 1, "the coordinate")?)),
        _ => Ok(Sentence::CoordinateNames(each(names, label)?)),
    }
}

fn symmetry(names: &[Said<'_>], antisymmetric: bool, slots: Vec<Name>) -> Result<Sentence, Trouble> {
    let tensors = each(names, exchangeable)?;
    for slot in &slots {
        let lacks = |tensor: &&Tensor| tensor.slots().iter().all(|found| found.letter != slot.text);
        if let Some(tensor) = tensors.iter().find(lacks) {
            let reason = format!("{} is no index of {}", shown(&slot.text), shown(tensor.name()));
            return Err(Trouble::new(slot.span, reason));
        }
    }
    if let [slot] = slots.as_slice() {
        return Err(Trouble::new(slot.span, "a symmetry exchanges two indices or more"));
    }
    Ok(Sentence::Symmetry { tensors, antisymmetric, slots })
}

/// A tensor with two slots or more: with fewer there is nothing to exchange.
fn exchangeable(word: &Word<'_>) -> Result<Tensor, Trouble> {
    let found = tensor(word)?;
    let has = match found.slots().len() {
        0 => "no index letters",
        1 => "one index",
        _ => return Ok(found),
    };
    Err(Trouble::new(
        word.span,
        format!("a symmetry exchanges two indices or more, but {} has {has}", shown(word.text)),
    ))
}

/// How many slots a tensor of curvature has, and what it is called.
fn curvature(kind: Curvature) -> (usize, &'static str) {
    match kind {
        Curvature::Riemann => (4, "the Riemann tensor"),
        Curvature::Weyl => (4, "the Weyl tensor"),
        Curvature::Ricci => (2, "the Ricci tensor"),
        Curvature::Einstein => (2, "the Einstein tensor"),
        Curvature::Scalar => (0, "the scalar curvature"),
    }
}

fn of_kind(names: &[Said<'_>], kind: Kind) -> Result<Sentence, Trouble> {
    let tensors = each(names, |word| match kind {
        Kind::Scalar => bare(word, "a scalar"),
        Kind::Matrix => bare(word, "a matrix"),
        Kind::Variation => bare(word, "a variation"),
        Kind::Vector => tensor(word).and_then(|found| match found.slots().len() {
            0 => Ok(found),
            _ => slotted(word, 1, "a vector"),
        }),
        Kind::ParameterDerivative => parameter_derivative(word),
        _ => tensor(word),
    })?;
    let epsilons = tensors.iter().filter(|tensor| is_epsilon(tensor)).count();
    let kind = match kind {
        Kind::Tensor if epsilons == tensors.len() => Kind::EpsilonTensor,
        Kind::Tensor if epsilons > 0 => {
            let at = tensors.iter().find(|tensor| is_epsilon(tensor)).map(|tensor| tensor.span).unwrap_or_default();
            return Err(Trouble::new(at, "the epsilon needs a sentence of its own"));
        }
        kind => kind,
    };
    Ok(Sentence::Kind { tensors, kind })
}

fn is_epsilon(tensor: &Tensor) -> bool {
    match &tensor.factor.atom {
        Atom::Kernel(kernel) => matches!(kernel.letter.as_str(), "\\epsilon" | "\\varepsilon"),
        _ => false,
    }
}

/// `dot` and `prime`: names of marks over letters, kernels of no formula.
fn parameter_derivative(word: &Word<'_>) -> Result<Tensor, Trouble> {
    let name: CompactString = match word.text.trim_start_matches('\\') {
        "dot" | "Dot" => "dot".into(),
        "prime" | "Prime" => "prime".into(),
        _ => {
            let reason = format!("only `dot` and `prime` are derivatives, not {}", shown(word.text));
            return Err(Trouble::new(word.span, reason));
        }
    };
    let kernel = Kernel { name: name.clone(), letter: name, bold: false, word: true };
    let (scripts, marks) = (Vec::new(), CompactString::default());
    let factor = Factor { span: word.span, atom: Atom::Kernel(kernel), scripts, joint: Joint::Beside, marks };
    Ok(Tensor { factor, span: word.span })
}
