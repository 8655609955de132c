//! lineclear: atomic energy levels and spectral lines, and what gets in the way of the one you want.

pub use importers;
pub use vocabulary;

pub mod advise;
pub mod calc;
pub mod catalogue;
pub mod cli;
pub mod show;
