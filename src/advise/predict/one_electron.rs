//! Series of one electron and a nucleus.

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::constants::RYDBERG_PER_CM;

use super::{
    Answer, LevelLifetime, LowerName, PredictError, PredictedLevel, PredictedLine, Question,
    SeriesName, shown,
};
use crate::calc::coulomb::{Transition, black_body_lifetime, polarisability_scale_a0_3};
use crate::calc::one_electron::{
    HIGHEST_FINE_N, Nucleus, OneElectronError, OneElectronLevel, component_rate, gross_energy,
    level_index, levels, lifetime_s, orbital_rate, rate_relative_uncertainty, series_name,
    shell_rate,
};
use crate::calc::series::orbital_letter;

const METHOD: &str = "one electron: Dirac energy with recoil, radiative and nuclear terms";
const RATE_METHOD: &str = "one electron: exact dipole integral";
/// Shells above the last one asked for that black-body radiation lifts to.
const SHELLS_ABOVE: u32 = 10;

/// Answers for a one-electron species.
///
/// # Errors
/// n outside the model, l ≥ n, j that does not belong to l, a shell series that begins too low.
pub fn one_electron(question: &Question) -> Result<Answer, PredictError> {
    let nucleus = Nucleus::of(question.species).map_err(wrong(question))?;
    let system = System::new(question, nucleus).map_err(wrong(question))?;
    match question.series {
        SeriesName::Shell { lower_n } => system.shell_series(lower_n),
        SeriesName::Orbital { l, j, .. } => system.orbital_series(l, j),
    }
}

fn wrong(question: &Question) -> impl Fn(OneElectronError) -> PredictError + use<> {
    let species: Species = question.species;
    move |cause| PredictError::OneElectron { species, cause }
}

struct System<'q> {
    question: &'q Question,
    nucleus: Nucleus,
    /// Fine-structure levels up to the last n asked for, or the highest there are.
    levels: Vec<OneElectronLevel>,
    highest: u32,
}

impl<'q> System<'q> {
    fn new(question: &'q Question, nucleus: Nucleus) -> Result<Self, OneElectronError> {
        // Checks the range of n, fine structure or not.
        gross_energy(&nucleus, question.from_n)?;
        gross_energy(&nucleus, question.to_n)?;
        let wanted = question.to.map_or(1, |to| to.n).max(question.to_n);
        let highest = wanted.min(HIGHEST_FINE_N);
        let levels = levels(&nucleus, highest)?;
        Ok(Self {
            question,
            nucleus,
            levels,
            highest,
        })
    }

    fn level(&self, n: u32, l: u32, j: HalfInteger) -> Option<&OneElectronLevel> {
        let stretched = u32::from(j.twice()) == 2 * l + 1;
        (n <= self.highest && l < n).then(|| &self.levels[level_index(n, l, stretched)])
    }

    fn answer(&self, series: String) -> Answer {
        let ground = &self.levels[0];
        Answer {
            series,
            limit_per_cm: ground.binding_per_cm,
            limit_uncertainty_per_cm: ground.binding_uncertainty_per_cm,
            limit_line: None,
            basis: vec![
                "Energies: the Dirac energy with recoil, radiative and nuclear-size terms, constants of \
                 CODATA 2022; no level was fitted."
                    .into(),
                "Rates: nonrelativistic dipole integrals in closed form; 1 σ is 1.5 (Zα)² of the rate.".into(),
            ],
            levels: Vec::new(),
            lines: Vec::new(),
            sources: Vec::new(),
        }
    }

    /// Whole shells: the mean line of each n to the lower shell.
    fn shell_series(&self, lower_n: u32) -> Result<Answer, PredictError> {
        let question = self.question;
        if question.from_n <= lower_n {
            return Err(PredictError::BelowShell {
                typed: question.typed.clone(),
                lower_n,
            });
        }
        let name = series_name(lower_n).unwrap_or("series");
        let mut answer = self.answer(format!("{name} series, n → {lower_n}"));
        let lower = gross_energy(&self.nucleus, lower_n).map_err(wrong(question))?;
        answer.limit_line = shown(
            lower.binding_per_cm,
            lower.uncertainty_per_cm,
            question.medium,
        );
        for n in question.from_n..=question.to_n {
            let line = self.shell_line(n, lower_n).map_err(wrong(question))?;
            answer.lines.push(line);
            for l in 0..=lower_n.min(n - 1) {
                for j in momenta(l) {
                    answer.levels.extend(self.predicted(n, l, j)?);
                }
            }
        }
        if question.to_n > HIGHEST_FINE_N {
            answer.basis.push(format!(
                "Above n = {HIGHEST_FINE_N} the mean energy of a shell, 1 σ half its fine structure."
            ));
        }
        Ok(answer)
    }

