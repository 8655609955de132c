//! How long `tune` over all species and `climb` over three ranges take on an open catalogue, reading
//! included: the targets are 150 ms and 500 ms of processor time for the whole command.

use lineclear::advise::Spectrum;
use lineclear::advise::climb::{self, Target};
use lineclear::advise::tune::{self, Atom, Laser, Question};
use lineclear::catalogue::Catalogue;
use lineclear::vocabulary::atom::Species;
use lineclear::vocabulary::light::{Medium, SpectralRange};

fn main() {
    divan::main();
}

fn laser(from_nm: f64, to_nm: f64) -> Laser {
    Laser {
        name: String::new(),
        range: SpectralRange::from_wavenumbers_per_cm(1e7 / from_nm, 1e7 / to_nm)
            .expect("two different wavelengths"),
        power_mw: None,
        linewidth_mhz: None,
    }
}

fn spectrum(catalogue: &Catalogue, species: Species, from: f64, to: f64) -> Spectrum {
    let levels = catalogue.levels(species).expect("levels");
    Spectrum {
        lines: catalogue.lines(species, &levels, from, to).expect("lines"),
        strengths: catalogue.strengths(species).expect("strengths"),
        scopes: Vec::new(),
        limit_per_cm: lineclear::vocabulary::atom::limit(species).map(|l| l.energy_per_cm),
        mass_u: lineclear::vocabulary::atom::mass_u(species).unwrap_or(1.0),
        species,
        amount: 1.0,
        named: true,
        levels,
    }
}

#[divan::bench(sample_count = 20)]
fn tune_300_to_1100_nm_all_species(bencher: divan::Bencher) {
    let catalogue = Catalogue::bundled_in_memory(&mut |_, _| {}).expect("bundled tables");
    let question = Question {
        lasers: vec![laser(300.0, 1100.0)],
        medium: Medium::Auto,
        temperature_k: 300.0,
        density_per_cm3: None,
        cell_cm: 1.0,
        metastable: false,
        hyperfine: false,
        two_photons: false,
    };
    let (from, to) = (1e7 / 1100.0, 1e7 / 300.0);
    bencher.bench_local(|| {
        let atoms: Vec<Atom> = catalogue
            .species()
            .expect("species")
            .into_iter()
            .filter(|s| catalogue.count_lines(*s, from, to).expect("count") > 0)
            .map(|s| Atom::new(spectrum(&catalogue, s, from, to)))
            .collect();
        tune::answer(&question, &atoms)
            .expect("an answer")
            .transitions
            .len()
    });
}

#[divan::bench(sample_count = 20)]
fn climb_calcium_over_three_ranges(bencher: divan::Bencher) {
    let catalogue = Catalogue::bundled_in_memory(&mut |_, _| {}).expect("bundled tables");
    bencher.bench_local(|| {
        let spectrum = spectrum(&catalogue, Species::new(20, 1), 0.0, f64::INFINITY);
        let question = climb::Question {
            lasers: vec![
                laser(400.0, 450.0),
                laser(300.0, 600.0),
                laser(600.0, 1100.0),
            ],
            target: Target::Limit(spectrum.limit_per_cm.expect("a limit")),
            typed_target: "limit".to_owned(),
            temperature_k: 300.0,
            metastable: false,
        };
        climb::answer(&question, &spectrum, &[])
            .expect("an answer")
            .routes
            .len()
    });
}
