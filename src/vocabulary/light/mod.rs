//! Spectral quantities and ranges, units, media, the index of air, thermal radiation and photons.

mod air;
mod conditions;
pub mod constants;
mod convert;
mod error;
mod medium;
mod number;
mod quantity;
mod range;
pub mod thermal;
mod unit;
mod width;

pub use air::{
    Air, AirConditions, AirError, AirIndex, AirWavelength, HIGHEST_AIR_NM, LOWEST_AIR_NM,
    PUBLISHED_AIR_NM,
};
pub use conditions::{NumberDensity, Temperature};
pub use convert::{Conversion, photoelectric_threshold_nm};
pub use error::QuantityError;
pub use medium::{AUTO_AIR_NM, Medium, PositionMedium, ShownPosition};
pub use quantity::SpectralQuantity;
pub use range::{SpectralRange, TypedRange};
pub use unit::{SpectralKind, SpectralUnit};
pub use width::SpectralWidth;
