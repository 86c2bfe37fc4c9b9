//! Questions about the habits of a document, with their answers: what a judgement rests on.
//!
//! While a statement is judged, every question is noted. The judgement holds as long as all of its questions have the
//! same answers; different judgements ask the same questions, so that each is numbered and asked again only once for a
//! new version of the document.

use std::cell::RefCell;

use compact_str::CompactString;
use rustc_hash::FxHashMap;

use crate::sketch::Unit;

/// A question that `Prices` answers; the function of a like name there says what it asks.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Inquiry {
    /// `score`.
    Score(Unit),
    /// `is_cartesian`.
    WritesBelow,
    /// `speaks_of_levels`.
    TellsLevels(CompactString),
    /// `level_habit`.
    Levels(CompactString),
    /// `kernel_ignores_levels`.
    IgnoresLevels(Unit),
    /// `free_levels_in_force`.
    FreeLevels(CompactString),
    /// `is_index_notation`.
    IndexNotation(CompactString),
    /// `trusts`, of one command.
    Trusts(CompactString),
    /// `both_strange`, of one of the two.
    Strange(Unit),
    /// `is_curved`.
    Curved,
    /// `uses`.
    Uses((CompactString, u8, u8)),
    /// `lone_uses`, of a kernel and a letter.
    Alone(CompactString, CompactString),
    /// `staggering`.
    Staggering((CompactString, u8, u8)),
}

/// The questions asked of one document.
#[derive(Debug, Default)]
pub struct Inquiries(RefCell<Noted>);

#[derive(Debug, Default)]
struct Noted {
    numbers: FxHashMap<Inquiry, u32>,
    /// Every question with its answer now, by its number.
    asked: Vec<(Inquiry, i64)>,
    /// The numbers of those asked since `take` was called last.
    lately: Vec<u32>,
}

impl Inquiries {
    /// Notes a question that was asked just now.
    pub(super) fn note(&self, inquiry: Inquiry, answer: i64) {
        let mut noted = self.0.borrow_mut();
        let number = match noted.numbers.get(&inquiry) {
            Some(number) => *number,
            None => {
                let number = u32::try_from(noted.asked.len()).unwrap_or(u32::MAX);
                noted.asked.push((inquiry.clone(), answer));
                noted.numbers.insert(inquiry, number);
                number
            }
        };
        noted.lately.push(number);
    }

    /// The numbers of the questions asked since this was called last, in order, each once.
    pub fn take(&self) -> Box<[u32]> {
        let mut lately = std::mem::take(&mut self.0.borrow_mut().lately);
        lately.sort_unstable();
        lately.dedup();
        lately.into_boxed_slice()
    }

    /// Asks everything again under new evidence: for each question, whether its answer is another one.
    pub fn ask_again(&self, answer_to: impl Fn(&Inquiry) -> i64) -> Vec<bool> {
        let mut noted = self.0.borrow_mut();
        let again = |(inquiry, answer): &mut (Inquiry, i64)| {
            let now = answer_to(inquiry);
            std::mem::replace(answer, now) != now
        };
        noted.asked.iter_mut().map(again).collect()
    }
}
