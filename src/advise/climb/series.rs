//! Levels of a Rydberg series as the end of a route, and how strongly a level is joined to them.

use std::sync::Arc;

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::constants::RYDBERG_PER_CM;
use vocabulary::spectrum::{Level, PositionOrigin};

use crate::calc::coulomb::{
    BoundLevel, OuterLevel, PredictedSeries, Setting, bound_line_between, predict_scaled_series,
};
use crate::calc::one_electron::{
    HIGHEST_FINE_N, Nucleus, component_rate, energy, rate_relative_uncertainty,
};
use crate::calc::plasma::absorption_f;
use crate::calc::series::{
    LabelledLevel, Series, SeriesError, SeriesKey, group_series, orbital_letter, orbital_number,
    outer_electron,
};

/// Highest principal quantum number that is predicted: beyond, stray fields of a few mV/cm mix the
/// levels of real cells (field ionisation and Stark mixing scale as n⁻⁴ and n⁻⁵; common practice).
pub const HIGHEST_N: u32 = 100;
/// 1 σ of ln A beyond which the Coulomb approximation says too little.
const LARGEST_SIGMA: f64 = 1.0;

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

/// What joins a level to a member of a series.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Joint {
    /// Spontaneous emission rate, s⁻¹.
    pub rate_per_s: f64,
    /// Absorption oscillator strength.
    pub oscillator_strength: f64,
    /// 1 σ of either over itself.
    pub relative_uncertainty: f64,
}

/// How the members of a series and their strengths are made.
#[derive(Clone, Debug, PartialEq)]
enum Maker {
    /// One electron outside a core.
    Outer(Setting),
    /// One electron and a nucleus.
    OneElectron(Nucleus),
}

/// A series that a route can end in: one core, l, term and J.
#[derive(Clone, Debug, PartialEq)]
pub struct RydbergSeries {
    /// The core, `4p6`; empty for a bare nucleus.
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
    maker: Maker,
}

/// All series of an orbital momentum of one electron and a nucleus, members up to the highest n
/// whose fine structure is computed.
///
/// # Errors
/// A species that is not known to the calculator.
pub fn one_electron_series(species: Species, l: u32) -> Result<Vec<RydbergSeries>, String> {
    let nucleus = Nucleus::of(species).map_err(|e| e.to_string())?;
    let ground = energy(&nucleus, 1, 0, HalfInteger::from_twice(1)).map_err(|e| e.to_string())?;
    let charge = nucleus.charge();
    let rydberg_per_cm = RYDBERG_PER_CM * nucleus.reduced_mass() * charge * charge;
    let of_j = |twice_j: u32| -> Result<RydbergSeries, String> {
        let j = HalfInteger::from_twice(twice_j as u16);
        let mut members = Vec::new();
        for n in l + 1..=HIGHEST_FINE_N {
            let level = energy(&nucleus, n, l, j).map_err(|e| e.to_string())?;
            members.push(RydbergLevel {
                n,
                energy_per_cm: ground.binding_per_cm - level.binding_per_cm,
                uncertainty_per_cm: level.uncertainty_per_cm.hypot(ground.uncertainty_per_cm),
                effective: (rydberg_per_cm / level.binding_per_cm).sqrt(),
                origin: PositionOrigin::Computed,
            });
        }
        let letter = orbital_letter(l).unwrap_or('?').to_ascii_uppercase();
        let parity = if l.is_multiple_of(2) { "" } else { "o" };
        Ok(RydbergSeries {
            core: String::new(),
            l,
            term: format!("2{letter}{parity}"),
            j,
            sources: vec![Arc::from("computed-one-electron")],
            members,
            maker: Maker::OneElectron(nucleus),
        })
    };
    let momenta = (2 * l).checked_sub(1).into_iter().chain([2 * l + 1]);
    momenta.map(of_j).collect()
}

