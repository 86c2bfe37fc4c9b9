//! From the tree of a side to an expression of the algebra.
//!
//! The reading says which scripts are indices, `terms/uses.rs` sorts them into slots; here kernels get their meaning
//! and products their structure. A part that has no meaning here is refused with a reason. Trap: some things are
//! not written, as how far a derivative reaches beyond the next factor; `Way` chooses, and the caller tries the others
//! where they matter.

mod calls;
mod kernels;
mod matrices;
mod orders;
mod scripts;
mod ways;

use compact_str::CompactString;
use indexwise_algebra::expression::{Expression, Filling, Index};
use indexwise_algebra::geometry::Level;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::{
    self, Atom, Big, Bracket, Factor, Fraction, FractionKind, Group, Joint, Product as ProductSign, SignKind, Sum, Term,
};

use crate::conventions::built_in::is_derivative;
use crate::conventions::meanings::Known;
use crate::ledger::shown;
use crate::terms::Eyes;
use crate::terms::uses::{self, Use, UsedSlot, use_of};

use super::world::Surroundings;
pub use ways::Way;

/// Why a part could not be lowered: a clause that can stand by itself.
pub type Refusal = String;
type Lowered = Result<Expression, Refusal>;

/// Lowers the sides of one statement: its letters are numbered together.
pub struct Lowering<'s, 'a, 'e> {
    surroundings: &'s mut Surroundings<'a>,
    eyes: &'e Eyes<'e>,
    way: Way,
    /// Families of the levelled indices of the statement: what a scalar of geometry belongs to.
    levelled: Vec<usize>,
    /// Letters by their labels.
    letters: Vec<CompactString>,
    /// The other ways in which it could be read.
    pub others: Vec<Way>,
    /// Whether an index is moved in a family that has more than one metric.
    pub moved_among_metrics: bool,
    /// How many indices are antisymmetrised at once, at most.
    pub antisymmetrised: usize,
    /// From which order on terms in small fields are left out, where a term says so.
    pub neglected: Option<usize>,
    /// Whether a side is lowered as a definition.
    pub defines: bool,
    /// Nesting that is left.
    depth: usize,
}

/// Nesting beyond which a side is not lowered; a bracket counts twice.
const DEPTH: usize = 128;
/// Terms of a bracket's permutations beyond which it is not written out.
const PERMUTATIONS: usize = 120;

impl<'s, 'a, 'e> Lowering<'s, 'a, 'e> {
    /// For one statement.
    pub fn new(surroundings: &'s mut Surroundings<'a>, eyes: &'e Eyes<'e>, way: Way) -> Self {
        Self {
            surroundings,
            eyes,
            way,
            levelled: Vec::new(),
            letters: Vec::new(),
            others: Vec::new(),
            moved_among_metrics: false,
            antisymmetrised: 0,
            neglected: None,
            defines: false,
            depth: DEPTH,
        }
    }

    /// The letters of the labels, in their order.
    pub fn letters(&self) -> &[CompactString] {
        &self.letters
    }

    /// Looks at the sides before they are lowered: which families of levelled indices they have. A letter that no
    /// declaration has, beside letters of declared ranges, may be one of them or not: that is refused.
    pub fn survey(&mut self, sides: [&Sum; 2]) -> Result<(), Refusal> {
        self.label_matrices();
        let mut declared = None;
        for letter in sides.into_iter().flat_map(|side| super::standing::slot_letters(side, self.eyes)) {
            let known = self.surroundings.meanings.family_number(&letter).is_some();
            if declared.is_some_and(|declared| declared != known) {
                return Err("a letter has no declared range, but letters beside it have".to_owned());
            }
            declared = Some(known);
            if self.eyes.is_cartesian(&letter) {
                continue;
            }
            let family = self.surroundings.family(&letter, false);
            if !self.levelled.contains(&family) {
                self.levelled.push(family);
            }
        }
        Ok(())
    }

    /// The family that a scalar of geometry belongs to, as the scalar curvature.
    fn levelled_family(&mut self) -> Result<usize, Refusal> {
        match self.levelled.as_slice() {
            [] => Ok(self.surroundings.levelled_family()),
            [one] => Ok(*one),
            _ => Err("a scalar of the geometry stands beside two kinds of indices".to_owned()),
        }
    }

