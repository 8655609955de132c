//! What the calculator claims to cover of a one-electron species.
//!
//! Every line up to the highest n is held. Those that are missing come from higher n and lie, for each shell m that
//! they end on, between the limit of the series and its line from the highest n. Where they are too weak to
//! count, below 5e-4 of the strongest line of that part of the spectrum in an arc of 1 eV, the claim is
//! `computed`. Elsewhere (the crowded ends of the Balmer series of H, D and T, and the like) it is `strong` over
//! the series.

use vocabulary::atom::Species;
use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::spectrum::Completeness;

use super::one_electron::highest_n;
use crate::calc::one_electron::{Nucleus, OneElectronError, gross_energy, shell_rate};

/// Where the claim begins, as a fraction of the wavelength of the Lyman limit: no bound electron
/// has a shorter line.
const SHORTEST: f64 = 1e-3;
/// Room left around an edge for fine structure, as a fraction of the wavelength.
const MARGIN: f64 = 3e-4;
/// Light of a missing line, as a part of the strongest line of its part of the spectrum, below which it does
/// not count.
const NEGLIGIBLE: f64 = 5e-4;
/// Temperature of an arc, as energy, cm⁻¹: 1 eV.
const ARC_PER_CM: f64 = PER_CM_PER_EV;
/// Ends of the parts of the spectrum that are judged apart, nm: ultraviolet, the range of spectrometers, infrared.
const PARTS_NM: [f64; 3] = [200.0, 1000.0, f64::INFINITY];

/// A claim for one band, vacuum nm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Claim {
    pub from_nm: f64,
    pub to_nm: f64,
    pub completeness: Completeness,
}

/// The claims for a species; none where it is not filled.
pub(super) fn claims(species: Species) -> Vec<Claim> {
    highest_n(species)
        .and_then(|highest| Shells::new(species, highest).ok())
        .and_then(|shells| shells.claims().ok())
        .unwrap_or_default()
}

/// The mean lines between whole shells.
struct Shells {
    nucleus: Nucleus,
    highest: u32,
    /// Binding energies of n = 1, 2, … up to one above the highest n, cm⁻¹.
    binding_per_cm: Vec<f64>,
}

impl Shells {
    fn new(species: Species, highest: u32) -> Result<Self, OneElectronError> {
        let nucleus = Nucleus::of(species)?;
        let binding_per_cm = (1..=highest + 1)
            .map(|n| gross_energy(&nucleus, n).map(|e| e.binding_per_cm))
            .collect::<Result<_, _>>()?;
        Ok(Self {
            nucleus,
            highest,
            binding_per_cm,
        })
    }

    fn binding(&self, n: u32) -> f64 {
        self.binding_per_cm[n as usize - 1]
    }

    fn wavelength_nm(&self, upper: u32, lower: u32) -> f64 {
        1e7 / (self.binding(lower) - self.binding(upper))
    }

    /// Light of a line in an arc, in any one unit, as its logarithm to the base e.
    fn light(&self, upper: u32, lower: u32) -> Result<f64, OneElectronError> {
        let rate = shell_rate(&self.nucleus, upper, lower)?;
        let weight = f64::from(2 * upper * upper);
        let wavenumber = self.binding(lower) - self.binding(upper);
        Ok((rate * weight * wavenumber).ln() + self.binding(upper) / ARC_PER_CM)
    }

    /// The strongest line of each part of the spectrum.
    fn strongest(&self) -> Result<[f64; 3], OneElectronError> {
        let mut strongest = [f64::NEG_INFINITY; 3];
        for upper in 2..=self.highest {
            for lower in 1..upper {
                let part = &mut strongest[part(self.wavelength_nm(upper, lower))];
                *part = part.max(self.light(upper, lower)?);
            }
        }
        Ok(strongest)
    }

    fn claims(&self) -> Result<Vec<Claim>, OneElectronError> {
        let strongest = self.strongest()?;
        let mut claims = Vec::new();
        let mut from_nm = SHORTEST * 1e7 / self.binding(1);
        for m in 1..self.highest {
            let missing = self.light(self.highest + 1, m)?;
            let seen = strongest[part(self.wavelength_nm(self.highest + 1, m))];
            if missing < seen + NEGLIGIBLE.ln() {
                continue;
            }
            let limit_nm = 1e7 / self.binding(m) * (1.0 - MARGIN);
            claims.push(Claim {
                from_nm: limit_nm,
                to_nm: self.wavelength_nm(m + 1, m) * (1.0 + MARGIN),
                completeness: Completeness::Strong,
            });
            claims.extend(computed(from_nm, limit_nm));
            from_nm = from_nm.max(self.wavelength_nm(self.highest, m) * (1.0 - MARGIN));
        }
        let longest_nm = self.wavelength_nm(self.highest, self.highest - 1) * (1.0 + MARGIN);
        claims.extend(computed(from_nm, longest_nm));
        Ok(claims)
    }
}

fn part(wavelength_nm: f64) -> usize {
    PARTS_NM
        .iter()
        .take_while(|end| wavelength_nm > **end)
        .count()
}

fn computed(from_nm: f64, to_nm: f64) -> Option<Claim> {
    (from_nm < to_nm).then_some(Claim {
        from_nm,
        to_nm,
        completeness: Completeness::Computed,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn best(species: Species, nm: f64) -> Option<Completeness> {
        claims(species)
            .iter()
            .filter(|c| (c.from_nm..=c.to_nm).contains(&nm))
            .map(|c| c.completeness)
            .max()
    }

    #[test]
    fn the_end_of_the_balmer_series_is_left_out() {
        // Hα, Hβ, Lyman α and the gap between Lyman and Balmer lie in the open; 366 nm is crowded by lines from
        // n = 21 and higher (Balmer limit 364.6 nm: common practice).
        let hydrogen = Species::new(1, 1);
        for clear in [121.6, 300.0, 486.3, 656.5, 102.6] {
            assert_eq!(
                best(hydrogen, clear),
                Some(Completeness::Computed),
                "{clear} nm"
            );
        }
        assert_eq!(best(hydrogen, 366.0), Some(Completeness::Strong));
    }

    #[test]
    fn the_visible_range_of_highly_charged_ions_is_covered_as_far_as_light_goes() {
        // Lines from n > 20 need 6 eV more than the visible lines of O VIII: nothing in an arc.
        for nm in [2.0, 121.6, 366.0] {
            let found = best(Species::new(8, 8), nm);
            assert_eq!(found, Some(Completeness::Computed), "{nm} nm");
        }
    }
}
