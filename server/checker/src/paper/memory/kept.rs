//! Formulas by their text: what was read once is not read again.
//!
//! A formula is found by a hash of its text and then compared, so that no chance is taken. Only formulas of the version
//! before are kept: an edit changes few, and what nobody has is dropped.

use std::hash::{Hash, Hasher};
use std::sync::Arc;

use indexwise_grammar::hosts::{Region, Setting};
use indexwise_grammar::read_regions;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Formula;
use rustc_hash::{FxHashMap, FxHasher};

use crate::reading::Reading;
use crate::sketch::{Sketch, Unit};

use super::super::reads::Read;
use super::ROUNDS;
use super::judgements::Judgement;

/// Units of formulas that are gone are kept up to this number in any case.
const UNITS_SPARED: usize = 10_000;

/// The formulas of a document, by numbers that stay while a formula is kept.
#[derive(Default)]
pub(super) struct Formulas {
    pub kept: Vec<Option<Kept>>,
    free: Vec<u32>,
    by_hash: FxHashMap<u64, Vec<u32>>,
    pub units: Units,
}

/// A formula.
pub(super) struct Kept {
    text: Box<str>,
    layout: Layout,
    /// Where it stood when it was read.
    base: u32,
    /// Without its statements.
    formula: Formula,
    pub statements: Vec<KeptStatement>,
    /// How often it stands in the document, and how often without being skipped; now and in the version before.
    stands: u32,
    pub times: u32,
    pub times_before: u32,
}

/// What else the reading of a formula depends on, in bytes from its start.
#[derive(PartialEq, Eq)]
struct Layout {
    body: Span,
    holes: Vec<Span>,
    setting: Setting,
    /// How many definitions of the document stand before it.
    definitions: usize,
}

/// A statement with scripts.
pub(super) struct KeptStatement {
    pub sketch: Arc<Sketch>,
    /// Its units by their numbers in the document.
    pub units: Box<[u32]>,
    /// Its readings, round by round, and the last under all counts.
    pub readings: [Option<Arc<Reading>>; ROUNDS + 1],
    pub judgement: Option<Judgement>,
}

/// All units of a document. The same come again and again, so that each is numbered and scored once.
#[derive(Default)]
pub(super) struct Units {
    pub list: Vec<Unit>,
    numbers: FxHashMap<Unit, u32>,
}

impl Units {
    fn number(&mut self, unit: &Unit) -> u32 {
        if let Some(number) = self.numbers.get(unit) {
            return *number;
        }
        let number = u32::try_from(self.list.len()).unwrap_or(u32::MAX);
        self.list.push(unit.clone());
        self.numbers.insert(unit.clone(), number);
        number
    }
}

impl Formulas {
    /// Reads the formulas of a scanned document, those that are not kept; each formula's number, in their order.
    pub fn read(&mut self, read: &mut Read) -> Vec<u32> {
        let Read { text, host, document, macros, .. } = read;
        for kept in self.kept.iter_mut().flatten() {
            (kept.stands, kept.times_before, kept.times) = (0, kept.times, 0);
        }
        let regions = &document.scan.regions;
        let definitions = &document.scan.definitions;
        let layout = |region: &Region| Layout {
            body: within(region.body, region.span),
            holes: region.holes.iter().map(|hole| within(*hole, region.span)).collect(),
            setting: region.setting,
            definitions: definitions.partition_point(|definition| definition.span.end <= region.span.start),
        };
        let mut places: Vec<Option<u32>> = Vec::with_capacity(regions.len());
        let mut missing: Vec<(usize, u64, Layout)> = Vec::new();
        for (number, region) in regions.iter().enumerate() {
            let (own, layout) = (region.span.of(text), layout(region));
            let hash = hash_of(own);
            let known = self.find(hash, own, &layout);
            if known.is_none() {
                missing.push((number, hash, layout));
            }
            places.push(known);
        }
        let mut at = missing.into_iter();
        let unread: Vec<&Region> =
            places.iter().zip(regions).filter(|(place, _)| place.is_none()).map(|(_, region)| region).collect();
        read_regions(unread.into_iter(), text, *host, macros, |formula| {
            let Some((number, hash, layout)) = at.next() else { return };
            let own = formula.span.of(text);
            // The same formula may stand twice in what is new.
            let place = self.find(hash, own, &layout).unwrap_or_else(|| self.keep(hash, own, layout, formula));
            if let Some(slot) = places.get_mut(number) {
                *slot = Some(place);
            }
        });
        let places: Vec<u32> = places.into_iter().map(Option::unwrap_or_default).collect();
        document.formulas =
            places.iter().zip(&document.scan.regions).map(|(place, region)| self.formula(*place, region)).collect();
        places
    }

