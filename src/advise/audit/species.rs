//! Rows that carry the name of another species: their lines fall on its lines and on none of their
//! own.

use std::collections::HashMap;

use vocabulary::atom::Species;
use vocabulary::report::{ReportedSource, Reports};

use super::finding::{Finding, Place, Rule};

/// Lines from which a match can be told from chance.
const LEAST_LINES: usize = 4;
/// Part of the lines that must fall on lines of the other species.
const MOST_OF: f64 = 0.8;
/// Part of the lines at most that other sources know of the species they are declared for.
const FEW_OF: f64 = 0.2;
/// Widest match, cm⁻¹ relative: more would be chance in a rich spectrum.
const WIDEST: f64 = 2e-6;

/// All concluded lines of a catalogue, by wavenumber.
struct AllLines {
    at: Vec<(f64, Species, f64)>,
}

pub(super) fn check(reports: &[Reports]) -> Vec<Finding> {
    let all = AllLines::new(reports);
    let mut found = Vec::new();
    for of in reports {
        for (index, source) in of.sources.iter().enumerate() {
            if source.lines.len() >= LEAST_LINES && known_share(of, index) <= FEW_OF {
                found.extend(all.judge(of, source));
            }
        }
    }
    found
}

/// Part of the lines of a source that other sources report as well.
fn known_share(of: &Reports, index: usize) -> f64 {
    let source = &of.sources[index];
    let shared = source
        .lines
        .iter()
        .filter_map(|l| l.joined)
        .filter(|&l| of.lines[l].reports.iter().any(|(s, _)| *s != index))
        .count();
    shared as f64 / source.lines.len() as f64
}

impl AllLines {
    fn new(reports: &[Reports]) -> Self {
        let mut at: Vec<_> = reports
            .iter()
            .flat_map(|of| {
                of.lines
                    .iter()
                    .map(|l| (l.wavenumber_per_cm, of.species, l.uncertainty_per_cm))
            })
            .collect();
        at.sort_by(|a, b| a.0.total_cmp(&b.0));
        Self { at }
    }

    fn judge(&self, of: &Reports, source: &ReportedSource) -> Option<Finding> {
        let positions: Vec<(f64, f64)> = source
            .lines
            .iter()
            .filter_map(|l| source.position(l))
            .collect();
        let mut hits: HashMap<Species, usize> = HashMap::new();
        for &(wavenumber, sigma) in &positions {
            let mut here: Vec<Species> = self.near(wavenumber, sigma).collect();
            here.sort_unstable_by_key(|s| s.code());
            here.dedup();
            for species in here.into_iter().filter(|s| !akin(*s, of.species)) {
                *hits.entry(species).or_default() += 1;
            }
        }
        let (species, count) = hits
            .into_iter()
            .max_by_key(|(species, count)| (*count, std::cmp::Reverse(species.code())))?;
        let enough = count >= LEAST_LINES && count as f64 >= MOST_OF * positions.len() as f64;
        enough.then(|| Finding {
            rule: Rule::Species,
            species: of.species,
            source: source.key.to_string(),
            place: Place::whole(format!("{}, {} lines", of.species, positions.len())),
            size: count as f64 / positions.len() as f64,
            unit: "of the lines",
            advice: format!(
                "{count} of its {} lines fall on lines of {species}, and other sources do not know \
                 them of {}: correct the name of the species",
                positions.len(),
                of.species,
            ),
        })
    }

    fn near(&self, wavenumber_per_cm: f64, sigma: f64) -> impl Iterator<Item = Species> {
        let widest = WIDEST * wavenumber_per_cm;
        let from = self
            .at
            .partition_point(|l| l.0 < wavenumber_per_cm - widest);
        self.at[from..]
            .iter()
            .take_while(move |l| l.0 <= wavenumber_per_cm + widest)
            .filter(move |l| (l.0 - wavenumber_per_cm).abs() <= 3.0 * sigma.hypot(l.2))
            .map(|l| l.1)
    }
}

/// The same element in the same stage: isotopes and mixtures share their lines.
fn akin(a: Species, b: Species) -> bool {
    (a.atomic_number, a.stage) == (b.atomic_number, b.stage)
}
