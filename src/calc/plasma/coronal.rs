//! Line emission of a thin plasma: excited from the ground level, decaying by radiation alone.

use super::error::{PlasmaError, positive};
use super::excitation::{Target, absorption_f, excitation_rate};

/// A level of one ion.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CoronalLevel {
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// Statistical weight.
    pub weight: f64,
}

/// A line of that ion.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CoronalLine {
    /// Index of the lower level.
    pub lower: usize,
    /// Index of the upper level.
    pub upper: usize,
    /// Emission rate A, s⁻¹.
    pub rate_per_s: f64,
    /// For an electric-dipole line, what its f gives the excitation rate for; `None` for a
    /// forbidden or spin-forbidden line, which only radiates.
    pub excitation: Option<Target>,
}

/// What the corona model makes of an ion.
#[derive(Clone, Debug, PartialEq)]
pub struct CoronalEmission {
    /// Photons per second, per atom of the species and per electron per m³ (so m³/s), line by line.
    pub photons_m3_per_s: Vec<f64>,
    /// Excitation of each level straight from populated ones, in the same unit.
    pub direct_m3_per_s: Vec<f64>,
    /// All that reaches each level, cascades included, in the same unit.
    pub feed_m3_per_s: Vec<f64>,
    /// Sum of the held rates out of each level, s⁻¹.
    pub decay_per_s: Vec<f64>,
    /// Levels that emit lines but that nothing in the model feeds: their lines come out as zero
    /// *because the data lack a way to excite them*, and an answer names them as unrated.
    pub unfed: Vec<usize>,
}

/// Emission in the corona model (excitation = radiative decay; R. W. P. McWhirter 1965, in *Plasma
/// Diagnostic Techniques*, ch. 5).
///
/// `populated` gives the levels that hold the atoms, with the fraction in each: the ground level,
/// and metastable ones where their population is known. They excite by allowed lines
/// ([`excitation_rate`]); each excited level passes on what it gets by its branching fractions,
/// cascades included. Levels in `populated` keep their population: what cascades into them is not
/// counted again. Branching is by the rates held: a missing strong decay makes a line too strong.
/// Valid while collisions out of a level are rare, n_e X ≪ A.
///
/// # Errors
/// k T not positive; a line between levels that do not exist or are in the wrong order; a negative
/// rate.
pub fn coronal_emission(
    levels: &[CoronalLevel],
    lines: &[CoronalLine],
    populated: &[(usize, f64)],
    kt_per_cm: f64,
) -> Result<CoronalEmission, PlasmaError> {
    positive("k T in per cm", kt_per_cm)?;
    for line in lines {
        check(levels, *line)?;
    }
    let mut feed = vec![0.0; levels.len()];
    for line in lines {
        let held = populated.iter().find(|p| p.0 == line.lower);
        let (Some((_, fraction)), Some(target)) = (held, line.excitation) else {
            continue;
        };
        let (lower, upper) = (levels[line.lower], levels[line.upper]);
        let energy = upper.energy_per_cm - lower.energy_per_cm;
        let f = absorption_f(line.rate_per_s, upper.weight, lower.weight, energy);
        feed[line.upper] += fraction * excitation_rate(energy, f, kt_per_cm, target)?;
    }
    Ok(cascade(levels, lines, populated, feed))
}

fn check(levels: &[CoronalLevel], line: CoronalLine) -> Result<(), PlasmaError> {
    let sound = match (levels.get(line.lower), levels.get(line.upper)) {
        (Some(lower), Some(upper)) => {
            upper.energy_per_cm > lower.energy_per_cm && lower.weight > 0.0 && upper.weight > 0.0
        }
        _ => false,
    };
    if sound && line.rate_per_s.is_finite() && line.rate_per_s >= 0.0 {
        return Ok(());
    }
    Err(PlasmaError::BadTransition {
        lower: line.lower,
        upper: line.upper,
    })
}

/// From the highest level downwards, so that each level has all its feed before it passes it on.
fn cascade(
    levels: &[CoronalLevel],
    lines: &[CoronalLine],
    populated: &[(usize, f64)],
    mut feed: Vec<f64>,
) -> CoronalEmission {
    let direct = feed.clone();
    let mut total = vec![0.0; levels.len()];
    let mut below: Vec<Vec<usize>> = vec![Vec::new(); levels.len()];
    for (index, line) in lines.iter().enumerate() {
        total[line.upper] += line.rate_per_s;
        below[line.upper].push(index);
    }
    let mut order: Vec<usize> = (0..levels.len()).collect();
    order.sort_by(|&a, &b| levels[b].energy_per_cm.total_cmp(&levels[a].energy_per_cm));
    let mut photons = vec![0.0; lines.len()];
    let mut unfed = Vec::new();
    for level in order {
        let is_held = populated.iter().any(|p| p.0 == level && p.1 > 0.0);
        if total[level] == 0.0 || is_held {
            continue;
        }
        if feed[level] == 0.0 {
            unfed.push(level);
            continue;
        }
        for &index in &below[level] {
            let line = lines[index];
            let flow = feed[level] * line.rate_per_s / total[level];
            photons[index] = flow;
            feed[line.lower] += flow;
        }
    }
    unfed.sort_unstable();
    CoronalEmission {
        photons_m3_per_s: photons,
        direct_m3_per_s: direct,
        feed_m3_per_s: feed,
        decay_per_s: total,
        unfed,
    }
}
