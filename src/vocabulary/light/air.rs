//! The refractive index of air: P. E. Ciddor 1996, "Refractive index of air: new equations for the
//! visible and near infrared", Applied Optics 35, 1566–1573. Equation numbers are those of the paper.

use std::sync::OnceLock;

/// Shortest vacuum wavelength at which the index is reckoned, nm (extrapolated below 300 nm).
pub const LOWEST_AIR_NM: f64 = 185.0;
/// Longest vacuum wavelength at which the index is reckoned, nm (extrapolated above 1690 nm).
pub const HIGHEST_AIR_NM: f64 = 2500.0;
/// Range for which the equations are published, vacuum nm.
pub const PUBLISHED_AIR_NM: std::ops::RangeInclusive<f64> = 300.0..=1690.0;

/// Slack at the bounds, relative: an inverse that lands on a bound must not fail by rounding.
const BOUND_SLACK: f64 = 1e-9;

/// State of the air between source and instrument.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AirConditions {
    /// Temperature, °C; −40 to 100 (published; the paper's measurements cover less).
    pub temperature_celsius: f64,
    /// Pressure, Pa; above 0, to 140 000 (published from 80 000 to 120 000, good below).
    pub pressure_pa: f64,
    /// Relative humidity, 0 to 1, with respect to liquid water also below 0 °C.
    pub relative_humidity: f64,
    /// Carbon dioxide, parts per million by volume, 0 to 2000.
    pub co2_ppm: f64,
}

impl AirConditions {
    /// Standard air: 15 °C, 101 325 Pa, dry, 450 ppm CO₂.
    pub const STANDARD: Self = Self {
        temperature_celsius: 15.0,
        pressure_pa: 101_325.0,
        relative_humidity: 0.0,
        co2_ppm: 450.0,
    };
}

impl Default for AirConditions {
    fn default() -> Self {
        Self::STANDARD
    }
}

/// What cannot be reckoned about air.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum AirError {
    /// A wavelength at which the index of air is not known well enough.
    #[error(
        "{wavelength_nm} nm: the index of air is known from {LOWEST_AIR_NM} to {HIGHEST_AIR_NM} nm \
         only; use vacuum wavelengths (--medium vacuum)"
    )]
    OutOfRange {
        /// The wavelength, nm.
        wavelength_nm: f64,
    },
    /// Conditions outside the bounds of the equations.
    #[error(
        "{what} of {value} {unit} is outside {low} to {high} {unit}, the bounds of the equations for air"
    )]
    Conditions {
        /// Which condition.
        what: &'static str,
        /// Its value.
        value: f64,
        /// Its unit.
        unit: &'static str,
        /// Lower bound.
        low: f64,
        /// Upper bound.
        high: f64,
    },
    /// More water vapour than the pressure leaves room for.
    #[error(
        "a relative humidity of {humidity_percent} % at {temperature_celsius} °C is more water \
         vapour than a pressure of {pressure_pa} Pa holds; lower the humidity or the temperature"
    )]
    VapourAbovePressure {
        /// Relative humidity, %.
        humidity_percent: f64,
        /// Temperature, °C.
        temperature_celsius: f64,
        /// Pressure, Pa.
        pressure_pa: f64,
    },
}

/// The index of air at one wavelength.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AirIndex {
    /// Phase index n.
    pub index: f64,
    /// The wavelength lies outside the published 300–1690 nm.
    pub extrapolated: bool,
}

/// A converted wavelength.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AirWavelength {
    /// Wavelength in the other medium, nm.
    pub nm: f64,
    /// The index was extrapolated.
    pub extrapolated: bool,
}

/// Air of one state: the parts of the index that do not depend on the wavelength are worked out
/// once.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Air {
    conditions: AirConditions,
    /// ρ_a / ρ_axs times the CO₂ factor: scales the refractivity of standard dry air.
    dry_factor: f64,
    /// ρ_w / ρ_ws: scales the refractivity of standard water vapour.
    vapour_factor: f64,
}

