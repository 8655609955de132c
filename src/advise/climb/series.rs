//! Levels of a Rydberg series as the end of a route.

use std::sync::Arc;

use vocabulary::atom::HalfInteger;
use vocabulary::light::constants::{ELECTRON_MASS_U, RYDBERG_PER_CM};
use vocabulary::spectrum::{Level, PositionOrigin};

use crate::advise::Spectrum;
use crate::calc::series::{
    Core, LabelledLevel, Limit, Series, SeriesFit, SeriesInput, fit, group_series, orbital_number,
    outer_electron,
};

/// Highest principal quantum number that is predicted: beyond, stray fields of a few mV/cm mix the
/// levels of real cells (field ionisation and Stark mixing scale as n⁻⁴ and n⁻⁵; common practice).
pub const HIGHEST_N: u32 = 100;

/// One member of a series.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RydbergLevel {
    /// Principal quantum number.
    pub n: u32,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Effective quantum number, n less the quantum defect.
    pub effective: f64,
    /// Measured, or computed by the fit of the series.
    pub origin: PositionOrigin,
}

/// A series that a route can end in: one core, l, term and J.
#[derive(Clone, Debug, PartialEq)]
pub struct RydbergSeries {
    /// Open shells of the core, `4s`; empty for a closed core.
    pub core: String,
    /// Orbital momentum of the outer electron.
    pub l: u32,
    /// Term, `2S`.
    pub term: String,
    /// J.
    pub j: HalfInteger,
    /// Keys of the sources of the measured members.
    pub sources: Vec<Arc<str>>,
    /// Members by n, measured where they are held, else predicted, up to [`HIGHEST_N`].
    pub members: Vec<RydbergLevel>,
}

/// All series of an orbital momentum on the ground core, or the reasons why there are none.
///
/// Members up to n = [`HIGHEST_N`] come from the Ritz fit of `calc::series`; the limit is that of
/// the species, with its 1 σ.
pub fn series_of(spectrum: &Spectrum, l: u32) -> Result<Vec<RydbergSeries>, String> {
    let limit = vocabulary::atom::limit(spectrum.species)
        .ok_or_else(|| "no ionisation energy is held".to_owned())?;
    let names: Vec<String> = spectrum.levels.iter().map(|l| open_shells(l)).collect();
    let labelled: Vec<LabelledLevel<'_>> = spectrum
        .levels
        .iter()
        .zip(&names)
        .filter_map(|(level, name)| label(level, name))
        .collect();
    let mut found = Vec::new();
    let mut reason = "no levels of such a series are held".to_owned();
    for series in group_series(&labelled)
        .iter()
        .filter(|s| s.key.l == l && s.ground_core)
    {
        let fitted = series.core_on_ground().and_then(|core| {
            let core = if series.key.core.is_empty() {
                closed_core(spectrum)
            } else {
                core
            };
            fit(&SeriesInput {
                core_charge: u32::from(spectrum.species.core_charge()),
                rydberg_per_cm: RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / spectrum.mass_u),
                l,
                core,
                limit: Limit::Fixed {
                    per_cm: limit.energy_per_cm,
                    sigma_per_cm: limit.uncertainty_per_cm,
                },
                members: series.members.clone(),
            })
        });
        match fitted {
            Ok(fitted) => found.push(rydberg(series, &fitted, sources(spectrum, series))),
            Err(error) => reason = error.to_string(),
        }
    }
    if found.is_empty() {
        Err(reason)
    } else {
        Ok(found)
    }
}

/// The configuration without closed shells before the open ones, and without the term of a closed
/// core: sources write `5s`, `4p6 5s` and `4s2 4p6 (1S) 5s` for one level.
fn open_shells(level: &Level) -> String {
    let mut words: Vec<&str> = level
        .configuration
        .as_deref()
        .unwrap_or_default()
        .split_whitespace()
        .collect();
    let closed = |word: &str| {
        ["s2", "p6", "d10", "f14"].iter().any(|full| {
            word.strip_suffix(full)
                .is_some_and(|n| n.bytes().all(|b| b.is_ascii_digit()))
        }) || word == "(1S)"
    };
    while words.len() > 1 && closed(words[0]) {
        words.remove(0);
    }
    words.join(" ")
}

