//! The answers: pure functions from lines and conditions to verdicts. No I/O here.

mod coverage;
mod emission;
mod error;
mod feature;
pub mod marks;
mod position;
mod scene;
mod spectrum;
mod verdict;
pub mod window;

pub use emission::{Conditions, EmissionModel};
pub use error::AdviseError;
pub use position::{Placed, placed};
pub use spectrum::Spectrum;
pub use verdict::{Interference, Verdict, VerdictRange, Worst};
