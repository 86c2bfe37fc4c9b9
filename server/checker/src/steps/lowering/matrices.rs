//! Matrices written without indices: products in their order, powers, inverses, transposes, traces.
//!
//! Only a kernel that is declared a matrix is one. The one idea: a matrix is an expression in which the labels of row
//! and column are free, so that sums, derivatives, variations, definitions and the comparison of sides need to know
//! nothing of matrices. A product puts one new label in the place of the column of each matrix and the row of the next,
//! a trace one in the place of both, and indices that are written on a matrix take their places.
//!
//! Traps: the labels of row and column are free wherever they stand and are never summed, so that renaming meets no
//! dummy of that name. A scalar beside a matrix in a sum is refused, but a plain number there is a multiple of the
//! identity. `\operatorname{tr} A B` may end after the first matrix or not: the caller tries both, and what gives
//! a matrix where a scalar is wanted is no reading.

mod looks;

use indexwise_algebra::expression::{Expression, Filling, Index};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::rational::Rational;
use indexwise_algebra::sample::SlotSymmetry;
use indexwise_grammar::conventions::Kind;
use indexwise_grammar::tree::{
    self, Atom, Factor, Item, ItemKind, Joint, Kernel, Operator, Product, Script, SignKind, Sum,
};

use crate::ledger::shown;
use crate::terms::uses::{Use, UsedSlot, use_of};

use super::{Lowered, Lowering, Refusal, scripts};

/// The letters of the labels of row and column, as they are told.
const ROW: &str = "row";
const COLUMN: &str = "column";

/// The highest power of a matrix that is written out.
const POWER: i128 = 8;
/// The most nodes of a power or of half a commutator of matrices: nested, they grow by multiples.
const NODES: usize = 2_000;

/// What scripts do to a matrix: the power comes first.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Acts {
    power: i128,
    transposed: bool,
}

impl Acts {
    const NONE: Self = Self { power: 1, transposed: false };
}

