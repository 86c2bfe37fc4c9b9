//! How a law is stated once and tested for every kind of number.

/// A test that holds a generic law over both primes and over fractions; with `and the extension`, over the quadratic
/// extension too.
macro_rules! law {
    ($name:ident, $law:ident) => {
        #[test]
        fn $name() {
            $law::<crate::field::Residue<{ crate::field::FIRST }>>();
            $law::<crate::field::Residue<{ crate::field::SECOND }>>();
            $law::<crate::number::Exact>();
        }
    };
    ($name:ident, $law:ident, and the extension) => {
        #[test]
        fn $name() {
            $law::<crate::field::Residue<{ crate::field::FIRST }>>();
            $law::<crate::field::Residue<{ crate::field::SECOND }>>();
            $law::<crate::field::Complex<{ crate::field::FIRST }>>();
            $law::<crate::number::Exact>();
        }
    };
}
pub(crate) use law;
