//! `window` over the bundled catalogue: reading what is held, and the answer itself.
//!
//! Records are kept beside this file; compare ratios inside one run, machines are noisy.

use divan::{Bencher, black_box};
use lineclear::advise::window::{Question, answer};
use lineclear::advise::{Conditions, Details, EmissionModel, Spectrum};
use lineclear::catalogue::Catalogue;
use lineclear::vocabulary::atom::{SpeciesRequest, limit, mass_u};
use lineclear::vocabulary::light::{Air, Medium, SpectralWidth, TypedRange};

fn main() {
    divan::main();
}

fn spectra(catalogue: &Catalogue, range: (f64, f64)) -> Vec<Spectrum> {
    let requests = SpeciesRequest::parse_list("He,C,O,Fe,Cu").expect("a list");
    let held = catalogue.species().expect("species");
    held.into_iter()
        .filter(|s| requests.iter().any(|r| r.matches(*s)))
        .map(|species| {
            let levels = catalogue.levels(species).expect("levels");
            Spectrum {
                lines: catalogue
                    .lines(species, &levels, 1e7 / range.1, 1e7 / range.0)
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

fn question(range: &str) -> Question {
    let typed: TypedRange = range.parse().expect("a range");
    Question {
        range: typed
            .resolve(Medium::Auto, Air::standard())
            .expect("a range"),
        medium: Medium::Auto,
        width: SpectralWidth::from_nm(0.1),
        conditions: Conditions {
            model: EmissionModel::Visible,
            kt_per_cm: 8065.5,
            electron_density_per_m3: None,
            gas_temperature_k: 1000.0,
            details: Details::default(),
        },
        not_held: Vec::new(),
    }
}

#[divan::bench]
fn read_five_elements(bencher: Bencher) {
    let catalogue = Catalogue::bundled_in_memory(&mut |_, _| {}).expect("a catalogue");
    bencher.bench_local(|| spectra(black_box(&catalogue), (665.0, 671.0)));
}

#[divan::bench(args = ["667..669nm", "400..700nm"])]
fn answer_five_elements(bencher: Bencher, range: &str) {
    let catalogue = Catalogue::bundled_in_memory(&mut |_, _| {}).expect("a catalogue");
    let held = spectra(&catalogue, (390.0, 710.0));
    let question = question(range);
    bencher.bench_local(|| answer(black_box(&question), &held));
}
