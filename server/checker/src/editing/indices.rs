//! The indices of a statement: which of its places mean one and the same letter, and in what part.
//!
//! Everything is read off the count of the balance (`balance::events`): a closed pair is one index, the free places of
//! compared terms are one, and so are the places that one sum sign binds. A sum in brackets brings its free index to
//! the product around it, so that its places and their partner outside are one index, too. Trap: what the count passes
//! over (terms that match anything, arguments) has no event; a letter there belongs to the free index of its name, if
//! there is one, and else stands for itself, which `Role::Unjudged` says.

use compact_str::CompactString;
use indexwise_grammar::span::Span;

use crate::balance::{self, Choice, Event};
use crate::sketch::{Op, Sketch};

/// Places of one letter in one statement that are told apart; if there are more, they are taken as one index that is not
/// judged.
const PLACES_BUDGET: usize = 1024;

/// What an index does in its statement; a later role is told before an earlier one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Role {
    /// It stands where nothing is compared.
    #[default]
    Unjudged,
    /// It is free in the whole statement.
    Free,
    /// It is summed since it stands twice.
    Summed,
    /// A sum sign binds it.
    Bound,
    /// It stands more than twice in a product.
    Thrice,
}

/// One index with all its places.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Index {
    pub letter: CompactString,
    pub role: Role,
    /// Numbers of places of the sketch, in their order.
    pub places: Vec<u32>,
    /// Where it stands at its sum sign.
    pub signs: Vec<Span>,
}

impl Index {
    /// Where it stands, in the order of the text, each place once.
    pub fn spans(&self, sketch: &Sketch) -> Vec<Span> {
        let places = self.places.iter().filter_map(|place| sketch.place(*place)).map(|place| place.span);
        let mut spans: Vec<Span> = places.chain(self.signs.iter().copied()).collect();
        spans.sort_unstable();
        spans.dedup();
        spans
    }
}

/// All indices of a statement, letter by letter.
pub(super) fn indices(sketch: &Sketch, choice: &Choice) -> Vec<Index> {
    let terms = terms_of_places(sketch, choice);
    sketch.letter_numbers().flat_map(|letter| indices_of(sketch, choice, letter, &terms)).collect()
}

fn indices_of(sketch: &Sketch, choice: &Choice, letter: u16, terms: &[Option<u32>]) -> Vec<Index> {
    let numbers = 0..u32::try_from(sketch.places.len()).unwrap_or(u32::MAX);
    let is_index = |place: &u32| {
        let held = sketch.place(*place).filter(|held| held.number == letter);
        held.is_some_and(|held| choice.index.get(held.unit as usize) == Some(&true))
    };
    let name = sketch.letters.get(letter as usize).cloned().unwrap_or_default();
    let places: Vec<u32> = numbers.filter(is_index).collect();
    if places.len() > PLACES_BUDGET {
        return vec![Index { letter: name, role: Role::Unjudged, places, signs: Vec::new() }];
    }
    let mut classes = Classes::of(places);
    classes.share_places(sketch);
    let (_, events) = balance::events(sketch, choice, letter);
    let mut outer: Vec<u32> = Vec::new();
    let mut signs: Vec<(u32, u32)> = Vec::new();
    for event in &events {
        match event {
            Event::Pair(one, two) => classes.join(&[*one, *two], Role::Summed),
            Event::Thrice(places) => classes.join(places, Role::Thrice),
            Event::Captured(..) => {}
            Event::Terms(compared) => {
                let free: Vec<u32> = compared.iter().filter_map(|term| term.free).collect();
                classes.join(&free, Role::Free);
                outer.extend(compared.iter().filter(|term| term.side.is_some()).filter_map(|term| term.free));
            }
            Event::Bound(place, sign) => signs.push((*place, *sign)),
        }
    }
    // One free letter is one index of the statement, also where a relation does not compare.
    classes.join(&outer, Role::Free);
    signs.sort_unstable_by_key(|(place, sign)| (*sign, *place));
    for own in signs.chunk_by(|one, two| one.1 == two.1) {
        classes.join(&own.iter().map(|(place, _)| *place).collect::<Vec<_>>(), Role::Bound);
    }
    close_squares(sketch, choice, &mut classes);
    settle_unjudged(&mut classes, outer.first().copied(), terms);
    let mut all = classes.finish(&name);
    for index in all.iter_mut().filter(|index| index.role == Role::Bound) {
        let own = signs.iter().find(|(place, _)| index.places.contains(place)).map(|(_, sign)| *sign);
        index.signs = own.map(|sign| sign_spans(sketch, sign, &name)).unwrap_or_default();
    }
    all
}

