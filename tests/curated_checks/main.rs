//! Checks of the ions entered by hand (`data/curated-*`): what is bundled against what was entered, against physics, and
//! against tables from outside.

// Helpers of tests may unwrap: a panic there is the report.
#![allow(clippy::unwrap_used)]

mod levels;
mod lines;
mod outside;
mod reading;
mod series;
mod sums;
mod support;
mod tables;
