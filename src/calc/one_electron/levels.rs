//! All levels of a one-electron system, their labels and series.

use vocabulary::atom::{HalfInteger, OneElectronLabel};

use super::dirac::State;
use super::energy::{Budget, Energy, binding, gross};
use super::error::OneElectronError;
use super::nucleus::Nucleus;

/// Highest n with fine structure.
pub const HIGHEST_FINE_N: u32 = 50;
/// Highest n of the gross structure.
pub const HIGHEST_GROSS_N: u32 = 1000;

/// One level n l j.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OneElectronLevel {
    /// Principal quantum number.
    pub n: u32,
    /// Orbital quantum number.
    pub l: u32,
    /// Total angular momentum.
    pub j: HalfInteger,
    /// Energy above 1s1/2, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ of the energy above 1s1/2, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Energy to the series limit, cm⁻¹.
    pub binding_per_cm: f64,
    /// 1 σ of the binding energy, cm⁻¹.
    pub binding_uncertainty_per_cm: f64,
    pub(super) budget: Budget,
}

impl OneElectronLevel {
    /// The label n l j in the words of the catalogue.
    pub fn label(&self) -> Option<OneElectronLabel> {
        let n = u16::try_from(self.n).ok()?;
        OneElectronLabel::new(n, u8::try_from(self.l).ok()?, self.j)
    }

    /// Configuration, `2p`.
    pub fn configuration(&self) -> String {
        self.label()
            .map_or_else(String::new, OneElectronLabel::configuration)
    }

    /// Term, `2Po`.
    pub fn term(&self) -> String {
        self.label()
            .map_or_else(String::new, |label| label.term().to_string())
    }

    /// Statistical weight 2j + 1.
    pub fn weight(&self) -> f64 {
        self.j.weight()
    }

    /// Wavenumber of the light between two levels of one system, cm⁻¹ (positive when `self` is the upper),
    /// and its 1 σ, from which what both levels share has dropped out.
    pub fn above(&self, lower: &Self) -> (f64, f64) {
        (
            lower.binding_per_cm - self.binding_per_cm,
            self.budget.of_difference(&lower.budget),
        )
    }
}

/// Name of the series of hydrogen lines that end on n (Lyman 1 … Humphreys 6).
pub fn series_name(lower_n: u32) -> Option<&'static str> {
    const NAMES: [&str; 6] = [
        "Lyman",
        "Balmer",
        "Paschen",
        "Brackett",
        "Pfund",
        "Humphreys",
    ];
    NAMES.get((lower_n as usize).checked_sub(1)?).copied()
}

/// Energy of one level n l j; 1 ≤ n ≤ 50.
pub fn energy(
    nucleus: &Nucleus,
    n: u32,
    l: u32,
    j: HalfInteger,
) -> Result<Energy, OneElectronError> {
    let (binding_per_cm, budget) = binding(nucleus, checked_state(n, l, j)?);
    Ok(Energy {
        binding_per_cm,
        uncertainty_per_cm: budget.total(),
    })
}

/// Mean binding energy of shell n, 1 ≤ n ≤ 1000, its 1 σ half the width of the fine structure: for n above 50.
pub fn gross_energy(nucleus: &Nucleus, n: u32) -> Result<Energy, OneElectronError> {
    if !(1..=HIGHEST_GROSS_N).contains(&n) {
        return Err(OneElectronError::PrincipalNumber {
            n,
            lowest: 1,
            highest: HIGHEST_GROSS_N,
            model: "the gross structure of a one-electron system",
        });
    }
    Ok(gross(nucleus, n))
}

/// All levels up to n = `n_max` (at most 50), in order of n, l, j.
pub fn levels(nucleus: &Nucleus, n_max: u32) -> Result<Vec<OneElectronLevel>, OneElectronError> {
    check_fine_n(n_max)?;
    let ground = binding(nucleus, State::new(1, 0, true));
    let mut all = Vec::with_capacity((n_max * n_max) as usize);
    for n in 1..=n_max {
        for l in 0..n {
            if l > 0 {
                all.push(level(nucleus, State::new(n, l, false), &ground));
            }
            all.push(level(nucleus, State::new(n, l, true), &ground));
        }
    }
    Ok(all)
}

/// Place of n l j in the list that [`levels`] gives.
pub fn level_index(n: u32, l: u32, stretched: bool) -> usize {
    let shell = (n - 1) * (n - 1);
    let inside = if l == 0 {
        0
    } else {
        2 * l - 1 + u32::from(stretched)
    };
    (shell + inside) as usize
}

fn level(nucleus: &Nucleus, state: State, ground: &(f64, Budget)) -> OneElectronLevel {
    let (binding_per_cm, budget) = binding(nucleus, state);
    OneElectronLevel {
        n: state.n,
        l: state.l,
        j: HalfInteger::from_twice(state.twice_j()),
        energy_per_cm: ground.0 - binding_per_cm,
        uncertainty_per_cm: if state.n == 1 {
            0.0
        } else {
            budget.of_difference(&ground.1)
        },
        binding_per_cm,
        binding_uncertainty_per_cm: budget.total(),
        budget,
    }
}

pub(super) fn check_fine_n(n: u32) -> Result<(), OneElectronError> {
    if (1..=HIGHEST_FINE_N).contains(&n) {
        return Ok(());
    }
    Err(OneElectronError::PrincipalNumber {
        n,
        lowest: 1,
        highest: HIGHEST_FINE_N,
        model: "the fine structure of a one-electron system",
    })
}

/// The state n l j, or why there is none.
pub(super) fn checked_state(n: u32, l: u32, j: HalfInteger) -> Result<State, OneElectronError> {
    check_fine_n(n)?;
    if l >= n {
        return Err(OneElectronError::OrbitalNumber { n, l });
    }
    let stretched = u32::from(j.twice()) == 2 * l + 1;
    if !stretched && (l == 0 || u32::from(j.twice()) != 2 * l - 1) {
        return Err(OneElectronError::TotalNumber { l, j });
    }
    Ok(State::new(n, l, stretched))
}
