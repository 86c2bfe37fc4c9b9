//! The tree that a statement is drafted in while its sketch is built, and its way into flat code.

use indexwise_grammar::span::Span;

use super::{Bound, Op, Run, Side, Sketch, Term};

/// A term of a side or of a sum in brackets.
#[derive(Clone, Debug)]
pub(super) struct TermNode {
    /// Its place.
    pub span: Span,
    /// Its factors.
    pub nodes: Vec<Node>,
    /// Whether it matches anything.
    pub any: bool,
    /// Matches anything while this switch is on: a list of components, a map's value.
    pub loose: Option<u32>,
    /// Whether a command stands in it that nobody knows and that may print indices of its own.
    pub opaque: bool,
    /// Whether it is a bare number.
    pub number: bool,
    /// Whether it is written without indices in a vector notation, so that it may stand for one with a free index.
    pub shorthand: bool,
}

/// How letters are held together.
#[derive(Clone, Debug)]
pub(super) enum Node {
    /// A letter in a script.
    Place(u32),
    /// Factors, local to nothing.
    Product(Vec<Node>),
    /// A sum in brackets.
    Sum(Vec<TermNode>),
    /// A square: closes the free indices inside while the switch is on.
    Square(Box<Node>, u32),
    /// Another power: a free index inside is not judged.
    Power(Box<Node>),
    /// The argument of a function: its dummies are local to it.
    Scope(Box<Node>),
    /// An argument: counts only while the switch is on; else a term that lacks a letter may have it from here.
    Argument(u32, Box<Node>),
    /// Counts only while the switch is on.
    Switch(u32, Box<Node>),
    /// A sum sign: letters bound in the rest of the product, each perhaps under a switch.
    Bind(Vec<Bound>),
}

/// Adds a side to the code of a sketch.
pub(super) fn add_side(sketch: &mut Sketch, span: Span, terms: &[TermNode], zero: bool) {
    let start = here(sketch);
    terms.iter().for_each(|term| add_term(sketch, term));
    let code = Run { start, end: here(sketch) };
    let count = u32::try_from(terms.len()).unwrap_or(u32::MAX);
    sketch.sides.push(Side { span, code, terms: count, any: terms.iter().all(|term| term.any), zero });
}

fn here(sketch: &Sketch) -> u32 {
    u32::try_from(sketch.code.len()).unwrap_or(u32::MAX)
}

fn add_term(sketch: &mut Sketch, term: &TermNode) {
    let number = u32::try_from(sketch.terms.len()).unwrap_or(u32::MAX);
    sketch.terms.push(Term {
        span: term.span,
        letters: 0,
        any: term.any,
        loose: term.loose,
        opaque: term.opaque,
        number: term.number,
        shorthand: term.shorthand,
    });
    holding(sketch, Op::Term(number, 0), |sketch| term.nodes.iter().for_each(|node| add(sketch, node)));
}

/// Adds an instruction with what it holds.
fn holding(sketch: &mut Sketch, op: Op, held: impl FnOnce(&mut Sketch)) {
    let at = sketch.code.len();
    sketch.code.push(op);
    held(sketch);
    let end = here(sketch);
    if let Some(place) = sketch.code.get_mut(at).and_then(Op::end_mut) {
        *place = end;
    }
}

fn add(sketch: &mut Sketch, node: &Node) {
    match node {
        Node::Place(place) => sketch.code.push(Op::Place(*place)),
        Node::Product(nodes) => nodes.iter().for_each(|node| add(sketch, node)),
        Node::Sum(terms) => holding(sketch, Op::Sum(0), |sketch| terms.iter().for_each(|term| add_term(sketch, term))),
        Node::Square(inner, switch) => holding(sketch, Op::Square(*switch, 0), |sketch| add(sketch, inner)),
        Node::Power(inner) => holding(sketch, Op::Power(0), |sketch| add(sketch, inner)),
        Node::Scope(inner) => holding(sketch, Op::Scope(0), |sketch| add(sketch, inner)),
        Node::Argument(switch, inner) => holding(sketch, Op::Argument(*switch, 0), |sketch| add(sketch, inner)),
        Node::Switch(switch, inner) => holding(sketch, Op::Switch(*switch, 0), |sketch| add(sketch, inner)),
        Node::Bind(letters) => {
            let start = u32::try_from(sketch.bound.len()).unwrap_or(u32::MAX);
            sketch.bound.extend(letters.iter().cloned());
            sketch.code.push(Op::Bind(start, u32::try_from(sketch.bound.len()).unwrap_or(u32::MAX)));
        }
    }
}
