//! Which line reports mean the same line, and its values.

use std::collections::BTreeMap;

use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

use super::choose::{Candidate, best_by_uncertainty};
use super::{Apart, ApartReason, DerivedLevel, DerivedLine, LineReport, SourceKind, SourceReports};

/// What makes reports the same line: its pair of levels.
type Pair = (usize, usize);

/// Reports of one line: source and index.
pub(super) type Reports = Vec<(usize, usize)>;

/// Joins line reports by level pair, then those without levels by position.
pub(super) fn join(
    reports: &[SourceReports],
    levels: &[DerivedLevel],
    level_of: &[Vec<Option<usize>>],
    apart: &mut Vec<Apart>,
) -> Vec<DerivedLine> {
    let mut by_pair: BTreeMap<Pair, Reports> = BTreeMap::new();
    let mut loose: Vec<(usize, usize)> = Vec::new();
    for (source, of) in reports.iter().enumerate() {
        for (report, line) in of.lines.iter().enumerate() {
            match pair_of(line, &level_of[source]) {
                Linked::Pair(pair) => by_pair.entry(pair).or_default().push((source, report)),
                Linked::Loose => loose.push((source, report)),
                Linked::Mean => {
                    let reason = ApartReason::ComponentsHeld;
                    apart.push(Apart {
                        source,
                        report,
                        is_level: false,
                        reason,
                    });
                }
            }
        }
    }
    let held = measured(reports, level_of, levels.len());
    let mut lines: Vec<DerivedLine> = by_pair
        .into_iter()
        .filter_map(|(pair, members)| by_levels(reports, levels, &held, pair, members))
        .collect();
    sort(&mut lines);
    join_loose(reports, levels, &loose, &mut lines, apart);
    sort(&mut lines);
    lines
}

pub(super) fn sort(lines: &mut [DerivedLine]) {
    lines.sort_by(|a, b| {
        (a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm))
            .then(a.lower.cmp(&b.lower))
            .then(a.upper.cmp(&b.upper))
            .then(a.reports.cmp(&b.reports))
    });
}

enum Linked {
    Pair(Pair),
    Loose,
    /// A mean whose components are held.
    Mean,
}

fn pair_of(line: &LineReport, level_of: &[Option<usize>]) -> Linked {
    match (line.lower, line.upper) {
        (Some(lower), Some(upper)) => match (level_of[lower], level_of[upper]) {
            (Some(lower), Some(upper)) if lower != upper => Linked::Pair((lower, upper)),
            (Some(_), Some(_)) => Linked::Loose,
            _ => Linked::Mean,
        },
        _ => Linked::Loose,
    }
}

/// For each concluded level the measured level reports that joined it.
pub(super) fn measured(
    reports: &[SourceReports],
    level_of: &[Vec<Option<usize>>],
    levels: usize,
) -> Vec<Reports> {
    let mut held = vec![Reports::new(); levels];
    for (source, of) in level_of.iter().enumerate() {
        for (report, level) in of.iter().enumerate() {
            let measured = !reports[source].levels[report].computed;
            if let Some(level) = level.filter(|_| measured) {
                held[level].push((source, report));
            }
        }
    }
    held
}

/// Ritz positions of a pair from each source that holds both levels, whether or not it lists the
/// line.
pub(super) fn ritz_of_pair<'a>(
    reports: &'a [SourceReports],
    held: &'a [Reports],
    pair: Pair,
) -> impl Iterator<Item = Position> + 'a {
    held[pair.0].iter().flat_map(move |&(source, a)| {
        let of = &reports[source].levels;
        held[pair.1]
            .iter()
            .filter(move |(other, _)| *other == source)
            .map(move |&(_, b)| Position {
                wavenumber_per_cm: (of[a].energy_per_cm - of[b].energy_per_cm).abs(),
                uncertainty_per_cm: of[a].uncertainty_per_cm.hypot(of[b].uncertainty_per_cm),
                origin: PositionOrigin::Ritz,
                source,
            })
            .filter(|position| position.wavenumber_per_cm > 0.0)
    })
}