    /// Lowers a side.
    pub fn side(&mut self, sum: &Sum) -> Lowered {
        self.depth = self.depth.checked_sub(1).ok_or("it is nested too deep")?;
        let terms = self.terms(sum)?;
        let terms = self.fitted(terms)?;
        self.depth += 1;
        match terms.len() {
            0 => Err("a side is empty".to_owned()),
            1 => Ok(terms.into_iter().next().unwrap_or_else(Expression::zero)),
            _ => Ok(Expression::Sum(terms)),
        }
    }

    fn term(&mut self, term: &Term) -> Lowered {
        if term.dangling != Joint::Beside || term.factors.is_empty() {
            return Err("a term is not complete".to_owned());
        }
        let brackets = scripts::brackets_across(&term.factors)?;
        let value = match brackets {
            false => self.product(&term.factors)?,
            true => self.bracketed(&term.factors)?,
        };
        match term.sign.map_or(SignKind::Plus, |sign| sign.kind) {
            SignKind::Plus => Ok(value),
            SignKind::Minus => Ok(value.negated()),
            SignKind::PlusMinus | SignKind::MinusPlus => Err("a sign is left open".to_owned()),
        }
    }

    /// A product, from left to right; a derivative takes what it acts on with it.
    fn product(&mut self, factors: &[Factor]) -> Lowered {
        let mut parts: Vec<Expression> = Vec::new();
        let mut at = 0;
        while let Some(factor) = factors.get(at) {
            let rest = factors.get(at..).unwrap_or_default();
            match factor.joint {
                Joint::Beside | Joint::Times(ProductSign::Dot | ProductSign::Star) => {
                    let (value, taken) = self.one(rest)?;
                    if factor.joint != Joint::Beside && self.is_matrix(&value) {
                        self.no_matrix(&parts, "the product of matrices with a sign between them is not plain")?;
                    }
                    parts.push(value);
                    at += taken;
                }
                Joint::Slash => {
                    let over = parts.pop().ok_or("nothing stands before a slash")?;
                    let (under, taken) = self.one(rest)?;
                    self.no_matrix(std::slice::from_ref(&under), "a matrix stands below a line")?;
                    parts.push(Expression::Quotient(Box::new(over), Box::new(under)));
                    at += taken;
                }
                Joint::Times(sign) => return Err(format!("the product {} is not known", sign.latex())),
                Joint::Set(sign) => return Err(format!("{sign} joins no numbers")),
                Joint::Apart => return Err("a list stands in a product".to_owned()),
            }
        }
        let mut parts = self.joined(parts)?;
        Ok(match parts.len() {
            1 => parts.pop().unwrap_or_else(Expression::zero),
            _ => Expression::Product(parts),
        })
    }

    /// The first factor with what belongs to it, and how many factors that are.
    fn one(&mut self, factors: &[Factor]) -> Result<(Expression, usize), Refusal> {
        // What acts on what acts on something is nested as brackets are.
        self.depth = self.depth.checked_sub(1).ok_or("it is nested too deep")?;
        let value = self.first_factor(factors);
        self.depth += 1;
        value
    }

