//! Levels against levels of other sources, and against the lines that name them.

use std::collections::BTreeMap;

use vocabulary::report::{ConcludedLevel, ReportedLevel, ReportedSource, Reports};

use super::finding::{Finding, Place, Rule};
use super::names::Name;
use super::positions::{energy_unit, unit_factor};
use super::residuals::of_source;

/// Largest difference at which a like-named level is taken for the same one, relative and cm⁻¹.
const SAME_NAME_RELATIVE: f64 = 2e-3;
const SAME_NAME_PER_CM: f64 = 20.0;
/// How near a level of the table must be to the one that a line names to be offered for it, cm⁻¹.
const OFFERED_PER_CM: f64 = 5.0;

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    let others = Others::new(of);
    for (index, source) in of.sources.iter().enumerate() {
        match unit(of, index, &others) {
            Some(finding) => found.push(finding),
            None => differs(of, index, &others, found),
        }
        unlisted(of, source, found);
        found.extend(isolated(of, index));
    }
}

/// Concluded levels with their names.
struct Others<'r> {
    named: Vec<(Option<Name>, &'r ConcludedLevel)>,
    by_name: BTreeMap<(u16, String), Vec<usize>>,
}

impl<'r> Others<'r> {
    fn new(of: &'r Reports) -> Self {
        let named: Vec<_> = of
            .levels
            .iter()
            .map(|l| (Name::of_concluded(l), l))
            .collect();
        let mut by_name: BTreeMap<_, Vec<usize>> = BTreeMap::new();
        for (at, (name, _)) in named.iter().enumerate() {
            if let Some(name) = name {
                by_name.entry(name.key()).or_default().push(at);
            }
        }
        Self { named, by_name }
    }

    /// The only concluded level of this name that the source has no report of.
    fn namesake(&self, name: &Name, source: usize) -> Option<&'r ConcludedLevel> {
        let mut fits = self.by_name.get(&name.key())?.iter().filter_map(|&at| {
            let (other, level) = &self.named[at];
            (other.as_ref()?.agrees(name) && foreign(level, source)).then_some(*level)
        });
        let first = fits.next();
        first.filter(|_| fits.next().is_none())
    }

    /// The only concluded level within reach that has another J and the same configuration and
    /// term. Where several are within reach the fine structure is narrower than the scales, and
    /// nothing can be said.
    fn other_j(
        &self,
        name: &Name,
        source: usize,
        energy_per_cm: f64,
        reach_per_cm: f64,
    ) -> Option<&'r ConcludedLevel> {
        let from = self
            .named
            .partition_point(|(_, l)| l.energy_per_cm < energy_per_cm - reach_per_cm);
        let mut fits = self.named[from..]
            .iter()
            .take_while(|(_, l)| l.energy_per_cm <= energy_per_cm + reach_per_cm)
            .filter(|(other, level)| {
                foreign(level, source)
                    && other
                        .as_ref()
                        .is_some_and(|o| o.same_term(name) && !o.agrees(name))
            })
            .map(|(_, level)| *level);
        let first = fits.next();
        first.filter(|_| fits.next().is_none())
    }
}

/// No report of the source stands behind the level.
fn foreign(level: &ConcludedLevel, source: usize) -> bool {
    !level.computed && level.reports.iter().all(|(s, _)| *s != source)
}

/// Levels of a source that no other source joined, with their names.
fn alone(of: &Reports, index: usize) -> impl Iterator<Item = (&ReportedLevel, Name)> {
    of.sources[index]
        .levels
        .iter()
        .filter(|level| !level.computed)
        .filter(move |level| {
            level
                .joined
                .is_some_and(|l| of.levels[l].reports.iter().all(|(s, _)| *s == index))
        })
        .filter_map(|level| Some((level, Name::of_report(level)?)))
}

/// One factor between its energies and those of the same names elsewhere. A source whose own
/// wavelengths confirm its energies is not the one to blame; where it gives none, the later in
/// rank is.
fn unit(of: &Reports, index: usize, others: &Others<'_>) -> Option<Finding> {
    let residuals = of_source(of, index);
    let fitting = residuals.iter().filter(|r| !r.misfits()).count();
    if fitting > 0 && 2 * fitting >= residuals.len() {
        return None;
    }
    let factors: Vec<(f64, &str)> = alone(of, index)
        .filter(|(level, _)| level.energy_per_cm > 0.0)
        .filter_map(|(level, name)| {
            let right = others.namesake(&name, index)?;
            let blamed = !residuals.is_empty() || index > right.source;
            unit_factor(right.energy_per_cm / level.energy_per_cm).filter(|_| blamed)
        })
        .collect();
    let (factor, words) = *factors.first()?;
    let alike = factors.iter().filter(|(f, _)| *f == factor).count();
    (alike >= 2 && alike == factors.len()).then(|| {
        energy_unit(
            of,
            &of.sources[index],
            alike,
            factor,
            words,
            "the levels of other sources",
        )
    })
}

