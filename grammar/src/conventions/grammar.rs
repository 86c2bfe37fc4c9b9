//! The forms of sentences as a chumsky grammar over words.
//!
//! Most sentences are a list of names, a verb and what is said: `i j k` `run` `from 1 to 3`. The names are taken
//! as words here, since only what is said of them tells whether they are to be letters or tensors; `sentence`
//! looks at that. Labels of the parsers are what people are told was expected: words of the language as they are,
//! anything else in capitals (`PHRASES`).

use chumsky::error::{RichPattern, RichReason};
use chumsky::input::MapExtra;
use chumsky::prelude::*;
use chumsky::primitive::select_ref;

use crate::span::Span;

use super::words::{Word, sign};
use super::{Bound, Curvature, Kind, Name, Range, Sentence};

pub(super) type Input<'a> = &'a [Word<'a>];
type Extra<'a> = extra::Err<Rich<'a, Word<'a>>>;
type Said<'a> = &'a Word<'a>;

/// A sentence by its form.
#[derive(Clone, Debug)]
pub(super) enum Clause<'a> {
    /// A directive, complete.
    Directive(Sentence),
    /// Names and what is said of them.
    Of(Vec<Said<'a>>, Predicate),
}

/// What is said of names.
#[derive(Clone, Debug)]
pub(super) enum Predicate {
    Range(Range),
    Dimension(Vec<Name>),
    Cartesian,
    Spatial(Vec<Name>),
    Frame(Option<Name>),
    Metric(bool, Vec<bool>),
    Raises(Vec<Name>),
    Coordinates,
    Labels,
    Christoffel(Option<Name>),
    CovariantDerivative(Option<Name>),
    Symmetry(bool, Vec<Name>),
    Traceless,
    Curvature(Curvature, Option<Name>),
    Kind(Kind),
}

/// What the capitals in labels mean to people; a label without a phrase is not told.
const PHRASES: &[(&str, &str)] = &[
    ("NUMBER", "a number"),
    ("LETTER", "a letter"),
    ("KERNEL", "a kernel"),
    ("SIGN", "a sign"),
    ("RULE", "the name of a rule"),
    ("REFERENCE", "a label such as `(eq:a)`"),
    ("NAME", "a letter or a tensor"),
    ("VERB", "`is`, `are`, `run` or another verb"),
    ("KIND", "a kind of thing"),
    ("AND", ""),
    ("ARTICLE", ""),
];

/// Words beside the verbs that are no names where a sentence begins.
const NO_NAMES: &[&str] = &["and", "skip", "allow", "check"];

/// The index of the word at which reading stopped (their number for the end), and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Stop {
    pub at: usize,
    pub reason: String,
    /// Whether a verb was wanted.
    pub no_verb: bool,
}

/// The grammar of a whole sentence.
pub(super) fn clause<'a>() -> impl Parser<'a, Input<'a>, Clause<'a>, Extra<'a>> {
    let derivations = said("derivations").then(be()).then(said("checked")).to(Sentence::DerivationsAreChecked);
    let skip = said("skip").then(said("this")).to(Sentence::Skip);
    let directive = choice((skip, allow(), check(), derivations)).then_ignore(end()).map(Clause::Directive);
    let name = any_ref().filter(|word: &Said| !NO_NAMES.iter().any(|no_name| word.says(no_name)) && !word.is_verb());
    let name = name.labelled("NAME");
    let names = list(name).then(predicate()).then_ignore(end()).map(|(names, said)| Clause::Of(names, said));
    directive.or(names)
}

/// Why words are no sentence, from what the grammar wanted at the furthest word that it reached.
pub(super) fn stop(words: &[Word<'_>], errors: &[Rich<'_, Word<'_>>]) -> Stop {
    let at = errors.first().map_or(0, |error| error.span().start).min(words.len());
    let mut wanted: Vec<&str> = Vec::new();
    if let Some(RichReason::ExpectedFound { expected, .. }) = errors.first().map(Rich::reason) {
        wanted = expected.iter().filter_map(label_of).collect();
    }
    wanted.sort_unstable();
    wanted.dedup();
    Stop { at, reason: reason(words, at, &wanted), no_verb: wanted.contains(&"VERB") }
}

fn label_of<'e>(pattern: &'e RichPattern<'_, Word<'_>>) -> Option<&'e str> {
    match pattern {
        RichPattern::Label(label) => Some(label.as_ref()),
        RichPattern::EndOfInput => Some("END"),
        _ => None,
    }
}