impl Lowering<'_, '_, '_> {
    /// Gives row and column their labels, before any letter has one, so that all readings of a statement agree on
    /// them.
    pub(super) fn label_matrices(&mut self) {
        if self.surroundings.has_matrices() {
            self.label(ROW);
            self.label(COLUMN);
        }
    }

    /// Row and column as slots.
    ///
    /// # Errors
    /// Several ranges are declared, and nothing says which is that of matrices.
    pub(super) fn frame(&mut self) -> Result<[Index; 2], Refusal> {
        let family = self.surroundings.matrix_family(&self.levelled)?;
        let index = |label| Index { filling: Filling::Label(label), level: Level::Inert, family };
        Ok([index(self.label(ROW)), index(self.label(COLUMN))])
    }

    /// Refuses matrices where there is no place for them.
    pub(super) fn no_matrix(&self, values: &[Expression], why: &str) -> Result<(), Refusal> {
        if values.iter().any(|value| self.is_matrix(value)) { Err(why.to_owned()) } else { Ok(()) }
    }

    /// The labels of row and column, if any matrix has been met.
    fn frame_labels(&self) -> Option<[u16; 2]> {
        let label = |name: &str| self.letters.iter().position(|letter| letter == name);
        Some([u16::try_from(label(ROW)?).ok()?, u16::try_from(label(COLUMN)?).ok()?])
    }

    /// Whether the value of an expression is a matrix without indices.
    pub fn is_matrix(&self, expression: &Expression) -> bool {
        let Some([row, _]) = self.frame_labels() else { return false };
        let mut pending = vec![expression];
        while let Some(part) = pending.pop() {
            let own = match part {
                Expression::Inverse(_, _, slots) | Expression::Adjugate(_, _, slots) => slots.as_slice(),
                other => other.slots(),
            };
            if own.iter().any(|index| index.filling == Filling::Label(row)) {
                return true;
            }
            match part {
                Expression::Sum(terms) => pending.extend(terms.first()),
                Expression::Product(factors) => pending.extend(factors),
                Expression::Quotient(over, _) => pending.push(over),
                Expression::Partial(_, of) | Expression::Covariant { of, .. } | Expression::Vary { of, .. } => {
                    pending.push(of);
                }
                _ => {}
            }
        }
        false
    }

    /// Whether a kernel is declared a matrix; `I` is the identity then, unless something else is said of it.
    fn is_matrix_kernel(&self, name: &str) -> bool {
        self.surroundings.meanings.is_kind(name, Kind::Matrix)
    }

    /// A kernel that is declared a matrix, without its indices or with indices on a power or a transpose of it.
    /// Nothing for everything else.
    pub(super) fn matrix_kernel(&mut self, factor: &Factor, kernel: &Kernel) -> Result<Option<Expression>, Refusal> {
        if !self.surroundings.has_matrices() {
            return Ok(None);
        }
        let (acts, rest) = match acts(factor) {
            // Of what is no matrix these scripts say something else.
            Err(refusal) => return if self.is_matrix_kernel(&kernel.name) { Err(refusal) } else { Ok(None) },
            Ok(acts) => acts,
        };
        let made = use_of(&rest, kernel, self.eyes, false);
        let own = made.own_slots().count();
        if !self.is_matrix_kernel(&made.kernel) || acts == Acts::NONE && own == 2 {
            return Ok(None);
        }
        let misread = made.unread || made.power || !rest.marks.is_empty() || own != made.slots.len();
        if misread || !matches!(own, 0 | 2) {
            return Err(format!("the scripts of {} are not understood", shown(&made.kernel)));
        }
        if own == 2 && acts.power > 1 {
            return Err(format!("a power of the components of {} is not plain", shown(&made.kernel)));
        }
        let value = self.bare_matrix(&made)?;
        let value = self.acted(value, acts)?;
        self.with_indices(value, &made.slots).map(Some)
    }

    /// What a kernel that is declared a matrix stands for without indices.
    fn bare_matrix(&mut self, made: &Use) -> Lowered {
        let slots = self.frame()?;
        if let Some(definition) = self.surroundings.definition(&made.kernel, 2) {
            return Ok(Expression::Defined { definition, slots: slots.to_vec() });
        }
        let known = self.surroundings.meanings.known(&made.kernel, 2);
        if is_identity(&made.kernel) && known.is_none() {
            return Ok(Expression::Delta(slots));
        }
        let natural = slots.map(|index| (index.family, index.level));
        let exchanges = known.map(|known| known.exchanges.as_slice()).unwrap_or_default();
        let swapped = |antisymmetric| SlotSymmetry::exchange(2, 0, 1, antisymmetric);
        let symmetries = exchanges.iter().map(|one| swapped(one.antisymmetric)).collect();
        let field = self.surroundings.field(&made.kernel, &natural, symmetries);
        Ok(Expression::Field { field, slots: slots.to_vec() })
    }

    /// `\mathbb{1}`, the identity where the document has matrices.
    pub(super) fn identity_by_face(&mut self, factor: &Factor) -> Option<Lowered> {
        let one = matches!(&factor.atom, Atom::Number(number) if number == "1");
        let face = matches!(factor.marks.trim_end(), "\\mathbb" | "\\mathds" | "\\mathbbm" | "\\mathbf" | "\\bm");
        let plain = one && face && factor.scripts.is_empty() && self.surroundings.has_matrices();
        plain.then(|| self.identity())
    }

    fn identity(&mut self) -> Lowered {
        Ok(Expression::Delta(self.frame()?))
    }

    /// Whether the use of a kernel that is declared a matrix has levels under which its components are those of
    /// row and column.
    pub(super) fn are_matrix_levels(slots: &[Index]) -> bool {
        let levels: Vec<Level> = slots.iter().map(|index| index.level).collect();
        matches!(levels[..], [Level::Inert, Level::Inert] | [Level::Up, Level::Down])
    }

    /// The factors of a product, with the column of each matrix tied to the row of the next.
    pub(super) fn joined(&mut self, mut parts: Vec<Expression>) -> Result<Vec<Expression>, Refusal> {
        let places: Vec<usize> =
            (0..parts.len()).filter(|at| parts.get(*at).is_some_and(|p| self.is_matrix(p))).collect();
        let Some([row, column]) = self.frame_labels() else { return Ok(parts) };
        for pair in places.windows(2) {
            let between = self.fresh();
            let [one, two] = pair else { continue };
            if let Some(left) = parts.get_mut(*one) {
                left.rename_free(column, between);
            }
            if let Some(right) = parts.get_mut(*two) {
                right.rename_free(row, between);
            }
        }
        Ok(parts)
    }

    /// The terms of a sum: where one is a matrix all have to be, a number as a multiple of the identity.
    pub(super) fn fitted(&mut self, terms: Vec<Expression>) -> Result<Vec<Expression>, Refusal> {
        if !terms.iter().any(|term| self.is_matrix(term)) {
            return Ok(terms);
        }
        terms.into_iter().map(|term| self.as_matrix(term)).collect()
    }

    /// A matrix, or a number as a multiple of the identity.
    fn as_matrix(&mut self, value: Expression) -> Lowered {
        if self.is_matrix(&value) {
            return Ok(value);
        }
        if !is_number(&value) {
            return Err("a matrix stands beside what is none".to_owned());
        }
        Ok(Expression::Product(vec![value, self.identity()?]))
    }

    /// Two sides: where one is a matrix, so is the other. A side that is nothing has every shape.
    pub fn fitted_sides(&mut self, left: Expression, right: Expression) -> Result<(Expression, Expression), Refusal> {
        match (self.is_matrix(&left), self.is_matrix(&right)) {
            (true, false) if right != Expression::zero() => Ok((left, self.as_matrix(right)?)),
            (false, true) if left != Expression::zero() => Ok((self.as_matrix(left)?, right)),
            _ => Ok((left, right)),
        }
    }

    /// `[A, B]` of matrices.
    pub(super) fn commutator_of_matrices(&mut self, one: &Sum, two: &Sum) -> Lowered {
        let (one, two) = (self.side(one)?, self.side(two)?);
        if !self.is_matrix(&one) || !self.is_matrix(&two) {
            return Err("a commutator of what are neither derivatives nor matrices is not evaluated".to_owned());
        }
        if size(&one).saturating_add(size(&two)) > NODES {
            return Err("a commutator of matrices is too large".to_owned());
        }
        let ahead = Expression::Product(self.joined(vec![one.clone(), two.clone()])?);
        let back = Expression::Product(self.joined(vec![two, one])?);
        Ok(Expression::Sum(vec![ahead, back.negated()]))
    }

    /// A matrix under the scripts that stand on its bracket.
    pub(super) fn matrix_in_brackets(&mut self, value: Expression, factor: &Factor) -> Lowered {
        let (acts, rest) = acts(factor)?;
        let nameless = Kernel { name: "".into(), letter: "".into(), bold: false, word: false };
        let made = use_of(&rest, &nameless, self.eyes, false);
        let plain =
            !made.unread && !made.power && made.kernel.is_empty() && made.own_slots().count() == made.slots.len();
        if !plain || !matches!(made.slots.len(), 0 | 2) {
            return Err("the scripts of a matrix in brackets are not understood".to_owned());
        }
        let value = self.acted(value, acts)?;
        self.with_indices(value, &made.slots)
    }

    /// A matrix with its power and its transpose.
    fn acted(&mut self, value: Expression, acts: Acts) -> Lowered {
        let [row, column] = self.frame()?;
        let labels = self.frame_labels().ok_or("a matrix has no rows")?;
        let mut value = match acts.power {
            power if power.abs() > POWER || size(&value).saturating_mul(power.unsigned_abs() as usize) > NODES => {
                return Err("a power of a matrix is too large".to_owned());
            }
            power if power < 0 => Expression::Inverse(Box::new(value), labels, [row, column]),
            _ => value,
        };
        if acts.power.abs() > 1 {
            let count = usize::try_from(acts.power.abs()).unwrap_or(1);
            value = Expression::Product(self.joined(vec![value; count])?);
        }
        if acts.transposed {
            let aside = self.fresh();
            value.rename_free(labels[0], aside);
            value.rename_free(labels[1], labels[0]);
            value.rename_free(aside, labels[1]);
        }
        Ok(value)
    }

    /// A matrix with these indices for row and column; itself without any.
    fn with_indices(&mut self, mut value: Expression, slots: &[UsedSlot]) -> Lowered {
        let [row, column] = self.frame_labels().ok_or("a matrix has no rows")?;
        let [one, two] = slots else { return Ok(value) };
        let indices = [self.index(one)?, self.index(two)?];
        if !Self::are_matrix_levels(&indices) {
            return Err("the indices on a matrix have other levels than row and column".to_owned());
        }
        let family = self.frame()?.map(|index| index.family);
        if indices.map(|index| index.family) != family {
            return Err("the indices on a matrix have another range than row and column".to_owned());
        }
        let delta = |label, index: Index| {
            let own = Index { filling: Filling::Label(label), level: Level::Inert, family: index.family };
            Expression::Delta([own, index])
        };
        // By deltas, so that the value keeps labels of its own: `(A B)_{ii}` is a trace.
        let (first, second) = (self.fresh(), self.fresh());
        value.rename_free(row, first);
        value.rename_free(column, second);
        let [one, two] = indices;
        Ok(Expression::Product(vec![value, delta(first, one), delta(second, two)]))
    }

    /// The trace.
    pub(super) fn trace(&mut self, mut value: Expression) -> Lowered {
        let [row, column] = self.frame_labels().ok_or("a matrix has no rows")?;
        let both = self.fresh();
        value.rename_free(row, both);
        value.rename_free(column, both);
        Ok(value)
    }

    /// The determinant of a matrix without indices.
    pub(super) fn determinant_of(&mut self, value: Expression) -> Lowered {
        let labels = self.frame_labels().ok_or("a matrix has no rows")?;
        if value.free_slots().len() > 2 {
            return Err("the argument of a determinant has more than two indices".to_owned());
        }
        Ok(Expression::Det(Box::new(value), labels))
    }

    /// The adjugate of a matrix without indices.
    pub(super) fn adjugate_of(&mut self, value: Expression) -> Lowered {
        let labels = self.frame_labels().ok_or("a matrix has no rows")?;
        let slots = self.frame()?;
        Ok(Expression::Adjugate(Box::new(value), labels, slots))
    }

    /// What a relation defines: for a matrix a matrix.
    pub fn body(&mut self, sum: &Sum, slots: &[Index]) -> Lowered {
        let value = self.side(sum)?;
        let row = self.frame_labels().map(|[row, _]| Filling::Label(row));
        match slots.first() {
            Some(first) if Some(first.filling) == row => self.as_matrix(value),
            _ if self.is_matrix(&value) => Err("a matrix defines what is none".to_owned()),
            _ => Ok(value),
        }
    }

    /// The slots of a kernel that is declared a matrix and stands alone, without scripts.
    pub(super) fn lone_matrix(&mut self, factor: &Factor, made: &Use) -> Option<Vec<Index>> {
        let bare = factor.scripts.is_empty() && factor.marks.is_empty() && self.is_matrix_kernel(&made.kernel);
        if bare { self.frame().ok().map(|slots| slots.to_vec()) } else { None }
    }

    /// Whether scripts turn or raise a kernel that is declared a matrix: what a relation cannot define.
    pub(super) fn is_acted_matrix(&self, factor: &Factor, kernel: &Kernel) -> bool {
        let Ok((acts, rest)) = acts(factor) else { return self.is_matrix_kernel(&kernel.name) };
        acts != Acts::NONE && self.is_matrix_kernel(&use_of(&rest, kernel, self.eyes, false).kernel)
    }
}

