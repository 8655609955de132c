//! The physics: pure functions on vocabulary types, no I/O.

pub mod angular;
pub mod coulomb;
pub mod filter;
pub mod one_electron;
pub mod plasma;
pub mod prior;
pub mod series;
pub mod shape;
