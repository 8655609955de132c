//! What is wrong, or looks wrong, inside a catalogue: rules over the reports of its species.
//!
//! A finding names the rule, the source, the row, the size and what to do. Findings that somebody
//! has looked at and decided are listed with their reason ([`KnownFindings`]). Sources that merely
//! disagree about a line are no findings but [`Conflict`]s: a quarter of all matches has them.

mod conflict;
mod finding;
mod known;
mod levels;
mod lifetimes;
mod names;
mod positions;
mod rates;
mod residuals;
mod scales;
mod selection;
mod series;
mod species;

use vocabulary::report::Reports;

pub use conflict::{Conflict, ConflictCounts, Quantity};
pub use finding::{Finding, Place, Rule, Table};
pub use known::{KnownError, KnownFindings};
pub use lifetimes::Lifetime;

/// The answer of an audit.
#[derive(Clone, Debug, Default)]
pub struct Audit {
    /// Findings, by species, source, rule and row.
    pub findings: Vec<Finding>,
    /// Disagreements between sources, by species and wavenumber.
    pub conflicts: Vec<Conflict>,
    /// How many there are, of how many matches.
    pub counts: ConflictCounts,
    /// Species looked at.
    pub species: usize,
    /// Line reports looked at.
    pub lines: usize,
    /// Level reports looked at.
    pub levels: usize,
    /// Sums of rates that were compared with a lifetime.
    pub sums: usize,
}

impl Audit {
    /// Leaves what concerns one source; the counts are then those of its conflicts listed.
    pub fn keep_source(&mut self, key: &str) {
        self.findings.retain(|f| f.source == key);
        self.conflicts
            .retain(|c| &*c.first.0 == key || &*c.second.0 == key);
    }
}

/// Applies all rules to all reports; `lifetimes` are those that papers report.
pub fn audit(reports: &[Reports], lifetimes: &[Lifetime]) -> Audit {
    let mut answer = Audit {
        species: reports.len(),
        ..Audit::default()
    };
    let mislabelled = species::check(reports);
    for of in reports {
        // Rows under a wrong species break every other rule as well: one finding says it all.
        let strangers: Vec<&str> = mislabelled
            .iter()
            .filter(|f| f.species == of.species)
            .map(|f| f.source.as_str())
            .collect();
        let mut found = of_species(of);
        answer.sums += lifetimes::check(of, lifetimes, &mut found);
        found.retain(|f| !strangers.contains(&f.source.as_str()));
        answer.findings.append(&mut found);
        conflict::of_species(of, &mut answer.conflicts, &mut answer.counts);
        answer.lines += of.sources.iter().map(|s| s.lines.len()).sum::<usize>();
        answer.levels += of.sources.iter().map(|s| s.levels.len()).sum::<usize>();
    }
    answer.findings.extend(mislabelled);
    answer.findings.sort_by(Finding::order);
    answer
}

fn of_species(of: &Reports) -> Vec<Finding> {
    let mut found = Vec::new();
    positions::check(of, &mut found);
    selection::check(of, &mut found);
    levels::check(of, &mut found);
    series::check(of, &mut found);
    rates::check(of, &mut found);
    scales::check(of, &mut found);
    // One unit that is wrong shows in wavelengths and in levels.
    let mut units = std::collections::HashSet::new();
    found.retain(|f| f.rule != Rule::EnergyUnit || units.insert(f.source.clone()));
    found
}