/// What the scripts above a matrix do, and the factor without those scripts.
fn acts(factor: &Factor) -> Result<(Acts, Factor), Refusal> {
    let mut acts = Acts::NONE;
    let mut rest = factor.clone();
    let mut refused = None;
    rest.scripts.retain(|script| match act(script) {
        None => true,
        Some(Ok(one)) => {
            acts = Acts { power: acts.power.saturating_mul(one.power), transposed: acts.transposed != one.transposed };
            false
        }
        Some(Err(refusal)) => {
            refused = Some(refusal);
            false
        }
    });
    refused.map_or(Ok((acts, rest)), Err)
}

/// What one script does to a matrix; nothing for indices and labels.
fn act(script: &Script) -> Option<Result<Acts, Refusal>> {
    if script.level == tree::Level::Down || script.before {
        return None;
    }
    match script.items.as_slice() {
        [one] if is_transpose(&one.kind) => Some(Ok(Acts { power: 1, transposed: true })),
        [Item { kind: ItemKind::Sign(SignKind::Minus), .. }, one] if is_transpose(&one.kind) => {
            Some(Ok(Acts { power: -1, transposed: true }))
        }
        [Item { kind: ItemKind::Mark(mark), .. }] if matches!(mark.as_str(), "dagger" | "*" | "ast") => {
            Some(Err("the adjoint of a matrix is not evaluated".to_owned()))
        }
        // `A^0` and `A^1` may be what is left of a series.
        items => {
            scripts::power_of(items).filter(|power| *power != Rational::ZERO && *power != Rational::ONE).map(|power| {
                match power.denominator() {
                    1 => Ok(Acts { power: power.numerator(), transposed: false }),
                    _ => Err("a root of a matrix is not evaluated".to_owned()),
                }
            })
        }
    }
}

