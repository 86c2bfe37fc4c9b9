//! Commands of the server.

/// Their names.
pub const COMMANDS: [&str; 5] = [
    "indexwise.writeOut",
    "indexwise.checkDerivation",
    "indexwise.explain",
    "indexwise.symbolTable",
    "indexwise.ledger",
];