impl Air {
    /// Standard air, worked out once per process.
    pub fn standard() -> &'static Self {
        static STANDARD: OnceLock<Air> = OnceLock::new();
        STANDARD.get_or_init(|| Self::from_sound(AirConditions::STANDARD))
    }

    /// Air of another state.
    ///
    /// # Errors
    /// Conditions outside the bounds that [`AirConditions`] names, or that are no number; more water
    /// vapour than the pressure leaves room for.
    pub fn new(conditions: AirConditions) -> Result<Self, AirError> {
        let AirConditions {
            temperature_celsius,
            pressure_pa,
            relative_humidity,
            co2_ppm,
        } = conditions;
        within(
            "an air temperature",
            temperature_celsius,
            "°C",
            -40.0,
            100.0,
        )?;
        within("an air pressure", pressure_pa, "Pa", 1e-3, 140_000.0)?;
        within(
            "a relative humidity",
            100.0 * relative_humidity,
            "%",
            0.0,
            100.0,
        )?;
        within("a CO2 content", co2_ppm, "ppm", 0.0, 2000.0)?;
        if vapour_share(&conditions) > 1.0 {
            return Err(AirError::VapourAbovePressure {
                humidity_percent: 100.0 * relative_humidity,
                temperature_celsius,
                pressure_pa,
            });
        }
        Ok(Self::from_sound(conditions))
    }

    /// The state of this air.
    pub fn conditions(&self) -> AirConditions {
        self.conditions
    }

    /// Index at a vacuum wavelength, nm.
    ///
    /// # Errors
    /// A wavelength outside 185–2500 nm.
    pub fn index(&self, vacuum_nm: f64) -> Result<AirIndex, AirError> {
        let slack = vacuum_nm * BOUND_SLACK;
        let inside = vacuum_nm + slack >= LOWEST_AIR_NM && vacuum_nm - slack <= HIGHEST_AIR_NM;
        if !inside {
            return Err(AirError::OutOfRange {
                wavelength_nm: vacuum_nm,
            });
        }
        Ok(AirIndex {
            index: 1.0 + self.refractivity(vacuum_nm),
            extrapolated: !PUBLISHED_AIR_NM.contains(&vacuum_nm),
        })
    }

    /// Wavelength in this air of a vacuum wavelength, nm.
    ///
    /// # Errors
    /// A wavelength outside 185–2500 nm.
    pub fn to_air_nm(&self, vacuum_nm: f64) -> Result<AirWavelength, AirError> {
        let AirIndex {
            index,
            extrapolated,
        } = self.index(vacuum_nm)?;
        Ok(AirWavelength {
            nm: vacuum_nm / index,
            extrapolated,
        })
    }

    /// Vacuum wavelength of a wavelength in this air, nm: the solution of λ = n(λ) λ_air, to a few
    /// units in the last place. Each step gains a factor |λ dn/dλ| < 2e-4.
    ///
    /// # Errors
    /// A vacuum wavelength outside 185–2500 nm.
    pub fn to_vacuum_nm(&self, air_nm: f64) -> Result<AirWavelength, AirError> {
        let near = (LOWEST_AIR_NM * 0.99..=HIGHEST_AIR_NM).contains(&air_nm);
        if !near {
            return Err(AirError::OutOfRange {
                wavelength_nm: air_nm,
            });
        }
        let mut vacuum_nm = air_nm * (1.0 + self.refractivity(air_nm));
        for _ in 0..4 {
            vacuum_nm = air_nm * (1.0 + self.refractivity(vacuum_nm));
        }
        self.index(vacuum_nm)
            .map(|found| AirWavelength {
                nm: vacuum_nm,
                extrapolated: found.extrapolated,
            })
            .map_err(|_| AirError::OutOfRange {
                wavelength_nm: air_nm,
            })
    }

    /// n − 1 at a vacuum wavelength, nm (Eq. 5).
    fn refractivity(&self, vacuum_nm: f64) -> f64 {
        let sigma_per_um = 1e3 / vacuum_nm;
        let square = sigma_per_um * sigma_per_um;
        let dry = self.dry_factor * standard_dry(square);
        if self.vapour_factor == 0.0 {
            return dry;
        }
        dry + self.vapour_factor * standard_vapour(square)
    }

    /// Works out the densities (Appendix B, steps 1–10) for conditions that are known to be sound.
    fn from_sound(conditions: AirConditions) -> Self {
        let kelvin = conditions.temperature_celsius + 273.15;
        let vapour_share = vapour_share(&conditions);
        let density =
            |share: f64| conditions.pressure_pa / (compressibility(&conditions, share) * kelvin);
        let reference_dry = dry_reference_density();
        let reference_vapour = vapour_reference_density();
        // Densities share the factor M_a / R (or M_w / R) with their reference: it drops out.
        let dry_ratio = density(vapour_share) * (1.0 - vapour_share) / reference_dry;
        let vapour_ratio = density(vapour_share) * vapour_share / reference_vapour;
        Self {
            conditions,
            dry_factor: dry_ratio * co2_factor(conditions.co2_ppm),
            vapour_factor: vapour_ratio,
        }
    }
}

