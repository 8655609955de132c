//! Lines that no table lists but that follow from two levels (Ritz 1908, Astrophys. J. 28, 237).
//!
//! Only between measured levels that one source holds both of, with J and parity, below the limit:
//! * electric dipole lines that LS coupling allows (ΔS = 0, |ΔL| ≤ 1, ΔJ, parity), or, where a level has
//!   no LS term, that ΔJ and parity allow;
//! * magnetic dipole and electric quadrupole lines inside the ground configuration (|ΔJ| ≤ 2).
//!
//! Intercombination lines stay out unless a source lists them. Such a line has no rate of its own: the
//! prior for unknown rates bounds it, so that none is made where that prior cannot speak (isotopes apart
//! from their element, ions without a limit or without one rated line). It never displaces a listed line:
//! pairs that are listed, and places where a listed line of the same J lies within what the scales allow,
//! are left alone.

use vocabulary::atom::{DipoleClass, HalfInteger, Species, Term, dipole_class, limit};
use vocabulary::spectrum::LineKind;

use super::lines::{self, Position, Reports};
use super::{Derived, DerivedLevel, DerivedLine, SourceReports};

/// Lines below this wavenumber (1 mm) are not made, cm⁻¹.
const LOWEST_PER_CM: f64 = 10.0;

/// A level that lines may end on.
struct End {
    level: usize,
    twice_j: u16,
    odd: bool,
    term: Option<Term>,
    in_ground_configuration: bool,
    /// Bit per source that measured it.
    sources: u128,
}

/// Adds to the lines of tables those that follow from their levels; `reports` are in rank.
pub(super) fn add(species: Species, reports: &[SourceReports], derived: &mut Derived) {
    let Some(limit_per_cm) = bounded(species, derived) else {
        return;
    };
    let held = lines::measured(reports, &derived.level_of, derived.levels.len());
    let ends = ends(derived, &held, limit_per_cm);
    let has_ls_terms = ends.iter().filter(|e| is_ls(e)).count() > 1;
    let mut fresh = Vec::new();
    for (index, upper) in ends.iter().enumerate() {
        for lower in &ends[..index] {
            if lower.sources & upper.sources == 0 || !allowed(lower, upper, has_ls_terms) {
                continue;
            }
            fresh.extend(line(reports, &held, (lower.level, upper.level)));
        }
    }
    let scale = |position: &DerivedLine| scale_of(derived, position);
    let mut listed: Vec<(usize, usize)> = (derived.lines.iter())
        .filter_map(|l| Some((l.lower?, l.upper?)))
        .collect();
    listed.sort_unstable();
    fresh.retain(|made: &DerivedLine| {
        let pair = made.lower.zip(made.upper);
        pair.is_some_and(|pair| listed.binary_search(&pair).is_err())
            && !has_twin(made, &derived.lines, derived, &scale)
    });
    let kept = without_twins(fresh, derived, &scale);
    derived.lines.extend(kept);
    lines::sort(&mut derived.lines);
}

/// The limit of a species whose unrated lines the prior can bound.
fn bounded(species: Species, derived: &Derived) -> Option<f64> {
    let rated = derived.lines.iter().any(|l| l.rate_per_s.is_some());
    let fits = species.isotope.is_none() && !species.is_one_electron() && rated;
    fits.then(|| limit(species).map(|l| l.energy_per_cm))?
}

/// Levels that lines may end on, by energy.
fn ends(derived: &Derived, held: &[Reports], limit_per_cm: f64) -> Vec<End> {
    let unresolved: Vec<&DerivedLevel> = (derived.levels.iter())
        .filter(|l| l.twice_j.is_none())
        .collect();
    let ground = derived.levels.first().map(|l| &l.label);
    let end = |(number, level): (usize, &DerivedLevel)| {
        let mean = unresolved
            .iter()
            .any(|u| u.label.same_multiplet(&level.label));
        let usable = !level.computed && !mean && level.energy_per_cm < limit_per_cm;
        usable.then_some(())?;
        level.g?;
        Some(End {
            level: number,
            twice_j: level.twice_j?,
            odd: level.label.odd()?,
            term: level.label.term.as_deref().map(Term::parse),
            in_ground_configuration: ground.is_some_and(|g| g.same_configuration(&level.label)),
            sources: held[number].iter().fold(0, |bits, &(s, _)| bits | bit(s)),
        })
    };
    derived.levels.iter().enumerate().filter_map(end).collect()
}

/// Sources beyond the 128th of one species take no part.
fn bit(source: usize) -> u128 {
    u32::try_from(source)
        .ok()
        .and_then(|s| 1_u128.checked_shl(s))
        .unwrap_or(0)
}

fn is_ls(end: &End) -> bool {
    matches!(end.term, Some(Term::Ls { .. }))
}