    fn first_factor(&mut self, factors: &[Factor]) -> Result<(Expression, usize), Refusal> {
        let Some(factor) = factors.first() else { return Err("a derivative acts on nothing".to_owned()) };
        let rest = factors.get(1..).unwrap_or_default();
        if let Atom::Kernel(kernel) = &factor.atom {
            if let Some(value) = self.matrix_kernel(factor, kernel)? {
                return Ok((value, 1 + self.arguments_of_matrix(rest)?));
            }
            let made = use_of(factor, kernel, self.eyes, false);
            if is_derivative(&made.letter) && !self.is_quantity(&made) {
                return self.derivative(factor, &made, rest);
            }
            if matches!(made.kernel.as_str(), "\\Box" | "\\square") && factor.scripts.is_empty() {
                let (of, taken) = self.acted_on(rest)?;
                let family = self.levelled_family()?;
                return Ok((self.twice_covariant(family, of), taken + 1));
            }
            if self.is_variation(&made, rest) {
                let parameter = self.surroundings.parameter(&made.kernel);
                let (of, taken) = self.one(rest)?;
                return Ok((self.varied(parameter, of), taken + 1));
            }
            let (value, arguments) = self.kernel(factor, made, rest)?;
            return Ok((value, arguments + 1));
        }
        if let Atom::Fraction(fraction) = &factor.atom
            && let Some((operators, acted)) = self.derivative_fraction(fraction)?
        {
            let (of, taken) = match acted {
                [] => self.acted_on(rest)?,
                acted => (self.product(acted)?, 0),
            };
            return Ok((wrapped(operators, of), taken + 1));
        }
        if let Atom::Group(group) = &factor.atom
            && matches!(group.bracket, Bracket::Square | Bracket::Pair)
            && group.parts.len() == 2
            && factor.scripts.is_empty()
        {
            let (value, taken) = self.commutator(group, rest)?;
            return Ok((value, taken + 1));
        }
        if let Atom::Function(name) = &factor.atom {
            let (value, taken) = self.call(name, factor, rest)?;
            return Ok((value, taken + 1));
        }
        if let Some(identity) = self.identity_by_face(factor) {
            return Ok((identity?, 1));
        }
        Ok((self.atom(factor)?, 1))
    }

    /// A derivative sign with what it acts on.
    fn derivative(&mut self, factor: &Factor, made: &Use, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        if made.unread || !made.marks.iter().all(|mark| matches!(mark, uses::Mark::Slot(_))) {
            return Err(format!("the derivative {} is not understood", shown(&made.kernel)));
        }
        if made.power {
            return self.laplacian(factor, made, rest);
        }
        if made.slots.is_empty() {
            return Err(format!("{} has no index", shown(&made.kernel)));
        }
        let operators: Vec<Operator> =
            made.slots.iter().map(|slot| self.operator(made, slot)).collect::<Result<_, _>>()?;
        let (of, taken) = self.acted_on(rest)?;
        if operators.iter().any(|operator| matches!(operator, Operator::Covariant(..))) {
            self.no_matrix(std::slice::from_ref(&of), "the covariant derivative of a matrix is not plain")?;
        }
        Ok((wrapped(operators, of), taken + 1))
    }

    /// What a derivative acts on: the next factor, or all that follow.
    fn acted_on(&mut self, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        let reaches = rest.iter().position(|factor| factor.joint == Joint::Slash).unwrap_or(rest.len());
        let (near, taken) = self.one(rest)?;
        let more = rest.get(taken..reaches).unwrap_or_default();
        if more.iter().all(|factor| matches!(factor.atom, Atom::Number(_))) {
            return Ok((near, taken));
        }
        self.may_be(Way::Far);
        match self.way {
            Way::Near | Way::Turned | Way::Raised | Way::Wide => Ok((near, taken)),
            Way::Far | Way::FarAndWide => Ok((self.product(rest.get(..reaches).unwrap_or_default())?, reaches)),
        }
    }

    /// Whether a kernel is declared as a quantity with these slots: `D_i` may be a displacement.
    fn is_quantity(&self, made: &Use) -> bool {
        self.surroundings.meanings.known(&made.kernel, made.slots.len()).is_some_and(Known::is_settled)
    }

    fn operator(&mut self, made: &Use, slot: &UsedSlot) -> Result<Operator, Refusal> {
        let index = self.index(slot)?;
        if made.letter == "\\partial" {
            // A raised one is raised by the metric; where none is declared, levels are taken for mere notation.
            if index.level == Level::Up && self.has_metric() {
                self.surroundings.metric_of(index.family);
            }
            return Ok(Operator::Partial(index));
        }
        let declared = self.surroundings.meanings.derivatives.iter().find(|(kernel, _)| *kernel == made.kernel);
        match declared {
            Some((_, metric)) => {
                let metric = match metric.clone() {
                    Some(name) => self.surroundings.metric(&name, index.family),
                    None => self.surroundings.metric_of(index.family),
                };
                Ok(Operator::Covariant(metric, index))
            }
            // Without levels there is nothing that a covariant derivative could correct.
            None if made.kernel == "\\nabla" && index.level == Level::Inert => Ok(Operator::Partial(index)),
            None if made.kernel == "\\nabla" => {
                Ok(Operator::Covariant(self.surroundings.metric_of(index.family), index))
            }
            None => Err(format!("the derivative {} is not declared", shown(&made.kernel))),
        }
    }

