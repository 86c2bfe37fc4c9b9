//! What a kernel stands for: a definition, a metric and what follows from it, a symbol, a field.

use compact_str::CompactString;
use indexwise_algebra::expression::{Curvature, Expression, Filling, Index};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::rational::Rational;
use indexwise_algebra::sample::SlotSymmetry;
use indexwise_grammar::conventions::{self, Kind};
use indexwise_grammar::tree::{Atom, Factor, Joint};

use crate::conventions::built_in::is_metric_by_custom;
use crate::conventions::meanings::Role;
use crate::ledger::shown;
use crate::terms::Piece;
use crate::terms::symmetries::exchanges;
use crate::terms::uses::{Origin, Use, UsedSlot};

use super::{Lowered, Lowering, Operator, Refusal, Way, scripts, wrapped};

impl Lowering<'_, '_, '_> {
    /// Whether a kernel varies what stands after it: a bare `\delta`, or one that is declared a variation.
    pub(super) fn is_variation(&self, made: &Use, rest: &[Factor]) -> bool {
        let declared = self.surroundings.meanings.is_kind(&made.kernel, Kind::Variation);
        let custom = made.kernel == "\\delta" && !self.surroundings.meanings.declares(&made.kernel);
        made.slots.is_empty() && !made.power && !rest.is_empty() && (declared || custom)
    }

    /// A kernel with its scripts, and how many of the following factors are its arguments.
    pub(super) fn kernel(
        &mut self,
        factor: &Factor,
        made: Use,
        rest: &[Factor],
    ) -> Result<(Expression, usize), Refusal> {
        if made.unread || !factor.marks.is_empty() {
            return Err(format!("the scripts of {} are not understood", shown(&made.kernel)));
        }
        if self.surroundings.meanings.is_kind(&made.kernel, Kind::NonCommuting) {
            return Err(format!("{} does not commute", shown(&made.kernel)));
        }
        let arguments = usize::from(rest.first().is_some_and(|next| self.is_argument(&made, next)));
        if arguments == 0 && rest.first().is_some_and(is_lone_letter_in_brackets) {
            return Err(format!("what {} takes in brackets is not understood", shown(&made.kernel)));
        }
        let own: Vec<UsedSlot> = made.own_slots().cloned().collect();
        let slots: Vec<Index> = own.iter().map(|slot| self.index(slot)).collect::<Result<_, _>>()?;
        let value = self.meaning(&made, &own, slots)?;
        // Derivatives after the slots act in their order: `A_{a;bc}` is `\nabla_c \nabla_b A_a`.
        let mut of = value;
        for slot in made.slots.iter().filter(|slot| slot.origin != Origin::Own) {
            let index = self.index(slot)?;
            let operator = match slot.origin {
                Origin::Covariant if index.level != Level::Inert => {
                    Operator::Covariant(self.surroundings.metric_of(index.family), index)
                }
                _ => Operator::Partial(index),
            };
            of = wrapped(vec![operator], of);
        }
        if made.power {
            let power = scripts::power(factor)?
                .ok_or_else(|| format!("a power of {} is not understood", shown(&made.kernel)))?;
            of = self.powered_by(of, power)?;
        }
        Ok((of, arguments))
    }

    /// `\phi(x)`, `A_i(x^j)`: where a field is taken, not a factor.
    pub(super) fn is_argument(&self, made: &Use, next: &Factor) -> bool {
        let Atom::Group(group) = &next.atom else { return false };
        let point = |factor: &Factor| match &factor.atom {
            Atom::Kernel(kernel) => matches!(kernel.letter.as_str(), "x" | "y" | "t" | "r" | "s" | "z"),
            _ => false,
        };
        let points = group.parts.iter().flat_map(|part| &part.sides).all(|side| {
            side.terms.len() == 1
                && side.terms.iter().all(|term| term.factors.len() == 1 && term.factors.iter().all(point))
        });
        next.joint == Joint::Beside && points && !made.power && next.scripts.is_empty() && !group.parts.is_empty()
    }

    fn meaning(&mut self, made: &Use, own: &[UsedSlot], slots: Vec<Index>) -> Lowered {
        if let Some(definition) = self.surroundings.definition(&made.kernel, slots.len()) {
            if let Some(value) = self.defined_metric(made, &slots) {
                return Ok(value);
            }
            let own = self.surroundings.world.definitions.get(definition).map(|own| own.free.clone());
            self.move_slots(&slots, own.unwrap_or_default().iter().map(|index| index.level));
            return Ok(Expression::Defined { definition, slots });
        }
        let known = self.surroundings.meanings.known(&made.kernel, slots.len());
        let role = known.and_then(|known| known.role.clone());
        // A definition alone does not make a kernel another than it is by custom.
        let declared = known.is_some_and(|known| known.is_settled() || known.traceless);
        match role {
            Some(Role::Metric { .. }) => return self.metric(made, &slots),
            Some(Role::Christoffel) => return self.christoffel(made, slots),
            Some(Role::Curvature(kind)) => return self.curvature(made, kind, slots),
            None => {}
        }
        if !declared && let Some(value) = self.by_custom(made, &slots)? {
            return Ok(value);
        }
        self.epsilon(made, &slots).unwrap_or_else(|| self.field(made, own, slots))
    }

    /// What the usual kernels stand for where nothing is declared.
    fn by_custom(&mut self, made: &Use, slots: &[Index]) -> Result<Option<Expression>, Refusal> {
        let plain = |made: &Use| made.kernel == made.letter;
        Ok(Some(match (made.letter.as_str(), slots) {
            ("\\delta", [one, two]) if plain(made) => Expression::Delta([*one, *two]),
            // With nothing after it that it could vary.
            ("\\delta", []) if plain(made) && self.surroundings.has_matrices() => Expression::Delta(self.frame()?),
            (_, [one, two]) if is_metric_by_custom(&made.kernel) => {
                if one.level == Level::Inert || two.level == Level::Inert {
                    return Err(format!("{} stands with indices that have no levels", shown(&made.kernel)));
                }
                self.metric(made, slots)?
            }
            ("g", []) if plain(made) => {
                let family = self.levelled_family()?;
                let metric = self.surroundings.metric_of(family);
                if self.surroundings.world.metrics.get(metric).is_some_and(|metric| metric.name == "g") {
                    Expression::Determinant(metric)
                } else {
                    return Ok(None);
                }
            }
            ("\\Gamma", [_, _, _]) if plain(made) => self.christoffel(made, slots.to_vec())?,
            ("R", [_, _, _, _]) if plain(made) => {
                self.curvature(made, conventions::Curvature::Riemann, slots.to_vec())?
            }
            ("R", [_, _]) if plain(made) && self.eyes.customs.curved => {
                self.curvature(made, conventions::Curvature::Ricci, slots.to_vec())?
            }
            ("R", []) if plain(made) && self.eyes.customs.curved => {
                self.curvature(made, conventions::Curvature::Scalar, Vec::new())?
            }
            ("G", [_, _]) if plain(made) && self.eyes.customs.curved => {
                self.curvature(made, conventions::Curvature::Einstein, slots.to_vec())?
            }
            ("i", []) if plain(made) => Expression::Imaginary,
            ("x", [index]) if plain(made) && index.level != Level::Down => Expression::Coordinate(*index),
            (letter, []) if plain(made) && self.surroundings.meanings.dimensions.iter().any(|name| name == letter) => {
                Expression::Dimension(self.surroundings.family("i", false))
            }
            _ => return Ok(None),
        }))
    }

    /// `g^{ij}` of a metric that is defined is its inverse, whatever moves the indices of other tensors.
    fn defined_metric(&mut self, made: &Use, slots: &[Index]) -> Option<Expression> {
        let [one, two] = slots else { return None };
        if (one.level, two.level) == (Level::Down, Level::Down) || one.level == Level::Inert {
            return None;
        }
        let metric = self.surroundings.defined_metric(&made.kernel, one.family)?;
        Some(Expression::Metric { metric, slots: [*one, *two] })
    }

    fn metric(&mut self, made: &Use, slots: &[Index]) -> Lowered {
        let [one, two] = slots else {
            return Err(format!("{} stands with {} indices", shown(&made.kernel), slots.len()));
        };
        let metric = self.surroundings.metric(&made.kernel, one.family);
        // Indices are moved by the metric that is declared; where none is, by the first that is met.
        if self.has_metric() {
            self.surroundings.metric_of(one.family);
        }
        if let Some(family) = self.surroundings.world.families.get_mut(one.family) {
            family.metric = family.metric.or(Some(metric));
        }
        Ok(Expression::Metric { metric, slots: [*one, *two] })
    }

    fn christoffel(&mut self, made: &Use, slots: Vec<Index>) -> Lowered {
        let [a, b, c] = slots.as_slice() else {
            return Err(format!("{} stands with {} indices", shown(&made.kernel), slots.len()));
        };
        // The upper index comes first, wherever it is written.
        let mut order = [*a, *b, *c];
        order.sort_by_key(|index| index.level != Level::Up);
        let up = order.iter().filter(|index| index.level == Level::Up).count();
        if up != 1 {
            return Err(format!("it is not plain which index of {} is the first", shown(&made.kernel)));
        }
        Ok(Expression::Christoffel { metric: self.surroundings.metric_of(a.family), slots: order })
    }

    fn curvature(&mut self, made: &Use, kind: conventions::Curvature, slots: Vec<Index>) -> Lowered {
        let count = match kind {
            conventions::Curvature::Riemann | conventions::Curvature::Weyl => 4,
            conventions::Curvature::Ricci | conventions::Curvature::Einstein => 2,
            conventions::Curvature::Scalar => 0,
        };
        let family = match slots.first() {
            Some(index) => index.family,
            None => self.levelled_family()?,
        };
        if slots.len() != count || slots.iter().any(|index| index.level == Level::Inert) {
            return Err(format!("{} stands with {} indices", shown(&made.kernel), slots.len()));
        }
        let kind = match kind {
            conventions::Curvature::Riemann => Curvature::Riemann,
            conventions::Curvature::Weyl => Curvature::Weyl,
            conventions::Curvature::Ricci => Curvature::Ricci,
            conventions::Curvature::Einstein => Curvature::Einstein,
            conventions::Curvature::Scalar => Curvature::Scalar,
        };
        Ok(Expression::Curvature { metric: self.surroundings.metric_of(family), kind, slots })
    }

    /// An epsilon with two slots or more: a tensor where levels matter, else a symbol, unless the author says which.
    fn epsilon(&mut self, made: &Use, slots: &[Index]) -> Option<Lowered> {
        let is = |kind: Kind| self.surroundings.meanings.is_kind(&made.kernel, kind);
        let (tensor, symbol) = (is(Kind::EpsilonTensor), is(Kind::EpsilonSymbol));
        let custom = matches!(made.kernel.as_str(), "\\epsilon" | "\\varepsilon") && slots.len() > 2;
        if !(tensor || symbol || custom) || slots.is_empty() {
            return None;
        }
        let first = slots.first()?;
        let metric = (first.level != Level::Inert && !symbol).then(|| self.surroundings.metric_of(first.family));
        if first.level == Level::Inert && tensor && !self.surroundings.meanings.metrics().is_empty() {
            return Some(Err("an epsilon tensor stands on indices without levels".to_owned()));
        }
        Some(Ok(Expression::Epsilon { metric, slots: slots.to_vec() }))
    }

    fn field(&mut self, made: &Use, own: &[UsedSlot], mut slots: Vec<Index>) -> Lowered {
        let meanings = self.surroundings.meanings;
        let matrix = meanings.is_kind(&made.kernel, Kind::Matrix);
        if matrix && slots.len() == 2 && !Self::are_matrix_levels(&slots) {
            return Err(format!(
                "the indices of the matrix {} have other levels than row and column",
                shown(&made.kernel)
            ));
        }
        let bare = Use { slots: own.to_vec(), ..made.clone() };
        let piece = Piece { made: bare, ..Piece::default() };
        let symmetries: Vec<SlotSymmetry> = exchanges(&piece, meanings, self.eyes.customs)
            .into_iter()
            .map(|one| SlotSymmetry { slots: one.images, negative: one.negative })
            .collect();
        if made.stacked && symmetries.is_empty() {
            self.may_be(Way::Turned);
            if self.way == Way::Turned {
                let first = slots.first().map(|index| index.level);
                // Those on the level of the first go behind; each level keeps its order.
                slots.sort_by_key(|index| Some(index.level) == first);
            }
        }
        let natural: Vec<(usize, Level)> = slots.iter().map(|index| (index.family, index.level)).collect();
        let field = self.surroundings.field(&made.kernel, &natural, symmetries);
        if !matrix {
            let own = self.surroundings.world.fields.get(field).map(|field| field.slots.clone()).unwrap_or_default();
            self.move_slots(&slots, own.into_iter().map(|(_, level)| level));
        }
        Ok(Expression::Field { field, slots })
    }

    /// On another level than its own an index is moved by the metric of its family, which has to be known then.
    fn move_slots(&mut self, slots: &[Index], own: impl Iterator<Item = Level>) {
        for (index, own) in slots.iter().zip(own) {
            if index.level != own {
                self.surroundings.metric_of(index.family);
                self.moved_among_metrics |= self.surroundings.has_metrics(index.family);
            }
        }
    }

    /// The name of a kernel that a side consists of alone, with its slots: what a relation may define.
    pub fn lone_kernel(&mut self, factor: &Factor) -> Option<(CompactString, Vec<Index>)> {
        let Atom::Kernel(kernel) = &factor.atom else { return None };
        let made = crate::terms::uses::use_of(factor, kernel, self.eyes, false);
        if let Some(slots) = self.lone_matrix(factor, &made) {
            return Some((made.kernel, slots));
        }
        if self.is_acted_matrix(factor, kernel) {
            return None;
        }
        let plain =
            !made.unread && !made.power && factor.marks.is_empty() && made.own_slots().count() == made.slots.len();
        if !plain || made.slots.iter().any(|slot| slot.letter().is_none()) {
            return None;
        }
        let slots: Vec<Index> = made.slots.iter().map(|slot| self.index(slot)).collect::<Result<_, _>>().ok()?;
        let labels: Vec<Filling> = slots.iter().map(|index| index.filling).collect();
        let distinct = labels.iter().all(|label| labels.iter().filter(|other| *other == label).count() == 1);
        distinct.then_some((made.kernel, slots))
    }
}