/// A line between two concluded levels.
fn by_levels(
    reports: &[SourceReports],
    levels: &[DerivedLevel],
    held: &[Reports],
    pair: Pair,
    members: Reports,
) -> Option<DerivedLine> {
    let between = ritz_of_pair(reports, held, pair).collect();
    let position = best_position(reports, &members, between)?;
    let (lower, upper) = if levels[pair.0].energy_per_cm <= levels[pair.1].energy_per_cm {
        pair
    } else {
        (pair.1, pair.0)
    };
    let mut line = DerivedLine {
        wavenumber_per_cm: position.wavenumber_per_cm,
        uncertainty_per_cm: position.uncertainty_per_cm,
        position_origin: position.origin,
        position_source: position.source,
        lower: Some(lower),
        upper: Some(upper),
        rate_per_s: None,
        rate_relative_uncertainty: None,
        rate_origin: None,
        rate_source: None,
        kind: kind_of(reports, &members),
        reports: members,
    };
    if line.position_origin == PositionOrigin::Ritz && is_computed_alone(reports, &line.reports) {
        line.kind = LineKind::Ritz;
    }
    choose_rate(reports, &mut line);
    Some(line)
}

/// Whether no table lists a line, but only the calculator, between levels that were measured.
fn is_computed_alone(reports: &[SourceReports], members: &Reports) -> bool {
    let kind = |source: usize| reports[source].source.kind;
    let made = |&(source, report): &(usize, usize)| {
        kind(source) == SourceKind::Computed && reports[source].lines[report].computed
    };
    members.iter().all(made)
}

/// One line is a line as soon as one report of it is.
fn kind_of(reports: &[SourceReports], members: &Reports) -> LineKind {
    let kinds = || members.iter().map(|&(s, r)| reports[s].lines[r].kind);
    if kinds().any(|k| k == LineKind::Line) {
        LineKind::Line
    } else {
        kinds().next().unwrap_or_default()
    }
}

/// A position with its origin, before the best is chosen.
#[derive(Clone, Copy)]
pub(super) struct Position {
    pub wavenumber_per_cm: f64,
    pub uncertainty_per_cm: f64,
    pub origin: PositionOrigin,
    pub source: usize,
}

/// The best of all observed positions and of the Ritz positions of each source's own levels.
/// A blend's position belongs to several lines and counts only where nothing else is known.
fn best_position(
    reports: &[SourceReports],
    members: &Reports,
    mut positions: Vec<Position>,
) -> Option<Position> {
    let mut blended = Vec::new();
    for &(source, report) in members {
        let line = &reports[source].lines[report];
        positions.extend(ritz(&reports[source], source, line));
        let into = if line.kind == LineKind::Blend {
            &mut blended
        } else {
            &mut positions
        };
        into.extend(given(source, line));
    }
    best_of(reports, &positions).or_else(|| best_of(reports, &blended))
}

pub(super) fn best_of(reports: &[SourceReports], positions: &[Position]) -> Option<Position> {
    let best = best_by_uncertainty(positions.iter().enumerate().map(|(i, p)| Candidate {
        computed: p.origin == PositionOrigin::Computed,
        kind: reports[p.source].source.kind,
        uncertainty: Some(p.uncertainty_per_cm),
        source: p.source,
        report: i,
    }))?;
    positions.get(best.report).copied()
}

fn given(source: usize, line: &LineReport) -> Option<Position> {
    let origin = match (line.computed, line.from_levels) {
        (true, _) => PositionOrigin::Computed,
        (false, true) => PositionOrigin::Ritz,
        (false, false) => PositionOrigin::Measured,
    };
    Some(Position {
        wavenumber_per_cm: line.wavenumber_per_cm?,
        uncertainty_per_cm: line.uncertainty_per_cm?,
        origin,
        source,
    })
}

fn ritz(of: &SourceReports, source: usize, line: &LineReport) -> Option<Position> {
    let (lower, upper) = (of.levels.get(line.lower?)?, of.levels.get(line.upper?)?);
    let computed = lower.computed || upper.computed || line.computed;
    // The calculator gives differences more precisely than its levels: common terms cancel.
    if computed && line.wavenumber_per_cm.is_some() {
        return None;
    }
    Some(Position {
        wavenumber_per_cm: (upper.energy_per_cm - lower.energy_per_cm).abs(),
        uncertainty_per_cm: lower.uncertainty_per_cm.hypot(upper.uncertainty_per_cm),
        origin: if computed {
            PositionOrigin::Computed
        } else {
            PositionOrigin::Ritz
        },
        source,
    })
}

