//! The physics: pure functions on vocabulary types, no I/O.

pub mod filter;
pub mod plasma;
pub mod series;
pub mod shape;
