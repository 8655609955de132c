//! How long the Coulomb approximation takes: an orbital, an integral, and all rates of an ion.

use lineclear::calc::coulomb::{Orbital, Species, predict_lines, predict_series, radial_integral};
use lineclear::calc::series::LabelledLevel;

fn main() {
    divan::main();
}

#[divan::bench(args = [3, 10, 30])]
fn orbital(bencher: divan::Bencher<'_, '_>, n: u32) {
    bencher.bench_local(|| Orbital::new(divan::black_box(f64::from(n) - 0.35), 1));
}

#[divan::bench(args = [3, 10, 30])]
fn integral(bencher: divan::Bencher<'_, '_>, n: u32) {
    let orbitals = [(f64::from(n) - 0.35, 1), (1.63, 0)].map(|(nu, l)| Orbital::new(nu, l));
    if let [Ok(a), Ok(b)] = &orbitals {
        bencher.bench_local(|| radial_integral(1, divan::black_box(a), b, None));
    }
}

/// Sodium from its first members (rounded to 1 cm⁻¹): series to n = 20, then all rates.
#[divan::bench]
fn sodium(bencher: divan::Bencher<'_, '_>) {
    const LEVELS: [(f64, &str, &str, u16); 10] = [
        (0.0, "2p6 3s", "2S", 1),
        (16_956.0, "2p6 3p", "2Po", 1),
        (16_973.0, "2p6 3p", "2Po", 3),
        (25_740.0, "2p6 4s", "2S", 1),
        (29_172.8, "2p6 3d", "2D", 5),
        (29_172.9, "2p6 3d", "2D", 3),
        (30_267.0, "2p6 4p", "2Po", 1),
        (30_272.6, "2p6 4p", "2Po", 3),
        (34_548.7, "2p6 4d", "2D", 5),
        (34_548.8, "2p6 4d", "2D", 3),
    ];
    let species = Species {
        element: "Na",
        core_charge: 1,
        rydberg_per_cm: 109_734.7,
        limit_per_cm: 41_449.5,
        limit_sigma_per_cm: 0.1,
    };
    let held: Vec<LabelledLevel<'_>> = LEVELS
        .iter()
        .map(
            |(energy_per_cm, configuration, term, twice_j)| LabelledLevel {
                energy_per_cm: *energy_per_cm,
                uncertainty_per_cm: 0.5,
                configuration,
                term,
                twice_j: *twice_j,
            },
        )
        .collect();
    bencher.bench_local(|| {
        let series = predict_series(&held, &species, 20);
        let made = series
            .iter()
            .flat_map(|s| &s.levels)
            .map(|level| level.labelled());
        let all: Vec<LabelledLevel<'_>> = held.iter().cloned().chain(made).collect();
        predict_lines(&all, &species).len()
    });
}
