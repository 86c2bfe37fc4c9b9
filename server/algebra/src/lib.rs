//! Exact arithmetic for index notation.
