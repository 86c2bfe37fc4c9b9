//! The count behind the balance: one walk over a sketch for one letter.
//!
//! This is where the time of a check goes, so that it works on numbers, passes over terms that do not hold the
//! letter and allocates only where events are asked for.

use crate::conventions::built_in::{LetterClass, class_of, is_derivative};
use crate::sketch::{Bound, Op, Place, Run, Shape, Sketch, Term};

use super::{Choice, Compared, Event, Odd, compared_groups};

/// Places of one letter that are told apart in one product; further ones change nothing.
const MOST_OPEN: usize = 8;

/// Places not closed in an inner scope.
#[derive(Clone, Copy, Debug, Default)]
struct Open {
    places: [u32; MOST_OPEN],
    count: usize,
}

impl Open {
    fn push(&mut self, place: u32) {
        if let Some(free) = self.places.get_mut(self.count) {
            *free = place;
            self.count += 1;
        }
    }

    fn as_slice(&self) -> &[u32] {
        self.places.get(..self.count).unwrap_or_default()
    }

    fn first(&self) -> Option<u32> {
        self.as_slice().first().copied()
    }
}

#[derive(Clone, Copy, Debug, Default)]
struct Tally {
    open: Open,
    /// A place of a pair closed in an inner scope.
    closed: Option<u32>,
    odd: Odd,
    /// Not to be judged: a power of something with a free index.
    skip: bool,
    /// An argument that does not count holds the letter.
    lent: bool,
}

impl Tally {
    fn add(&mut self, other: Self) {
        other.open.as_slice().iter().for_each(|place| self.open.push(*place));
        self.closed = self.closed.or(other.closed);
        self.odd = self.odd.max(other.odd);
        self.skip |= other.skip;
        self.lent |= other.lent;
    }
}

/// Compared terms: how many, in how many the letter is free, and the list if events are asked for.
#[derive(Default)]
struct Comparison {
    terms: usize,
    free: usize,
    first_free: Option<u32>,
    /// Terms without the letter that are not bare numbers.
    lacking: usize,
    /// Terms in which the letter stands twice.
    twice: usize,
    list: Vec<Compared>,
}

/// The sum sign that binds the letter here, if one does: where its letters begin in `Sketch::bound`.
type Binding = Option<u32>;

/// A count of one letter under one choice.
pub(super) struct Count<'a> {
    sketch: &'a Sketch,
    choice: &'a Choice,
    letter: u16,
    bit: u64,
    events: Option<&'a mut Vec<Event>>,
}

impl<'a> Count<'a> {
    pub(super) fn new(sketch: &'a Sketch, choice: &'a Choice, letter: u16, events: Option<&'a mut Vec<Event>>) -> Self {
        Count { sketch, choice, letter, bit: Sketch::bit(letter), events }
    }

    /// The whole statement.
    pub(super) fn statement(&mut self) -> Odd {
        let sketch = self.sketch;
        let Some(groups) = compared_groups(sketch, self.choice) else {
            let mut compared = Comparison::default();
            let mut odd = Odd::Balanced;
            for (number, side) in (0_u32..).zip(&sketch.sides) {
                odd = odd.max(self.terms(side.code, None, Some(number), &mut compared).odd);
            }
            return odd.max(self.compare(compared));
        };
        let mut odd = Odd::Balanced;
        for group in 0..=groups.last().copied().unwrap_or(0) {
            let mut compared = Comparison::default();
            for ((number, side), own) in (0_u32..).zip(&sketch.sides).zip(&groups) {
                if *own == group {
                    odd = odd.max(self.terms(side.code, None, Some(number), &mut compared).odd);
                }
            }
            odd = odd.max(self.compare(compared));
        }
        odd
    }

    /// One term: its free place and a place of a summed pair.
    pub(super) fn term(&mut self, term: &Term, inside: Run) -> (Option<u32>, Option<u32>) {
        if term.letters & self.bit == 0 {
            return (None, None);
        }
        let mut tally = Tally::default();
        self.product(inside, &mut None, &mut tally);
        let settled = self.settle(tally);
        (settled.open.first(), settled.closed)
    }