    fn find(&self, hash: u64, text: &str, layout: &Layout) -> Option<u32> {
        let candidates = self.by_hash.get(&hash)?;
        let same = |kept: &Kept| *kept.text == *text && kept.layout == *layout;
        candidates.iter().copied().find(|number| self.get(*number).is_some_and(same))
    }

    fn get(&self, number: u32) -> Option<&Kept> {
        self.kept.get(number as usize)?.as_ref()
    }

    fn keep(&mut self, hash: u64, text: &str, layout: Layout, mut formula: Formula) -> u32 {
        let sketches = std::mem::take(&mut formula.statements);
        let sketches = sketches.iter().map(Sketch::of).filter(|sketch| !sketch.places.is_empty());
        let units = &mut self.units;
        let statement = |sketch: Sketch| KeptStatement {
            units: sketch.units.iter().map(|unit| units.number(unit)).collect(),
            sketch: Arc::new(sketch),
            readings: Default::default(),
            judgement: None,
        };
        let statements = sketches.map(statement).collect();
        let base = formula.span.start;
        let kept = Kept { text: text.into(), layout, base, formula, statements, stands: 0, times: 0, times_before: 0 };
        let number = match self.free.pop() {
            Some(number) => number,
            None => {
                self.kept.push(None);
                u32::try_from(self.kept.len() - 1).unwrap_or(u32::MAX)
            }
        };
        if let Some(slot) = self.kept.get_mut(number as usize) {
            *slot = Some(kept);
        }
        self.by_hash.entry(hash).or_default().push(number);
        number
    }

    /// A formula where its region stands.
    fn formula(&mut self, number: u32, region: &Region) -> Formula {
        let Some(kept) = self.kept.get_mut(number as usize).and_then(Option::as_mut) else { return Formula::default() };
        kept.stands += 1;
        let mut formula = kept.formula.clone();
        let moved = distance(kept.base, region.span.start);
        if moved != 0 {
            formula.move_spans(|span| span.moved(moved));
        }
        formula
    }

    /// Counts a formula that is not skipped, and hands out its statements by their numbers, with how far they moved.
    pub fn count(&mut self, number: u32, start: u32, mut take: impl FnMut(u32, &Arc<Sketch>, i32)) {
        let Some(kept) = self.kept.get_mut(number as usize).and_then(Option::as_mut) else { return };
        kept.times += 1;
        let moved = distance(kept.base, start);
        for (at, statement) in (0..).zip(&kept.statements) {
            take(at, &statement.sketch, moved);
        }
    }

    /// A statement of a formula.
    pub fn statement(&self, (formula, statement): (u32, u32)) -> Option<&KeptStatement> {
        self.get(formula)?.statements.get(statement as usize)
    }

    /// A statement of a formula.
    pub fn statement_mut(&mut self, (formula, statement): (u32, u32)) -> Option<&mut KeptStatement> {
        self.kept.get_mut(formula as usize)?.as_mut()?.statements.get_mut(statement as usize)
    }

    /// Whether most units are of formulas that are gone.
    pub fn is_littered(&self) -> bool {
        let used = self.kept.iter().flatten().flat_map(|kept| &kept.statements).map(|statement| statement.units.len());
        self.units.list.len() > UNITS_SPARED + 2 * used.sum::<usize>()
    }

    /// Drops the formulas that the document has no more.
    pub fn drop_gone(&mut self) {
        for (number, slot) in (0..).zip(&mut self.kept) {
            let Some(kept) = slot.as_ref().filter(|kept| kept.stands == 0) else { continue };
            let hash = hash_of(&kept.text);
            if let Some(numbers) = self.by_hash.get_mut(&hash) {
                numbers.retain(|other| *other != number);
                if numbers.is_empty() {
                    self.by_hash.remove(&hash);
                }
            }
            *slot = None;
            self.free.push(number);
        }
    }
}

fn within(span: Span, whole: Span) -> Span {
    Span { start: span.start.saturating_sub(whole.start), end: span.end.saturating_sub(whole.start) }
}

fn distance(from: u32, to: u32) -> i32 {
    i32::try_from(i64::from(to) - i64::from(from)).unwrap_or_default()
}

fn hash_of(text: &str) -> u64 {
    let mut hasher = FxHasher::default();
    text.hash(&mut hasher);
    hasher.finish()
}
