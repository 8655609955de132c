//! Elements, isotopes, species notation, angular momenta and term symbols.

mod half;
mod species;

pub use half::HalfInteger;
pub use species::Species;
