//! Adding up what disturbs a line, and how well the sum is known.

use super::emission::{Emitter, shared_sigma};
use super::scene::Scene;
use super::verdict::Interference;

/// Interference in the making.
#[derive(Default)]
pub(super) struct Sum {
    /// Fraction of other species.
    pub other: f64,
    variance: f64,
    /// Fraction of other features of the same species.
    pub own: f64,
    /// Fraction of each spectrum.
    by_spectrum: std::collections::BTreeMap<usize, f64>,
}

impl Sum {
    /// Adds a line of a spectrum (an index into the scene's) with the relative 1 σ of its own.
    pub(super) fn add(&mut self, spectrum: usize, part: f64, relative_uncertainty: f64) {
        self.other += part;
        self.variance += (part * relative_uncertainty).powi(2);
        *self.by_spectrum.entry(spectrum).or_default() += part;
    }

    /// The interference over a target of a spectrum whose signal has a relative 1 σ of its own:
    /// lines count as independent, what a whole species shares (amount, ionisation) does not.
    pub(super) fn interference(
        &self,
        scene: &Scene<'_>,
        target: usize,
        target_sigma: f64,
    ) -> Interference {
        if self.other <= 0.0 {
            return Interference::new(0.0, 0.0);
        }
        let parts: Vec<(&Emitter, f64)> = self
            .by_spectrum
            .iter()
            .map(|(&s, part)| (&scene.emitters[s], part / self.other))
            .collect();
        let shared = shared_sigma(&parts, &scene.emitters[target]);
        let own = self.variance.sqrt() / self.other;
        // Variances of logarithms add.
        let all = [own, target_sigma, shared]
            .map(|s| s * s)
            .iter()
            .fold(1.0, |a, v| a * (1.0 + v));
        Interference::new(self.other, (all - 1.0).sqrt())
    }
}
