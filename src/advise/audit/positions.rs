//! Positions against levels: wrong medium, wrong unit, one level off, one line off.

use std::collections::{BTreeMap, BTreeSet};

use vocabulary::light::Air;
use vocabulary::report::{ReportedSource, Reports};

use super::finding::{Finding, Place, Rule, wavelength};
use super::residuals::{Residual, of_source};
use crate::advise::median::median;

/// Lines from which a common cause can be told from chance.
const LEAST_FOR_A_SHAPE: usize = 3;
/// Part of the lines that must show it.
const MOST_OF: f64 = 0.7;
/// How far a line may lie from the shape, as a fraction of the shift of air.
const SHAPE_WIDTH: f64 = 0.15;

/// Factors between units of energy that are mixed up: eV, m⁻¹, GHz, Ry, Hartree, kK and a slipped
/// decimal point, as given / right. CODATA 2022: 1 eV = 8065.5439 cm⁻¹, 1 Ry = 109737.3157 cm⁻¹,
/// 1 cm⁻¹ = 29.9792458 GHz.
const UNIT_FACTORS: [(f64, &str); 8] = [
    (8065.5439, "eV taken for cm-1"),
    (1.0 / 8065.5439, "cm-1 taken for eV"),
    (109_737.316, "Ry taken for cm-1"),
    (219_474.631, "Hartree taken for cm-1"),
    (0.01, "m-1 taken for cm-1"),
    (1.0 / 29.979_245_8, "GHz taken for cm-1"),
    (10.0, "a decimal point slipped to the left"),
    (0.1, "a decimal point slipped to the right"),
];

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    for (index, source) in of.sources.iter().enumerate() {
        let residuals = of_source(of, index);
        let finding = medium(of, source, &residuals)
            .or_else(|| unit(of, source, &residuals))
            .or_else(|| medium_of_strangers(of, index));
        match finding {
            Some(finding) => found.push(finding),
            None => single(of, source, &residuals, found),
        }
    }
}

/// The shape of the index of air in the residuals of most lines.
fn medium(of: &Reports, source: &ReportedSource, residuals: &[Residual]) -> Option<Finding> {
    let fractions: Vec<(f64, f64)> = residuals
        .iter()
        .filter_map(|r| Some((r.air_fraction()?, r.expected_per_cm)))
        .collect();
    let middle = median(fractions.iter().map(|f| f.0))?;
    let sign = middle.signum();
    let shaped: Vec<&(f64, f64)> = fractions
        .iter()
        .filter(|f| (f.0 - sign).abs() <= SHAPE_WIDTH)
        .collect();
    if shaped.len() < LEAST_FOR_A_SHAPE
        || (shaped.len() as f64) < MOST_OF * fractions.len() as f64
        || (middle.abs() - 1.0).abs() > SHAPE_WIDTH
    {
        return None;
    }
    let ends = |pick: fn(f64, f64) -> f64| shaped.iter().map(|f| f.1).reduce(pick);
    let (low, high) = ends(f64::max).zip(ends(f64::min))?;
    let (rule, words, declare) = if sign > 0.0 {
        (
            Rule::AirAsVacuum,
            "shorter",
            "in air: declare the column as air",
        )
    } else {
        (
            Rule::VacuumAsAir,
            "longer",
            "in vacuum: declare the column as vacuum",
        )
    };
    Some(Finding {
        rule,
        species: of.species,
        source: source.key.to_string(),
        place: Place::whole(format!("{}, {} lines", of.species, shaped.len())),
        size: middle.abs(),
        unit: "of the shift of air",
        advice: format!(
            "{} of {} wavelengths from {} to {} are {words} than their levels give by just what \
             the index of air makes of them ({:.2} of its shift), so they are {declare}",
            shaped.len(),
            fractions.len(),
            wavelength(low),
            wavelength(high),
            middle.abs(),
        ),
    })
}

/// One known factor between given positions and energies.
fn unit(of: &Reports, source: &ReportedSource, residuals: &[Residual]) -> Option<Finding> {
    if residuals.is_empty() {
        return None;
    }
    let ratios = || residuals.iter().map(|r| r.given_per_cm / r.expected_per_cm);
    let (factor, words) = UNIT_FACTORS.into_iter().find(|(factor, _)| {
        let near = ratios().filter(|r| (r / factor - 1.0).abs() < 1e-3).count();
        near as f64 >= MOST_OF * residuals.len() as f64
    })?;
    Some(energy_unit(
        of,
        source,
        residuals.len(),
        factor,
        words,
        "its wavelengths",
    ))
}

/// The finding of energies in another unit than declared.
pub(super) fn energy_unit(
    of: &Reports,
    source: &ReportedSource,
    count: usize,
    factor: f64,
    words: &str,
    against: &str,
) -> Finding {
    Finding {
        rule: Rule::EnergyUnit,
        species: of.species,
        source: source.key.to_string(),
        place: Place::whole(format!("{}, energies", of.species)),
        size: factor,
        unit: "times",
        advice: format!(
            "its energies are to be multiplied by {factor:.6} to fit {against} ({count} rows), as \
             by {words}: declare the unit that they are given in"
        ),
    }
}

/// The factor between two energies, if it is one of units mixed up.
pub(super) fn unit_factor(right_over_given: f64) -> Option<(f64, &'static str)> {
    UNIT_FACTORS
        .into_iter()
        .find(|(factor, _)| (right_over_given / factor - 1.0).abs() < 1e-3)
}

