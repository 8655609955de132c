//! What can be wrong with a question about a one-electron system.

use vocabulary::atom::HalfInteger;

/// Why a one-electron system cannot be computed.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum OneElectronError {
    /// Nuclear charge outside 1–110.
    #[error("no one-electron model for atomic number {atomic_number}: give 1 to 110")]
    AtomicNumber {
        /// What was asked for.
        atomic_number: u8,
    },
    /// A mass or radius that is not a positive, finite number (a radius may be zero).
    #[error("nuclear {quantity} {value} is not usable: give a positive, finite number")]
    Nucleus {
        /// Which quantity.
        quantity: &'static str,
        /// What was given.
        value: f64,
    },
    /// A principal quantum number outside the range of the model.
    #[error("n = {n} is outside {lowest} to {highest} for {model}")]
    PrincipalNumber {
        /// What was asked for.
        n: u32,
        /// Lowest n of the model.
        lowest: u32,
        /// Highest n of the model.
        highest: u32,
        /// Which model.
        model: &'static str,
    },
    /// l ≥ n.
    #[error("there is no level with n = {n} and l = {l}: l goes from 0 to n − 1")]
    OrbitalNumber {
        /// Principal quantum number.
        n: u32,
        /// Orbital quantum number.
        l: u32,
    },
    /// j is neither l + ½ nor l − ½.
    #[error("there is no level with l = {l} and j = {j}: j is l + 1/2, or l − 1/2 where l > 0")]
    TotalNumber {
        /// Orbital quantum number.
        l: u32,
        /// Total angular momentum.
        j: HalfInteger,
    },
    /// A species with more than one electron.
    #[error("{symbol} has {electrons} electrons: the one-electron model needs exactly one")]
    NotOneElectron {
        /// How the caller writes the species.
        symbol: String,
        /// Number of electrons.
        electrons: u8,
    },
    /// A species without a known nuclear mass.
    #[error(
        "no nuclear mass is known for {symbol}: give a mass number that is in the isotope table"
    )]
    NoMass {
        /// How the trade writes the species.
        symbol: String,
    },
}
