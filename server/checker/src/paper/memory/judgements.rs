//! What was found in a statement, kept for as long as all that it rests on stays the same.
//!
//! A judgement rests on the statement's own text, its reading, the words after its formula, what the usual kernels are
//! taken for, and the answers to the questions about habits that the rules asked (`conventions/inquiries.rs`). The macros
//! and the meanings in force are looked after by `memory.rs`.

use std::sync::Arc;

use indexwise_grammar::span::Span;

use crate::conventions::inquiries::Inquiries;
use crate::conventions::prices::Prices;
use crate::finding::Finding;
use crate::reading::Reading;
use crate::terms::symmetries::Customs;

use super::super::reads::Statement;
use super::Remembered;

/// The words after a formula that a judgement may look at, in characters.
const AFTER: usize = 90;

/// Questions that are kept; beyond, all are forgotten with the judgements that rest on them.
const QUESTIONS: usize = 200_000;

/// What judgements of a document rest on together.
#[derive(Default)]
pub(crate) struct Known {
    inquiries: Inquiries,
    /// For each question, whether its answer is another one than when the document was judged last.
    changed: Vec<bool>,
    /// A count that moves on when everything is to be forgotten.
    age: u32,
}

/// What was found in a statement.
#[derive(Clone, Debug)]
pub(crate) struct Judgement {
    /// The findings where the statement stood then.
    pub findings: Vec<Finding>,
    /// Whether it balances, so that its steps are worth a look.
    pub balanced: bool,
    basis: Basis,
    /// Where it stood then.
    moved: i32,
    questions: Box<[u32]>,
    age: u32,
}

/// What a judgement rests on, apart from questions.
#[derive(Clone, Debug)]
pub(crate) struct Basis {
    reading: Arc<Reading>,
    customs: Customs,
    /// The words after the formula, and how many bytes the next one is away, if that is less.
    after: Box<str>,
    next: Option<u32>,
}

impl Basis {
    /// The basis of a statement of a formula; `next` is where the next formula begins.
    pub fn of(statement: &Statement, customs: Customs, text: &str, formula: Span, next: Option<u32>) -> Self {
        let rest = text.get(formula.end as usize..).unwrap_or_default();
        let end = rest.char_indices().nth(AFTER).map_or(rest.len(), |(at, _)| at);
        let next = next.and_then(|next| next.checked_sub(formula.end)).filter(|next| (*next as usize) < end);
        let after = rest.get(..end).unwrap_or_default().into();
        Self { reading: statement.reading.clone(), customs, after, next }
    }

    fn is(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.reading, &other.reading)
            && self.customs == other.customs
            && self.next == other.next
            && self.after == other.after
    }
}

impl Known {
    /// No judgement holds any more.
    pub fn forget(&mut self) {
        *self = Self { age: self.age.wrapping_add(1), ..Self::default() };
    }

    /// Asks all questions again, before the document is judged.
    pub fn ask_again(&mut self, prices: &Prices<'_>) {
        self.changed = self.inquiries.ask_again(|inquiry| prices.answer(inquiry));
        if self.changed.len() > QUESTIONS {
            self.forget();
        }
    }

    /// Hands out the questions, to be noted by whoever judges.
    pub fn lend(&mut self) -> Inquiries {
        std::mem::take(&mut self.inquiries)
    }

    /// Takes the questions back.
    pub fn take_back(&mut self, inquiries: Inquiries) {
        self.inquiries = inquiries;
    }
}

impl Remembered {
    /// What was found in a statement, where it stands now; nothing if it has to be judged again.
    pub fn recall(&self, statement: &Statement, basis: &Basis) -> Option<Judgement> {
        let judgement = self.formulas.statement(statement.place)?.judgement.as_ref()?;
        let changed = |question: &u32| self.known.changed.get(*question as usize) != Some(&false);
        if judgement.age != self.known.age || !judgement.basis.is(basis) || judgement.questions.iter().any(changed) {
            return None;
        }
        let mut judgement = judgement.clone();
        let by = statement.moved - judgement.moved;
        if by != 0 {
            judgement.findings.iter_mut().for_each(|finding| finding.move_spans(|span| span.moved(by)));
        }
        Some(judgement)
    }

    /// Keeps what was found in a statement just now.
    pub fn remember(
        &mut self,
        statement: &Statement,
        basis: Basis,
        questions: Box<[u32]>,
        (findings, balanced): (&[Finding], bool),
    ) {
        let age = self.known.age;
        if let Some(kept) = self.formulas.statement_mut(statement.place) {
            let (findings, moved) = (findings.to_vec(), statement.moved);
            kept.judgement = Some(Judgement { findings, balanced, basis, moved, questions, age });
        }
    }
}