    fn shell_line(&self, n: u32, lower_n: u32) -> Result<PredictedLine, OneElectronError> {
        let (wavenumber_per_cm, uncertainty_per_cm) = match self.mean(n, lower_n)? {
            Some(mean) => mean,
            None => {
                let upper = gross_energy(&self.nucleus, n)?;
                let lower = gross_energy(&self.nucleus, lower_n)?;
                let sigma = upper.uncertainty_per_cm.hypot(lower.uncertainty_per_cm);
                (lower.binding_per_cm - upper.binding_per_cm, sigma)
            }
        };
        Ok(PredictedLine {
            n,
            upper: format!("n = {n}"),
            lower: format!("n = {lower_n}"),
            wavenumber_per_cm,
            uncertainty_per_cm,
            rate_per_s: shell_rate(&self.nucleus, n, lower_n)?,
            rate_relative_uncertainty: rate_relative_uncertainty(&self.nucleus),
            method: RATE_METHOD,
            placed: shown(wavenumber_per_cm, uncertainty_per_cm, self.question.medium),
        })
    }

    /// Mean over the components, weighted with g A, and the largest of their σ; `None` where there is no
    /// fine structure.
    fn mean(&self, n: u32, lower_n: u32) -> Result<Option<(f64, f64)>, OneElectronError> {
        if n > self.highest {
            return Ok(None);
        }
        let (mut total, mut sum, mut sigma) = (0.0, 0.0, 0.0_f64);
        for l in 0..lower_n {
            let above = [l.checked_sub(1), Some(l + 1)].into_iter().flatten();
            for (upper_l, to) in above.flat_map(|u| momenta(l).map(move |to| (u, to))) {
                for from in momenta(upper_l) {
                    let rate = component_rate(&self.nucleus, (n, upper_l, from), (lower_n, l, to))?;
                    let ends = self.level(n, upper_l, from).zip(self.level(lower_n, l, to));
                    let Some((upper, lower)) = ends.filter(|_| rate > 0.0) else {
                        continue;
                    };
                    let (wavenumber, uncertainty) = upper.above(lower);
                    let weight = rate * from.weight();
                    total += weight;
                    sum += weight * wavenumber;
                    sigma = sigma.max(uncertainty);
                }
            }
        }
        Ok((total > 0.0).then_some((sum / total, sigma)))
    }

    /// Levels of one l, for one j or both.
    fn orbital_series(&self, l: u32, j: Option<HalfInteger>) -> Result<Answer, PredictError> {
        let question = self.question;
        for (n, momentum) in [(question.from_n, j), (question.to_n, j)] {
            check(n, l, momentum).map_err(wrong(question))?;
        }
        let letter = orbital_letter(l).unwrap_or('?');
        let of_j = j.map_or(String::new(), |j| format!(" {j}"));
        let mut answer = self.answer(format!("n{letter}{of_j}"));
        for n in question.from_n..=question.to_n {
            for momentum in momenta(l).filter(|m| j.is_none_or(|j| j == *m)) {
                answer.levels.extend(self.predicted(n, l, momentum)?);
                if let Some(to) = question.to {
                    let found = self.lines_to(n, l, momentum, to).map_err(wrong(question))?;
                    answer.lines.extend(found);
                }
            }
        }
        if question.to.is_some() && answer.lines.is_empty() {
            let to = question.to.map(LowerName::words).unwrap_or_default();
            return Err(PredictError::NoLowerLevel {
                species: question.species,
                wanted: to,
            });
        }
        Ok(answer)
    }

    fn predicted(
        &self,
        n: u32,
        l: u32,
        j: HalfInteger,
    ) -> Result<Option<PredictedLevel>, PredictError> {
        let letter = orbital_letter(l).unwrap_or('?');
        let (binding_per_cm, uncertainty_per_cm, method) = match self.level(n, l, j) {
            Some(level) => (level.binding_per_cm, level.uncertainty_per_cm, METHOD),
            None => {
                let shell = gross_energy(&self.nucleus, n).map_err(wrong(self.question))?;
                let method = "one electron: mean energy of the shell";
                (shell.binding_per_cm, shell.uncertainty_per_cm, method)
            }
        };
        let charge = self.nucleus.charge();
        let rydberg = RYDBERG_PER_CM * self.nucleus.reduced_mass() * charge * charge;
        let effective = (rydberg / binding_per_cm).sqrt();
        let relative_uncertainty = rate_relative_uncertainty(&self.nucleus);
        let seconds = lifetime_s(&self.nucleus, n, l).map_err(wrong(self.question))?;
        Ok(Some(PredictedLevel {
            n,
            l,
            j: Some(j),
            label: format!("{n}{letter} {j}"),
            energy_per_cm: self.levels[0].binding_per_cm - binding_per_cm,
            uncertainty_per_cm,
            binding_per_cm,
            quantum_defect: f64::from(n) - effective,
            method: method.to_owned(),
            lifetime: seconds.map(|seconds| LevelLifetime {
                seconds,
                relative_uncertainty,
            }),
            black_body_lifetime: self.black_body(n, l)?,
            polarisability_scale_a0_3: polarisability_scale_a0_3(
                effective,
                u32::from(self.nucleus.atomic_number()),
            ),
        }))
    }