/// `T`, `\mathsf T`, `\mathrm T`, `\top`, `\intercal`.
fn is_transpose(kind: &ItemKind) -> bool {
    match kind {
        ItemKind::Letter(text) | ItemKind::Label(text) => text == "T",
        ItemKind::Styled(text) => text.split_whitespace().last() == Some("T"),
        ItemKind::Mark(text) => matches!(text.as_str(), "top" | "intercal"),
        ItemKind::Operator(Operator::Joint(Joint::Times(Product::Other(sign)))) => *sign == "\\intercal",
        _ => false,
    }
}

/// `I` in any face, without accents and labels.
fn is_identity(kernel: &str) -> bool {
    matches!(kernel, "I" | "\\mathbb I" | "\\mathbf I" | "\\mathrm I" | "\\bm I")
}

/// A plain number, or a product that ends with a written 1: nobody multiplies a scalar by it.
fn is_number(value: &Expression) -> bool {
    match value {
        Expression::Number(_) => true,
        Expression::Product(parts) => {
            parts.iter().all(is_number) || parts.last() == Some(&Expression::Number(Rational::ONE)) && parts.len() > 1
        }
        _ => false,
    }
}

/// The number of nodes of an expression.
fn size(value: &Expression) -> usize {
    let mut pending = vec![value];
    let mut count = 0_usize;
    while let Some(part) = pending.pop() {
        count += 1;
        pending.extend(part.parts());
    }
    count
}
