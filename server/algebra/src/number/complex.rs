//! The quadratic extension as numbers. Roots and signs are those of its real members; the others have none,
//! for no choice of a root among them would be multiplicative.

use super::{Number, common_divisor};
use crate::draws::Draws;
use crate::field::{Complex, Residue};

impl<const P: u64> Number for Complex<P> {
    /// Real and imaginary part.
    type Sum = (u128, u128);

    /// Each part grows by two products at a time.
    const RUN: usize = Residue::<P>::RUN / 2;
    const ZERO: Self = Self::ZERO;
    const ONE: Self = Self::ONE;
    const EMPTY: (u128, u128) = (0, 0);

    fn from_integer(number: i64) -> Self {
        <Residue<P> as Number>::from_integer(number).into()
    }

    fn draw(draws: &mut Draws) -> Self {
        Self::new(Residue::draw(draws), Residue::draw(draws))
    }

    fn draw_real(draws: &mut Draws) -> Self {
        Residue::draw(draws).into()
    }

    fn imaginary_unit() -> Option<Self> {
        Some(Self::I)
    }

    fn inverse(self) -> Option<Self> {
        self.inverse()
    }

    fn magnitude(self) -> Option<Self> {
        self.imaginary.is_zero().then(|| self.real.magnitude().into())
    }

    fn power(self, numerator: i64, denominator: u64) -> Option<Self> {
        if common_divisor(numerator.unsigned_abs(), denominator) == denominator && denominator > 0 {
            let base = if numerator < 0 { self.inverse()? } else { self };
            return Some(base.pow(numerator.unsigned_abs() / denominator));
        }
        let real = self.imaginary.is_zero().then_some(self.real)?;
        Number::power(real, numerator, denominator).map(Self::from)
    }

    fn add_unsettled((real, imaginary): (u128, u128), a: Self, b: Self) -> (u128, u128) {
        let real = Residue::add_unsettled(real, a.real, b.real);
        let imaginary = Residue::add_unsettled(imaginary, a.real, b.imaginary);
        let real = Residue::add_unsettled(real, -a.imaginary, b.imaginary);
        (real, Residue::add_unsettled(imaginary, a.imaginary, b.real))
    }

    fn settled((real, imaginary): (u128, u128)) -> (u128, u128) {
        (Residue::<P>::settled(real), Residue::<P>::settled(imaginary))
    }

    fn total((real, imaginary): (u128, u128)) -> Self {
        Self::new(Residue::from_wide(real), Residue::from_wide(imaginary))
    }
}
