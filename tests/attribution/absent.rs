//! Lists that no species made, and lines that nobody saw: no species is claimed on their account.

use std::sync::Arc;

use lineclear::advise::attribute::{Answer, Peak, Question, answer};
use lineclear::advise::{Conditions, EmissionModel, Spectrum};
use lineclear::catalogue::Catalogue;
use vocabulary::atom::{SpeciesRequest, limit, mass_u};
use vocabulary::light::{Air, Medium, SpectralWidth};
use vocabulary::spectrum::{Line, LineKind, PositionOrigin};

use super::common::{catalogue, json};
use super::{Chance, list, present};

/// Random lists of each size.
const LISTS: usize = 10;

#[test]
fn random_lists_show_no_species() {
    let mut claims = Vec::new();
    for (count, sigma_nm) in [(20, 0.02), (100, 0.02), (100, 0.05), (1000, 0.02)] {
        for seed in 0..LISTS {
            let mut chance = Chance::new(1000 * count as u64 + seed as u64);
            let mut places: Vec<f64> = (0..count).map(|_| 220.0 + 700.0 * chance.part()).collect();
            places.sort_by(f64::total_cmp);
            places.dedup_by(|a, b| (*a - *b).abs() < 1e-3);
            let file = list("random.csv", &places, sigma_nm);
            let answer = json(&format!("lineclear attribute {file}"));
            claims.extend(present(&answer));
        }
    }
    // 40 lists against all elements held: at most 5 % of them may show a species.
    assert!(claims.len() <= 2, "{claims:?}");
}

/// What is held of some elements from 250 to 1000 nm, without the lines that follow from levels alone.
fn held(of: &str) -> Vec<Spectrum> {
    let requests = SpeciesRequest::parse_list(of).unwrap();
    let catalogue = Catalogue::open(catalogue()).unwrap();
    let species = catalogue.species().unwrap();
    species
        .into_iter()
        .filter(|s| requests.iter().any(|r| r.matches(*s)))
        .map(|species| {
            let levels = catalogue.levels(species).unwrap();
            let mut lines = catalogue.lines(species, &levels, 1e4, 4e4).unwrap();
            lines.retain(|l| l.kind != LineKind::Ritz);
            Spectrum {
                lines,
                strengths: catalogue.strengths(species).unwrap(),
                scopes: catalogue.scopes(species).unwrap(),
                limit_per_cm: limit(species).map(|l| l.energy_per_cm),
                mass_u: mass_u(species).unwrap_or(1.0),
                species,
                amount: 1.0,
                named: false,
                levels,
            }
        })
        .collect()
}

/// Adds every line that the levels allow (parities differ, J by one at most) and that is not there, without a rate.
fn add_unrated(spectrum: &mut Spectrum) -> usize {
    let mut added = Vec::new();
    for lower in &spectrum.levels {
        for upper in &spectrum.levels {
            let wavenumber = upper.energy_per_cm - lower.energy_per_cm;
            let (Some(p), Some(q), Some(i), Some(j)) =
                (lower.parity, upper.parity, lower.j, upper.j)
            else {
                continue;
            };
            let allowed = p != q && (i.value() - j.value()).abs() < 1.5;
            let there = |l: &Line| (l.wavenumber_per_cm - wavenumber).abs() < 1e-3;
            if !(1e4..4e4).contains(&wavenumber) || !allowed || spectrum.lines.iter().any(there) {
                continue;
            }
            added.push(Line {
                species: spectrum.species,
                wavenumber_per_cm: wavenumber,
                wavenumber_uncertainty_per_cm: 0.02,
                position_origin: PositionOrigin::Ritz,
                position_source: Arc::clone(&upper.source),
                lower: Some(Arc::clone(lower)),
                upper: Some(Arc::clone(upper)),
                rate_per_s: None,
                rate_relative_uncertainty: None,
                rate_origin: None,
                rate_source: None,
                kind: LineKind::Line,
            });
        }
    }
    let count = added.len();
    spectrum.lines.extend(added);
    spectrum
        .lines
        .sort_by(|a, b| a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm));
    count
}

fn asked(spectra: &[Spectrum], places_nm: &[f64]) -> Answer {
    let conditions = |ev: f64| Conditions {
        model: EmissionModel::Visible,
        kt_per_cm: 8065.5 * ev,
        electron_density_per_m3: None,
        gas_temperature_k: 1000.0,
        details: lineclear::advise::Details::default(),
    };
    let question = Question {
        medium: Medium::Auto,
        width: SpectralWidth::from_nm(0.1),
        grid: [0.3, 1.0, 4.0].map(conditions).to_vec(),
        shift_bound_nm: 0.05,
        species_expected: 8.0,
    };
    let peaks: Vec<Peak> = places_nm
        .iter()
        .map(|&nm| Peak {
            vacuum_nm: Air::standard().to_vacuum_nm(nm).unwrap().nm,
            second_order_vacuum_nm: None,
            sigma_nm: 0.02,
            intensity: None,
        })
        .collect();
    answer(&question, &peaks, spectra).unwrap()
}

fn names(answer: &Answer) -> Vec<String> {
    let mut names: Vec<String> = answer
        .species
        .iter()
        .filter(|s| s.present)
        .map(|s| s.species.to_string())
        .collect();
    names.sort();
    names
}

fn peaks_of(set: &str) -> Vec<f64> {
    let text = std::fs::read_to_string(format!("tests/reference/published/bench/peaks-{set}.csv"))
        .unwrap();
    let first = |l: &str| l.split(',').next().unwrap().parse().unwrap();
    text.lines().skip(1).map(first).collect()
}

#[test]
fn lines_of_levels_alone_make_no_species_present() {
    let before = held("Ne,Ar,Fe,Cr,Mn,Ni,Cu,Ti,V,Co,Hg,N,O,C");
    let mut after = before.clone();
    let added: usize = after.iter_mut().map(add_unrated).sum();
    // More than is held of them there, or the test says little.
    let held: usize = before.iter().map(|s| s.lines.len()).sum();
    assert!(added > held, "{added} {held}");
    for set in ["neon", "mercury-argon", "steel-arc"] {
        let places = peaks_of(set);
        let (one, other) = (asked(&before, &places), asked(&after, &places));
        assert_eq!(names(&one), names(&other), "{set}");
        let same = one
            .peaks
            .iter()
            .zip(&other.peaks)
            .filter(|(a, b)| {
                let species = |p: &lineclear::advise::attribute::PeakAnswer| {
                    p.attributed().map(|c| c.line.species)
                };
                species(a) == species(b)
            })
            .count();
        assert!(
            same * 50 >= places.len() * 49,
            "{set}: {same} of {}",
            places.len()
        );
    }
    let mut chance = Chance::new(7);
    for _ in 0..LISTS {
        let places: Vec<f64> = (0..100).map(|_| 260.0 + 600.0 * chance.part()).collect();
        assert_eq!(
            names(&asked(&after, &places)),
            names(&asked(&before, &places))
        );
    }
}