    /// `\nabla^2`, `\partial^2`: the sum over both slots by the metric.
    fn laplacian(&mut self, factor: &Factor, made: &Use, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        let square = scripts::power(factor)? == Some(Rational::from_integer(2));
        let (of, taken) = self.acted_on(rest)?;
        if !square || made.slots.len() > 1 {
            return Err(format!("a power of {} is not understood", shown(&made.kernel)));
        }
        let letter = made.slots.first().and_then(UsedSlot::letter).cloned();
        let cartesian = letter.as_ref().is_none_or(|letter| self.eyes.is_cartesian(letter)) && !self.has_metric();
        let family = self.surroundings.family(letter.as_deref().unwrap_or("i"), cartesian);
        let flat = made.letter == "\\partial" || cartesian;
        if !flat {
            return Ok((self.twice_covariant(family, of), taken + 1));
        }
        let (one, two) = (self.fresh(), self.fresh());
        let level = if cartesian { Level::Inert } else { Level::Down };
        let index = |label| Operator::Partial(Index { filling: Filling::Label(label), level, family });
        if cartesian {
            return Ok((wrapped(vec![index(two), index(two)], of), taken + 1));
        }
        let twice = wrapped(vec![index(one), index(two)], of);
        Ok((Expression::Product(vec![self.inverse_metric(family, one, two), twice]), taken + 1))
    }

    /// `g^{ab} \nabla_a \nabla_b` of something.
    fn twice_covariant(&mut self, family: usize, of: Expression) -> Expression {
        let (one, two) = (self.fresh(), self.fresh());
        let metric = self.surroundings.metric_of(family);
        let index = |label| Index { filling: Filling::Label(label), level: Level::Down, family };
        let operators = vec![Operator::Covariant(metric, index(one)), Operator::Covariant(metric, index(two))];
        Expression::Product(vec![self.inverse_metric(family, one, two), wrapped(operators, of)])
    }

    fn inverse_metric(&mut self, family: usize, one: u16, two: u16) -> Expression {
        let metric = self.surroundings.metric_of(family);
        let up = |label| Index { filling: Filling::Label(label), level: Level::Up, family };
        Expression::Metric { metric, slots: [up(one), up(two)] }
    }

    /// Whether the document has a metric that is declared and not constant.
    fn has_metric(&self) -> bool {
        !self.surroundings.meanings.metrics().is_empty()
    }

