//! The balance of one letter in a statement, under one choice of readings.
//!
//! A letter is in balance if every term that is compared holds it once, as a free index, or none does, apart from
//! pairs closed within a product. Everything that the rules report about balance is an event of this count, so
//! that no rule counts again.

use indexwise_grammar::tree::{Level, RelationKind};

use crate::conventions::built_in::{LetterClass, class_of, is_derivative};
use crate::sketch::{Node, Shape, Side, Sketch, TermNode};

/// Which units are read as indices and which switches are on.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Choice {
    /// One for each unit.
    pub index: Vec<bool>,
    /// One for each switch.
    pub on: Vec<bool>,
}

/// How a letter is out of balance; the later variant is the graver one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub enum Odd {
    /// It is in balance.
    #[default]
    Balanced,
    /// A dummy of an inner sum meets the same letter outside.
    Captured,
    /// Free in some terms or sides, not in others.
    Mismatch,
    /// More than twice in one product.
    Thrice,
}

/// What the count met.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Event {
    /// A closed pair.
    Pair(u32, u32),
    /// More than twice in one product: all the places.
    Thrice(Vec<u32>),
    /// Outside places, and one of the places of the inner pair.
    Captured(Vec<u32>, u32),
    /// The terms of one sum or of all sides: for each its free place, or none.
    Terms(Vec<Compared>),
}

/// A term or side as compared with others.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Compared {
    /// Its place in the text.
    pub span: indexwise_grammar::span::Span,
    /// The free place of the letter, if it is free there.
    pub free: Option<u32>,
    /// The side that it belongs to, if the sides of the statement are compared.
    pub side: Option<u32>,
    /// Whether it is a bare number.
    pub number: bool,
}

#[derive(Clone, Debug, Default)]
struct Tally {
    /// Places not closed in an inner scope.
    open: Vec<u32>,
    /// A place of a pair closed in an inner scope.
    closed: Option<u32>,
    odd: Odd,
    /// Not to be judged: a power of something with a free index.
    skip: bool,
    /// An argument that does not count holds the letter.
    lent: bool,
}

/// Judges one letter. Events go to `events` in the order of the text.
pub fn judge(sketch: &Sketch, choice: &Choice, letter: &str, events: &mut Vec<Event>) -> Odd {
    let mut count = Count { sketch, choice, letter, events };
    let groups = compared_groups(sketch, choice);
    let mut odd = Odd::Balanced;
    for group in groups {
        let mut terms = Vec::new();
        for (number, side) in group {
            odd = odd.max(count.terms(&side.terms, false, Some(number), &mut terms).odd);
        }
        odd = odd.max(count.compare(terms));
    }
    odd
}

/// The state of one letter in one term.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct TermState {
    /// The free place, if the letter is free.
    pub free: Option<u32>,
    /// Whether a pair of it is summed.
    pub summed: bool,
}

/// The state of a letter in a term of a side.
pub fn term_state(sketch: &Sketch, choice: &Choice, term: &TermNode, letter: &str) -> TermState {
    let mut ignored = Vec::new();
    let mut count = Count { sketch, choice, letter, events: &mut ignored };
    let tally = count.product(&term.nodes, &mut false);
    let settled = count.settle(tally);
    TermState { free: settled.open.first().copied(), summed: settled.closed.is_some() }
}

/// Sides that are compared with one another, by the relations between them: a loose relation compares only sides
/// that both have a free index.
fn compared_groups<'s>(sketch: &'s Sketch, choice: &Choice) -> Vec<Vec<(u32, &'s Side)>> {
    let mut groups: Vec<Vec<(u32, &Side)>> = Vec::new();
    let mut before: Option<&Side> = None;
    // "all of these vanish": each stands for itself.
    let vanish = sketch.sides.len() > 2 && sketch.sides.iter().any(|side| side.zero);
    for (number, side) in (0_u32..).zip(&sketch.sides) {
        let relation = (number as usize).checked_sub(1).and_then(|n| sketch.relations.get(n));
        let joined = match relation {
            None | Some(RelationKind::Free) => false,
            Some(RelationKind::Equal) => !vanish,
            Some(kind) => {
                let asked = if *kind == RelationKind::Order { 2 } else { 1 };
                let free = |side| free_letters(sketch, choice, side) >= asked;
                free(side) && before.is_some_and(free)
            }
        };
        match groups.last_mut().filter(|_| joined) {
            Some(group) => group.push((number, side)),
            None => groups.push(vec![(number, side)]),
        }
        before = Some(side);
    }
    groups
}