    /// Lifetime in black-body radiation; `None` where none is asked for or nothing leads away.
    fn black_body(&self, n: u32, l: u32) -> Result<Option<LevelLifetime>, PredictError> {
        // 2s decays by two photons, which black-body radiation hardly stimulates; it is left out.
        let Some(kelvin) = self.question.kelvin.filter(|_| (n, l) != (2, 0)) else {
            return Ok(None);
        };
        let (decays, lifts) = self.transitions(n, l).map_err(wrong(self.question))?;
        let lifetime = black_body_lifetime(&decays, &lifts, kelvin)?;
        // The ground level in warm radiation lives longer than is worth a number.
        Ok((lifetime.seconds < 1e6).then_some(LevelLifetime {
            seconds: lifetime.seconds,
            relative_uncertainty: rate_relative_uncertainty(&self.nucleus),
        }))
    }

    /// Decays of n l, and the lines that lift it.
    fn transitions(
        &self,
        n: u32,
        l: u32,
    ) -> Result<(Vec<Transition>, Vec<Transition>), OneElectronError> {
        let (mut decays, mut lifts) = (Vec::new(), Vec::new());
        let here = gross_energy(&self.nucleus, n)?.binding_per_cm;
        for other_n in (1..=n + SHELLS_ABOVE).filter(|m| *m != n) {
            for other_l in [l.checked_sub(1), Some(l + 1)].into_iter().flatten() {
                if other_l >= other_n {
                    continue;
                }
                let (upper, lower) = if other_n < n {
                    ((n, l), (other_n, other_l))
                } else {
                    ((other_n, other_l), (n, l))
                };
                let there = gross_energy(&self.nucleus, other_n)?.binding_per_cm;
                let weight = |l: u32| f64::from(2 * l + 1);
                let transition = Transition {
                    wavenumber_per_cm: (here - there).abs(),
                    rate_per_s: orbital_rate(&self.nucleus, upper, lower)?,
                    relative_uncertainty: rate_relative_uncertainty(&self.nucleus),
                    weight_ratio: weight(other_l) / weight(l),
                };
                if other_n < n {
                    decays.push(transition);
                } else {
                    lifts.push(transition);
                }
            }
        }
        Ok((decays, lifts))
    }

    fn lines_to(
        &self,
        n: u32,
        l: u32,
        j: HalfInteger,
        to: LowerName,
    ) -> Result<Vec<PredictedLine>, OneElectronError> {
        check(to.n, to.l, to.j)?;
        let mut lines = Vec::new();
        if to.n >= n || l.abs_diff(to.l) != 1 {
            return Ok(lines);
        }
        let letter = |l: u32| orbital_letter(l).unwrap_or('?');
        for momentum in momenta(to.l).filter(|m| to.j.is_none_or(|j| j == *m)) {
            let rate = component_rate(&self.nucleus, (n, l, j), (to.n, to.l, momentum))?;
            let ends = self.level(n, l, j).zip(self.level(to.n, to.l, momentum));
            let Some((upper, lower)) = ends.filter(|_| rate > 0.0) else {
                continue;
            };
            let (wavenumber_per_cm, uncertainty_per_cm) = upper.above(lower);
            lines.push(PredictedLine {
                n,
                upper: format!("{n}{} {j}", letter(l)),
                lower: format!("{}{} {momentum}", to.n, letter(to.l)),
                wavenumber_per_cm,
                uncertainty_per_cm,
                rate_per_s: rate,
                rate_relative_uncertainty: rate_relative_uncertainty(&self.nucleus),
                method: RATE_METHOD,
                placed: shown(wavenumber_per_cm, uncertainty_per_cm, self.question.medium),
            });
        }
        Ok(lines)
    }
}

/// j of a given l.
fn momenta(l: u32) -> impl Iterator<Item = HalfInteger> + Clone {
    let twice = |t: u32| HalfInteger::from_twice(u16::try_from(t).unwrap_or(u16::MAX));
    (2 * l)
        .checked_sub(1)
        .into_iter()
        .chain([2 * l + 1])
        .map(twice)
}

fn check(n: u32, l: u32, j: Option<HalfInteger>) -> Result<(), OneElectronError> {
    if l >= n {
        return Err(OneElectronError::OrbitalNumber { n, l });
    }
    match j {
        Some(j) if !momenta(l).any(|m| m == j) => Err(OneElectronError::TotalNumber { l, j }),
        _ => Ok(()),
    }
}