/// The best rate: smallest relative σ, then the rank of the source; unstated σ comes last.
fn choose_rate(reports: &[SourceReports], line: &mut DerivedLine) {
    let rated = line.reports.iter().filter_map(|&(source, report)| {
        let of = &reports[source].lines[report];
        of.rate_per_s.map(|_| Candidate {
            computed: of.rate_origin == Some(RateOrigin::Computed),
            kind: reports[source].source.kind,
            uncertainty: of.rate_relative_uncertainty,
            source,
            report,
        })
    });
    if let Some(best) = best_by_uncertainty(rated) {
        let of = &reports[best.source].lines[best.report];
        line.rate_per_s = of.rate_per_s;
        line.rate_relative_uncertainty = of.rate_relative_uncertainty;
        line.rate_origin = of.rate_origin.or(Some(RateOrigin::Published));
        line.rate_source = Some(best.source);
    }
}

/// Lines without levels join by position and J, or stand alone; one source at a time, so that its
/// own lines, which it tells apart, never join each other.
fn join_loose(
    reports: &[SourceReports],
    levels: &[DerivedLevel],
    loose: &[(usize, usize)],
    lines: &mut Vec<DerivedLine>,
    apart: &mut Vec<Apart>,
) {
    for of_source in loose.chunk_by(|a, b| a.0 == b.0) {
        let widest = lines
            .iter()
            .map(|l| l.uncertainty_per_cm)
            .fold(0.0, f64::max);
        let mut fresh = Vec::new();
        for &(source, report) in of_source {
            let of = &reports[source].lines[report];
            let Some(position) = best_position(reports, &vec![(source, report)], Vec::new()) else {
                continue;
            };
            match near(lines, levels, of, &position, widest).as_slice() {
                [] => fresh.push(standing_alone(reports, source, report, &position)),
                [single] => {
                    let line = &mut lines[*single];
                    line.reports.push((source, report));
                    choose_rate(reports, line);
                    choose_loose_position(line, reports, &position);
                }
                _ => {
                    let reason = ApartReason::SeveralCandidates;
                    apart.push(Apart {
                        source,
                        report,
                        is_level: false,
                        reason,
                    });
                }
            }
        }
        lines.extend(fresh);
        sort(lines);
    }
}

fn standing_alone(
    reports: &[SourceReports],
    source: usize,
    report: usize,
    position: &Position,
) -> DerivedLine {
    let mut line = DerivedLine {
        wavenumber_per_cm: position.wavenumber_per_cm,
        uncertainty_per_cm: position.uncertainty_per_cm,
        position_origin: position.origin,
        position_source: position.source,
        lower: None,
        upper: None,
        rate_per_s: None,
        rate_relative_uncertainty: None,
        rate_origin: None,
        rate_source: None,
        kind: reports[source].lines[report].kind,
        reports: vec![(source, report)],
    };
    choose_rate(reports, &mut line);
    line
}

/// An observed position may be better than what the line had.
fn choose_loose_position(line: &mut DerivedLine, reports: &[SourceReports], position: &Position) {
    let held = Position {
        wavenumber_per_cm: line.wavenumber_per_cm,
        uncertainty_per_cm: line.uncertainty_per_cm,
        origin: line.position_origin,
        source: line.position_source,
    };
    if let Some(best) = best_of(reports, &[held, *position]) {
        line.wavenumber_per_cm = best.wavenumber_per_cm;
        line.uncertainty_per_cm = best.uncertainty_per_cm;
        line.position_origin = best.origin;
        line.position_source = best.source;
    }
}

/// Lines within 3 combined σ whose J are not contradicted.
fn near(
    lines: &[DerivedLine],
    levels: &[DerivedLevel],
    report: &LineReport,
    position: &Position,
    widest: f64,
) -> Vec<usize> {
    let reach = 3.0 * position.uncertainty_per_cm.hypot(widest);
    let from = lines.partition_point(|l| l.wavenumber_per_cm < position.wavenumber_per_cm - reach);
    let fits = |l: &DerivedLine| {
        let sigma = l.uncertainty_per_cm.hypot(position.uncertainty_per_cm);
        (l.wavenumber_per_cm - position.wavenumber_per_cm).abs() <= 3.0 * sigma
            && j_agrees(l.lower, report.lower_twice_j, levels)
            && j_agrees(l.upper, report.upper_twice_j, levels)
    };
    (from..lines.len())
        .take_while(|&i| lines[i].wavenumber_per_cm <= position.wavenumber_per_cm + reach)
        .filter(|&i| fits(&lines[i]))
        .collect()
}

fn j_agrees(level: Option<usize>, twice_j: Option<u16>, levels: &[DerivedLevel]) -> bool {
    let held = level.and_then(|l| levels[l].twice_j);
    held.zip(twice_j).is_none_or(|(a, b)| a == b)
}
