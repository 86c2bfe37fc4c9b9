//! In how many places the outcome of a claim hangs on signs that are drawn: `\sqrt{f^2} = f` holds at every second
//! point, and no bound on degrees knows of that.

use super::{Claim, functions};
use crate::evaluation::needs::Needs;
use crate::expression::{Expression, MetricValues, World};

/// How many bits of error are asked for where signs are drawn.
const SIGN_BITS: u64 = 20;

/// The most draws for the sake of signs.
const MOST_DRAWS: u64 = 64;

/// For so many signs, one more each, the bits of one draw in thousandths, rounded down: a wrong claim is seen to be
/// wrong in one of `2^s` cases at least, and `-log2(1 - 2^-s)` bits are gained by a draw that does not see it.
const BITS_OF_A_DRAW: [u64; 6] = [1000, 415, 192, 93, 45, 22];

/// What signs ask for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Signs {
    /// How many draws there must be in all.
    pub draws: usize,
    /// Thousandths of a bit for each draw; nothing if no signs are drawn.
    pub bits: Option<u64>,
}

impl Signs {
    /// Of the roots of even order and the absolute values of a claim, each counted once.
    pub fn of(claim: &Claim, needs: &Needs) -> Self {
        let mut found: Vec<&Expression> = Vec::new();
        let mut pending = functions::expressions(claim, needs);
        while let Some(expression) = pending.pop() {
            pending.extend(expression.parts());
            let of = match expression {
                Expression::Magnitude(of) => of,
                Expression::Power(of, exponent) if exponent.denominator() % 2 == 0 => of,
                _ => continue,
            };
            if !is_volume(of, &claim.world) && !found.contains(&expression) {
                found.push(expression);
            }
        }
        let Some(last) = found.len().checked_sub(1) else { return Self { draws: 0, bits: None } };
        let bits = BITS_OF_A_DRAW.get(last).or(BITS_OF_A_DRAW.last()).copied().unwrap_or(1);
        let draws = (1000 * SIGN_BITS).div_ceil(bits).min(MOST_DRAWS);
        Self { draws: usize::try_from(draws).unwrap_or_default(), bits: Some(bits) }
    }

    /// The bits of so many draws, at most those that are left without signs.
    pub fn bound(self, draws: usize, bits: u32) -> u32 {
        let most = |each: u64| u32::try_from(each.saturating_mul(draws as u64) / 1000).unwrap_or(u32::MAX);
        self.bits.map_or(bits, |each| bits.min(most(each)))
    }
}

/// Whether this is the determinant of a metric that is drawn, or its opposite, or its size: its sign is that of the
/// signature, and it is no square of anything that a claim can name.
fn is_volume(of: &Expression, world: &World) -> bool {
    match of {
        Expression::Determinant(metric) => {
            let values = world.metrics.get(*metric).map(|metric| &metric.values);
            values.is_some_and(|values| !matches!(values, MetricValues::Defined(_)))
        }
        Expression::Magnitude(of) => matches!(**of, Expression::Determinant(_)) && is_volume(of, world),
        Expression::Product(factors) => match &factors[..] {
            [Expression::Number(_), of] => matches!(of, Expression::Determinant(_)) && is_volume(of, world),
            _ => false,
        },
        _ => false,
    }
}