/// Where the sum sign whose letters begin at `start` has a letter.
fn sign_spans(sketch: &Sketch, start: u32, letter: &str) -> Vec<Span> {
    let end = sketch.code.iter().find_map(|op| match op {
        Op::Bind(first, end) if *first == start => Some(*end),
        _ => None,
    });
    let own = sketch.bound.get(start as usize..end.unwrap_or(start) as usize).unwrap_or_default();
    own.iter().filter(|bound| bound.letter == letter).map(|bound| bound.span).collect()
}

/// For every place the number of the outermost term that it stands in; none for places in an argument that does not
/// count.
fn terms_of_places(sketch: &Sketch, choice: &Choice) -> Vec<Option<u32>> {
    let mut terms = vec![None; sketch.places.len()];
    let (mut until, mut argument_until) = (0, 0);
    let mut term = None;
    for (at, op) in (0_u32..).zip(&sketch.code) {
        match op {
            Op::Term(number, end) if at >= until => (term, until) = (Some(*number), *end),
            Op::Argument(switch, end) if choice.on.get(*switch as usize) != Some(&true) => {
                argument_until = argument_until.max(*end);
            }
            Op::Place(place) => {
                if let Some(held) = terms.get_mut(*place as usize).filter(|_| at >= argument_until) {
                    *held = term;
                }
            }
            _ => {}
        }
    }
    terms
}

/// A square closes its index with itself, which is no event of the count.
fn close_squares(sketch: &Sketch, choice: &Choice, classes: &mut Classes) {
    for (at, op) in sketch.code.iter().enumerate() {
        let Op::Square(switch, end) = op else { continue };
        if choice.on.get(*switch as usize) != Some(&true) {
            continue;
        }
        for op in sketch.code.get(at..*end as usize).unwrap_or_default() {
            if let Op::Place(place) = op
                && classes.role(*place) == Some(Role::Unjudged)
            {
                classes.join(&[*place], Role::Summed);
            }
        }
    }
}

/// Places without an event: two in one term are a pair of it, one belongs to the free index if there is one.
fn settle_unjudged(classes: &mut Classes, free: Option<u32>, terms: &[Option<u32>]) {
    let open: Vec<u32> = classes.places().filter(|place| classes.role(*place) == Some(Role::Unjudged)).collect();
    let term = |place: u32| terms.get(place as usize).copied().flatten();
    let mut rest: Vec<u32> = free.into_iter().collect();
    // Places stand in the order of their terms.
    for own in open.chunk_by(|one, two| term(*one) == term(*two)) {
        match own {
            [first, _] if term(*first).is_some() => classes.join(own, Role::Summed),
            _ => rest.extend(own),
        }
    }
    classes.join(&rest, if free.is_some() { Role::Free } else { Role::Unjudged });
}

/// Places of one letter in classes: each place with the number of its class and the class's role.
struct Classes {
    /// Place, class, role.
    entries: Vec<(u32, u32, Role)>,
}

impl Classes {
    fn of(places: Vec<u32>) -> Self {
        Self { entries: places.into_iter().map(|place| (place, place, Role::Unjudged)).collect() }
    }

    fn places(&self) -> impl Iterator<Item = u32> + '_ {
        self.entries.iter().map(|(place, ..)| *place)
    }

    fn role(&self, place: u32) -> Option<Role> {
        self.entries.iter().find(|(other, ..)| *other == place).map(|(.., role)| *role)
    }

    /// Makes the classes of these places one that has at least this role.
    fn join(&mut self, places: &[u32], role: Role) {
        let own: Vec<(u32, Role)> = self
            .entries
            .iter()
            .filter(|(place, ..)| places.contains(place))
            .map(|(_, class, role)| (*class, *role))
            .collect();
        let Some(class) = own.iter().map(|(class, _)| *class).min() else { return };
        let role = own.iter().map(|(_, role)| *role).fold(role, Role::max);
        for entry in self.entries.iter_mut().filter(|entry| own.iter().any(|(class, _)| *class == entry.1)) {
            (entry.1, entry.2) = (class, role);
        }
    }

    /// What a macro uses twice stands at one place of the text.
    fn share_places(&mut self, sketch: &Sketch) {
        let span = |place: u32| sketch.place(place).map(|place| place.span);
        let places: Vec<u32> = self.places().collect();
        for (n, place) in places.iter().enumerate() {
            if let Some(before) = places.iter().take(n).find(|before| span(**before) == span(*place)) {
                self.join(&[*before, *place], Role::Unjudged);
            }
        }
    }

    fn finish(self, letter: &CompactString) -> Vec<Index> {
        let mut all: Vec<(u32, Index)> = Vec::new();
        for (place, class, role) in self.entries {
            match all.iter_mut().find(|(known, _)| *known == class) {
                Some((_, index)) => index.places.push(place),
                None => {
                    let index = Index { letter: letter.clone(), role, places: vec![place], signs: Vec::new() };
                    all.push((class, index));
                }
            }
        }
        all.into_iter().map(|(_, index)| index).collect()
    }
}
