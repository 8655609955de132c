//! What chance does: the same list, shifted by many line widths, runs through the same steps.

use super::evidence::Evidence;
use super::matches::{Match, Matches, peak_density};
use super::room::{Found, Room};
use super::{ATTRIBUTED, CHANCE_SPECIES, Peak, PeakAnswer, Scale};

/// Shifted lists.
const DECOYS: usize = 10;
/// A shift is a multiple of so many widths, or of so many σ where that is more.
const SHIFT_WIDTHS: f64 = 10.0;
const SHIFT_SIGMA: f64 = 25.0;

/// What the shifted lists gave.
pub(super) struct Decoys {
    /// Part of their peaks that the species of the true list would claim.
    pub chance_match: f64,
    /// The same of the peaks that the true list leaves unattributed: these are of the brightness of
    /// peaks that no species found made.
    pub chance_match_unattributed: f64,
    /// Species found in them from scratch, on average.
    pub chance_species: f64,
    /// How many.
    pub count: usize,
    /// Logarithms of the odds of the species found in them.
    odds: Vec<f64>,
}

impl Decoys {
    /// Species of the true list that are not told from chance: of those with their odds and higher
    /// ones, more than [`CHANCE_SPECIES`] are to be expected by the shifted lists (target and decoy
    /// counts, J. E. Elias & S. P. Gygi 2007, Nat. Methods 4, 207).
    pub fn barred(&self, evidence: &[Evidence], log_prior: &[f64]) -> Vec<usize> {
        let odds = |s: usize| evidence[s].log_ratio + log_prior[s];
        let mut present: Vec<usize> = (0..evidence.len())
            .filter(|&s| evidence[s].present)
            .collect();
        present.sort_by(|&a, &b| odds(b).total_cmp(&odds(a)));
        let rate = |(rank, &s): (usize, &usize)| {
            let by_chance = self.odds.iter().filter(|o| **o >= odds(s)).count();
            by_chance as f64 / (self.count * (rank + 1)) as f64
        };
        let kept = (present.iter().enumerate().map(rate))
            .rposition(|rate| rate <= CHANCE_SPECIES)
            .map_or(0, |last| last + 1);
        present.split_off(kept)
    }
}

pub(super) fn judge(room: &Room<'_>, peaks: &[Peak], found: &Found, scale: Scale) -> Decoys {
    let width = room.question.width.at_nm(scale.middle_nm);
    let sigma = peaks.iter().map(|p| p.sigma_nm).fold(0.0, f64::max);
    let step = (SHIFT_WIDTHS * width).max(SHIFT_SIGMA * sigma);
    let (mut matched, mut odds) = (0, Vec::new());
    let open: Vec<bool> = found.candidates.iter().map(|c| !is_claimed(c)).collect();
    let (mut open_matched, open_count) = (0, open.iter().filter(|o| **o).count());
    for k in 0..DECOYS {
        // Both ways, at distances that are no multiples of each other.
        let sign = if k % 2 == 0 { 1.0 } else { -1.0 };
        let shift = sign * step * (1.0 + (k / 2) as f64 * 1.37);
        let (list, origin) = shifted(peaks, room.range, shift);
        let matches = Matches::new(&room.templates, &list, |nm| scale.at(nm));
        let density = peak_density(&list, room.range);
        let case = room.case(&matches, &density);
        let (blind, _) = case.species();
        let shown = blind.iter().zip(&room.log_prior).filter(|(e, _)| e.present);
        odds.extend(shown.map(|(e, prior)| e.log_ratio + prior));
        // The species of the true list, as bright as there, nothing being known of the peaks.
        let unclaimed = vec![0.9; list.len()];
        let candidates =
            room.candidates(&case, &list, &found.evidence, &unclaimed, &found.brightness);
        for (list, &origin) in candidates.iter().zip(&origin) {
            let claimed = usize::from(is_claimed(list));
            matched += claimed;
            open_matched += if open[origin] { claimed } else { 0 };
        }
    }
    Decoys {
        chance_match: matched as f64 / (DECOYS * peaks.len().max(1)) as f64,
        chance_match_unattributed: open_matched as f64 / (DECOYS * open_count.max(1)) as f64,
        chance_species: odds.len() as f64 / DECOYS as f64,
        count: DECOYS,
        odds,
    }
}

fn is_claimed(candidates: &[(Match, f64)]) -> bool {
    candidates.first().is_some_and(|c| c.1 >= ATTRIBUTED)
}

/// The list moved, what leaves one end of the range coming in at the other; and which peak each was.
fn shifted(peaks: &[Peak], range: (f64, f64), shift_nm: f64) -> (Vec<Peak>, Vec<usize>) {
    let span = range.1 - range.0;
    let mut out: Vec<(Peak, usize)> = peaks
        .iter()
        .enumerate()
        .map(|(index, peak)| {
            let vacuum_nm = range.0 + (peak.vacuum_nm - range.0 + shift_nm).rem_euclid(span);
            let moved = vacuum_nm - peak.vacuum_nm;
            let peak = Peak {
                vacuum_nm,
                second_order_vacuum_nm: peak.second_order_vacuum_nm.map(|nm| nm + moved / 2.0),
                ..*peak
            };
            (peak, index)
        })
        .collect();
    out.sort_by(|a, b| a.0.vacuum_nm.total_cmp(&b.0.vacuum_nm));
    out.into_iter().unzip()
}

/// Expected part of wrong first candidates among attributed peaks. A peak whose origin is not among
/// the species is attributed by chance with probability r, so that r n/(1 − r) attributions are
/// chance ones, n being the unattributed peaks of such origin (J. D. Storey 2002, J. R. Stat. Soc. B
/// 64, 479; n is the sum of what is left of them beside their candidates); and each attribution is
/// wrong with the probability of its rival candidates.
pub(super) fn false_discovery_rate(peaks: &[PeakAnswer], chance_match: f64) -> Option<f64> {
    let attributed: Vec<&PeakAnswer> = peaks.iter().filter(|p| p.attributed().is_some()).collect();
    if attributed.is_empty() {
        return None;
    }
    let count = attributed.len() as f64;
    let left = |p: &PeakAnswer| 1.0 - p.candidates.iter().map(|c| c.probability).sum::<f64>();
    let open: f64 = (peaks.iter().filter(|p| p.attributed().is_none()).map(left)).sum();
    let chance = chance_match * open / (1.0 - chance_match).max(0.01);
    let rivals: f64 = attributed
        .iter()
        .flat_map(|p| p.candidates.iter().skip(1))
        .map(|c| c.probability)
        .sum();
    Some(((chance + rivals) / count).min(1.0))
}
