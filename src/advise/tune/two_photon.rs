//! Two photons of one colour.

use std::sync::Arc;

use vocabulary::light::Air;
use vocabulary::spectrum::Level;

use super::atom::{Atom, same_level};
use super::decay::dipole_allowed;
use super::error::LaserError;
use super::{Laser, MHZ_PER_CM, Populated, Question, reaching};
use crate::advise::{Placed, placed};

/// A two-photon transition: both photons have half its energy.
#[derive(Clone, Debug)]
pub struct TwoPhoton {
    /// Whose, in the list of atoms.
    pub atom: usize,
    /// The lasers that reach it.
    pub lasers: Vec<usize>,
    /// Lower level.
    pub lower: Arc<Level>,
    /// Upper level.
    pub upper: Arc<Level>,
    /// Vacuum wavenumber of each photon and its 1 σ, cm⁻¹.
    pub photon_per_cm: (f64, f64),
    /// Position of the laser in the medium asked for.
    pub placed: Placed,
    /// Nearest level that electric dipole radiation joins to both ends.
    pub intermediate: Option<Arc<Level>>,
    /// Part of the atoms in the lower level; `None` for a metastable one.
    pub lower_population: Option<f64>,
}

impl TwoPhoton {
    /// Laser detuning from the intermediate level, GHz; positive where the photon has more energy
    /// than the first step needs.
    pub fn detuning_ghz(&self) -> Option<f64> {
        let step = self.intermediate.as_ref()?.energy_per_cm - self.lower.energy_per_cm;
        Some((self.photon_per_cm.0 - step) * MHZ_PER_CM * 1e-3)
    }
}

/// Whether two like photons can join two levels: one parity, and J → J′ by rank 0 (ΔJ = 0) or
/// rank 2 (a triangle with 2); rank 1 drops out for equal photons (Bonin & McIlrath 1984, J. Opt.
/// Soc. Am. B 1, 52). Levels of unknown parity or J are not joined.
pub fn two_photon_allowed(one: &Level, other: &Level) -> bool {
    let (Some(p), Some(q), Some(j), Some(k)) = (one.parity, other.parity, one.j, other.j) else {
        return false;
    };
    let (j, k) = (j.twice(), k.twice());
    p == q && (j == k || (j.abs_diff(k) <= 4 && j + k >= 4))
}

/// All two-photon transitions from populated levels.
pub(super) fn answer(
    question: &Question,
    atoms: &[Atom],
    populated: &[Populated],
) -> Result<Vec<TwoPhoton>, LaserError> {
    let air = Air::standard();
    let (low, high) = photon_bounds(&question.lasers);
    let mut out = Vec::new();
    for (atom, this) in atoms.iter().enumerate().filter(|(_, a)| a.listed) {
        let levels = &this.spectrum.levels;
        for lower in levels.iter().filter(|l| populated[atom].holds(l.number)) {
            let from = lower.energy_per_cm + 2.0 * low;
            let to = lower.energy_per_cm + 2.0 * high;
            let start = levels.partition_point(|l| l.energy_per_cm < from);
            for upper in levels[start..].iter().take_while(|l| l.energy_per_cm <= to) {
                if !two_photon_allowed(lower, upper) || replaced(atoms, atom, lower, upper) {
                    continue;
                }
                let photon = (upper.energy_per_cm - lower.energy_per_cm) / 2.0;
                let lasers = reaching(&question.lasers, photon);
                if lasers.is_empty() {
                    continue;
                }
                let sigma = upper
                    .energy_uncertainty_per_cm
                    .hypot(lower.energy_uncertainty_per_cm)
                    / 2.0;
                let thermal = populated[atom].thermally(lower.number);
                out.push(TwoPhoton {
                    atom,
                    lasers,
                    photon_per_cm: (photon, sigma),
                    placed: placed(photon, sigma, question.medium, air)
                        .map_err(crate::advise::AdviseError::from)?,
                    intermediate: intermediate(levels, lower, upper),
                    lower_population: populated[atom].fraction(lower.number).filter(|_| thermal),
                    lower: Arc::clone(lower),
                    upper: Arc::clone(upper),
                });
            }
        }
    }
    out.sort_by(|a, b| a.photon_per_cm.0.total_cmp(&b.photon_per_cm.0));
    Ok(out)
}

fn photon_bounds(lasers: &[Laser]) -> (f64, f64) {
    let low = lasers
        .iter()
        .map(|l| l.range.wavenumber_low_per_cm)
        .fold(f64::INFINITY, f64::min);
    let high = lasers
        .iter()
        .map(|l| l.range.wavenumber_high_per_cm)
        .fold(0.0, f64::max);
    (low, high)
}

fn replaced(atoms: &[Atom], mixture: usize, lower: &Level, upper: &Level) -> bool {
    let holds = |a: &Atom, level: &Level| a.spectrum.levels.iter().any(|l| same_level(l, level));
    atoms
        .iter()
        .filter(|a| a.mixture == Some(mixture) && a.replaces_mixture)
        .any(|a| holds(a, lower) && holds(a, upper))
}

/// The level nearest to half way that both photons can reach by electric dipole radiation; it may
/// lie above the upper level too.
fn intermediate(levels: &[Arc<Level>], lower: &Level, upper: &Level) -> Option<Arc<Level>> {
    let half = f64::midpoint(lower.energy_per_cm, upper.energy_per_cm);
    let joins = |l: &&Arc<Level>| {
        dipole_allowed(l, lower) == Some(true) && dipole_allowed(l, upper) == Some(true)
    };
    levels
        .iter()
        .filter(joins)
        .min_by(|a, b| {
            (a.energy_per_cm - half)
                .abs()
                .total_cmp(&(b.energy_per_cm - half).abs())
        })
        .cloned()
}
