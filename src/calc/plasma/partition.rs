//! Partition functions that do not diverge, and the populations that go with them.

use super::error::{PlasmaError, positive};
use super::lowering::lowering_per_cm;

/// The conditions that decide how levels are populated.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Plasma {
    /// k T, cm⁻¹.
    pub kt_per_cm: f64,
    /// Electron density, m⁻³; `None` leaves the series limits where they are.
    pub electron_density_per_m3: Option<f64>,
}

/// The partition function of one species and what it rests on.
///
/// Each held level counts g e^(−E/kT) w(B/kT), B being its distance to the (lowered) series limit
/// and w the Planck–Larkin factor ([`planck_larkin`]); without a limit w = 1.
///
/// `value` is a lower bound: levels that are not held would add to it. `missing_fraction` says by
/// how much, if above the highest held level the shells of a hydrogen-like series with 2 n² states
/// each are missing (`None` where no limit is known); nothing can say how many are missing
/// *between* the held ones, so an ion of which few levels are held is called a lower bound as soon
/// as they count.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Partition {
    /// U, dimensionless.
    pub value: f64,
    /// The series limit after lowering, cm⁻¹ above the ground level.
    pub limit_per_cm: Option<f64>,
    /// By how much the limit was lowered, cm⁻¹.
    pub lowering_per_cm: f64,
    /// Levels that were counted.
    pub levels_used: usize,
    /// Levels at or above the limit, which were not.
    pub levels_beyond: usize,
    /// What levels above the highest held one may add, over `value`.
    pub missing_fraction: Option<f64>,
    /// The part of `value` from levels above a tenth of the series limit (`None` without one).
    pub excited_fraction: Option<f64>,
    kt_per_cm: f64,
}

/// A part of U from which it is worth saying something.
const WORTH_SAYING: f64 = 0.01;
/// Fewer levels than this are few: even one-electron ions have 30 up to n = 5.
const FEW_LEVELS: usize = 30;

impl Partition {
    /// Fraction of the species' atoms in a level of this energy (cm⁻¹) and weight.
    pub fn fraction(&self, energy_per_cm: f64, weight: f64) -> f64 {
        term(energy_per_cm, weight, self.limit_per_cm, self.kt_per_cm) / self.value
    }

    /// Whether levels that are not held may raise U by more than 1 %, or nobody can tell: then an
    /// answer says that U is a lower bound, and that populations are upper bounds. True when shells
    /// above the held levels may add 1 %, when fewer than 30 levels are held and the excited ones
    /// make up 1 % of U, and when no series limit is known.
    pub fn is_lower_bound(&self) -> bool {
        let counts = |part: Option<f64>| part.is_none_or(|f| f > WORTH_SAYING);
        counts(self.missing_fraction)
            || (self.levels_used < FEW_LEVELS && counts(self.excited_fraction))
    }
}

/// The Planck–Larkin factor 1 − e^(−b)(1 + b), b = B/kT ≥ 0: how much of a level of binding energy
/// B still counts as bound (M. Planck 1924, Ann. Phys. 380, 673; A. I. Larkin 1960, Sov. Phys. JETP
/// 11, 1363; F. J. Rogers 1986, Astrophys. J. 310, 723). 0 at the limit and above, 1 when tightly
/// bound.
pub fn planck_larkin(binding_over_kt: f64) -> f64 {
    let b = binding_over_kt;
    if b.is_nan() {
        return f64::NAN;
    }
    if b <= 0.0 {
        return 0.0;
    }
    if b < 0.03 {
        // Series, free of cancellation: Σ (−1)^k (k − 1) b^k/k!.
        return b
            * b
            * (0.5
                - b * (1.0 / 3.0
                    - b * (0.125 - b * (1.0 / 30.0 - b * (1.0 / 144.0 - b / 840.0)))));
    }
    -(-b).exp_m1() - b * (-b).exp()
}

fn term(energy_per_cm: f64, weight: f64, limit_per_cm: Option<f64>, kt_per_cm: f64) -> f64 {
    let bound = limit_per_cm.map_or(1.0, |limit| {
        planck_larkin((limit - energy_per_cm) / kt_per_cm)
    });
    weight * (-energy_per_cm / kt_per_cm).exp() * bound
}

