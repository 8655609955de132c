//! What printed handbooks and papers say against what is held. The values in `tests/reference/published` were
//! entered from memory and frozen before any comparison; each row names its source. A value that is not met stands in
//! `decisions.csv` with the reason, and nothing is passed over: every test counts what it compared.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

mod bench;
mod held;
mod lamps;
mod laser;
mod lifetimes;
mod limits;
mod lines;
mod pairs;
mod photon;
mod printed;
