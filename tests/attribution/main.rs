//! Who made these peaks? Printed lamp tables, simulated lists with some species withheld, and lists that nothing made.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod absent;
#[path = "../common/mod.rs"]
mod common;
mod lamps;
mod simulated;

use std::collections::BTreeSet;
use std::fs;

use common::catalogue;
use lineclear::catalogue::Catalogue;
use serde_json::Value;

/// Numbers that look random, the same each time: SplitMix64 (G. L. Steele, D. Lea & C. H. Flood 2014, *Fast
/// splittable pseudorandom number generators*, OOPSLA).
pub struct Chance(u64);

impl Chance {
    /// From a seed.
    pub const fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// From several numbers: what one thing draws does not depend on how many others there are.
    pub fn of(seeds: &[u64]) -> Self {
        let mut mixed = Self(0);
        for seed in seeds {
            mixed.0 = mixed.next() ^ seed;
        }
        mixed
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Above zero, below one.
    pub fn part(&mut self) -> f64 {
        ((self.next() >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }

    /// Normal with σ of one (G. E. P. Box & M. E. Muller 1958, Ann. Math. Stat. 29, 610).
    pub fn normal(&mut self) -> f64 {
        let (radius, angle) = (self.part(), self.part());
        (-2.0 * radius.ln()).sqrt() * (2.0 * std::f64::consts::PI * angle).cos()
    }

    /// Below a count.
    pub fn below(&mut self, count: usize) -> usize {
        (self.part() * count as f64) as usize
    }
}

/// A number of an answer.
pub fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

/// Species called present.
pub fn present(answer: &Value) -> BTreeSet<String> {
    let species = answer["species"].as_array().unwrap();
    let there = species.iter().filter(|s| s["status"] == "present");
    there
        .map(|s| s["species"].as_str().unwrap().to_owned())
        .collect()
}

/// Writes a list beside the catalogue of this run.
pub fn written(name: &str, text: &str) -> String {
    let path = catalogue().parent().unwrap().join(name);
    fs::write(&path, text).unwrap();
    path.display().to_string()
}

/// Positions, in nm of the default medium, as a list with one σ for all.
pub fn list(name: &str, positions_nm: &[f64], sigma_nm: f64) -> String {
    let rows: String = positions_nm
        .iter()
        .map(|nm| format!("{nm:.4},{sigma_nm}\n"))
        .collect();
    written(name, &format!("position_nm,uncertainty_nm\n{rows}"))
}

/// Symbols of all elements of which something is held.
pub fn elements() -> BTreeSet<String> {
    let held = Catalogue::open(catalogue()).unwrap().species().unwrap();
    let symbol = |s: &vocabulary::atom::Species| element(&s.to_string()).to_owned();
    held.iter()
        .filter(|s| s.isotope.is_none())
        .map(symbol)
        .collect()
}

/// `Fe` of `Fe II`.
pub fn element(species: &str) -> &str {
    species.split(' ').next().unwrap()
}
