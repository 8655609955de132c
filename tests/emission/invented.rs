//! Invented spectra, and the shortest questions about them.

use std::sync::Arc;

use lineclear::advise::vet::{Answer, Question, answer};
use lineclear::advise::{Conditions, Details, EmissionModel, Spectrum, Wanted};
use lineclear::vocabulary::atom::{HalfInteger, Species};
use lineclear::vocabulary::light::{Medium, SpectralWidth};
use lineclear::vocabulary::spectrum::{
    Completeness, Level, Line, LineKind, Parity, PositionOrigin, RateOrigin, Scope, Strength,
};

pub const MEDIUM: Medium = Medium::Vacuum;

/// A level: energy (cm⁻¹), weight, configuration, term; J is (weight − 1)/2.
pub type LevelRow = (f64, f64, &'static str, &'static str);
/// A line: lower and upper level, rate (s⁻¹).
pub type LineRow = (usize, usize, Option<f64>);

/// An invented species; every line's rate is known to 10 %.
pub fn spectrum(species: Species, levels: &[LevelRow], lines: &[LineRow]) -> Spectrum {
    let source: Arc<str> = Arc::from("invented");
    let levels: Vec<Arc<Level>> = levels
        .iter()
        .enumerate()
        .map(|(number, &(energy_per_cm, g, configuration, term))| {
            Arc::new(Level {
                number: u32::try_from(number).unwrap(),
                species,
                energy_per_cm,
                energy_uncertainty_per_cm: 1e-6,
                configuration: Some(Arc::from(configuration)),
                term: Some(Arc::from(term)),
                j: Some(HalfInteger::from_twice(g as u16 - 1)),
                g: Some(g),
                parity: Some(if term.ends_with('o') {
                    Parity::Odd
                } else {
                    Parity::Even
                }),
                origin: PositionOrigin::Measured,
                source: source.clone(),
            })
        })
        .collect();
    let mut held: Vec<Line> = lines
        .iter()
        .map(|&(lower, upper, rate_per_s)| Line {
            species,
            wavenumber_per_cm: levels[upper].energy_per_cm - levels[lower].energy_per_cm,
            wavenumber_uncertainty_per_cm: 1e-6,
            position_origin: PositionOrigin::Measured,
            position_source: source.clone(),
            lower: Some(levels[lower].clone()),
            upper: Some(levels[upper].clone()),
            rate_per_s,
            rate_relative_uncertainty: rate_per_s.map(|_| 0.1),
            rate_origin: rate_per_s.map(|_| RateOrigin::Published),
            rate_source: rate_per_s.map(|_| source.clone()),
            kind: LineKind::Line,
        })
        .collect();
    held.sort_by(|a, b| a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm));
    let strengths = held
        .iter()
        .map(|l| Strength {
            wavenumber_per_cm: l.wavenumber_per_cm,
            rate_per_s: l.rate_per_s,
            computed: false,
            lower: l.lower.as_ref().map(|l| l.number),
            upper: l.upper.as_ref().map(|u| u.number),
        })
        .collect();
    Spectrum {
        species,
        amount: 1.0,
        named: true,
        levels,
        lines: held,
        strengths,
        limit_per_cm: Some(60_000.0),
        mass_u: 50.0,
        scopes: vec![Scope {
            from_nm: 100.0,
            to_nm: 5000.0,
            completeness: Completeness::Computed,
            source,
        }],
    }
}

/// One line from a 1Po level to the ground level.
pub fn one_line(atomic_number: u8, nm: f64, rate_per_s: f64) -> Spectrum {
    spectrum(
        Species::new(atomic_number, 1),
        &[(0.0, 1.0, "4s2", "1S"), (1e7 / nm, 3.0, "4s 4p", "1Po")],
        &[(0, 1, Some(rate_per_s))],
    )
}

pub fn conditions(model: EmissionModel, kt_per_cm: f64) -> Conditions {
    Conditions {
        model,
        kt_per_cm,
        electron_density_per_m3: None,
        gas_temperature_k: 1000.0,
        details: Details::default(),
    }
}

/// Vets the line of a species at a wavelength (vacuum nm).
pub fn vet(
    spectra: &[Spectrum],
    species: &str,
    nm: f64,
    fwhm_nm: f64,
    conditions: Conditions,
) -> Answer {
    let question = Question {
        wanted: wanted(species, nm),
        medium: MEDIUM,
        width: SpectralWidth::from_nm(fwhm_nm),
        conditions,
        not_held: Vec::new(),
        column_per_m2: None,
        scan_kt_per_cm: Vec::new(),
        scan_density_per_m3: Vec::new(),
    };
    answer(&question, spectra, &[]).unwrap()
}

pub fn wanted(species: &str, nm: f64) -> Wanted {
    Wanted {
        request: Some(species.parse().unwrap()),
        vacuum_nm: nm,
        typed: "invented".into(),
    }
}