fn reason(words: &[Word<'_>], at: usize, wanted: &[&str]) -> String {
    let found = words.get(at).map(|word| shown(word.text));
    let after = at.checked_sub(1).and_then(|at| words.get(at)).map(|word| shown(word.text));
    let place = after.map_or_else(|| " at the start".to_owned(), |after| format!(" after {after}"));
    match found {
        Some(found) if at == 0 => format!("a sentence begins with a letter, a tensor or a directive, not with {found}"),
        Some(found) if wanted.contains(&"KIND") => format!("{found} is not a kind of thing"),
        Some(found) if wanted == ["END"] => format!("nothing is expected{place}, but {found} follows"),
        _ => format!("expected {}{place}", alternatives(wanted)),
    }
}

/// Words of the document are shown up to this many letters.
const SHOWN: usize = 24;

/// A word of the document between back quotes, shortened.
pub(super) fn shown(text: &str) -> String {
    let short: String = text.chars().take(SHOWN).collect();
    if short.len() < text.len() { format!("`{short}...`") } else { format!("`{text}`") }
}

/// `a number, `of` or the end`.
fn alternatives(wanted: &[&str]) -> String {
    // Where a verb may follow so may another name, and to name both is no help.
    let verb = wanted.contains(&"VERB");
    let phrase = |label: &&str| match PHRASES.iter().find(|(name, _)| name == label) {
        Some((name, phrase)) => {
            let told = !(phrase.is_empty() || verb && *name == "NAME");
            told.then(|| (*phrase).to_owned())
        }
        None if *label == "END" => None,
        None => Some(format!("`{label}`")),
    };
    let mut phrases: Vec<String> = wanted.iter().filter_map(phrase).collect();
    phrases.extend(wanted.contains(&"END").then(|| "the end".to_owned()));
    match phrases.split_last() {
        None => "something else".to_owned(),
        Some((last, [])) => last.clone(),
        Some((last, others)) => format!("{} or {last}", others.join(", ")),
    }
}

/// One word of the language.
fn said<'a>(word: &'static str) -> impl Parser<'a, Input<'a>, Said<'a>, Extra<'a>> + Clone {
    any_ref().filter(move |found: &Said| found.says(word)).labelled(word)
}

/// One of several words that mean the same; the first is what people are told.
fn any_of<'a>(words: &'static [&'static str]) -> impl Parser<'a, Input<'a>, Said<'a>, Extra<'a>> + Clone {
    let label = words.first().copied().unwrap_or_default();
    any_ref().filter(move |found: &Said| words.iter().any(|word| found.says(word))).labelled(label)
}

/// A word with a meaning of some sort.
fn read<'a, O>(
    meaning: impl Fn(Said<'a>) -> Option<O> + Clone,
    label: &'static str,
) -> impl Parser<'a, Input<'a>, O, Extra<'a>> + Clone {
    select_ref(move |word: Said<'a>, _: &mut MapExtra<'a, '_, Input<'a>, Extra<'a>>| meaning(word)).labelled(label)
}

/// One or more, `and` between them or not.
fn list<'a, O>(
    item: impl Parser<'a, Input<'a>, O, Extra<'a>> + Clone,
) -> impl Parser<'a, Input<'a>, Vec<O>, Extra<'a>> + Clone {
    item.separated_by(said("and").labelled("AND").or_not()).at_least(1).collect()
}

fn be<'a>() -> impl Parser<'a, Input<'a>, Said<'a>, Extra<'a>> + Clone {
    any_of(&["is", "are"])
}

fn article<'a>() -> impl Parser<'a, Input<'a>, (), Extra<'a>> + Clone {
    any_of(&["the", "a", "an"]).labelled("ARTICLE").or_not().ignored()
}

fn letters<'a>() -> impl Parser<'a, Input<'a>, Vec<Name>, Extra<'a>> + Clone {
    list(read(Word::letter, "LETTER"))
}