/// All series of an orbital momentum of one electron outside the ground core, or the reasons why
/// there are none. Levels, limit and fit are those of the gap fill and of `predict`.
///
/// # Errors
/// The reason, series by series.
pub fn series_of(
    setting: &Setting,
    held: &[OuterLevel],
    l: u32,
) -> Result<Vec<RydbergSeries>, String> {
    let labelled: Vec<LabelledLevel<'_>> = held
        .iter()
        .map(|level| LabelledLevel {
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.uncertainty_per_cm,
            configuration: &level.configuration,
            term: &level.term,
            twice_j: level.twice_j,
        })
        .collect();
    let groups = group_series(&labelled);
    let (mut found, mut refused) = (Vec::new(), Vec::new());
    let scales: Vec<f64> = held.iter().map(|level| level.scale_per_cm).collect();
    for series in predict_scaled_series(&labelled, &scales, &setting.calc(), HIGHEST_N)
        .into_iter()
        .filter(|series| series.key.l == l)
    {
        match &series.fit {
            Some(Err(
                SeriesError::CoreChanging { .. }
                | SeriesError::SplitCore { .. }
                | SeriesError::TooFewMembers { held: 0, .. },
            )) => {}
            Some(Err(reason)) => refused.push((words(&series.key), reason.to_string())),
            _ => {
                let group = groups.iter().find(|group| group.key == series.key);
                found.push(rydberg(setting, &series, group, held));
            }
        }
    }
    match (found.is_empty(), refused.is_empty()) {
        (false, _) => Ok(found),
        (true, true) => Err("no levels of such a series are held".into()),
        (true, false) => Err(reasons(&refused)),
    }
}

/// Each reason once, with the series that it is about.
fn reasons(refused: &[(String, String)]) -> String {
    let mut by_reason: Vec<(&str, Vec<&str>)> = Vec::new();
    for (series, reason) in refused {
        match by_reason.iter_mut().find(|(known, _)| known == reason) {
            Some((_, names)) => names.push(series),
            None => by_reason.push((reason, vec![series])),
        }
    }
    let sentence = |(reason, names): &(&str, Vec<&str>)| format!("{}: {reason}", names.join(", "));
    let sentences: Vec<String> = by_reason.iter().map(sentence).collect();
    sentences.join("; ")
}

fn words(key: &SeriesKey) -> String {
    let letter = orbital_letter(key.l).unwrap_or('?');
    let j = HalfInteger::from_twice(key.twice_j);
    format!("n{letter} {} {j}", key.term)
}

fn rydberg(
    setting: &Setting,
    series: &PredictedSeries,
    group: Option<&Series>,
    held: &[OuterLevel],
) -> RydbergSeries {
    let fit = series.fit.as_ref().and_then(|fit| fit.as_ref().ok());
    let measured = group.map_or(&[][..], |group| &group.members);
    let lowest = fit.and_then(|fit| fit.used.first().copied()).unwrap_or(1);
    let mut members: Vec<RydbergLevel> = measured
        .iter()
        .filter(|member| member.n >= lowest)
        .filter_map(|member| {
            let effective = f64::from(member.n) - fit?.predict(member.n).ok()?.quantum_defect;
            Some(RydbergLevel {
                n: member.n,
                energy_per_cm: member.energy_per_cm,
                uncertainty_per_cm: member.uncertainty_per_cm,
                effective,
                origin: PositionOrigin::Measured,
            })
        })
        .collect();
    members.extend(series.levels.iter().map(|level| RydbergLevel {
        n: level.prediction.n,
        energy_per_cm: level.prediction.energy_per_cm,
        uncertainty_per_cm: level.prediction.uncertainty_per_cm,
        effective: f64::from(level.prediction.n) - level.prediction.quantum_defect,
        origin: PositionOrigin::Computed,
    }));
    members.sort_by_key(|member| member.n);
    let of_series = |level: &&OuterLevel| {
        (measured.iter()).any(|member| member.energy_per_cm == level.energy_per_cm)
    };
    let mut sources: Vec<Arc<str>> = (held.iter().filter(of_series))
        .map(|level| Arc::clone(&level.source))
        .collect();
    sources.sort();
    sources.dedup();
    RydbergSeries {
        core: series.key.core.clone(),
        l: series.key.l,
        term: series.key.term.clone(),
        j: HalfInteger::from_twice(series.key.twice_j),
        sources,
        members,
        maker: Maker::Outer(*setting),
    }
}

