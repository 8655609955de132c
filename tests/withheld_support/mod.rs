//! How the withheld tests of levels and of rates are scored: one routine for both.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]
#![allow(dead_code, reason = "each test uses its part")]

/// A withheld value: how far off the prediction is, in units of both σ together, and its own σ.
#[derive(Clone, Copy, Debug)]
pub struct Miss {
    pub pull: f64,
    pub sigma: f64,
}

/// What the σ of predictions are worth.
#[derive(Debug)]
pub struct Score {
    pub count: usize,
    /// Share within 1 σ, %.
    pub within_one: f64,
    /// Share within 2 σ, %.
    pub within_two: f64,
    pub median_sigma: f64,
}

pub fn score(found: impl Iterator<Item = Miss>) -> Score {
    let found: Vec<Miss> = found.collect();
    let share = |k: f64| {
        let inside = found.iter().filter(|miss| miss.pull.abs() <= k).count();
        100.0 * inside as f64 / found.len() as f64
    };
    let mut sigmas: Vec<f64> = found.iter().map(|miss| miss.sigma).collect();
    sigmas.sort_by(f64::total_cmp);
    Score {
        count: found.len(),
        within_one: share(1.0),
        within_two: share(2.0),
        median_sigma: sigmas[sigmas.len() / 2],
    }
}

impl Score {
    /// The promise of the project's specification: 68 ± 8 % within 1 σ, at least 93 % within 2 σ.
    pub fn assert_calibrated(&self) {
        assert!((60.0..=76.0).contains(&self.within_one), "{self:?}");
        assert!(self.within_two >= 93.0, "{self:?}");
    }
}

/// The names that a list of halves (`half,name` rows) gives to one half.
pub fn listed(halves: &str, half: &str) -> Vec<String> {
    halves
        .lines()
        .filter_map(|line| line.strip_prefix(half)?.strip_prefix(','))
        .map(str::to_owned)
        .collect()
}

/// How far a number of the kept table may move with small changes of the tables.
#[derive(Clone, Copy)]
pub enum Allowed {
    /// So many points.
    Points(f64),
    /// A fraction of the kept number, or so much, whichever is more.
    Part(f64, f64),
}

/// Panics where the kept table lacks one of the rows, give or take what is allowed for each of the
/// numbers behind its two names.
pub fn assert_kept(rows: &[String], kept: &str, allowed: &[Allowed]) {
    let cells = |text: &str| -> Vec<String> {
        text.split('|').map(|cell| cell.trim().to_owned()).collect()
    };
    for row in rows {
        let new = cells(row);
        let old = kept
            .lines()
            .map(cells)
            .find(|old| old.get(1..3) == new.get(1..3))
            .unwrap_or_else(|| panic!("the kept table lacks the row: {row}"));
        assert_eq!(new.len(), allowed.len() + 4, "{row}");
        for (at, allowed) in (3..).zip(allowed) {
            let (old, new): (f64, f64) = (old[at].parse().unwrap(), new[at].parse().unwrap());
            let bound = match *allowed {
                Allowed::Points(points) => points,
                Allowed::Part(part, least) => (part * old).max(least),
            };
            let moved = (old - new).abs();
            assert!(moved <= bound, "the kept table is out of date: {row}");
        }
    }
}
