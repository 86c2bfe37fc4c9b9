//! What every symbol means, and on what evidence: declared by the author, built in by the trade, inferred from use.

pub mod built_in;
pub mod clashes;
pub mod declared;
pub mod implied;
pub mod inferred;
pub mod inquiries;
pub mod meanings;
pub mod prices;