/// How many letters are free on a side.
fn free_letters(sketch: &Sketch, choice: &Choice, side: &Side) -> usize {
    let mut letters: Vec<&str> = Vec::new();
    for place in &sketch.places {
        if side.span.holds(place.span) && !letters.contains(&place.letter.as_str()) {
            letters.push(&place.letter);
        }
    }
    let is_free = |letter: &&str| {
        let mut terms = Vec::new();
        let mut ignored = Vec::new();
        Count { sketch, choice, letter, events: &mut ignored }.terms(&side.terms, false, None, &mut terms);
        terms.iter().any(|term| term.free.is_some())
    };
    letters.iter().filter(|letter| is_free(letter)).count()
}

struct Count<'a> {
    sketch: &'a Sketch,
    choice: &'a Choice,
    letter: &'a str,
    events: &'a mut Vec<Event>,
}

impl Count<'_> {
    /// Whether the compared terms agree.
    fn compare(&mut self, terms: Vec<Compared>) -> Odd {
        let free = terms.iter().filter(|term| term.free.is_some()).count();
        if free == 0 {
            return Odd::Balanced;
        }
        // `r_i + p_i = 1`: numbers named by a letter, one formula for each.
        let numbered = || terms.iter().all(|term| term.free.is_some() || term.number) && self.numbers_quantities();
        let agree = free == terms.len() || numbered();
        self.events.push(Event::Terms(terms));
        if agree { Odd::Balanced } else { Odd::Mismatch }
    }

    /// Settles every term of a sum; those that can be compared are added to `out`.
    fn terms(&mut self, terms: &[TermNode], bound: bool, side: Option<u32>, out: &mut Vec<Compared>) -> Tally {
        let reach = self.sketch.reach.and_then(|switch| self.choice.on.get(switch as usize)).copied().unwrap_or(false);
        let mut sum = Tally::default();
        let mut bound_so_far = bound;
        for term in terms {
            let mut bound_here = bound_so_far;
            let tally = self.product(&term.nodes, &mut bound_here);
            if reach {
                bound_so_far = bound_here;
            }
            // What an unknown command prints may close what is open here.
            if term.opaque && tally.open.len() == 1 {
                sum.skip = true;
                continue;
            }
            let loose = term.loose.is_some_and(|switch| self.is_on(switch));
            if term.any || loose || tally.lent && tally.open.is_empty() || term.shorthand && self.takes_shorthand() {
                continue;
            }
            if tally.skip {
                sum.odd = sum.odd.max(tally.odd);
                sum.skip = true;
                continue;
            }
            let settled = self.settle(tally);
            sum.odd = sum.odd.max(settled.odd);
            sum.closed = sum.closed.or(settled.closed);
            if settled.odd <= Odd::Mismatch {
                out.push(Compared { span: term.span, free: settled.open.first().copied(), side, number: term.number });
            }
        }
        sum
    }

    /// Closes what a product holds twice.
    fn settle(&mut self, mut tally: Tally) -> Tally {
        let open = tally.open.len();
        if open > 2 && !self.names_component(&tally.open) {
            tally.odd = tally.odd.max(Odd::Thrice);
            self.events.push(Event::Thrice(tally.open.clone()));
        } else if let (true, Some(inner)) = (open > 0, tally.closed) {
            tally.odd = tally.odd.max(Odd::Captured);
            self.events.push(Event::Captured(tally.open.clone(), inner));
        }
        if let [first, second] = tally.open.as_slice() {
            self.events.push(Event::Pair(*first, *second));
            tally.closed = Some(*first);
            tally.open.clear();
        }
        tally
    }

    fn product(&mut self, nodes: &[Node], bound: &mut bool) -> Tally {
        let mut tally = Tally::default();
        for node in nodes {
            let one = self.node(node, bound);
            tally.open.extend(one.open);
            tally.closed = tally.closed.or(one.closed);
            tally.odd = tally.odd.max(one.odd);
            tally.skip |= one.skip;
            tally.lent |= one.lent;
        }
        tally
    }

    fn node(&mut self, node: &Node, bound: &mut bool) -> Tally {
        match node {
            Node::Place(number) => self.place(*number, *bound),
            Node::Product(nodes) => self.product(nodes, bound),
            Node::Sum(terms) => self.sum(terms, *bound),
            Node::Square(inner, switch) => {
                let mut tally = self.node(inner, bound);
                if self.is_on(*switch) && tally.open.len() == 1 {
                    tally.closed = tally.open.pop();
                }
                tally
            }
            Node::Power(inner) => {
                let mut tally = self.node(inner, bound);
                tally.skip |= tally.open.len() == 1;
                tally.open.clear();
                tally
            }
            Node::Scope(inner) => Tally { closed: None, ..self.node(inner, bound) },
            Node::Argument(switch, inner) if !self.is_on(*switch) => {
                let inside = self.node(inner, bound);
                // An argument by its looks; one that only might be one lends nothing.
                let likely = self.sketch.switches.get(*switch as usize).is_some_and(|switch| !switch.on);
                Tally { lent: likely && !inside.open.is_empty(), ..Tally::default() }
            }
            Node::Argument(_, inner) => self.node(inner, bound),
            Node::Switch(switch, inner) => {
                if self.is_on(*switch) {
                    self.node(inner, bound)
                } else {
                    Tally::default()
                }
            }
            Node::Bind(letters) => {
                let binds = |(letter, switch): &(compact_str::CompactString, Option<u32>)| {
                    letter == self.letter && switch.is_none_or(|switch| self.is_on(switch))
                };
                *bound |= letters.iter().any(binds);
                Tally::default()
            }
        }
    }

    fn place(&self, number: u32, bound: bool) -> Tally {
        let mut tally = Tally::default();
        if let Some(place) = self.sketch.place(number).filter(|place| place.letter == self.letter) {
            let index = self.choice.index.get(place.unit as usize).copied().unwrap_or(false);
            if index && !bound {
                tally.open.push(number);
            }
        }
        tally
    }

    /// A sum in brackets brings a free index to the product around it; its dummies are its own.
    fn sum(&mut self, terms: &[TermNode], bound: bool) -> Tally {
        let mut compared = Vec::new();
        let mut tally = self.terms(terms, bound, None, &mut compared);
        tally.open = compared.iter().filter_map(|term| term.free).take(1).collect();
        tally.skip &= compared.is_empty();
        if terms.len() > 1 {
            tally.odd = tally.odd.max(self.compare(compared));
        }
        tally
    }

    /// `\Gamma^0_{jj} T^{jj}`: a letter that stands only twice over in scripts of its own names a component.
    fn names_component(&self, places: &[u32]) -> bool {
        let alone = |place: &crate::sketch::Place| {
            let mine = self.sketch.places.iter().filter(|other| other.script == place.script);
            place.company == 2 && mine.filter(|other| other.letter == self.letter).count() == 2
        };
        places.iter().all(|place| self.sketch.place(*place).is_some_and(alone))
    }

    /// Whether the letter numbers quantities rather than components: a small Latin letter, only on kernels that carry
    /// nothing else and do not differentiate.
    fn numbers_quantities(&self) -> bool {
        let mut mine = self.sketch.units.iter().filter(|unit| unit.letter == self.letter);
        class_of(self.letter) != LetterClass::Greek
            && mine.all(|unit| unit.shape == Shape::Lone && !is_derivative(&unit.kernel_letter))
    }

    /// Whether a term in vector notation may stand for one with this letter free: not where the vectors themselves
    /// carry indices (`\mathbf v = v_i \mathbf e_i` is closed), nor where two letters are free on a kernel each.
    fn takes_shorthand(&self) -> bool {
        let index = |place: &&crate::sketch::Place| self.choice.index.get(place.unit as usize) == Some(&true);
        let places = || self.sketch.places.iter().filter(index);
        let unit = |place: &crate::sketch::Place| self.sketch.units.get(place.unit as usize);
        if places().any(|place| unit(place).is_some_and(|unit| unit.vector)) {
            return false;
        }
        let lone = |letter: &str| {
            let mut count = 0;
            for place in places().filter(|place| place.letter == letter) {
                if unit(place).is_none_or(|unit| unit.shape != Shape::Lone) {
                    return false;
                }
                count += 1;
            }
            count % 2 == 1
        };
        let mut free: Vec<&str> = Vec::new();
        for place in places() {
            if !free.contains(&place.letter.as_str()) && lone(&place.letter) {
                free.push(&place.letter);
            }
        }
        free.len() < 2 || !free.contains(&self.letter)
    }

    fn is_on(&self, switch: u32) -> bool {
        self.choice.on.get(switch as usize).copied().unwrap_or(false)
    }
}

/// Whether two places stand on the same level.
pub fn same_level(sketch: &Sketch, first: u32, second: u32) -> Option<Level> {
    let (first, second) = (sketch.place(first)?, sketch.place(second)?);
    (first.level == second.level).then_some(first.level)
}
