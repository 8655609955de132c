//! The answers: pure functions from lines and conditions to verdicts. No I/O here.

pub mod attribute;
pub mod audit;
pub mod background;
pub mod choose;
pub mod climb;
pub mod contrast;
mod coverage;
mod emission;
mod error;
mod feature;
pub mod hyperfine;
mod judge;
pub mod ledger;
pub mod marks;
mod median;
pub mod pairs;
pub mod passband;
mod physics;
mod position;
pub mod predict;
mod pressure;
mod resolving;
pub mod scan;
mod scene;
mod spectrum;
mod sum;
mod target;
pub mod tune;
mod unlisted;
mod unrated;
mod verdict;
pub mod vet;
pub mod window;

pub use coverage::{UNLISTED_IN_COMPLEX, UNLISTED_IN_SIMPLE, unlisted_per_listed};
pub use emission::{
    Conditions, Details, EmissionModel, Entry, Gas, GivenIntensity, InstrumentForm, LevelName,
    Metastable,
};
pub use error::AdviseError;
pub use physics::{Physics, WidthUse};
pub use position::{Placed, placed};
pub use pressure::{Pressure, pressure_reach_nm};
pub use scene::REACH_WIDTHS;
pub use spectrum::Spectrum;
pub use target::Wanted;
pub use unrated::{CHANCE_CHANGED, PriorLight, Unrated};
pub use verdict::{Interference, Verdict, VerdictRange, Worst};