fn allowed(lower: &End, upper: &End, has_ls_terms: bool) -> bool {
    let step = lower.twice_j.abs_diff(upper.twice_j);
    let sum = lower.twice_j + upper.twice_j;
    if lower.odd == upper.odd {
        let inside = lower.in_ground_configuration && upper.in_ground_configuration;
        let magnetic = step <= 2 && sum >= 2;
        let quadrupole = step <= 4 && sum >= 4;
        return inside && (magnetic || quadrupole);
    }
    let j = |end: &End| Some(HalfInteger::from_twice(end.twice_j));
    match (&lower.term, &upper.term) {
        (Some(Term::Unknown(_)), _) | (_, Some(Term::Unknown(_))) => false,
        (Some(a), Some(b)) => {
            let class = dipole_class((a, j(lower)), (b, j(upper)));
            class.is_none_or(|c| c == DipoleClass::Allowed) && step <= 2 && sum >= 2
        }
        _ => !has_ls_terms && step <= 2 && sum >= 2,
    }
}

/// The line between two concluded levels at the best Ritz position of a source that holds both.
fn line(reports: &[SourceReports], held: &[Reports], pair: (usize, usize)) -> Option<DerivedLine> {
    let between: Vec<Position> = lines::ritz_of_pair(reports, held, pair).collect();
    let position = lines::best_of(reports, &between)?;
    let far = position.wavenumber_per_cm > 3.0 * position.uncertainty_per_cm;
    (far && position.wavenumber_per_cm >= LOWEST_PER_CM).then(|| DerivedLine {
        wavenumber_per_cm: position.wavenumber_per_cm,
        uncertainty_per_cm: position.uncertainty_per_cm,
        position_origin: position.origin,
        position_source: position.source,
        lower: Some(pair.0),
        upper: Some(pair.1),
        rate_per_s: None,
        rate_relative_uncertainty: None,
        rate_origin: None,
        rate_source: None,
        kind: LineKind::Ritz,
        reports: Vec::new(),
    })
}

/// By how much the scale of its source may shift a line, cm⁻¹.
fn scale_of(derived: &Derived, line: &DerivedLine) -> f64 {
    let source = &derived.sources[line.position_source];
    let at = |level: Option<usize>| {
        level.map_or(0.0, |l| source.scale_at(derived.levels[l].energy_per_cm))
    };
    at(line.lower) + at(line.upper)
}

/// Whether a line of a list (by wavenumber) may be the same one, seen by a source on another scale:
/// both ends may be the same levels and lie within 3 σ and the scales, or bear the same names.
fn has_twin(
    made: &DerivedLine,
    list: &[DerivedLine],
    derived: &Derived,
    scale: &impl Fn(&DerivedLine) -> f64,
) -> bool {
    // Levels of one name lie up to 3 cm⁻¹ apart in the bundled tables, two ends twice that.
    const WIDEST_PER_CM: f64 = 10.0;
    let from =
        list.partition_point(|l| l.wavenumber_per_cm < made.wavenumber_per_cm - WIDEST_PER_CM);
    list[from..]
        .iter()
        .take_while(|l| l.wavenumber_per_cm <= made.wavenumber_per_cm + WIDEST_PER_CM)
        .any(|other| {
            let sigma = made.uncertainty_per_cm.hypot(other.uncertainty_per_cm);
            let reach = 3.0 * sigma + scale(made) + scale(other);
            let near = (made.wavenumber_per_cm - other.wavenumber_per_cm).abs() <= reach;
            let alike = [(made.lower, other.lower), (made.upper, other.upper)]
                .map(|(one, other)| likeness(derived, one, other));
            alike.iter().all(|a| {
                *a >= if near {
                    Likeness::Possible
                } else {
                    Likeness::Named
                }
            })
        })
}

/// Whether two concluded levels may be one that sources place on different scales.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Likeness {
    /// Another J or parity, or a source tells them apart.
    None,
    /// Nothing contradicts it.
    Possible,
    /// The same configuration, term and J; or the same level.
    Named,
}

fn likeness(derived: &Derived, one: Option<usize>, other: Option<usize>) -> Likeness {
    let (Some(one), Some(other)) = (one, other) else {
        return Likeness::Possible;
    };
    if one == other {
        return Likeness::Named;
    }
    let [a, b] = [one, other].map(|l| &derived.levels[l]);
    let like = |x: Option<u16>, y: Option<u16>| x.zip(y).is_none_or(|(x, y)| x == y);
    let parity = a.label.odd().zip(b.label.odd()).is_none_or(|(x, y)| x == y);
    match like(a.twice_j, b.twice_j) && parity && a.source != b.source {
        false => Likeness::None,
        true if a.label.same_multiplet(&b.label) => Likeness::Named,
        true => Likeness::Possible,
    }
}

/// Of lines made twice, between levels that sources place apart, the one with the smaller 1 σ.
fn without_twins(
    mut made: Vec<DerivedLine>,
    derived: &Derived,
    scale: &impl Fn(&DerivedLine) -> f64,
) -> Vec<DerivedLine> {
    made.sort_by(|a, b| {
        (a.uncertainty_per_cm.total_cmp(&b.uncertainty_per_cm))
            .then(a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm))
            .then((a.lower, a.upper).cmp(&(b.lower, b.upper)))
    });
    let mut kept: Vec<DerivedLine> = Vec::with_capacity(made.len());
    for line in made {
        if !has_twin(&line, &kept, derived, scale) {
            let at = kept.partition_point(|l| l.wavenumber_per_cm < line.wavenumber_per_cm);
            kept.insert(at, line);
        }
    }
    kept
}
