//! Bytes to lines and columns and back.