impl RydbergSeries {
    /// The configuration of a level in the form in which the series writes its core.
    fn one_form(&self, level: &Level) -> Option<String> {
        let configuration = level.configuration.as_deref()?;
        match &self.maker {
            Maker::Outer(setting) => setting.one_form(configuration),
            Maker::OneElectron(_) => Some(configuration.to_owned()),
        }
    }

    /// Whether electric dipole radiation joins a level to this series: the outer electron, or one
    /// of an s² shell, changes l by one, the core and the multiplicity stay, J closes a triangle
    /// with 1.
    pub fn is_reached_from(&self, level: &Level) -> bool {
        let outer = self.one_form(level).and_then(|form| outer_electron(&form));
        let (Some(outer), Some(j), Some(term)) = (outer, level.j, level.term.as_deref()) else {
            return false;
        };
        let (a, b) = (j.twice(), self.j.twice());
        (outer.occupancy == 1 || (outer.occupancy, outer.l) == (2, 0))
            && outer.core == self.core
            && outer.l.abs_diff(self.l) == 1
            && multiplicity(term) == multiplicity(&self.term)
            && a.abs_diff(b) <= 2
            && a + b >= 2
    }

    /// The member that a level is.
    pub fn holds(&self, level: &Level) -> Option<RydbergLevel> {
        let outer = outer_electron(&self.one_form(level)?)?;
        let fits = outer.core == self.core
            && outer.occupancy == 1
            && outer.l == self.l
            && level.j == Some(self.j)
            && level.term.as_deref().is_some_and(|t| bare(t) == self.term);
        self.members
            .iter()
            .find(|m| fits && m.n == outer.n)
            .copied()
    }

    /// How strongly a level below is joined to a member: exact for one electron, else by the
    /// Coulomb approximation where it holds to a factor e.
    pub fn joint(&self, level: &Level, member: RydbergLevel) -> Option<Joint> {
        let (rate_per_s, relative_uncertainty) = match &self.maker {
            Maker::OneElectron(nucleus) => self.exact_rate(nucleus, level, member)?,
            Maker::Outer(setting) => self.coulomb_rate(setting, level, member)?,
        };
        let wavenumber_per_cm = member.energy_per_cm - level.energy_per_cm;
        let (upper, lower) = (self.j.weight(), level.g?);
        Some(Joint {
            rate_per_s,
            oscillator_strength: absorption_f(rate_per_s, upper, lower, wavenumber_per_cm),
            relative_uncertainty,
        })
    }

    fn exact_rate(
        &self,
        nucleus: &Nucleus,
        level: &Level,
        member: RydbergLevel,
    ) -> Option<(f64, f64)> {
        let outer = outer_electron(level.configuration.as_deref()?)?;
        let (upper, lower) = ((member.n, self.l, self.j), (outer.n, outer.l, level.j?));
        let rate = component_rate(nucleus, upper, lower).ok()?;
        (rate > 0.0).then(|| (rate, rate_relative_uncertainty(nucleus)))
    }

    fn coulomb_rate(
        &self,
        setting: &Setting,
        level: &Level,
        member: RydbergLevel,
    ) -> Option<(f64, f64)> {
        let letter = orbital_letter(self.l)?;
        let configuration = format!("{} {}{letter}", self.core, member.n);
        let upper = LabelledLevel {
            energy_per_cm: member.energy_per_cm,
            uncertainty_per_cm: member.uncertainty_per_cm,
            configuration: configuration.trim(),
            term: &self.term,
            twice_j: self.j.twice(),
        };
        let form = self.one_form(level)?;
        let lower = LabelledLevel {
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.energy_uncertainty_per_cm,
            configuration: &form,
            term: level.term.as_deref()?,
            twice_j: level.j?.twice(),
        };
        let strength_per_cm = setting.rydberg_per_cm * f64::from(setting.core_charge).powi(2);
        // High members are bound by little: their distance to the limit is that of the fit.
        let upper = BoundLevel {
            level: upper,
            binding_per_cm: strength_per_cm / member.effective.powi(2),
        };
        let lower = BoundLevel::of_species(lower, &setting.calc());
        let rate = bound_line_between(&upper, &lower, &setting.calc()).ok()?;
        (rate.relative_uncertainty <= LARGEST_SIGMA)
            .then_some((rate.per_s, rate.relative_uncertainty))
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
