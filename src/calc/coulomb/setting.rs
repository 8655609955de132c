//! From a species to what the series and the Coulomb approximation have to know of it.

use std::sync::Arc;

use vocabulary::atom::{Species, element, limit, mass_u};
use vocabulary::light::constants::{ELECTRON_MASS_U, RYDBERG_PER_CM};

use super::gaps::Species as Outside;
use crate::calc::series::outer_electron;

/// A measured level of one electron outside a core.
#[derive(Clone, Debug, PartialEq)]
pub struct OuterLevel {
    /// Configuration as [`Setting::one_form`] gives it.
    pub configuration: String,
    /// Term.
    pub term: String,
    /// Twice J.
    pub twice_j: u16,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// By how much the scale of its table may be off, 1 σ, cm⁻¹.
    pub scale_per_cm: f64,
    /// Key of its source.
    pub source: Arc<str>,
}

/// What the calculator has to know of a species.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Setting {
    /// Element symbol.
    pub element: &'static str,
    /// Electrons of the core.
    pub core_electrons: u8,
    /// Charge that the outer electron sees.
    pub core_charge: u32,
    /// Rydberg constant of the nucleus, cm⁻¹.
    pub rydberg_per_cm: f64,
    /// Ionisation energy, cm⁻¹.
    pub limit_per_cm: f64,
    /// 1 σ of the ionisation energy, cm⁻¹.
    pub limit_sigma_per_cm: f64,
}

impl Setting {
    /// The setting of a species; `None` where its ionisation energy or mass is not known.
    pub fn of(species: Species) -> Option<Self> {
        let known = limit(species)?;
        let mixture = Species::new(species.atomic_number, 1);
        let atom = Species {
            isotope: species.isotope,
            ..mixture
        };
        let nucleus_u = mass_u(atom)? - f64::from(species.atomic_number) * ELECTRON_MASS_U;
        Some(Self {
            element: element(species.atomic_number)?.symbol,
            core_electrons: species.atomic_number - species.stage,
            core_charge: u32::from(species.core_charge()),
            rydberg_per_cm: RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / nucleus_u),
            limit_per_cm: known.energy_per_cm,
            limit_sigma_per_cm: known.uncertainty_per_cm,
        })
    }

    /// The same in the words of the calculator.
    pub fn calc(&self) -> Outside<'_> {
        Outside {
            element: self.element,
            core_charge: self.core_charge,
            rydberg_per_cm: self.rydberg_per_cm,
            limit_per_cm: self.limit_per_cm,
            limit_sigma_per_cm: self.limit_sigma_per_cm,
        }
    }

    /// A configuration with its core in one form, whatever a table prints of it: inner closed
    /// shells and the term of a closed shell dropped, a bare outer electron given its closed shell.
    pub fn one_form(&self, configuration: &str) -> Option<String> {
        let outer = outer_electron(configuration)?;
        if outer.occupancy > 1 {
            return Some(configuration.trim().to_owned());
        }
        let core = outer.core.strip_suffix(" (1S)").unwrap_or(&outer.core);
        let mut shells: Vec<&str> = core.split_whitespace().collect();
        if shells.is_empty() {
            shells.extend(closed_shell(self.core_electrons));
        }
        while shells.len() > 1 && !shells[1].starts_with('(') && is_full(shells[0]) {
            shells.remove(0);
        }
        let electron = configuration.split_whitespace().last()?;
        shells.push(electron);
        Some(shells.join(" "))
    }
}

/// Last shell of a core of so many electrons, where it is a closed one.
const fn closed_shell(electrons: u8) -> Option<&'static str> {
    match electrons {
        2 => Some("1s2"),
        4 => Some("2s2"),
        10 => Some("2p6"),
        12 => Some("3s2"),
        18 => Some("3p6"),
        36 => Some("4p6"),
        54 => Some("5p6"),
        86 => Some("6p6"),
        _ => None,
    }
}

fn is_full(shell: &str) -> bool {
    ["s2", "p6", "d10"].iter().any(|full| shell.ends_with(full))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cores_take_one_form() {
        let form = |z, stage, text: &str| {
            let setting = Setting::of(Species::new(z, stage)).unwrap();
            setting.one_form(text).unwrap()
        };
        assert_eq!(form(11, 1, "3p"), "2p6 3p");
        assert_eq!(form(37, 1, "4s2 4p6 (1S) 5s"), "4p6 5s");
        assert_eq!(form(29, 1, "3s2 3p6 3d10 (1S) 4s"), "3d10 4s");
        assert_eq!(form(12, 1, "3s 3p"), "3s 3p");
        assert_eq!(form(2, 1, "1s2"), "1s2");
        assert_eq!(form(26, 1, "3d6 (5D) 4s"), "3d6 (5D) 4s");
        assert_eq!(form(13, 1, "3s2 (1S) 3p"), "3s2 3p");
    }
}
