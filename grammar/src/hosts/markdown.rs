//! Host scan.
use super::Scan;
use crate::macros::Macros;

/// Scans.
pub(super) fn scan(_text: &str, _macros: &Macros) -> Scan {
    Scan::default()
}
