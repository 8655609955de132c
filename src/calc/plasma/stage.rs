//! What one stage of ionisation loses to and gains from the next in a thin plasma.

use vocabulary::atom::Species;
use vocabulary::light::constants::PER_CM_PER_EV;

use super::error::PlasmaError;
use super::ionisation::{
    CoreTransition, DEFAULT_LOTZ, HYDROGEN_LOTZ, Subshell, dielectronic_recombination,
    radiative_recombination,
};

/// The outermost subshell of a ground configuration.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct OuterSubshell {
    /// Principal quantum number.
    pub n: u8,
    /// Orbital angular momentum.
    pub l: u8,
    /// Electrons in it.
    pub electrons: u8,
}

/// Neutral atoms with one (Pd: two) s electrons fewer than the rule says (common practice).
const PROMOTED: [(u8, u8); 10] = [
    (24, 1),
    (29, 1),
    (41, 1),
    (42, 1),
    (44, 1),
    (45, 1),
    (46, 2),
    (47, 1),
    (78, 1),
    (79, 1),
];

/// The outermost subshell of the ground configuration of a species: shells filled in the order of
/// n + l (E. Madelung 1936) with the known exceptions, then emptied from the highest n, in it from
/// the highest l.
///
/// Right for nearly all neutral atoms; a few ions of the iron group (V II, Co II, Ni II) hold their
/// last electron in d where this says s. `None` for a species without electrons.
pub fn outer_subshell(species: Species) -> Option<OuterSubshell> {
    let charge = species.stage.checked_sub(1)?;
    let electrons = species.atomic_number.checked_sub(charge)?;
    let mut shells = neutral_shells(species.atomic_number);
    // Outermost last.
    shells.sort_unstable_by_key(|s| (s.n, s.l));
    let mut to_remove = species.atomic_number - electrons;
    while let Some(last) = shells.last_mut() {
        let removed = to_remove.min(last.electrons);
        last.electrons -= removed;
        to_remove -= removed;
        if last.electrons > 0 {
            return Some(*last);
        }
        shells.pop();
    }
    None
}

fn neutral_shells(atomic_number: u8) -> Vec<OuterSubshell> {
    let mut left = atomic_number;
    let mut shells = Vec::new();
    for sum in 1..=8_u8 {
        // Of equal n + l, lower n (higher l) fills first.
        for l in (0..=(sum - 1) / 2).rev() {
            let electrons = left.min(2 * (2 * l + 1));
            if electrons == 0 {
                return promote(atomic_number, shells);
            }
            left -= electrons;
            shells.push(OuterSubshell {
                n: sum - l,
                l,
                electrons,
            });
        }
    }
    promote(atomic_number, shells)
}

/// Moves electrons of the last s shell to the d shell that fills after it.
fn promote(atomic_number: u8, mut shells: Vec<OuterSubshell>) -> Vec<OuterSubshell> {
    let moved = PROMOTED.iter().find(|p| p.0 == atomic_number).map(|p| p.1);
    if let (Some(moved), [.., s, d]) = (moved, shells.as_mut_slice())
        && s.l == 0
        && d.l == 2
    {
        s.electrons -= moved;
        d.electrons += moved;
    }
    shells.retain(|s| s.electrons > 0);
    shells
}

/// Rate coefficients between a stage and the next.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StageRates {
    /// Ionisation into the next stage, m³/s.
    pub ionisation_m3_per_s: f64,
    /// Recombination from the next stage, radiative and dielectronic, m³/s.
    pub recombination_m3_per_s: f64,
    /// 1 σ of the ratio of the two, as a factor.
    pub ratio_uncertainty_factor: f64,
    /// Whether the next stage keeps electrons but no resonance transition of it was given: then
    /// dielectronic recombination is missing and recombination is a lower bound.
    pub lacks_dielectronic: bool,
}

/// Rates between `species` and its next stage: Lotz's formula for the outermost subshell
/// ([`Subshell`]; inner ones left out, up to a third), Seaton's and Burgess's for recombination
/// ([`radiative_recombination`], [`dielectronic_recombination`] through `core`, the resonance
/// transitions of the next stage).
///
/// # Errors
/// An ionisation energy or k T (cm⁻¹) that is not positive; a core transition without energy.
pub fn stage_rates(
    species: Species,
    limit_per_cm: f64,
    core: &[CoreTransition],
    kt_per_cm: f64,
) -> Result<StageRates, PlasmaError> {
    let is_hydrogen = species.atomic_number == 1;
    let shell = Subshell {
        binding_ev: limit_per_cm / PER_CM_PER_EV,
        electrons: outer_subshell(species).map_or(1, |s| s.electrons),
        lotz: if is_hydrogen {
            HYDROGEN_LOTZ
        } else {
            DEFAULT_LOTZ
        },
    };
    let radiative = radiative_recombination(species.core_charge(), limit_per_cm, kt_per_cm)?;
    let dielectronic = dielectronic_recombination(species.core_charge(), core, kt_per_cm)?;
    let factor = match (is_hydrogen, species.stage) {
        (true, _) => 1.15,
        (false, 1..=3) => 2.5,
        (false, _) => 2.0,
    };
    Ok(StageRates {
        ionisation_m3_per_s: shell.ionisation_rate(kt_per_cm)?,
        recombination_m3_per_s: radiative + dielectronic,
        ratio_uncertainty_factor: factor,
        lacks_dielectronic: core.is_empty() && !species.is_one_electron(),
    })
}