/// Lines without levels that match no other source as given, and do once the index of air is
/// applied.
fn medium_of_strangers(of: &Reports, index: usize) -> Option<Finding> {
    let source = &of.sources[index];
    let others: Vec<f64> = of
        .lines
        .iter()
        .filter(|l| l.position_source != index)
        .map(|l| l.wavenumber_per_cm)
        .collect();
    let loose: Vec<(f64, f64)> = source
        .lines
        .iter()
        .filter(|l| l.lower.is_none() || l.upper.is_none())
        .filter_map(|l| l.wavenumber_per_cm.zip(l.uncertainty_per_cm))
        .filter(|(w, _)| Air::standard().index(1e7 / w).is_ok())
        .collect();
    if loose.len() < 5 || others.len() < 5 {
        return None;
    }
    let matched = |scale: fn(f64) -> Option<f64>| {
        let near = |&&(w, u): &&(f64, f64)| {
            scale(w).is_some_and(|w| {
                let reach = (3.0 * u).min(2e-5 * w);
                let at = others.partition_point(|o| *o < w - reach);
                others.get(at).is_some_and(|o| *o <= w + reach)
            })
        };
        loose.iter().filter(near).count() as f64 / loose.len() as f64
    };
    let as_given = matched(Some);
    let to_vacuum = matched(|w| Some(1e7 / Air::standard().to_vacuum_nm(1e7 / w).ok()?.nm));
    let to_air = matched(|w| Some(1e7 / Air::standard().to_air_nm(1e7 / w).ok()?.nm));
    let (rule, share, declare) = if to_vacuum >= to_air {
        (Rule::AirAsVacuum, to_vacuum, "air")
    } else {
        (Rule::VacuumAsAir, to_air, "vacuum")
    };
    (share >= MOST_OF && as_given <= 0.3).then(|| Finding {
        rule,
        species: of.species,
        source: source.key.to_string(),
        place: Place::whole(format!("{}, {} lines", of.species, loose.len())),
        size: 1.0,
        unit: "of the shift of air",
        advice: format!(
            "{:.0} % of its lines match lines of other sources as given, {:.0} % if they are read \
             in {declare}: declare the column as {declare}",
            100.0 * as_given,
            100.0 * share,
        ),
    })
}

/// Levels whose lines all miss alike, then single lines.
fn single(of: &Reports, source: &ReportedSource, residuals: &[Residual], found: &mut Vec<Finding>) {
    let mut explained = BTreeSet::new();
    for (level, lines) in by_level(source, residuals) {
        let open: Vec<(f64, &Residual)> = lines
            .into_iter()
            .filter(|(_, r)| !explained.contains(&r.line))
            .collect();
        if let Some(shift) = common_shift(&open) {
            explained.extend(open.iter().map(|(_, r)| r.line));
            found.push(level_off(of, source, level, open.len(), shift));
        }
    }
    for residual in residuals.iter().filter(|r| r.misfits()) {
        if !explained.contains(&residual.line) {
            found.push(misfit(of, source, residual));
        }
    }
}

/// Residuals by level with the sign that its energy has in them, levels with most misfits first.
fn by_level<'r>(
    source: &ReportedSource,
    residuals: &'r [Residual],
) -> Vec<(usize, Vec<(f64, &'r Residual)>)> {
    let mut levels: BTreeMap<usize, Vec<(f64, &Residual)>> = BTreeMap::new();
    for residual in residuals {
        let line = &source.lines[residual.line];
        if let (Some(lower), Some(upper)) = (line.lower, line.upper) {
            levels.entry(upper).or_default().push((1.0, residual));
            levels.entry(lower).or_default().push((-1.0, residual));
        }
    }
    let misfits = |l: &[(f64, &Residual)]| l.iter().filter(|(_, r)| r.misfits()).count();
    let mut levels: Vec<_> = levels
        .into_iter()
        .filter(|(_, l)| misfits(l) >= 2)
        .collect();
    levels.sort_by_key(|(level, lines)| (std::cmp::Reverse(misfits(lines)), *level));
    levels
}

/// What the energy has to be moved by, where all lines of the level ask for the same.
fn common_shift(lines: &[(f64, &Residual)]) -> Option<f64> {
    let shift = median(lines.iter().map(|(sign, r)| sign * r.off_per_cm()))?;
    let alike = lines
        .iter()
        .all(|(sign, r)| (sign * r.off_per_cm() - shift).abs() <= 3.0 * r.sigma_per_cm + 1e-3);
    (alike && lines.iter().filter(|(_, r)| r.misfits()).count() >= 2).then_some(shift)
}

fn level_off(
    of: &Reports,
    source: &ReportedSource,
    level: usize,
    lines: usize,
    shift_per_cm: f64,
) -> Finding {
    Finding {
        rule: Rule::LevelOff,
        species: of.species,
        source: source.key.to_string(),
        place: Place::level(of.species, &source.levels[level]),
        size: shift_per_cm,
        unit: "cm-1",
        advice: format!(
            "all {lines} lines of this level ask for an energy {shift_per_cm:+.3} cm-1 from the \
             one given: compare the level with its paper, or widen its uncertainty"
        ),
    }
}

fn misfit(of: &Reports, source: &ReportedSource, residual: &Residual) -> Finding {
    let off_nm = 1e7 / residual.given_per_cm - 1e7 / residual.expected_per_cm;
    Finding {
        rule: Rule::RitzMisfit,
        species: of.species,
        source: source.key.to_string(),
        place: Place::line(
            of.species,
            &source.lines[residual.line],
            residual.given_per_cm,
        ),
        size: off_nm,
        unit: "nm",
        advice: format!(
            "its levels give {} ({:.1} sigma away): check the digits of the wavelength and which \
             levels it belongs to",
            wavelength(residual.expected_per_cm),
            residual.off_per_cm().abs() / residual.sigma_per_cm.max(1e-9),
        ),
    }
}
