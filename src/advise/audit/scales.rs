//! Lines whose two concluded levels come from sources with different scales.

use vocabulary::report::{ConcludedLine, Reports};

use super::finding::{Finding, Place, Rule, wavelength};

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    found.extend(of.lines.iter().filter_map(|line| mixed(of, line)));
}

fn mixed(of: &Reports, line: &ConcludedLine) -> Option<Finding> {
    let (lower, upper) = (of.levels.get(line.lower?)?, of.levels.get(line.upper?)?);
    if lower.source == upper.source {
        return None;
    }
    let difference = (upper.energy_per_cm - lower.energy_per_cm) - line.wavenumber_per_cm;
    let levels = lower.uncertainty_per_cm.hypot(upper.uncertainty_per_cm);
    let scale = |source: usize, energy| of.sources[source].scale_at(energy);
    // Each source says how far its scale may be off; a difference inside that is expected.
    let declared =
        scale(lower.source, lower.energy_per_cm) + scale(upper.source, upper.energy_per_cm);
    let bound = 3.0 * levels.hypot(line.uncertainty_per_cm) + declared;
    let report = line.reports.first()?;
    let own = &of.sources[report.0].lines[report.1];
    (difference.abs() > bound).then(|| Finding {
        rule: Rule::ScalesMixed,
        species: of.species,
        source: of.sources[upper.source].key.to_string(),
        place: Place {
            subject: format!("{} {}", of.species, wavelength(line.wavenumber_per_cm)),
            row: Place::line(of.species, own, line.wavenumber_per_cm)
                .row
                .filter(|_| report.0 == upper.source),
        },
        size: difference,
        unit: "cm-1",
        advice: format!(
            "its lower level is that of {}, its upper level that of {}, and their scales do not \
             meet: declare the scale uncertainty of the older one",
            of.sources[lower.source].key, of.sources[upper.source].key,
        ),
    })
}
