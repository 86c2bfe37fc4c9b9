//! What contradicts itself within one scope, and names that nothing declares.
//!
//! Between scopes nothing clashes: the nearer declaration wins. Within a scope two sentences may say the same thing
//! twice, or add to one another; a clash is what they cannot both mean. It stands at the later sentence and points at
//! the earlier one. How either is told is the rules' business.

use compact_str::CompactString;
use indexwise_grammar::conventions::{Kind, Name, Range, Sentence, Tensor};
use indexwise_grammar::span::Span;

use super::built_in::{is_metric_by_custom, shown};
use super::meanings::Meanings;

/// Something said of a name that excludes other things said of it.
#[derive(Clone, Debug, PartialEq)]
enum Claim {
    /// The letter is an index that runs over this range, if it was said.
    Index(Option<Range>),
    /// The letter is no index; the word that says so.
    NoIndex(&'static str),
    /// Levels matter or do not.
    Levels(bool),
    /// A kernel with slots exchanges two of them with this sign.
    Exchange(usize, usize, bool),
    /// The kernel is of this kind.
    Kind(Kind),
    /// The dimension of these letters.
    Dimension(Vec<CompactString>),
    /// A definition.
    Defined,
}

/// A claim on a name: the letter, or the kernel with its number of slots.
struct Claimed {
    name: CompactString,
    slots: Option<usize>,
    claim: Claim,
    span: Span,
}

/// Two sentences that cannot both hold.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Clash {
    /// The later sentence.
    pub span: Span,
    /// The earlier one.
    pub earlier: Span,
    /// The letter or the kernel that they speak of.
    pub name: CompactString,
    /// Why they cannot both hold, in words that follow the name.
    pub words: &'static str,
}

/// A name that means nothing in its sentence.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unknown {
    /// The name.
    pub span: Span,
    /// What is the matter with it.
    pub message: String,
}

/// The clashes of one scope's sentences, in their order: one for a pair of sentences.
pub fn clashes(sentences: &[(Sentence, Span)]) -> Vec<Clash> {
    let mut known: Vec<Claimed> = Vec::new();
    let mut found = Vec::new();
    for (sentence, span) in sentences {
        let own = claims(sentence, *span);
        let clash = own.iter().find_map(|one| {
            known.iter().find_map(|other| excludes(other, one).map(|words| (one.name.clone(), other.span, words)))
        });
        if let Some((name, earlier, words)) = clash {
            found.push(Clash { span: *span, earlier, name, words });
        } else {
            known.extend(own);
        }
    }
    found
}

/// Names in one scope's sentences that mean nothing: a metric that nothing declares, a slot that a tensor lacks.
pub fn unknown_names(sentences: &[(Sentence, Span)], meanings: &Meanings) -> Vec<Unknown> {
    sentences.iter().flat_map(|(sentence, _)| unknown_in(sentence, meanings)).collect()
}

fn unknown_in(sentence: &Sentence, meanings: &Meanings) -> Vec<Unknown> {
    let metric = |name: &Name| {
        let declared = meanings.metrics().into_iter().any(|((kernel, _), _)| *kernel == name.text);
        let known = declared || is_metric_by_custom(&name.text);
        (!known).then(|| {
            let wanted = "a sentence of the form \"TENSOR is the metric\" declares one";
            Unknown { span: name.span, message: format!("no metric is called {}: {wanted}", shown(&name.text)) }
        })
    };
    match sentence {
        Sentence::Christoffel { of: Some(name), .. }
        | Sentence::CovariantDerivative { of: Some(name), .. }
        | Sentence::Curvature { of: Some(name), .. }
        | Sentence::Frame { raised_by: Some(name), .. }
        | Sentence::Raises { metric: name, .. } => metric(name).into_iter().collect(),
        Sentence::Symmetry { tensors, slots, .. } => {
            let lacks = |tensor: &Tensor, name: &Name| tensor.slots().iter().all(|slot| slot.letter != name.text);
            let missing = |tensor: &Tensor| {
                let names = slots.iter().filter(|name| lacks(tensor, name));
                let words = |name: &Name| format!("{} has no slot {}", shown(tensor.name()), shown(&name.text));
                names.map(|name| Unknown { span: name.span, message: words(name) }).collect::<Vec<_>>()
            };
            tensors.iter().flat_map(missing).collect()
        }
        Sentence::Spatial { of, .. } => {
            let unknown = of.iter().filter(|name| meanings.family_number(&name.text).is_none());
            let words = |name: &Name| {
                format!("{} belongs to no family of indices: say first what it runs over", shown(&name.text))
            };
            unknown.map(|name| Unknown { span: name.span, message: words(name) }).collect()
        }
        _ => Vec::new(),
    }
}

