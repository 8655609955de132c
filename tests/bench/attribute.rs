//! `attribute` against everything the bundled catalogue holds: lists of 100, 1 000 and 10 000 peaks, 200 to 900 nm.
//!
//! Lists are features of every species held, drawn by a fixed sequence, with position errors of 0.02 nm, and a tenth of
//! peaks at any place. Records are kept beside this file; compare ratios inside one run, machines are noisy.

use divan::{Bencher, black_box};
use lineclear::advise::attribute::{Peak, Question, answer};
use lineclear::advise::{Conditions, Details, EmissionModel, Spectrum};
use lineclear::catalogue::Catalogue;
use lineclear::vocabulary::atom::{limit, mass_u};
use lineclear::vocabulary::light::{Medium, SpectralWidth};
use std::sync::OnceLock;

fn main() {
    divan::main();
}

fn catalogue() -> Catalogue {
    Catalogue::bundled_in_memory(&mut |_, _| {}).expect("a catalogue")
}

/// What is held from 100 nm (second order) to 900 nm.
fn read(catalogue: &Catalogue) -> Vec<Spectrum> {
    let held = catalogue.species().expect("species");
    let stripped =
        |s: &lineclear::vocabulary::atom::Species| s.is_one_electron() && s.atomic_number > 2;
    held.into_iter()
        .filter(|s| !stripped(s))
        .map(|species| {
            let levels = catalogue.levels(species).expect("levels");
            Spectrum {
                lines: catalogue
                    .lines(species, &levels, 1e7 / 900.0, 1e7 / 100.0)
                    .expect("lines"),
                strengths: catalogue.strengths(species).expect("strengths"),
                scopes: catalogue.scopes(species).expect("scopes"),
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

fn spectra() -> &'static [Spectrum] {
    static HELD: OnceLock<Vec<Spectrum>> = OnceLock::new();
    HELD.get_or_init(|| read(&catalogue()))
}

/// As the command asks it.
fn question() -> Question {
    let conditions = |ev: f64| Conditions {
        model: EmissionModel::Visible,
        kt_per_cm: 8065.5 * ev,
        electron_density_per_m3: None,
        gas_temperature_k: 1000.0,
        details: Details::default(),
    };
    Question {
        medium: Medium::Auto,
        width: SpectralWidth::from_nm(0.1),
        grid: [0.3, 0.6, 1.0, 2.0, 4.0, 8.0].map(conditions).to_vec(),
        shift_bound_nm: 0.05,
        species_expected: 8.0,
    }
}

fn list(count: usize) -> Vec<Peak> {
    let lines: Vec<f64> = spectra()
        .iter()
        .flat_map(|s| &s.lines)
        .map(|l| 1e7 / l.wavenumber_per_cm)
        .filter(|nm| (200.0..900.0).contains(nm))
        .collect();
    // The generator of Knuth, TAOCP 2, 3.3.4; a sum of twelve parts has σ 1.
    let mut state = 1_u64;
    let mut part = || {
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 11) as f64 / (1_u64 << 53) as f64
    };
    (0..count)
        .map(|k| {
            let place = part();
            let error = (0..12).map(|_| part()).sum::<f64>() - 6.0;
            let nm = if k % 10 == 0 {
                200.0 + 700.0 * place
            } else {
                lines[(place * lines.len() as f64) as usize] + 0.02 * error
            };
            Peak {
                vacuum_nm: nm,
                second_order_vacuum_nm: Some(nm / 2.0),
                sigma_nm: 0.02,
                intensity: Some(1.0 + 100.0 * part()),
            }
        })
        .collect()
}

#[divan::bench(args = [100, 1_000, 10_000], sample_count = 10, sample_size = 1)]
fn peaks_against_all_species(bencher: Bencher<'_, '_>, count: usize) {
    let (question, peaks) = (question(), list(count));
    bencher.bench_local(|| black_box(answer(&question, &peaks, spectra()).expect("an answer")));
}

#[divan::bench(sample_count = 10, sample_size = 1)]
fn read_all_species(bencher: Bencher<'_, '_>) {
    let catalogue = catalogue();
    bencher.bench_local(|| black_box(read(&catalogue)));
}