fn differs(of: &Reports, index: usize, others: &Others<'_>, found: &mut Vec<Finding>) {
    let source = &of.sources[index];
    let mut names: Vec<Name> = alone(of, index).map(|(_, name)| name).collect();
    names.sort_unstable();
    for (level, name) in alone(of, index) {
        let reach = 3.0 * level.uncertainty_per_cm + source.scale_at(level.energy_per_cm) + 0.1;
        if let Some(other) = others.other_j(&name, index, level.energy_per_cm, reach) {
            if weaker(index, level, other) {
                found.push(j_differs(of, source, level, other));
            }
            continue;
        }
        let unique = names.iter().filter(|n| **n == name).count() == 1;
        if let Some(other) = others.namesake(&name, index).filter(|_| unique) {
            let difference = level.energy_per_cm - other.energy_per_cm;
            let bound = (SAME_NAME_RELATIVE * level.energy_per_cm).min(SAME_NAME_PER_CM);
            let sigma = level.uncertainty_per_cm.hypot(other.uncertainty_per_cm);
            let differs = difference.abs() < bound && difference.abs() > 3.0 * sigma;
            if differs && weaker(index, level, other) {
                found.push(level_differs(of, source, level, other, difference));
            }
        }
    }
}

/// The side that a disagreement is reported on: that of the larger σ, then of the later rank.
fn weaker(index: usize, level: &ReportedLevel, other: &ConcludedLevel) -> bool {
    let (ours, theirs) = (level.uncertainty_per_cm, other.uncertainty_per_cm);
    ours > theirs || (ours == theirs && index > other.source)
}

fn keys(of: &Reports, level: &ConcludedLevel) -> String {
    let mut keys: Vec<&str> = level
        .reports
        .iter()
        .filter_map(|(s, _)| of.sources.get(*s).map(|s| &*s.key))
        .collect();
    keys.dedup();
    keys.join(", ")
}

fn j_differs(
    of: &Reports,
    source: &ReportedSource,
    level: &ReportedLevel,
    other: &ConcludedLevel,
) -> Finding {
    let value = |j: Option<vocabulary::atom::HalfInteger>| j.map_or(f64::NAN, |j| j.value());
    Finding {
        rule: Rule::JDiffers,
        species: of.species,
        source: source.key.to_string(),
        place: Place::level(of.species, level),
        size: value(level.j) - value(other.j),
        unit: "J",
        advice: format!(
            "{} has the level {} of this name with J = {}: see which J the lines of the level allow",
            keys(of, other),
            other.energy_per_cm,
            value(other.j),
        ),
    }
}

fn level_differs(
    of: &Reports,
    source: &ReportedSource,
    level: &ReportedLevel,
    other: &ConcludedLevel,
    difference_per_cm: f64,
) -> Finding {
    Finding {
        rule: Rule::LevelDiffers,
        species: of.species,
        source: source.key.to_string(),
        place: Place::level(of.species, level),
        size: difference_per_cm,
        unit: "cm-1",
        advice: format!(
            "{} gives the level of this name and J at {}: let the lines of the level decide, \
             correct the slip or widen the uncertainty",
            keys(of, other),
            other.energy_per_cm,
        ),
    }
}

/// Levels that only lines name, in a source with a table of levels that has another one nearby.
fn unlisted(of: &Reports, source: &ReportedSource, found: &mut Vec<Finding>) {
    let mut listed: Vec<&ReportedLevel> = source.levels.iter().filter(|l| l.own_row).collect();
    listed.sort_by(|a, b| a.energy_per_cm.total_cmp(&b.energy_per_cm));
    for level in source.levels.iter().filter(|l| !l.own_row) {
        let from =
            listed.partition_point(|l| l.energy_per_cm < level.energy_per_cm - OFFERED_PER_CM);
        let nearest = listed[from..]
            .iter()
            .take_while(|l| l.energy_per_cm <= level.energy_per_cm + OFFERED_PER_CM)
            .filter(|l| l.j == level.j)
            .min_by(|a, b| {
                let off = |l: &ReportedLevel| (l.energy_per_cm - level.energy_per_cm).abs();
                off(a).total_cmp(&off(b))
            });
        if let Some(nearest) = nearest {
            let off = level.energy_per_cm - nearest.energy_per_cm;
            let instead = if off == 0.0 {
                "under another name"
            } else {
                "instead"
            };
            found.push(Finding {
                rule: Rule::LevelUnlisted,
                species: of.species,
                source: source.key.to_string(),
                place: Place::level(of.species, level),
                size: off,
                unit: "cm-1",
                advice: format!(
                    "its own table of levels has {} (row {}) {instead}: make lines and levels name \
                     one level",
                    nearest.energy_per_cm, nearest.row,
                ),
            });
        }
    }
}

/// How many excited levels of a source no line of any source touches.
fn isolated(of: &Reports, index: usize) -> Option<Finding> {
    let source = &of.sources[index];
    if of.lines.is_empty() {
        return None;
    }
    let mut touched = vec![false; of.levels.len()];
    for line in &of.lines {
        for end in [line.lower, line.upper].into_iter().flatten() {
            touched[end] = true;
        }
    }
    let left: Vec<&ReportedLevel> = source
        .levels
        .iter()
        .filter(|l| l.own_row && l.energy_per_cm > 0.0)
        .filter(|l| l.joined.is_some_and(|j| !touched[j]))
        .collect();
    let first = left.first()?;
    Some(Finding {
        rule: Rule::Isolated,
        species: of.species,
        source: source.key.to_string(),
        place: Place::whole(format!("{}, {} levels", of.species, left.len())),
        size: left.len() as f64,
        unit: "levels",
        advice: format!(
            "no line touches them (the first is {}, row {}), so nothing tests them: add their \
             lines, or say that they are there for populations and series",
            first.energy_per_cm, first.row,
        ),
    })
}