fn claims(sentence: &Sentence, span: Span) -> Vec<Claimed> {
    let letters = |names: &[Name], claim: &Claim| {
        names.iter().map(|name| Claimed { name: name.text.clone(), slots: None, claim: claim.clone(), span }).collect()
    };
    let kernels = |tensors: &[Tensor], claim: &Claim| {
        let one = |tensor: &Tensor| Claimed {
            name: tensor.name().into(),
            slots: Some(tensor.slots().len()),
            claim: claim.clone(),
            span,
        };
        tensors.iter().map(one).collect::<Vec<_>>()
    };
    match sentence {
        Sentence::Family { letters: names, range } => letters(names, &Claim::Index(Some(range.clone()))),
        Sentence::Frame { letters: names, .. } => {
            let mut all: Vec<Claimed> = letters(names, &Claim::Index(None));
            all.extend::<Vec<Claimed>>(letters(names, &Claim::Levels(true)));
            all
        }
        Sentence::Spatial { letters: names, .. } => letters(names, &Claim::Index(None)),
        Sentence::Cartesian(names) => letters(names, &Claim::Levels(false)),
        Sentence::Metric { tensor, constant, .. } => {
            // The constant metric of Cartesian axes moves no levels.
            let slots = if *constant { Vec::new() } else { tensor.slots() };
            let levels = slots.iter().map(|slot| Claimed {
                name: slot.letter.clone(),
                slots: None,
                claim: Claim::Levels(true),
                span,
            });
            let mut all: Vec<Claimed> = levels.collect();
            all.extend(kernels(std::slice::from_ref(tensor), &Claim::Exchange(0, 1, false)));
            all
        }
        Sentence::Labels(names) => letters(names, &Claim::NoIndex("a label")),
        Sentence::CoordinateNames(names) => letters(names, &Claim::NoIndex("a coordinate")),
        Sentence::Dimension { letter, of } => {
            let of = of.iter().map(|name| name.text.clone()).collect();
            letters(std::slice::from_ref(letter), &Claim::Dimension(of))
        }
        Sentence::Symmetry { tensors, antisymmetric, slots } => {
            let mut all = Vec::new();
            for tensor in tensors {
                let own = tensor.slots();
                let named = |slot: &str| slots.is_empty() || slots.iter().any(|name| name.text == slot);
                let positions: Vec<usize> =
                    own.iter().enumerate().filter(|(_, slot)| named(&slot.letter)).map(|(at, _)| at).collect();
                for (n, one) in positions.iter().enumerate() {
                    for two in positions.iter().skip(n + 1) {
                        let claim = Claim::Exchange(*one, *two, *antisymmetric);
                        all.extend(kernels(std::slice::from_ref(tensor), &claim));
                    }
                }
            }
            all
        }
        Sentence::Kind { tensors, kind } => kernels(tensors, &Claim::Kind(*kind)),
        Sentence::Definition(statement) => {
            let factor =
                statement.sides.first().and_then(|side| side.terms.first()).and_then(|term| term.factors.first());
            let tensor = factor.map(|factor| Tensor { factor: factor.clone(), span: factor.span });
            tensor.map(|tensor| kernels(&[tensor], &Claim::Defined)).unwrap_or_default()
        }
        _ => Vec::new(),
    }
}

/// Why the later claim cannot hold beside the earlier, in words that follow the name.
fn excludes(earlier: &Claimed, later: &Claimed) -> Option<&'static str> {
    if earlier.name != later.name {
        return None;
    }
    let same_slots = earlier.slots == later.slots;
    match (&earlier.claim, &later.claim) {
        (Claim::Index(Some(one)), Claim::Index(Some(two))) if !same_range(one, two) => {
            Some("runs over another range already")
        }
        (Claim::NoIndex("a label"), Claim::Index(_)) => Some("is called a label already"),
        (Claim::Index(_), Claim::NoIndex("a label")) => Some("is an index already"),
        (Claim::Levels(true), Claim::Levels(false)) => Some("has levels already, by its metric"),
        (Claim::Levels(false), Claim::Levels(true)) => Some("is called Cartesian already"),
        (Claim::Exchange(a, b, one), Claim::Exchange(c, d, two)) if same_slots && (a, b) == (c, d) && one != two => {
            Some("is symmetric and antisymmetric in the same slots")
        }
        (Claim::Kind(one), Claim::Kind(two)) if kinds_exclude(*one, *two) => Some(called_already(*one)),
        (Claim::Kind(Kind::Constant), Claim::Dimension(_)) | (Claim::Dimension(_), Claim::Kind(Kind::Constant)) => None,
        (Claim::Dimension(one), Claim::Dimension(two)) if one != two => Some("is another dimension already"),
        (Claim::Defined, Claim::Defined) if same_slots => Some("is defined already"),
        _ => None,
    }
}

/// What a kernel of a kind that excludes others is called.
const fn called_already(kind: Kind) -> &'static str {
    match kind {
        Kind::Scalar => "is called a scalar already",
        Kind::Vector => "is called a vector already",
        Kind::Matrix => "is called a matrix already",
        Kind::EpsilonSymbol => "is called a symbol already",
        _ => "is called a tensor already",
    }
}

/// Whether two ranges are written alike: places do not count.
fn same_range(one: &Range, two: &Range) -> bool {
    use indexwise_grammar::conventions::Bound;
    let same_bound = |one: &Bound, two: &Bound| match (one, two) {
        (Bound::Number(one), Bound::Number(two)) => one == two,
        (Bound::Letter(one, less), Bound::Letter(two, more)) => one.text == two.text && less == more,
        _ => false,
    };
    match (one, two) {
        (Range::Between(first, last), Range::Between(other, end)) => first == other && same_bound(last, end),
        (Range::Size(one), Range::Size(two)) => same_bound(one, two),
        (Range::Members(one), Range::Members(two)) => {
            one.iter().map(|name| &name.text).eq(two.iter().map(|name| &name.text))
        }
        // `from 0 to 3` and `over t x y z` name the same range twice.
        _ => range_size(one).zip(range_size(two)).is_some_and(|(one, two)| one == two),
    }
}

fn range_size(range: &Range) -> Option<u32> {
    super::meanings::Family { range: Some(range.clone()), ..Default::default() }.size()
}

fn kinds_exclude(one: Kind, two: Kind) -> bool {
    use Kind::{EpsilonSymbol, EpsilonTensor, Matrix, Scalar, Tensor, Vector};
    let exclusive = [Scalar, Vector, Tensor, Matrix];
    let pair = |a: Kind, b: Kind| (one, two) == (a, b) || (one, two) == (b, a);
    one != two
        && (pair(EpsilonTensor, EpsilonSymbol)
            || (exclusive.contains(&one) && exclusive.contains(&two) && !pair(Vector, Tensor)))
}
