//! Plasmas: populations of levels, partition functions, ionisation balance.
//!
//! All energies are in cm⁻¹, as the catalogue holds them; k T too ([`kt_per_cm_from_kelvin`],
//! [`kt_per_cm_from_ev`]). Models are optically thin.

mod boltzmann;
mod continuum;
mod coronal;
mod error;
mod escape;
mod excitation;
mod expint;
mod gaunt_table;
mod ionisation;
mod lowering;
mod partition;
mod saha;
mod stage;

pub use boltzmann::{boltzmann_ratio, kt_per_cm_from_ev, kt_per_cm_from_kelvin};
pub use continuum::{free_free_gaunt, free_free_w_per_m3_sr_nm};
pub use coronal::{CoronalEmission, CoronalLevel, CoronalLine, coronal_emission};
pub use error::PlasmaError;
pub use escape::{escape_probability, line_centre_optical_depth, self_absorption_factor};
pub use excitation::{
    Target, UNKNOWN_STRENGTH_SIGMA_DEX, absorption_f, excitation_by_strength, excitation_rate,
    excitation_uncertainty_factor, mean_gaunt, unknown_collision_strength,
};
pub use ionisation::{
    CoreTransition, DEFAULT_LOTZ, HYDROGEN_LOTZ, Subshell, coronal_balance,
    dielectronic_recombination, radiative_recombination, recombination_into_shell,
};
pub use lowering::{debye_length_m, lowering_per_cm};
pub use partition::{Partition, Plasma, partition_function, planck_larkin};
pub use saha::{Stage, ionisation_balance, ln_saha_ratio, saha_ratio};
pub use stage::{OuterSubshell, StageRates, outer_subshell, stage_rates};