fn kernel<'a>() -> impl Parser<'a, Input<'a>, Name, Extra<'a>> + Clone {
    // In a note any word could be a kernel: `of the metric g`.
    read(|word: Said<'a>| word.kernel_name().filter(|_| !word.is_of_the_language() && !word.says("and")), "KERNEL")
}

/// `of g`, which may be left out.
fn of_kernel<'a>() -> impl Parser<'a, Input<'a>, Option<Name>, Extra<'a>> + Clone {
    said("of").ignore_then(kernel()).or_not()
}

/// `allow RULE here`, `allow RULE in this file`.
fn allow<'a>() -> impl Parser<'a, Input<'a>, Sentence, Extra<'a>> + Clone {
    let kebab = |word: Said<'a>| {
        let is_name = word.text.bytes().all(|byte| byte.is_ascii_alphanumeric() || byte == b'-');
        is_name.then(|| Name { text: word.text.into(), span: word.span })
    };
    let file = said("in").then(said("this")).then(said("file")).to(false);
    let place = said("here").to(true).or(file);
    said("allow").ignore_then(read(kebab, "RULE")).then(place).map(|(rule, here)| Sentence::Allow { rule, here })
}

/// `check this`, `check this step by step`, `check this using (eq:gamma), (eq:compat)`.
fn check<'a>() -> impl Parser<'a, Input<'a>, Sentence, Extra<'a>> + Clone {
    let reference = |word: Said<'a>| {
        let label = word.text.strip_prefix('(')?.strip_suffix(')')?.trim();
        let start = word.span.start as usize + word.text.find(label)?;
        (!label.is_empty()).then(|| Name { text: label.into(), span: Span::new(start, start + label.len()) })
    };
    let steps = said("step").then(said("by")).then(said("step")).to(Vec::new());
    let using = said("using").ignore_then(list(read(reference, "REFERENCE")));
    let manner = steps.or(using).or_not().map(Option::unwrap_or_default);
    said("check").then(said("this")).ignore_then(manner).map(|using| Sentence::Check { using })
}

/// A verb with what follows it.
fn predicate<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    let run = any_of(&["run", "runs", "range", "ranges"]).labelled("VERB");
    let raise = any_of(&["raises", "raise"]).labelled("VERB");
    let negated = any_of(&["does", "do"]).labelled("VERB");
    choice((
        be().labelled("VERB").ignore_then(kinds()),
        run.ignore_then(range()).map(Predicate::Range),
        raise.ignore_then(list(kernel())).map(Predicate::Raises),
        negated.then(said("not")).then(said("commute")).to(Predicate::Kind(Kind::NonCommuting)),
    ))
}

/// `from 1 to 3`, `over 4 dimensions`, `over t r \theta \phi`.
fn range<'a>() -> impl Parser<'a, Input<'a>, Range, Extra<'a>> + Clone {
    let number = || read(|word: Said<'a>| word.number(), "NUMBER");
    let minus = read(|word: Said<'a>| sign(word.text).filter(|plus| !plus), "-").ignore_then(number()).or_not();
    let letter = read(Word::letter, "LETTER").then(minus);
    let bound = letter.map(|(letter, less)| Bound::Letter(letter, less.unwrap_or(0)));
    let bound = number().map(Bound::Number).or(bound);
    let between = said("from").ignore_then(number()).then_ignore(said("to")).then(bound.clone());
    let size = bound.then_ignore(any_of(&["dimensions", "dimension"])).map(Range::Size);
    let over = said("over").ignore_then(size.or(letters().map(Range::Members)));
    between.map(|(from, to)| Range::Between(from, to)).or(over)
}

/// What something may be.
fn kinds<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    article().ignore_then(choice((of_letters(), of_metrics(), of_tensors(), plain_kinds())).labelled("KIND"))
}

fn of_letters<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    let of = said("of").ignore_then(letters());
    let raised = said("raised").then(said("by")).ignore_then(kernel()).or_not();
    choice((
        said("dimension").ignore_then(of.clone().or_not()).map(|of| Predicate::Dimension(of.unwrap_or_default())),
        said("spatial").then(said("part")).ignore_then(of).map(Predicate::Spatial),
        said("frame").then(any_of(&["indices", "index"])).ignore_then(raised).map(Predicate::Frame),
        said("cartesian").to(Predicate::Cartesian),
        any_of(&["label", "labels"]).to(Predicate::Labels),
        any_of(&["coordinates", "coordinate"]).to(Predicate::Coordinates),
    ))
}

