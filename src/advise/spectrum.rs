//! What an answer is given of one species.

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::spectrum::{Level, Line, Scope, Strength};

/// All that an answer needs to know of one species.
#[derive(Clone, Debug)]
pub struct Spectrum {
    /// Whose spectrum.
    pub species: Species,
    /// Relative amount in the mix, above or equal to zero.
    pub amount: f64,
    /// The stage was asked for by name, not only its element.
    pub named: bool,
    /// All levels, by number.
    pub levels: Vec<Arc<Level>>,
    /// Lines in the range of the question and its margin, by wavenumber.
    pub lines: Vec<Line>,
    /// All lines of the species.
    pub strengths: Vec<Strength>,
    /// Ionisation energy, cm⁻¹, where held.
    pub limit_per_cm: Option<f64>,
    /// Mass of the atom, u.
    pub mass_u: f64,
    /// What the sources claim to cover.
    pub scopes: Vec<Scope>,
}

impl Spectrum {
    /// Sum of the held decay rates out of each level, by number; s⁻¹. A lower bound where decays
    /// are not held or not rated.
    pub fn decay_rates(&self) -> Vec<f64> {
        let mut sums = vec![0.0; self.levels.len()];
        for strength in &self.strengths {
            if let (Some(rate), Some(upper)) = (strength.rate_per_s, strength.upper)
                && let Some(sum) = sums.get_mut(upper as usize)
            {
                *sum += rate;
            }
        }
        sums
    }
}
