//! Sources that disagree about one line: positions beyond 3 combined σ, rates beyond 25 %.

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::report::Reports;

use super::finding::wavelength;

/// What two sources disagree about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// The position: size in combined σ.
    Position,
    /// The rate: size as the ratio of the second to the first source.
    Rate,
}

/// A disagreement.
#[derive(Clone, Debug, PartialEq)]
pub struct Conflict {
    /// Whose line.
    pub species: Species,
    /// Where, in words.
    pub line: String,
    /// About what.
    pub quantity: Quantity,
    /// The source of better rank, its row and its value (cm⁻¹ or s⁻¹).
    pub first: (Arc<str>, u64, f64),
    /// The other one.
    pub second: (Arc<str>, u64, f64),
    /// How large.
    pub size: f64,
}

/// How many pairs of reports were compared and how many disagree.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct ConflictCounts {
    /// Pairs with a position each.
    pub positions: usize,
    /// Of these, beyond 3 combined σ.
    pub position_conflicts: usize,
    /// Pairs with a rate each.
    pub rates: usize,
    /// Of these, beyond 25 %.
    pub rate_conflicts: usize,
}

/// Ratio of two rates beyond which they disagree.
pub(super) const RATE_RATIO: f64 = 1.25;

pub(super) fn of_species(of: &Reports, into: &mut Vec<Conflict>, counts: &mut ConflictCounts) {
    for line in &of.lines {
        for (at, &first) in line.reports.iter().enumerate() {
            for &second in &line.reports[at + 1..] {
                if first.0 != second.0 {
                    position(of, first, second, into, counts);
                    rate(of, first, second, into, counts);
                }
            }
        }
    }
}

type At = (usize, usize);

fn position(of: &Reports, a: At, b: At, into: &mut Vec<Conflict>, counts: &mut ConflictCounts) {
    let at = |(source, line): At| {
        let own = &of.sources[source];
        own.position(&own.lines[line])
    };
    let Some(((first, s1), (second, s2))) = at(a).zip(at(b)) else {
        return;
    };
    counts.positions += 1;
    let sigma = s1.hypot(s2).max(f64::MIN_POSITIVE);
    let size = (second - first) / sigma;
    if size.abs() > 3.0 {
        counts.position_conflicts += 1;
        into.push(conflict(
            of,
            a,
            b,
            (first, second),
            Quantity::Position,
            size,
        ));
    }
}

fn rate(of: &Reports, a: At, b: At, into: &mut Vec<Conflict>, counts: &mut ConflictCounts) {
    let at = |(source, line): At| of.sources[source].lines[line].rate_per_s;
    let Some((first, second)) = at(a).zip(at(b)).filter(|(f, s)| *f > 0.0 && *s > 0.0) else {
        return;
    };
    counts.rates += 1;
    let size = second / first;
    if size.max(1.0 / size) > RATE_RATIO {
        counts.rate_conflicts += 1;
        into.push(conflict(of, a, b, (first, second), Quantity::Rate, size));
    }
}

fn conflict(
    of: &Reports,
    a: At,
    b: At,
    values: (f64, f64),
    quantity: Quantity,
    size: f64,
) -> Conflict {
    let side = |(source, line): At, value| {
        let own = &of.sources[source];
        (own.key.clone(), own.lines[line].row, value)
    };
    let own = &of.sources[a.0];
    let wavenumber = own.lines[a.1]
        .joined
        .map(|line| of.lines[line].wavenumber_per_cm);
    Conflict {
        species: of.species,
        line: format!(
            "{} {}",
            of.species,
            wavenumber.map_or_else(|| "?".into(), wavelength)
        ),
        quantity,
        first: side(a, values.0),
        second: side(b, values.1),
        size,
    }
}