/// How rigid a closed core is: those with the electrons of a noble gas have no low excited states.
fn closed_core(spectrum: &Spectrum) -> Core {
    let species = spectrum.species;
    match species.atomic_number - species.stage {
        2 | 10 | 18 | 36 | 54 | 86 => Core::Rigid,
        _ => Core::Soft,
    }
}

fn label<'l>(level: &'l Level, configuration: &'l str) -> Option<LabelledLevel<'l>> {
    (level.origin != PositionOrigin::Computed).then_some(())?;
    Some(LabelledLevel {
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.energy_uncertainty_per_cm,
        configuration,
        term: level.term.as_deref()?,
        twice_j: level.j?.twice(),
    })
}

/// Sources of the measured members of a series.
fn sources(spectrum: &Spectrum, series: &Series) -> Vec<Arc<str>> {
    let member = |l: &&Arc<Level>| {
        series
            .members
            .iter()
            .any(|m| m.energy_per_cm == l.energy_per_cm)
    };
    let mut keys: Vec<Arc<str>> = spectrum
        .levels
        .iter()
        .filter(member)
        .map(|l| Arc::clone(&l.source))
        .collect();
    keys.sort();
    keys.dedup();
    keys
}

fn rydberg(series: &Series, fitted: &SeriesFit, sources: Vec<Arc<str>>) -> RydbergSeries {
    let lowest = fitted.used.first().copied().unwrap_or(1);
    let members = (lowest..=HIGHEST_N)
        .filter_map(|n| {
            let held = series.members.iter().find(|m| m.n == n);
            let predicted = fitted.predict(n).ok()?;
            let effective = f64::from(n) - predicted.quantum_defect;
            Some(match held {
                Some(member) => RydbergLevel {
                    n,
                    energy_per_cm: member.energy_per_cm,
                    uncertainty_per_cm: member.uncertainty_per_cm,
                    effective,
                    origin: PositionOrigin::Measured,
                },
                None => RydbergLevel {
                    n,
                    energy_per_cm: predicted.energy_per_cm,
                    uncertainty_per_cm: predicted.uncertainty_per_cm,
                    effective,
                    origin: PositionOrigin::Computed,
                },
            })
        })
        .collect();
    RydbergSeries {
        core: series.key.core.clone(),
        l: series.key.l,
        term: series.key.term.clone(),
        j: HalfInteger::from_twice(series.key.twice_j),
        sources,
        members,
    }
}

impl RydbergSeries {
    /// Whether electric dipole radiation joins a level to this series: the outer electron changes
    /// l by one, the core and the multiplicity stay, J closes a triangle with 1.
    pub fn is_reached_from(&self, level: &Level) -> bool {
        let outer = outer_electron(&open_shells(level));
        let (Some(outer), Some(j), Some(term)) = (outer, level.j, level.term.as_deref()) else {
            return false;
        };
        let (a, b) = (j.twice(), self.j.twice());
        outer.occupancy == 1
            && outer.core == self.core
            && outer.l.abs_diff(self.l) == 1
            && multiplicity(term) == multiplicity(&self.term)
            && a.abs_diff(b) <= 2
            && a + b >= 2
    }

    /// Whether a level is a member.
    pub fn holds(&self, level: &Level) -> Option<RydbergLevel> {
        let outer = outer_electron(&open_shells(level))?;
        let fits = outer.core == self.core
            && outer.l == self.l
            && level.j == Some(self.j)
            && level.term.as_deref().is_some_and(|t| bare(t) == self.term);
        self.members
            .iter()
            .find(|m| fits && m.n == outer.n)
            .copied()
    }
}

fn bare(term: &str) -> &str {
    crate::calc::series::label::bare_term(term)
}

fn multiplicity(term: &str) -> Option<char> {
    bare(term).chars().next().filter(char::is_ascii_digit)
}

/// `nS`, `60d`: the orbital momentum and, where a number stands, n.
pub fn read_series(text: &str) -> Option<(u32, Option<u32>)> {
    let text = text.trim();
    let letter = text.chars().last()?;
    let l = orbital_number(letter.to_ascii_lowercase())?;
    match &text[..text.len() - letter.len_utf8()] {
        "n" | "N" => Some((l, None)),
        number => Some((l, Some(number.parse().ok().filter(|n| *n > l)?))),
    }
}