    /// Whether the compared terms agree.
    fn compare(&mut self, compared: Comparison) -> Odd {
        if compared.free == 0 {
            return Odd::Balanced;
        }
        // `r_i + p_i = 1`: numbers named by a letter, one formula for each.
        // Where sums are written out, a letter that stands twice need not be summed: `F c_i = \epsilon_i \sum_j S_j c_i`.
        let unsummed = || self.sketch.reach.is_some() && compared.free + compared.twice == compared.terms;
        let agree = compared.free == compared.terms || unsummed() || compared.lacking == 0 && self.numbers_quantities();
        if let Some(events) = &mut self.events {
            events.push(Event::Terms(compared.list));
        }
        if agree { Odd::Balanced } else { Odd::Mismatch }
    }

    /// Settles every term of a sum; those that can be compared are added to `out`.
    fn terms(&mut self, run: Run, bound: Binding, side: Option<u32>, out: &mut Comparison) -> Tally {
        let reach = self.sketch.reach.is_some_and(|switch| self.is_on(switch));
        let mut sum = Tally::default();
        let mut bound_so_far = bound;
        let mut at = run.start;
        while let Some((term, inside)) = self.term_at(at, run) {
            at = inside.end;
            let mut bound_here = bound_so_far;
            let mut tally = Tally::default();
            if reach || term.letters & self.bit != 0 {
                self.product(inside, &mut bound_here, &mut tally);
            }
            if reach {
                bound_so_far = bound_here;
            }
            // What an unknown command prints may close what is open here.
            if term.opaque && tally.open.count == 1 {
                sum.skip = true;
                continue;
            }
            let loose = term.loose.is_some_and(|switch| self.is_on(switch));
            let lent = tally.lent && tally.open.count == 0;
            if term.any || loose || lent || term.shorthand && self.takes_shorthand() {
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
                out.twice += usize::from(settled.open.count == 0 && settled.closed.is_some());
                self.note(term, settled.open.first(), side, out);
            }
        }
        sum
    }

    fn note(&self, term: &Term, free: Option<u32>, side: Option<u32>, out: &mut Comparison) {
        out.terms += 1;
        out.free += usize::from(free.is_some());
        out.lacking += usize::from(free.is_none() && !term.number);
        out.first_free = out.first_free.or(free);
        if self.events.is_some() {
            out.list.push(Compared { span: term.span, free, side, number: term.number });
        }
    }

    /// Closes what a product holds twice.
    fn settle(&mut self, mut tally: Tally) -> Tally {
        let open = tally.open.count;
        if open > 2 && !self.names_component(tally.open.as_slice()) {
            tally.odd = tally.odd.max(Odd::Thrice);
            self.tell(|| Event::Thrice(tally.open.as_slice().to_vec()));
        } else if let (true, Some(inner)) = (open > 0, tally.closed) {
            tally.odd = tally.odd.max(Odd::Captured);
            self.tell(|| Event::Captured(tally.open.as_slice().to_vec(), inner));
        }
        if let [first, second] = *tally.open.as_slice() {
            self.tell(|| Event::Pair(first, second));
            tally.closed = Some(first);
            tally.open = Open::default();
        }
        tally
    }

    fn tell(&mut self, event: impl FnOnce() -> Event) {
        if let Some(events) = &mut self.events {
            events.push(event());
        }
    }

    /// The term that begins at an instruction of a run.
    fn term_at(&self, at: u32, run: Run) -> Option<(&'a Term, Run)> {
        if at >= run.end {
            return None;
        }
        let Op::Term(number, end) = self.sketch.code.get(at as usize).copied()? else { return None };
        self.sketch.terms.get(number as usize).map(|term| (term, Run { start: at + 1, end }))
    }

    fn product(&mut self, run: Run, bound: &mut Binding, out: &mut Tally) {
        let mut at = run.start;
        while at < run.end {
            let Some(op) = self.sketch.code.get(at as usize).copied() else { return };
            at = self.op(op, at + 1, bound, out);
        }
    }

