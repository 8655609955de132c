//! What chance does: the same list, shifted by many line widths, runs through the same steps.

use super::matches::{Matches, peak_density};
use super::{ATTRIBUTED, Found, Peak, PeakAnswer, Room, Scale};

/// Shifted lists.
const DECOYS: usize = 10;
/// A shift is a multiple of so many widths, or of so many σ where that is more.
const SHIFT_WIDTHS: f64 = 10.0;
const SHIFT_SIGMA: f64 = 25.0;

/// What the shifted lists gave.
pub(super) struct Decoys {
    /// Part of their peaks that the species of the true list would claim.
    pub chance_match: f64,
    /// Species found in them from scratch, on average.
    pub chance_species: f64,
    /// How many.
    pub count: usize,
}

pub(super) fn judge(room: &Room<'_>, peaks: &[Peak], found: &Found, scale: Scale) -> Decoys {
    let width = room.question.width.at_nm(scale.middle_nm);
    let sigma = peaks.iter().map(|p| p.sigma_nm).fold(0.0, f64::max);
    let step = (SHIFT_WIDTHS * width).max(SHIFT_SIGMA * sigma);
    let (mut matched, mut species) = (0, 0);
    for k in 0..DECOYS {
        // Both ways, at distances that are no multiples of each other.
        let sign = if k % 2 == 0 { 1.0 } else { -1.0 };
        let shift = sign * step * (1.0 + (k / 2) as f64 * 1.37);
        let list = shifted(peaks, room.range, shift);
        let matches = Matches::new(&room.templates, &list, |nm| scale.at(nm));
        let density = peak_density(&list, room.range);
        let case = room.case(&matches, &density);
        let (blind, _) = case.species();
        species += blind.iter().filter(|e| e.present).count();
        // The species of the true list, nothing being known of the peaks.
        let unclaimed = vec![0.9; list.len()];
        let candidates = room.candidates(&case, &list, &found.evidence, &unclaimed);
        let claims = |c: &&Vec<(super::Match, f64)>| c.first().is_some_and(|c| c.1 >= ATTRIBUTED);
        matched += candidates.iter().filter(claims).count();
    }
    Decoys {
        chance_match: matched as f64 / (DECOYS * peaks.len().max(1)) as f64,
        chance_species: species as f64 / DECOYS as f64,
        count: DECOYS,
    }
}

/// The list moved, what leaves one end of the range coming in at the other.
fn shifted(peaks: &[Peak], range: (f64, f64), shift_nm: f64) -> Vec<Peak> {
    let span = range.1 - range.0;
    let mut out: Vec<Peak> = peaks
        .iter()
        .map(|peak| {
            let vacuum_nm = range.0 + (peak.vacuum_nm - range.0 + shift_nm).rem_euclid(span);
            let moved = vacuum_nm - peak.vacuum_nm;
            Peak {
                vacuum_nm,
                second_order_vacuum_nm: peak.second_order_vacuum_nm.map(|nm| nm + moved / 2.0),
                ..*peak
            }
        })
        .collect();
    out.sort_by(|a, b| a.vacuum_nm.total_cmp(&b.vacuum_nm));
    out
}

/// Expected part of wrong first candidates among attributed peaks. Of N peaks M are attributed; a
/// peak whose origin is not among the species is attributed by chance with probability r, so that
/// r (N − M)/(1 − r) attributions are chance ones (J. D. Storey 2002, J. R. Stat. Soc. B 64, 479,
/// with the part of true nulls taken from N − M); and each attribution is wrong with the
/// probability of its rival candidates.
pub(super) fn false_discovery_rate(peaks: &[PeakAnswer], chance_match: f64) -> Option<f64> {
    let attributed: Vec<&PeakAnswer> = peaks.iter().filter(|p| p.attributed().is_some()).collect();
    if attributed.is_empty() {
        return None;
    }
    let (all, count) = (peaks.len() as f64, attributed.len() as f64);
    let chance = chance_match * (all - count) / (1.0 - chance_match).max(0.01);
    let rivals: f64 = attributed
        .iter()
        .flat_map(|p| p.candidates.iter().skip(1))
        .map(|c| c.probability)
        .sum();
    Some(((chance + rivals) / count).min(1.0))
}
