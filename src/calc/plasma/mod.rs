//! Plasmas: populations of levels, partition functions, ionisation balance.
//!
//! All energies are in cm⁻¹, as the catalogue holds them; k T too ([`kt_per_cm_from_kelvin`],
//! [`kt_per_cm_from_ev`]). Models are optically thin.

mod boltzmann;
mod error;
mod lowering;
mod partition;
mod saha;

pub use boltzmann::{boltzmann_ratio, kt_per_cm_from_ev, kt_per_cm_from_kelvin};
pub use error::PlasmaError;
pub use lowering::{debye_length_m, lowering_per_cm};
pub use partition::{Partition, Plasma, partition_function, planck_larkin};
pub use saha::{Stage, ionisation_balance, ln_saha_ratio, saha_ratio};
