//! Spectral quantities, units, the index of air, thermal radiation and photon thresholds.

pub mod constants;
