//! Terms that are not written out: `O(h^2)`, `\mathcal O(\|h\|^2)`, `\order{h^2}`.
//!
//! The one idea: such a term is nothing, and what it says is up to which order in the small kernels the sides are
//! compared. The lowest order of all counts, wherever it stands: that can only make a claim say less. Trap: without
//! the word that a kernel is small there is no order to count, and the term is refused.

use indexwise_algebra::expression::Expression;
use indexwise_grammar::conventions::Kind;
use indexwise_grammar::tree::{Atom, Bracket, Factor, Joint, Kernel, Sum, Term};

use crate::ledger::shown;
use crate::terms::uses::use_of;

use super::{Lowering, Refusal, scripts};

impl Lowering<'_, '_, '_> {
    /// The terms of a sum that are written out.
    pub(super) fn terms(&mut self, sum: &Sum) -> Result<Vec<Expression>, Refusal> {
        let mut terms = Vec::with_capacity(sum.terms.len());
        for term in &sum.terms {
            match self.order_of(term)? {
                Some(order) => self.neglect(order),
                None => terms.push(self.term(term)?),
            }
        }
        if terms.is_empty() && !sum.terms.is_empty() {
            terms.push(Expression::zero());
        }
        Ok(terms)
    }

    /// From this order on nothing is compared.
    fn neglect(&mut self, order: usize) {
        self.neglected = Some(self.neglected.map_or(order, |other| other.min(order)));
    }

    /// The order of a term that is not written out; nothing for every other term.
    fn order_of(&self, term: &Term) -> Result<Option<usize>, Refusal> {
        let held = match term.factors.as_slice() {
            [Factor { atom: Atom::Order(sum), .. }] => sum.as_deref(),
            [sign, bracket] if self.is_order_sign(sign) => held(bracket),
            _ => return Ok(None),
        };
        let Some([one]) = held.map(|sum| sum.terms.as_slice()) else {
            return Err("what terms are left out is not understood".to_owned());
        };
        let degree = |order: usize, factor| Ok(order.saturating_add(self.degree(factor)?));
        match one.factors.iter().try_fold(0, degree) {
            // A definition keeps what is not known of it.
            Err(_) if self.defines => Ok(None),
            other => other.map(Some),
        }
    }

    /// `O` or `\mathcal O`, if nothing else is said of it.
    fn is_order_sign(&self, factor: &Factor) -> bool {
        let Atom::Kernel(Kernel { name, letter, .. }) = &factor.atom else { return false };
        letter == "O"
            && matches!(name.as_str(), "O" | "\\mathcal O" | "\\mathscr O" | "\\mathrm O")
            && factor.scripts.is_empty()
            && factor.marks.is_empty()
            && !self.surroundings.meanings.declares(name)
    }

    /// The degree of a factor in small kernels, bars around it or not.
    fn degree(&self, factor: &Factor) -> Result<usize, Refusal> {
        let inner = match &factor.atom {
            Atom::Group(group) if group.bracket == Bracket::Bars => {
                match held(factor).map(|sum| sum.terms.as_slice()) {
                    Some([Term { factors, .. }]) => factors.first().filter(|_| factors.len() == 1),
                    _ => None,
                }
            }
            _ => Some(factor),
        };
        let Some(Factor { atom: Atom::Kernel(kernel), .. }) = inner else {
            return Err("what terms are left out is not understood".to_owned());
        };
        let made = use_of(inner.unwrap_or(factor), kernel, self.eyes, false);
        if !self.surroundings.meanings.is_kind(&made.kernel, Kind::Small) {
            return Err(format!("nothing says that {} is small", shown(&made.kernel)));
        }
        let power = scripts::power(factor)?.map_or(Some(1), |power| usize::try_from(power.numerator()).ok());
        power.ok_or_else(|| "what terms are left out is not understood".to_owned())
    }
}

/// What a bracket holds, if it is one sum.
fn held(factor: &Factor) -> Option<&Sum> {
    let Atom::Group(group) = &factor.atom else { return None };
    let [part] = group.parts.as_slice() else { return None };
    let [sum] = part.sides.as_slice() else { return None };
    (factor.joint == Joint::Beside).then_some(sum)
}
