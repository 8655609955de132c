//! Dipole integrals between Coulomb orbitals.

use super::Orbital;
use super::orbital::STEP;

/// Screening of the light's field by the core that it polarises: the dipole `r` becomes
/// `r − α_d (1 − e^(−(r/r_c)³)) / r²` (Hameed, Herzenberg & James 1968, J. Phys. B 1, 822).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CorePolarisation {
    /// Dipole polarisability of the core, a₀³.
    pub dipole_a0_3: f64,
    /// Radius inside which the core does not follow, a₀.
    pub cutoff_a0: f64,
}

impl CorePolarisation {
    /// With the cut-off at the radius ∛α_d that a polarisable sphere of that α has.
    pub fn new(dipole_a0_3: f64) -> Self {
        Self {
            dipole_a0_3,
            cutoff_a0: dipole_a0_3.cbrt(),
        }
    }

    /// Factor on the dipole at a radius (a₀).
    fn factor(&self, radius_a0: f64) -> f64 {
        let cube = radius_a0.powi(3);
        1.0 - self.dipole_a0_3 / cube * -(-cube / self.cutoff_a0.powi(3)).exp_m1()
    }
}

/// ⟨1|r|2⟩ and what it is made of.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RadialIntegral {
    /// ∫ P₁ r P₂ dr, a₀; its sign is that of the product of the orbitals' outermost lobes.
    pub value_a0: f64,
    /// ∫ |P₁ r P₂| dr, a₀.
    pub magnitude_a0: f64,
    /// What the polarisation of the core takes away from the integral, a₀; 0 where it is not known.
    pub core_part_a0: f64,
}

impl RadialIntegral {
    /// How much of the magnitude cancels: 1 for none.
    pub fn cancellation(&self) -> f64 {
        self.magnitude_a0 / self.value_a0.abs()
    }
}

/// Dipole integral between two orbitals in the field of charge Z.
pub fn radial_integral(
    core_charge: u32,
    first: &Orbital,
    second: &Orbital,
    core: Option<CorePolarisation>,
) -> RadialIntegral {
    let charge = f64::from(core_charge);
    let begin = first.first.max(second.first);
    let left = first.values.get(begin - first.first..).unwrap_or(&[]);
    let right = second.values.get(begin - second.first..).unwrap_or(&[]);
    let mut value = 0.0;
    let mut magnitude = 0.0;
    let mut without_core = 0.0;
    for ((index, a), b) in (begin..).zip(left).zip(right) {
        // ∫ P₁ ρ P₂ dρ = 2 ∫ Q₁ Q₂ x⁴ dx.
        let square = (index as f64 * STEP).powi(2);
        let plain = a * b * square * square;
        let part = core.map_or(plain, |core| plain * core.factor(square / charge));
        value += part;
        without_core += plain;
        magnitude += part.abs();
    }
    let scale = 2.0 * STEP / charge;
    RadialIntegral {
        value_a0: scale * value,
        magnitude_a0: scale * magnitude,
        core_part_a0: scale * (without_core - value),
    }
}
