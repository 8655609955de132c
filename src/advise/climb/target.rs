//! Where a route is to end.

use std::sync::Arc;

use vocabulary::atom::HalfInteger;
use vocabulary::spectrum::Level;

use super::series::RydbergSeries;
use crate::advise::tune::is_named;

/// The end of a route.
#[derive(Clone, Debug)]
pub enum Target {
    /// One of these levels.
    Levels(Vec<Arc<Level>>),
    /// A member of one of these series; of one n where it is given.
    Series(Vec<RydbergSeries>, Option<u32>),
    /// Above the series limit, cm⁻¹.
    Limit(f64),
}

/// How far a typed energy may be from the level that is meant, cm⁻¹.
const ENERGY_SLACK_PER_CM: f64 = 0.5;

/// Levels of an energy (cm⁻¹) above the ground level.
pub fn levels_at(levels: &[Arc<Level>], energy_per_cm: f64) -> Vec<Arc<Level>> {
    let slack = |l: &Level| ENERGY_SLACK_PER_CM.max(3.0 * l.energy_uncertainty_per_cm);
    levels
        .iter()
        .filter(|l| (l.energy_per_cm - energy_per_cm).abs() <= slack(l))
        .cloned()
        .collect()
}

/// Levels of a name: a configuration or its last shells, then, where given, term and J:
/// `5d`, `5d 2D`, `5d 2D 5/2`.
pub fn named_levels(levels: &[Arc<Level>], name: &str) -> Vec<Arc<Level>> {
    let words: Vec<&str> = name.split_whitespace().collect();
    let (words, j) = match words.split_last() {
        Some((last, rest)) if !rest.is_empty() && HalfInteger::parse(last).is_some() => {
            (rest, HalfInteger::parse(last))
        }
        _ => (&words[..], None),
    };
    let fits = |level: &&Arc<Level>| {
        let Some(own_j) = level.j else { return false };
        let Some(own_term) = level.term.as_deref() else {
            return false;
        };
        if j.is_some_and(|j| j != own_j) {
            return false;
        }
        let with_term = words.split_last().is_some_and(|(term, shells)| {
            !shells.is_empty() && is_named(level, &shells.join(" "), term, own_j)
        });
        with_term || is_named(level, &words.join(" "), own_term, own_j)
    };
    levels.iter().filter(fits).cloned().collect()
}

/// Names of the levels nearest to one that is not held: by energy, or by likeness of name.
pub fn nearest_levels(levels: &[Arc<Level>], typed: &str, energy_per_cm: Option<f64>) -> String {
    let mut ranked: Vec<(f64, String)> = levels
        .iter()
        .map(|level| {
            let name = full_name(level);
            let far = match energy_per_cm {
                Some(energy) => (level.energy_per_cm - energy).abs(),
                None => unlikeness(&outer_name(level), typed),
            };
            (far, format!("{name} ({:.1} cm⁻¹)", level.energy_per_cm))
        })
        .collect();
    ranked.sort_by(|a, b| a.0.total_cmp(&b.0));
    ranked.truncate(3);
    ranked
        .into_iter()
        .map(|(_, name)| name)
        .collect::<Vec<_>>()
        .join(", ")
}

fn full_name(level: &Level) -> String {
    let j = level.j.map(|j| j.to_string()).unwrap_or_default();
    let parts = [
        level.configuration.as_deref().unwrap_or(""),
        level.term.as_deref().unwrap_or(""),
        &j,
    ];
    parts
        .into_iter()
        .filter(|p| !p.is_empty())
        .collect::<Vec<_>>()
        .join(" ")
}

/// Last shell, term and J.
fn outer_name(level: &Level) -> String {
    let name = full_name(level);
    let words: Vec<&str> = name.split_whitespace().collect();
    words[words.len().saturating_sub(3)..].join(" ")
}

/// Number of single-letter changes between two names (Levenshtein 1966, Sov. Phys. Dokl. 10, 707),
/// the longer one's rest beyond the typed text not counted.
fn unlikeness(name: &str, typed: &str) -> f64 {
    let (name, typed): (Vec<char>, Vec<char>) = (name.chars().collect(), typed.chars().collect());
    let mut row: Vec<usize> = (0..=name.len()).collect();
    for (i, a) in typed.iter().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, b) in name.iter().enumerate() {
            let change = diagonal + usize::from(a != b);
            diagonal = row[j + 1];
            row[j + 1] = change.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row.into_iter().min().unwrap_or(0) as f64
}
