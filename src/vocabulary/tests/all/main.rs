//! Checks of the vocabulary against the world outside, its exact messages and its properties.
// Helpers may unwrap as tests do: a panic there is the report.
#![allow(clippy::unwrap_used)]

mod air;
mod constants;
mod labels;
mod photons;
mod properties;
mod quantities;
mod species;
mod support;
mod tables;
mod terms;
