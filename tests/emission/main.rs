//! Models of the light, instruments and filters over invented spectra, against values from outside.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod behind;
mod corona;
mod intervals;
mod invented;
mod measured;
mod seen;