/// The partition function of a species of net charge `charge` from its levels
/// (energy in cm⁻¹ above the ground level, statistical weight) and its series limit (cm⁻¹).
///
/// # Errors
/// k T or density not positive; a level with a negative energy, no weight or NaN; no bound level.
pub fn partition_function(
    levels: impl IntoIterator<Item = (f64, f64)>,
    limit_per_cm: Option<f64>,
    charge: u8,
    plasma: Plasma,
) -> Result<Partition, PlasmaError> {
    let kt_per_cm = positive("k T in per cm", plasma.kt_per_cm)?;
    let density = plasma
        .electron_density_per_m3
        .map(|n| positive("the electron density per m³", n))
        .transpose()?;
    let limit = limit_per_cm
        .map(|l| positive("the ionisation energy in per cm", l))
        .transpose()?;
    let lowering = match (density, limit) {
        (Some(density), Some(_)) => lowering_per_cm(kt_per_cm, density, charge),
        _ => 0.0,
    };
    let limit = limit.map(|l| l - lowering);
    let mut sum = Sum::default();
    for (energy_per_cm, weight) in levels {
        check(energy_per_cm, weight)?;
        sum.add(energy_per_cm, weight, limit, kt_per_cm);
    }
    if sum.used == 0 {
        return Err(PlasmaError::NoLevels {
            limit_per_cm: limit,
        });
    }
    let missing = limit.map(|l| missing_states(l, sum.highest_per_cm, charge, kt_per_cm));
    Ok(Partition {
        value: sum.value,
        limit_per_cm: limit,
        lowering_per_cm: lowering,
        levels_used: sum.used,
        levels_beyond: sum.beyond,
        missing_fraction: missing.map(|m| m / sum.value),
        excited_fraction: limit.map(|_| sum.excited / sum.value),
        kt_per_cm,
    })
}

#[derive(Default)]
struct Sum {
    value: f64,
    excited: f64,
    used: usize,
    beyond: usize,
    highest_per_cm: f64,
}

impl Sum {
    fn add(&mut self, energy_per_cm: f64, weight: f64, limit: Option<f64>, kt_per_cm: f64) {
        if limit.is_some_and(|l| energy_per_cm >= l) {
            self.beyond += 1;
            return;
        }
        self.used += 1;
        let term = term(energy_per_cm, weight, limit, kt_per_cm);
        self.value += term;
        if limit.is_some_and(|l| energy_per_cm > 0.1 * l) {
            self.excited += term;
        }
        self.highest_per_cm = self.highest_per_cm.max(energy_per_cm);
    }
}

fn check(energy_per_cm: f64, weight: f64) -> Result<(), PlasmaError> {
    let sound = energy_per_cm.is_finite() && energy_per_cm >= 0.0;
    if sound && weight.is_finite() && weight > 0.0 {
        Ok(())
    } else {
        Err(PlasmaError::BadLevel {
            energy_per_cm,
            weight,
        })
    }
}

/// What the shells above the highest held level would add, each with 2 n² states at z²R/n² below
/// the limit (a core of weight 1; heavier cores have more).
fn missing_states(limit_per_cm: f64, highest_per_cm: f64, charge: u8, kt_per_cm: f64) -> f64 {
    let core = f64::from(charge) + 1.0;
    let rydberg_per_cm = vocabulary::light::constants::RYDBERG_PER_CM * core * core;
    let binding_per_cm = (limit_per_cm - highest_per_cm).max(rydberg_per_cm * 1e-8);
    let first = (rydberg_per_cm / binding_per_cm).sqrt().round() + 1.0;
    let shell = |n: f64| {
        let binding = rydberg_per_cm / (n * n);
        term(
            limit_per_cm - binding,
            2.0 * n * n,
            Some(limit_per_cm),
            kt_per_cm,
        )
    };
    // Far out a shell adds (z²R/kT)² e^(−limit/kT)/n²: sum some, integrate the rest.
    let last = first + 200.0;
    let counted: f64 = (0..200).map(|k| shell(first + f64::from(k))).sum();
    counted + shell(last) * (last - 0.5)
}
