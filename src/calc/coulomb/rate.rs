//! Rates and their uncertainty.

use super::{
    CorePolarisation, CoulombError, LsState, Orbital, RadialIntegral, line_strength_factor,
    radial_integral, rate_per_s,
};
use crate::calc::series::Core;
use crate::calc::series::label::{parents, shell};

/// A level as the Coulomb approximation sees it.
#[derive(Clone, Debug)]
pub struct Active {
    /// Energy on a scale that both levels of a line share, cm⁻¹.
    pub energy_per_cm: f64,
    /// Coupling.
    pub state: LsState,
    /// Orbital of the jumping electron.
    pub orbital: Orbital,
    /// Equivalent electrons that share the amplitude: 2 for an s² shell, else 1.
    pub occupancy: u32,
}

/// What kind of core the electron leaves behind, as far as it decides the error of a rate.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum RateClass {
    /// A rigid core ([`Core::Rigid`]): alkalis, alkaline-earth ions, He I.
    Rigid,
    /// A closed, s or half-filled p shell: Mg I, Al I, Ag I, O I.
    Soft,
    /// Jumps of or into a d electron outside an s or s² shell: p² and sp² configurations mix in.
    SoftD,
    /// An open 2p shell in LS coupling: C I, N II.
    OpenTwoP,
    /// An open p shell of n ≥ 3: LS coupling begins to fail.
    OpenP,
}

impl RateClass {
    /// The class of a jump between l and l′ outside a core.
    ///
    /// # Errors
    /// [`CoulombError::OpenCore`] for a core with an open d or f shell.
    pub fn of_jump(core: &str, l: u32, other_l: u32) -> Result<Self, CoulombError> {
        let shells: Vec<(u32, u32, u32)> = core.split_whitespace().filter_map(shell).collect();
        let open = |(_, l, q): &&(u32, u32, u32)| *q < 4 * l + 2;
        if shells.iter().filter(open).any(|(_, l, _)| *l > 1) {
            return Err(CoulombError::OpenCore {
                core: core.to_owned(),
            });
        }
        if Core::of_label(core) == Core::Rigid {
            return Ok(Self::Rigid);
        }
        let half_filled = parents(core)
            .last()
            .is_some_and(|parent| parent.contains('S'));
        match shells.iter().filter(open).find(|(_, l, _)| *l == 1) {
            Some((2, ..)) if !half_filled => Ok(Self::OpenTwoP),
            Some(_) if !half_filled => Ok(Self::OpenP),
            _ => {
                let outer_s = shells.last().is_some_and(|(_, l, _)| *l == 0);
                Ok(if outer_s && l.max(other_l) == 2 {
                    Self::SoftD
                } else {
                    Self::Soft
                })
            }
        }
    }
}

/// How uncertain the integrals of a class are; tuned on the half of the published rates that
/// `tests/reference/coulomb/halves.csv` calls `tuned`.
///
/// The 1 σ of ln A is the root of the sum of squares of four parts: `floor`; `2 share c`, c being the
/// cancellation ([`RadialIntegral::cancellation`]), as if the integral were wrong by `share` of its
/// magnitude; `depth` × how far ν lies below l + 1, the least of a hydrogenic orbital, since such an
/// orbital lies inside the core; and `2 core` × the share of the integral that the polarisation
/// of the core takes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RateModel {
    /// 1 σ of ln A that nothing else makes.
    pub floor: f64,
    /// Error of the integral as a share of its magnitude.
    pub share: f64,
    /// 1 σ of ln A per unit of ν below l + 1.
    pub depth: f64,
    /// Error of the polarisation part, as a share of it.
    pub core: f64,
}

/// Cancellation beyond which it counts no further: the rate is then known to its order of magnitude.
const MOST_CANCELLATION: f64 = 50.0;
/// How far below l + 1 the effective quantum number may lie.
pub const DEEPEST: f64 = 0.4;

impl RateModel {
    /// The tuned model of a class.
    pub fn of_class(class: RateClass) -> Self {
        let (floor, share, depth, core) = match class {
            RateClass::Rigid => (0.011, 0.0022, 0.42, 0.60),
            RateClass::Soft => (0.09, 0.03, 1.8, 0.45),
            RateClass::SoftD => (0.06, 0.20, 0.6, 0.45),
            RateClass::OpenTwoP => (0.04, 0.037, 0.5, 0.45),
            RateClass::OpenP => (0.10, 0.22, 0.9, 0.45),
        };
        Self {
            floor,
            share,
            depth,
            core,
        }
    }

    fn logarithmic_sigma(&self, integral: &RadialIntegral, depth: f64) -> f64 {
        let cancellation = integral.cancellation().min(MOST_CANCELLATION);
        let core = (integral.core_part_a0 / integral.value_a0).abs();
        self.floor
            .hypot(2.0 * self.share * cancellation)
            .hypot(self.depth * depth)
            .hypot(2.0 * self.core * core.min(MOST_CANCELLATION))
    }
}

/// A computed rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Rate {
    /// Spontaneous emission rate, s⁻¹.
    pub per_s: f64,
    /// 1 σ of the natural logarithm of the rate: the fraction of the rate where it is small; near
    /// and above 1 the rate is known to its order of magnitude only.
    pub relative_uncertainty: f64,
    /// Wavenumber of the transition, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// The radial integral.
    pub integral: RadialIntegral,
    /// Whether the integral nearly cancels: the uncertainty exceeds one half.
    pub cancels: bool,
}

/// Rate of the line between two levels.
///
/// # Errors
/// [`CoulombError`]: a selection rule, an upper level that is not the higher one, an orbital inside the core.
pub fn rate(
    core_charge: u32,
    upper: &Active,
    lower: &Active,
    core: Option<CorePolarisation>,
    model: RateModel,
) -> Result<Rate, CoulombError> {
    let depth = upper.orbital.depth().max(lower.orbital.depth());
    if depth > DEEPEST {
        return Err(CoulombError::InsideCore { depth });
    }
    let wavenumber_per_cm = upper.energy_per_cm - lower.energy_per_cm;
    if wavenumber_per_cm.is_nan() || wavenumber_per_cm <= 0.0 {
        return Err(CoulombError::Forbidden {
            rule: "the upper level does not lie above the lower one",
        });
    }
    let factor = line_strength_factor(&upper.state, &lower.state)?
        * f64::from(upper.occupancy * lower.occupancy);
    let integral = radial_integral(core_charge, &upper.orbital, &lower.orbital, core);
    let weight = f64::from(upper.state.twice_j) + 1.0;
    let relative_uncertainty = model.logarithmic_sigma(&integral, depth);
    Ok(Rate {
        per_s: rate_per_s(
            wavenumber_per_cm,
            factor * integral.value_a0.powi(2),
            weight,
        ),
        relative_uncertainty,
        wavenumber_per_cm,
        integral,
        cancels: relative_uncertainty > 0.5,
    })
}