    /// One instruction; what it holds begins at `inside`. Returns where the next one stands.
    fn op(&mut self, op: Op, inside: u32, bound: &mut Binding, out: &mut Tally) -> u32 {
        match op {
            Op::Place(number) => {
                if self.is_index(number) {
                    match *bound {
                        None => out.open.push(number),
                        Some(sign) => self.tell(|| Event::Bound(number, sign)),
                    }
                }
                inside
            }
            Op::Sum(end) | Op::Term(_, end) => {
                let sum = self.sum(Run { start: inside, end }, *bound);
                out.add(sum);
                end
            }
            Op::Square(switch, end) => {
                let mut tally = self.alone(inside, end, bound);
                if self.is_on(switch) && tally.open.count == 1 {
                    tally.closed = tally.open.first();
                    tally.open = Open::default();
                }
                out.add(tally);
                end
            }
            Op::Power(end) => {
                let mut tally = self.alone(inside, end, bound);
                tally.skip |= tally.open.count == 1;
                tally.open = Open::default();
                out.add(tally);
                end
            }
            Op::Scope(end) => {
                let tally = self.alone(inside, end, bound);
                out.add(Tally { closed: None, ..tally });
                end
            }
            Op::Argument(switch, end) if !self.is_on(switch) => {
                let held = self.alone(inside, end, bound);
                // An argument by its looks; one that only might be one lends nothing.
                let lends = self.sketch.switches.get(switch as usize).is_some_and(|switch| switch.lends);
                out.lent |= lends && held.open.count > 0;
                end
            }
            Op::Argument(_, end) => {
                self.product(Run { start: inside, end }, bound, out);
                end
            }
            Op::Switch(switch, end) => {
                if self.is_on(switch) {
                    self.product(Run { start: inside, end }, bound, out);
                }
                end
            }
            Op::Bind(start, end) => {
                let letters = self.sketch.bound.get(start as usize..end as usize).unwrap_or_default();
                let name = self.name();
                let binds = |one: &Bound| one.letter == name && one.switch.is_none_or(|switch| self.is_on(switch));
                if letters.iter().any(binds) {
                    *bound = Some(start);
                }
                inside
            }
        }
    }

    fn alone(&mut self, start: u32, end: u32, bound: &mut Binding) -> Tally {
        let mut tally = Tally::default();
        self.product(Run { start, end }, bound, &mut tally);
        tally
    }

    /// A sum in brackets brings a free index to the product around it; its dummies are its own.
    fn sum(&mut self, run: Run, bound: Binding) -> Tally {
        let mut compared = Comparison::default();
        let mut tally = self.terms(run, bound, None, &mut compared);
        if let Some(free) = compared.first_free {
            tally.open.push(free);
        }
        tally.skip &= compared.terms == 0;
        if compared.terms > 1 {
            tally.odd = tally.odd.max(self.compare(compared));
        }
        tally
    }

    /// `\Gamma^0_{jj} T^{jj}`: a letter that stands only twice over in scripts of its own names a component.
    fn names_component(&self, places: &[u32]) -> bool {
        let alone = |place: &Place| {
            let mine = self.sketch.places.iter().filter(|other| other.script == place.script);
            place.company == 2 && mine.filter(|other| other.number == self.letter).count() == 2
        };
        places.iter().all(|place| self.sketch.place(*place).is_some_and(alone))
    }

    /// Whether the letter numbers quantities rather than components: a small Latin letter, only on kernels that carry
    /// nothing else and do not differentiate.
    fn numbers_quantities(&self) -> bool {
        let name = self.name();
        let mut mine = self.sketch.units.iter().filter(|unit| unit.letter == name);
        class_of(name) != LetterClass::Greek
            && mine.all(|unit| unit.shape == Shape::Lone && !is_derivative(&unit.kernel_letter))
    }

    /// Whether a term in vector notation may stand for one with this letter free: not where the vectors themselves
    /// carry indices (`\mathbf v = v_i \mathbf e_i` is closed), nor where two letters are free on a kernel each.
    fn takes_shorthand(&self) -> bool {
        let index = |place: &&Place| self.choice.index.get(place.unit as usize) == Some(&true);
        let places = || self.sketch.places.iter().filter(index);
        let unit = |place: &Place| self.sketch.units.get(place.unit as usize);
        if places().any(|place| unit(place).is_some_and(|unit| unit.vector)) {
            return false;
        }
        let lone = |letter: u16| {
            let mut count = 0;
            for place in places().filter(|place| place.number == letter) {
                if unit(place).is_none_or(|unit| unit.shape != Shape::Lone) {
                    return false;
                }
                count += 1;
            }
            count % 2 == 1
        };
        !lone(self.letter) || self.sketch.letter_numbers().filter(|letter| lone(*letter)).count() < 2
    }

    fn is_index(&self, number: u32) -> bool {
        let place = self.sketch.place(number).filter(|place| place.number == self.letter);
        place.is_some_and(|place| self.choice.index.get(place.unit as usize) == Some(&true))
    }

    fn is_on(&self, switch: u32) -> bool {
        self.choice.on.get(switch as usize).copied().unwrap_or(false)
    }

    fn name(&self) -> &'a str {
        self.sketch.letters.get(self.letter as usize).map_or("", |letter| letter.as_str())
    }
}