impl Lowering<'_, '_, '_> {
    /// Whether a kernel with these slots has a meaning already: it is defined, built in, or plays a part.
    pub fn is_meant(&mut self, kernel: &CompactString, slots: &[Index]) -> bool {
        let known = self.surroundings.meanings.known(kernel, slots.len());
        let part = known.is_some_and(|known| known.role.is_some());
        let made = Use { kernel: kernel.clone(), letter: kernel.clone(), ..Use::default() };
        let declared = known.is_some_and(|known| known.is_settled() || known.traceless);
        let custom = !declared && self.by_custom(&made, slots).is_ok_and(|value| value.is_some());
        let epsilon = self.epsilon(&made, slots).is_some();
        self.surroundings.is_defined(kernel, slots.len()) || part || custom || epsilon
    }

    /// Whether an expression uses a kernel with so many slots as a field.
    pub fn uses(&self, expression: &Expression, kernel: &str, slots: usize) -> bool {
        let mut pending = vec![expression];
        while let Some(part) = pending.pop() {
            if let Expression::Field { field, slots: own } = part
                && own.len() == slots
                && self.surroundings.world.fields.get(*field).is_some_and(|field| field.name == kernel)
            {
                return true;
            }
            pending.extend(part.parts());
        }
        false
    }
}

/// `(r)`: nobody puts a lone letter in brackets to multiply it.
fn is_lone_letter_in_brackets(factor: &Factor) -> bool {
    let Atom::Group(group) = &factor.atom else { return false };
    let [part] = group.parts.as_slice() else { return false };
    let [side] = part.sides.as_slice() else { return false };
    let [term] = side.terms.as_slice() else { return false };
    let lone = term.sign.is_none() && matches!(term.factors.as_slice(), [one] if matches!(one.atom, Atom::Kernel(_)));
    lone && factor.joint == Joint::Beside && factor.scripts.is_empty()
}

/// One half.
pub(super) fn half() -> Rational {
    Rational::new(1, 2).unwrap_or(Rational::ONE)
}
