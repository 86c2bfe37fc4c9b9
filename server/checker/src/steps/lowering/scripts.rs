//! Scripts that are no plain indices: powers, and brackets that symmetrise, perhaps across factors.

use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::{Atom, Factor, Item, ItemKind, Joint, Level, Operator, SignKind, Sum};

use super::Refusal;

/// The power that stands on a factor; nothing if none does.
pub(super) fn power(factor: &Factor) -> Result<Option<Rational>, Refusal> {
    let mut found = None;
    for script in factor.scripts.iter().filter(|script| script.level == Level::Up) {
        if let Some(power) = power_of(&script.items) {
            found = Some(power);
        }
    }
    Ok(found)
}

/// `2`, `-1`, `1/2`, `-\frac12`: a number; nothing for anything else.
pub(super) fn power_of(items: &[Item]) -> Option<Rational> {
    let (negative, items) = match items {
        [Item { kind: ItemKind::Sign(SignKind::Minus), .. }, rest @ ..] => (true, rest),
        [Item { kind: ItemKind::Sign(SignKind::Plus), .. }, rest @ ..] => (false, rest),
        all => (false, all),
    };
    let value = match items {
        [Item { kind: ItemKind::Number(number), .. }] => crate::terms::exact(number)?,
        [
            Item { kind: ItemKind::Number(over), .. },
            Item { kind: ItemKind::Operator(Operator::Joint(Joint::Slash)), .. },
            Item { kind: ItemKind::Number(under), .. },
        ] => crate::terms::exact(over)?.checked_div(crate::terms::exact(under)?)?,
        [Item { kind: ItemKind::Factor(factor), .. }] => match &factor.atom {
            Atom::Fraction(fraction) if factor.scripts.is_empty() => {
                number_of(&fraction.over)?.checked_div(number_of(&fraction.under)?)?
            }
            _ => return None,
        },
        _ => return None,
    };
    Some(if negative { -value } else { value })
}

/// A sum that is one plain number.
pub(super) fn number_of(sum: &Sum) -> Option<Rational> {
    let [term] = sum.terms.as_slice() else { return None };
    let [factor] = term.factors.as_slice() else { return None };
    let Atom::Number(number) = &factor.atom else { return None };
    let value = crate::terms::exact(number).filter(|_| factor.scripts.is_empty())?;
    match term.sign.map_or(SignKind::Plus, |sign| sign.kind) {
        SignKind::Plus => Some(value),
        SignKind::Minus => Some(-value),
        _ => None,
    }
}

/// A letter inside a symmetrising bracket: factor, script and item.
type Place = (usize, usize, usize);

/// A bracket over letters.
struct Held {
    antisymmetric: bool,
    places: Vec<Place>,
}

/// Whether symmetrising brackets stand in the scripts of a product.
pub(super) fn brackets_across(factors: &[Factor]) -> Result<bool, Refusal> {
    Ok(!held(factors)?.is_empty())
}

/// The brackets of a product, in the order in which they close; those that hold fewer than two letters do nothing.
fn held(factors: &[Factor]) -> Result<Vec<Held>, Refusal> {
    let mut open: Vec<(Held, Level, bool)> = Vec::new();
    let mut out = Vec::new();
    for (f, factor) in factors.iter().enumerate() {
        for (s, script) in factor.scripts.iter().enumerate() {
            for (i, item) in script.items.iter().enumerate() {
                match &item.kind {
                    ItemKind::Open(sign @ ('(' | '[')) => {
                        if open.last().is_some_and(|(_, _, barred)| *barred) {
                            return Err("brackets cross one another in scripts".to_owned());
                        }
                        open.push((Held { antisymmetric: *sign == '[', places: Vec::new() }, script.level, false));
                    }
                    ItemKind::Close(')' | ']') => {
                        let (held, ..) = open.pop().ok_or("a bracket in a script is not opened")?;
                        out.push(held);
                    }
                    ItemKind::Bar => {
                        if let Some((_, _, barred)) = open.last_mut() {
                            *barred = !*barred;
                        }
                    }
                    ItemKind::Letter(_) => {
                        if let Some((held, level, false)) = open.last_mut()
                            && *level == script.level
                        {
                            held.places.push((f, s, i));
                        }
                    }
                    _ => {}
                }
            }
        }
    }
    if !open.is_empty() {
        return Err("a bracket in a script is not closed".to_owned());
    }
    out.retain(|held: &Held| held.places.len() > 1);
    Ok(out)
}

/// A product with its brackets written out.
pub(super) struct Permuted {
    /// How many products there are: each counts by its share.
    pub share: i128,
    /// Whether it counts negative, and its factors without brackets.
    pub products: Vec<(bool, Vec<Factor>)>,
    /// The most letters that one bracket antisymmetrises.
    pub antisymmetrised: usize,
}

/// Writes the brackets of a product out, up to so many products.
pub(super) fn permuted(factors: &[Factor], most: usize) -> Result<Permuted, Refusal> {
    let mut products = vec![(false, factors.to_vec())];
    let mut antisymmetrised = 0;
    for bracket in held(factors)? {
        if bracket.antisymmetric {
            antisymmetrised = antisymmetrised.max(bracket.places.len());
        }
        let orders = permutations(bracket.places.len(), most).ok_or("a bracket holds too many letters")?;
        if products.len() * orders.len() > most {
            return Err("the brackets hold too many letters".to_owned());
        }
        products = products
            .iter()
            .flat_map(|(negative, factors)| {
                orders.iter().map(|(odd, order)| {
                    (*negative != (*odd && bracket.antisymmetric), reordered(factors, &bracket.places, order))
                })
            })
            .collect();
    }
    for (_, factors) in &mut products {
        for script in factors.iter_mut().flat_map(|factor| &mut factor.scripts) {
            script.items.retain(|item| {
                !matches!(item.kind, ItemKind::Open('(' | '[') | ItemKind::Close(')' | ']') | ItemKind::Bar)
            });
        }
    }
    let share = i128::try_from(products.len()).map_err(|_| "the brackets hold too many letters")?;
    Ok(Permuted { share, products, antisymmetrised })
}

/// The factors with the letters at these places in another order; each letter keeps its span, by which its reading is
/// found.
fn reordered(factors: &[Factor], places: &[Place], order: &[usize]) -> Vec<Factor> {
    let mut out = factors.to_vec();
    let item = |(f, s, i): Place| factors.get(f)?.scripts.get(s)?.items.get(i);
    for (at, from) in order.iter().enumerate() {
        let (Some(to), Some(letter)) = (places.get(at), places.get(*from).and_then(|place| item(*place))) else {
            continue;
        };
        let target =
            out.get_mut(to.0).and_then(|factor| factor.scripts.get_mut(to.1)).and_then(|s| s.items.get_mut(to.2));
        if let Some(target) = target {
            *target = letter.clone();
        }
    }
    out
}

/// All orders of so many things with their parity; nothing if there are more than `most`.
fn permutations(count: usize, most: usize) -> Option<Vec<(bool, Vec<usize>)>> {
    let mut out = vec![(false, Vec::new())];
    for next in 0..count {
        out = out
            .iter()
            .flat_map(|(odd, order): &(bool, Vec<usize>)| {
                (0..=order.len()).map(move |at| {
                    let mut longer = order.clone();
                    longer.insert(at, next);
                    (*odd != ((order.len() - at) % 2 == 1), longer)
                })
            })
            .collect();
        if out.len() > most {
            return None;
        }
    }
    Some(out)
}