fn within(
    what: &'static str,
    value: f64,
    unit: &'static str,
    low: f64,
    high: f64,
) -> Result<(), AirError> {
    if (low..=high).contains(&value) {
        return Ok(());
    }
    Err(AirError::Conditions {
        what,
        value,
        unit,
        low,
        high,
    })
}

/// Refractivity of dry air at 15 °C, 101 325 Pa, 450 ppm CO₂, from σ² in µm⁻² (Eq. 1).
fn standard_dry(square: f64) -> f64 {
    (5_792_105.0 / (238.0185 - square) + 167_917.0 / (57.362 - square)) * 1e-8
}

/// Change of the dry refractivity with CO₂ (Eq. 2).
fn co2_factor(co2_ppm: f64) -> f64 {
    1.0 + 0.534e-6 * (co2_ppm - 450.0)
}

/// Refractivity of water vapour at 20 °C, 1333 Pa, from σ² in µm⁻² (Eq. 3).
fn standard_vapour(square: f64) -> f64 {
    let series = 295.235 + square * (2.6422 + square * (-0.032_380 + square * 0.004_028));
    1.022e-8 * series
}

/// Molar share of water vapour (Appendix B, step 5; saturation over water and the enhancement
/// factor of Appendix A).
fn vapour_share(conditions: &AirConditions) -> f64 {
    if conditions.relative_humidity == 0.0 {
        return 0.0;
    }
    let celsius = conditions.temperature_celsius;
    let kelvin = celsius + 273.15;
    let saturation_pa = (1.237_884_7e-5 * kelvin * kelvin - 1.912_131_6e-2 * kelvin
        + 33.937_110_47
        - 6.343_164_5e3 / kelvin)
        .exp();
    let enhancement = 1.000_62 + 3.14e-8 * conditions.pressure_pa + 5.6e-7 * celsius * celsius;
    let vapour_pa = enhancement * conditions.relative_humidity * saturation_pa;
    vapour_pa / conditions.pressure_pa
}

/// Compressibility of moist air with a molar share of water vapour (Appendix A, Eq. 12; Davis 1992).
fn compressibility(conditions: &AirConditions, share: f64) -> f64 {
    let celsius = conditions.temperature_celsius;
    let per_kelvin = conditions.pressure_pa / (celsius + 273.15);
    let linear = 1.581_23e-6 - 2.9331e-8 * celsius
        + 1.1043e-10 * celsius * celsius
        + (5.707e-6 - 2.051e-8 * celsius) * share
        + (1.9898e-4 - 2.376e-6 * celsius) * share * share;
    1.0 - per_kelvin * linear + per_kelvin * per_kelvin * (1.83e-11 - 0.765e-8 * share * share)
}

/// p / (Z T) of dry air at 15 °C, 101 325 Pa: the density ρ_axs without M_a / R.
fn dry_reference_density() -> f64 {
    let reference = AirConditions::STANDARD;
    reference.pressure_pa / (compressibility(&reference, 0.0) * 288.15)
}

/// p / (Z T) of pure water vapour at 20 °C, 1333 Pa: the density ρ_ws without M_w / R.
fn vapour_reference_density() -> f64 {
    let reference = AirConditions {
        temperature_celsius: 20.0,
        pressure_pa: 1333.0,
        ..AirConditions::STANDARD
    };
    reference.pressure_pa / (compressibility(&reference, 1.0) * 293.15)
}
