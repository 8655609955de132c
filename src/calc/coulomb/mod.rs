//! Transition rates by the Coulomb approximation.
//!
//! The jumping electron is taken to move in the field of the core charge alone, at its measured
//! binding energy (Bates & Damgaard 1949, Phil. Trans. R. Soc. A 242, 101): its orbital is the
//! decaying Coulomb function of effective principal quantum number `ν = Z_c √(R_M / (L − E))`,
//! wrong only inside the core, where a dipole integral gathers little. The polarisation of the
//! core screens the field of the light (Bersuker 1957, Opt. Spectrosc. 3, 97; Hameed, Herzenberg &
//! James 1968, J. Phys. B 1, 822). J-resolved rates follow by LS coupling.
//!
//! **Valid** for one electron that jumps between two shells outside one and the same core, in LS
//! coupling, ΔS = 0. It does not know the mixing of configurations, so that two-electron atoms (Mg I, Ca I)
//! and open shells are worse than alkalis; intercombination lines, jumps of equivalent electrons and jumps that change the core
//! are refused. Where the positive and negative parts of the integral cancel, small errors of the orbitals
//! grow: the uncertainty of a rate grows with the ratio of the integral of the magnitude to the
//! magnitude of the integral.

mod decay;
mod error;
mod gaps;
mod integral;
mod orbital;
mod rate;
mod setting;
mod strength;

pub use decay::{
    Coupling, Lifetime, Transition, black_body_lifetime, lifetime, photon_number,
    polarisability_scale_a0_3, scalar_polarisability_a0_3,
};
pub use error::CoulombError;
pub use gaps::{
    BoundLevel, ComputedLevel, ComputedLine, PredictedSeries, Species, bound_line_between,
    line_between, predict_bound_lines, predict_lines, predict_scaled_series, predict_series,
};
pub use integral::{CorePolarisation, RadialIntegral, radial_integral};
pub use orbital::{Orbital, effective_quantum_number};
pub use rate::{Active, DEEPEST, Rate, RateClass, RateModel, rate};
pub use setting::{OuterLevel, Setting};
pub use strength::{LsState, line_strength_factor, rate_per_s, strength_e2_a0_2};
