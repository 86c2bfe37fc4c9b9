//! Expansion under a budget.
