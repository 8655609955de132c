//! Rydberg series: quantum defects fitted to measured levels, and what they predict.
//!
//! Model: one electron outside a core of charge `Z_c` (1 for a neutral), whose levels are
//! `E_n = L − Z_c² R_M / (n − δ_n)²` with the Ritz expansion
//! `δ_n = δ₀ + δ₂/(n − δ₀)² + δ₄/(n − δ₀)⁴ + …`
//! (Ritz 1903, Phys. Z. 4, 406; the form with δ₀ in the denominators as in
//! Drake & Swainson 1991, Phys. Rev. A 44, 5448). It holds for a series that no level of
//! another configuration crosses, of one core state and one J; it says nothing about
//! doubly excited levels or levels above the limit.
//!
//! The uncertainty of a prediction has three parts, added in quadrature: the covariance of
//! the weighted fit (with the limit as one of its parameters), the scale factor of a fit
//! that misses its data, and the Ritz terms that were left out, whose size is taken from
//! those that were kept (see [`NeglectedTerms`]). The last was tuned on one half of the
//! series of the bundled tables and judged on the other (`tests/series_withheld.rs`).

mod error;
mod fit;
pub mod group;
mod input;
pub mod label;
mod linear;
pub mod polarisation;
mod predict;
mod ritz;
mod solve;

pub use error::SeriesError;
pub use fit::{SeriesFit, fit, fit_with};
pub use group::{LabelledLevel, Series, SeriesKey, group_series};
pub use input::{Core, Limit, Member, SeriesInput};
pub use label::{OuterElectron, outer_electron};
pub use predict::{Prediction, PredictionMethod};
pub use ritz::NeglectedTerms;

/// Spectroscopic letter of an orbital angular momentum `l`; `None` beyond l = 20.
pub fn orbital_letter(l: u32) -> Option<char> {
    // j is skipped, and p and s are not used again: common practice.
    "spdfghiklmnoqrtuvwxyz".chars().nth(l as usize)
}

/// Orbital angular momentum of a spectroscopic letter (lower case); `None` for others.
pub fn orbital_number(letter: char) -> Option<u32> {
    "spdfghiklmnoqrtuvwxyz"
        .chars()
        .position(|known| known == letter)
        .map(|l| l as u32)
}
