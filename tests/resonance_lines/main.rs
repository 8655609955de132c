//! The resonance-line tables of single isotopes: their bytes, their inner sums, and values from outside.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

mod catalogue;
mod mixture;
mod outside;
mod sums;
mod tables;
