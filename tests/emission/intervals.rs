//! The interval of an interference fraction, against Monte Carlo with a fixed seed.

use lineclear::advise::{EmissionModel, Entry};

use super::invented::{conditions, one_line, spectrum, vet};

/// Numbers of a normal distribution, from a fixed seed.
struct Normal(u64);

impl Normal {
    fn uniform(&mut self) -> f64 {
        // Knuth's MMIX generator (The Art of Computer Programming, vol. 2, 3.3.4); upper 53 bits.
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        ((self.0 >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }

    fn next(&mut self) -> f64 {
        let (a, b) = (self.uniform(), self.uniform());
        (-2.0 * a.ln()).sqrt() * (2.0 * std::f64::consts::PI * b).cos()
    }

    /// A log-normal factor of median 1 and this relative 1 σ.
    fn factor(&mut self, relative: f64) -> f64 {
        (relative.powi(2).ln_1p().sqrt() * self.next()).exp()
    }
}

fn entry(species: &str, value: f64, relative_sigma: f64) -> Entry {
    Entry {
        request: species.parse().unwrap(),
        value,
        relative_sigma,
    }
}

/// Low and high end over the central value.
fn interval(target_sigma: f64, other_sigma: f64) -> (f64, f64) {
    let mut conditions = conditions(EmissionModel::Visible, 8000.0);
    conditions.details.amounts = vec![
        entry("Sc", 1.0, target_sigma),
        entry("Ti", 1.0, other_sigma),
    ];
    let spectra = [
        one_line(21, 500.0, 1e7),
        one_line(22, 500.06, 1e7),
        one_line(23, 499.95, 1e7),
    ];
    let answer = vet(&spectra, "Sc I", 500.0, 0.1, conditions);
    let i = answer.interference.unwrap();
    (i.low / i.fraction, i.high / i.fraction)
}

#[test]
fn the_interval_is_that_of_monte_carlo() {
    // Rates known to 10 % each, amounts of target and of one interferer as stated; the parts of the
    // two interferers at 0.06 and 0.05 nm of a Gaussian of 0.1 nm: e^(−4 ln 2 d²/w²).
    let parts = [0.06_f64, 0.05].map(|d| (-4.0 * 2_f64.ln() * (d / 0.1).powi(2)).exp());
    for (target_sigma, other_sigma) in [(0.0, 0.0), (0.3, 0.0), (0.0, 0.5), (0.2, 0.4)] {
        let mut random = Normal(20_010_501);
        let mut draws: Vec<f64> = (0..40_000)
            .map(|_| {
                let target = random.factor(0.1) * random.factor(target_sigma);
                let titanium = parts[0] * random.factor(0.1) * random.factor(other_sigma);
                let vanadium = parts[1] * random.factor(0.1);
                (titanium + vanadium) / target / (parts[0] + parts[1])
            })
            .collect();
        draws.sort_by(f64::total_cmp);
        // 68 %: 15.9 % below, 15.9 % above.
        let at = |part: f64| draws[(part * draws.len() as f64) as usize];
        let spread = (at(0.841_3) / at(0.158_7)).ln() / 2.0;
        let (low, high) = interval(target_sigma, other_sigma);
        let got = (high / low).ln() / 2.0;
        // Moments against quantiles of a sum of log-normals, and 40,000 draws: 3 %.
        assert!(
            (got / spread - 1.0).abs() < 0.03,
            "{target_sigma} {other_sigma}: {got} {spread}"
        );
    }
}

#[test]
fn what_target_and_interferer_share_cancels() {
    // The amount of one element, for two of its stages.
    let ion = spectrum(
        lineclear::vocabulary::atom::Species::new(21, 2),
        &[(0.0, 1.0, "4s2", "1S"), (1e7 / 500.05, 3.0, "4s 4p", "1Po")],
        &[(0, 1, Some(1e7))],
    );
    let spectra = [one_line(21, 500.0, 1e7), ion];
    let high = |sigma: f64| {
        let mut conditions = conditions(EmissionModel::Visible, 8000.0);
        conditions.details.amounts = vec![entry("Sc", 1.0, sigma)];
        let i = vet(&spectra, "Sc I", 500.0, 0.1, conditions)
            .interference
            .unwrap();
        i.high / i.fraction
    };
    // Rounding only.
    assert!((high(0.0) - high(0.8)).abs() < 1e-12);
}
