//! One electron and a nucleus: levels, lines and rates for any charge from 1 to 110.
//!
//! # Model
//! The energy of n l j is the sum of
//! 1. the Dirac energy of a point nucleus with the reduced mass, and its recoil terms of order (Zα)⁴ m/M;
//! 2. relativistic recoil of order (Zα)⁵, (Zα)⁶ and (Zα)⁷ ln² (Zα);
//! 3. self-energy: the terms A41, A40 (with exact Bethe logarithms), A50, A62, A61 and a remainder that is
//!    tabulated over Z for 1s, 2s and 2p and carried on to other n by the n-dependence of hydrogen;
//! 4. vacuum polarisation: V40, V50, V61, a remainder computed from Dirac wave functions, the
//!    Wichmann–Kroll, muonic and hadronic parts;
//! 5. two photons (B40, B50, B63, B62, B61, B60), three photons, radiative recoil, radiation from the nucleus;
//! 6. the finite nucleus: its charge radius (all orders in Zα) and, for light nuclei, its polarisability.
//!
//! Constants are those of CODATA 2022. Energies are means over hyperfine
//! structure; [`hyperfine_levels`] adds it.
//!
//! # Validity and uncertainty
//! Fine structure is given for n ≤ 50, mean shell energies for n ≤ 1000. The 1 σ of a level is built from
//! the Rydberg constant and mass, the charge radius, the table values, and for every truncated series the size
//! of what was left out; the parts that levels have in common cancel in the 1 σ of a line. For hydrogen 1s it is
//! about 7 kHz; it grows with Z⁴ to Z⁶ and is dominated above Z ≈ 30 by the remembered table of F and by the
//! nuclear radius. Screening, other electrons and outside fields are not in the model.
//!
//! Rates are nonrelativistic electric-dipole rates, exact to 1e-12 within that model, with a stated relative
//! 1 σ of 1.5 (Zα)². Two-photon and magnetic-dipole decay are included for 2s alone.

mod bethe;
mod bethe_table;
mod dirac;
mod energy;
mod error;
mod hyperfine;
mod levels;
mod nucleus;
mod qed;
mod radial;
mod rates;
mod remainders;
mod species;

pub use energy::Energy;
pub use error::OneElectronError;
pub use hyperfine::{HyperfineLevel, NuclearMoment, hyperfine_levels};
pub use levels::{
    HIGHEST_FINE_N, HIGHEST_GROSS_N, OneElectronLevel, energy, gross_energy, level_index, levels,
    series_name,
};
pub use nucleus::{HIGHEST_ATOMIC_NUMBER, Nucleus, typical_radius_fm};
pub use radial::{ContinuumPair, HIGHEST_RADIAL_N, ShellPair, mean_square_radius, radial_integral};
pub use rates::{
    OneElectronLine, component_rate, decay_rate, lifetime_s, lines, lines_between, magnetic_rate,
    orbital_rate, oscillator_strength, rate_relative_uncertainty, shell_oscillator_strength,
    shell_rate, two_photon_rate,
};