/// What a metric is said to be besides.
#[derive(Clone, Debug)]
enum Property {
    Constant,
    Signature(Vec<bool>),
}

fn of_metrics<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    let signs = read(|word: Said<'a>| sign(word.text), "SIGN").repeated().at_least(1).collect::<Vec<_>>();
    let signs = signs.or(read(signs_in_brackets, "SIGN"));
    let signature = said("signature").ignore_then(signs).map(Property::Signature);
    let property = said("constant").to(Property::Constant).or(signature);
    let metric = said("metric")
        .ignore_then(said("and").labelled("AND").or_not().ignore_then(property).repeated().collect())
        .map(|properties: Vec<Property>| {
            let constant = properties.iter().any(|property| matches!(property, Property::Constant));
            let signature = properties.into_iter().rev().find_map(|property| match property {
                Property::Signature(signs) => Some(signs),
                Property::Constant => None,
            });
            Predicate::Metric(constant, signature.unwrap_or_default())
        });
    let christoffel = said("christoffel").then(any_of(&["symbol", "symbols"])).ignore_then(of_kernel());
    let covariant = said("covariant").then(said("derivative")).ignore_then(of_kernel());
    choice((metric, christoffel.map(Predicate::Christoffel), covariant.map(Predicate::CovariantDerivative)))
}

/// `(-,+,+,+)`.
fn signs_in_brackets(word: &Word<'_>) -> Option<Vec<bool>> {
    let inside = word.text.strip_prefix('(')?.strip_suffix(')')?;
    let letters = inside.char_indices().filter(|(_, letter)| !letter.is_whitespace() && !",$".contains(*letter));
    let signs = letters.map(|(at, letter)| inside.get(at..at + letter.len_utf8()).and_then(sign));
    signs.collect::<Option<Vec<bool>>>().filter(|signs| !signs.is_empty())
}

fn of_tensors<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    let tensor = any_of(&["tensor", "tensors"]);
    let named = choice((
        said("riemann").then(tensor.clone()).to(Curvature::Riemann),
        said("ricci").then(tensor.clone()).to(Curvature::Ricci),
        said("einstein").then(tensor.clone()).to(Curvature::Einstein),
        said("weyl").then(tensor).to(Curvature::Weyl),
        said("scalar").then(said("curvature")).to(Curvature::Scalar),
    ));
    let curvature = named.then(of_kernel()).map(|(kind, of)| Predicate::Curvature(kind, of));
    let symmetric = said("symmetric").to(false).or(said("antisymmetric").to(true));
    let slots = said("in").ignore_then(letters()).or_not().map(Option::unwrap_or_default);
    let symmetry = said("totally").or_not().ignore_then(symmetric).then(slots);
    let symmetry = symmetry.map(|(antisymmetric, slots)| Predicate::Symmetry(antisymmetric, slots));
    choice((curvature, symmetry, said("traceless").to(Predicate::Traceless)))
}

fn plain_kinds<'a>() -> impl Parser<'a, Input<'a>, Predicate, Extra<'a>> + Clone {
    let kind = |words, kind| any_of(words).to(Predicate::Kind(kind));
    choice((
        kind(&["scalar", "scalars"], Kind::Scalar),
        kind(&["vector", "vectors"], Kind::Vector),
        kind(&["tensor", "tensors"], Kind::Tensor),
        kind(&["constant", "constants"], Kind::Constant),
        kind(&["matrix", "matrices"], Kind::Matrix),
        kind(&["small"], Kind::Small),
        kind(&["variation", "variations"], Kind::Variation),
        kind(&["derivative", "derivatives"], Kind::ParameterDerivative),
        kind(&["symbol", "symbols"], Kind::EpsilonSymbol),
    ))
}
