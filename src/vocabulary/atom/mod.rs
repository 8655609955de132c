//! Elements, isotopes, species notation, ionisation limits, angular momenta and term symbols.

mod configuration;
mod element;
mod error;
mod half;
mod isotope;
mod limit;
mod notation;
mod one_electron;
mod request;
mod roman;
mod selection;
mod species;
mod term;

pub use configuration::{Configuration, OuterElectron, Shell, orbital_letter, orbital_number};
pub use element::{Element, MassKind, element, element_by_symbol, elements};
pub use error::SpeciesError;
pub use half::HalfInteger;
pub use isotope::{Isotope, isotope, isotopes, mass_u};
pub use limit::{Limit, LimitUncertainty, limit, limit_reports};
pub use one_electron::OneElectronLabel;
pub use request::{SpeciesRequest, Stages};
pub use roman::{from_roman, to_roman};
pub use selection::{
    DipoleClass, dipole_class, electric_quadrupole_allowed, magnetic_dipole_allowed,
};
pub use species::Species;
pub use term::Term;