    /// The derivatives that a fraction stands for, outermost first, and what it holds above the line to act on.
    fn derivative_fraction<'t>(&mut self, fraction: &'t Fraction) -> Result<Option<Operated<'t>>, Refusal> {
        let spelled = match fraction.kind {
            FractionKind::Quotient => true,
            FractionKind::Derivative("\\pdv") => false,
            FractionKind::Derivative(name) => return Err(format!("the derivative {name} is not evaluated")),
            _ => return Err("a fraction has no value".to_owned()),
        };
        let sign = |factor: &Factor| matches!(&factor.atom, Atom::Kernel(kernel) if kernel.letter == "\\partial");
        let above = match fraction.over.terms.as_slice() {
            [term] if term.sign.is_none() => term.factors.as_slice(),
            [] if !spelled => &[],
            _ if spelled => return Ok(None),
            _ => return Err("a sum stands above a derivative".to_owned()),
        };
        if spelled && !above.first().is_some_and(sign) {
            return Ok(None);
        }
        let [under] = fraction.under.terms.as_slice() else { return Err("a sum stands below a derivative".to_owned()) };
        let mut operators = Vec::new();
        for variable in under.factors.iter().filter(|factor| !(spelled && sign(factor))) {
            let Atom::Kernel(kernel) = &variable.atom else {
                return Err("a derivative is taken by what is no coordinate".to_owned());
            };
            let made = use_of(variable, kernel, self.eyes, true);
            let [slot] = made.slots.as_slice() else {
                return Err(format!("the derivative by {} is not evaluated", shown(&made.kernel)));
            };
            if !matches!(made.letter.as_str(), "x" | "X" | "y" | "q") || made.power {
                return Err(format!("the derivative by {} is not evaluated", shown(&made.kernel)));
            }
            operators.push(Operator::Partial(self.index(slot)?));
        }
        Ok(Some((operators, if spelled { above.get(1..).unwrap_or_default() } else { above })))
    }

    fn atom(&mut self, factor: &Factor) -> Lowered {
        let value = match &factor.atom {
            Atom::Number(number) => Expression::Number(exact(number)?),
            Atom::Fraction(fraction) if fraction.kind == FractionKind::Quotient => {
                let (over, under) = (self.side(&fraction.over)?, self.side(&fraction.under)?);
                self.no_matrix(std::slice::from_ref(&under), "a matrix stands below a line")?;
                match (&over, &under) {
                    (Expression::Number(over), Expression::Number(under)) => {
                        Expression::Number(over.checked_div(*under).ok_or("a number is divided by 0")?)
                    }
                    _ => Expression::Quotient(Box::new(over), Box::new(under)),
                }
            }
            Atom::Group(group) => self.group(group)?,
            Atom::Root(root) => {
                let degree = match &root.degree {
                    None => Rational::from_integer(2),
                    Some(degree) => scripts::number_of(degree).ok_or("the degree of a root is no number")?,
                };
                let power = degree.inverse().ok_or("a root has the degree 0")?;
                let body = self.side(&root.body)?;
                self.no_matrix(std::slice::from_ref(&body), "a root of a matrix is not evaluated")?;
                Expression::Power(Box::new(body), power)
            }
            Atom::Wrapped(sum) | Atom::Labelled(sum) if !sum.terms.is_empty() => self.side(sum)?,
            Atom::Big(Big::Integral, _) => return Err("an integral has no value here".to_owned()),
            Atom::Big(Big::Limit, _) => return Err("a limit has no value here".to_owned()),
            Atom::Big(Big::Sum, _) => return Err("a sum with a sign is not evaluated".to_owned()),
            Atom::Unknown(name, _) => return Err(format!("the command \\{name} is not defined")),
            Atom::Text(_) => return Err("words stand in it".to_owned()),
            Atom::Dots => return Err("an ellipsis stands in it".to_owned()),
            Atom::Matrix => return Err("a list of components stands in it".to_owned()),
            _ => return Err("a part of it is not evaluated".to_owned()),
        };
        if !factor.marks.is_empty() {
            return Err("something stands on a bracket".to_owned());
        }
        self.powered(value, factor)
    }

    /// A value under the power that stands on its factor.
    fn powered(&mut self, value: Expression, factor: &Factor) -> Lowered {
        if self.is_matrix(&value) {
            return self.matrix_in_brackets(value, factor);
        }
        match scripts::power(factor)? {
            None if factor.scripts.is_empty() => Ok(value),
            None => Err("indices stand on a bracket".to_owned()),
            Some(power) => self.powered_by(value, power),
        }
    }

    fn powered_by(&mut self, value: Expression, power: Rational) -> Lowered {
        if power == Rational::from_integer(2) && !value.free_slots().is_empty() {
            return Err("the square of something with indices is not evaluated".to_owned());
        }
        Ok(Expression::Power(Box::new(value), power))
    }

    fn group(&mut self, group: &Group) -> Lowered {
        let [part] = group.parts.as_slice() else { return Err("a list stands in it".to_owned()) };
        let [sum] = part.sides.as_slice() else { return Err("a relation stands in brackets".to_owned()) };
        match group.bracket {
            Bracket::Round | Bracket::Square | Bracket::Curly => self.side(sum),
            Bracket::Bars if group.left == "|" => {
                let of = self.side(sum)?;
                self.no_matrix(std::slice::from_ref(&of), "bars around a matrix are a norm or a determinant")?;
                Ok(Expression::Magnitude(Box::new(of)))
            }
            _ => Err("a norm or an average is not evaluated".to_owned()),
        }
    }

    /// `[\nabla_a, \nabla_b] V^c`: both orders, on what stands after it.
    fn commutator(&mut self, group: &Group, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        if let [one, two] = group.parts.as_slice()
            && let ([one], [two]) = (one.sides.as_slice(), two.sides.as_slice())
            && self.has_matrix(one)
            && self.has_matrix(two)
        {
            return Ok((self.commutator_of_matrices(one, two)?, 0));
        }
        let operators = |part: &tree::Statement| match part.sides.as_slice() {
            [side] if side.terms.len() == 1 => side.terms.first().map(|term| term.factors.clone()),
            _ => None,
        };
        let derivative =
            |factor: &Factor| matches!(&factor.atom, Atom::Kernel(kernel) if is_derivative(&kernel.letter));
        let (one, two) = match group.parts.as_slice() {
            [one, two] => (operators(one), operators(two)),
            _ => (None, None),
        };
        let (Some(one), Some(two)) = (one, two) else { return Err("a commutator is not understood".to_owned()) };
        if !one.iter().chain(&two).all(derivative) || rest.is_empty() {
            return Err("a commutator of what are no derivatives is not evaluated".to_owned());
        }
        let mut both = Vec::new();
        for (first, second) in [(&one, &two), (&two, &one)] {
            let all: Vec<Factor> = first.iter().chain(second).chain(rest).cloned().collect();
            both.push(self.one(&all)?);
        }
        let taken = both.first().map_or(0, |(_, taken)| taken.saturating_sub(one.len() + two.len()));
        let mut values = both.into_iter().map(|(value, _)| value);
        let (first, second) =
            (values.next().unwrap_or_else(Expression::zero), values.next().unwrap_or_else(Expression::zero));
        Ok((Expression::Sum(vec![first, second.negated()]), taken))
    }

    /// A product with brackets over the slots of several factors: the mean over all permutations.
    fn bracketed(&mut self, factors: &[Factor]) -> Lowered {
        let written = scripts::permuted(factors, PERMUTATIONS)?;
        self.antisymmetrised = self.antisymmetrised.max(written.antisymmetrised);
        let share = Rational::new(1, written.share).ok_or("a bracket is too long")?;
        let mut terms = Vec::new();
        for (negative, factors) in written.products {
            let value = self.product(&factors)?;
            terms.push(if negative { value.negated() } else { value });
        }
        Ok(Expression::Product(vec![Expression::Number(share), Expression::Sum(terms)]))
    }

    /// The index that a slot holds.
    fn index(&mut self, slot: &UsedSlot) -> Result<Index, Refusal> {
        match &slot.filling {
            uses::Filling::Index(letter) => {
                let cartesian = self.eyes.is_cartesian(letter);
                let family = self.surroundings.family(letter, cartesian);
                let level = match slot.level {
                    _ if cartesian => Level::Inert,
                    tree::Level::Up => Level::Up,
                    tree::Level::Down => Level::Down,
                };
                let filling = Filling::Label(self.label(letter));
                Ok(Index { filling, level, family })
            }
            uses::Filling::Component(name) => Err(format!("the component {name} is not evaluated")),
        }
    }

    fn label(&mut self, letter: &str) -> u16 {
        let at = self.letters.iter().position(|known| known == letter).unwrap_or_else(|| {
            self.letters.push(letter.into());
            self.letters.len() - 1
        });
        u16::try_from(at).unwrap_or(u16::MAX)
    }

    /// A label that no letter has.
    fn fresh(&mut self) -> u16 {
        let name = compact_str::format_compact!("?{}", self.letters.len());
        self.label(&name)
    }
}

/// The derivatives that a fraction stands for, and the factors above its line that they act on.
type Operated<'t> = (Vec<Operator>, &'t [Factor]);

/// A derivative before something.
#[derive(Clone, Copy, Debug)]
enum Operator {
    Partial(Index),
    Covariant(usize, Index),
}

/// What stands under derivatives, outermost first.
fn wrapped(operators: Vec<Operator>, of: Expression) -> Expression {
    operators.into_iter().rev().fold(of, |of, operator| match operator {
        Operator::Partial(index) => Expression::Partial(index, Box::new(of)),
        Operator::Covariant(metric, index) => Expression::Covariant { metric, index, of: Box::new(of) },
    })
}

/// A decimal number, exactly.
fn exact(text: &str) -> Result<Rational, Refusal> {
    crate::terms::exact(text).ok_or_else(|| format!("{text} is no plain number"))
}
