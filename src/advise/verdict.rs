//! Verdicts and what they rest on.

use std::fmt;

use vocabulary::atom::Species;

/// How clear a line is of the others.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Verdict {
    /// Interference below 1 %.
    Clear,
    /// 1 % to 10 %.
    Tinged,
    /// 10 % to 50 %.
    Blended,
    /// 50 % and more.
    Swamped,
    /// The data do not allow a number.
    Unrated,
}

impl Verdict {
    /// The verdict of an interference fraction; `Unrated` for NaN.
    pub fn of(fraction: f64) -> Self {
        match fraction {
            f if f.is_nan() => Self::Unrated,
            f if f < 0.01 => Self::Clear,
            f if f < 0.1 => Self::Tinged,
            f if f < 0.5 => Self::Blended,
            _ => Self::Swamped,
        }
    }

    /// The word.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Clear => "clear",
            Self::Tinged => "tinged",
            Self::Blended => "blended",
            Self::Swamped => "swamped",
            Self::Unrated => "unrated",
        }
    }
}

impl fmt::Display for Verdict {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(self.word())
    }
}

/// A verdict with the words that its 68 % interval reaches.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct VerdictRange {
    /// What the central value says; it decides.
    pub central: Verdict,
    /// Lower end.
    pub low: Verdict,
    /// Upper end.
    pub high: Verdict,
}

impl VerdictRange {
    /// No number can be given.
    pub const UNRATED: Self = Self {
        central: Verdict::Unrated,
        low: Verdict::Unrated,
        high: Verdict::Unrated,
    };
}

impl fmt::Display for VerdictRange {
    /// `clear`, or `clear–tinged` where the interval straddles a border.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.low == self.high {
            f.pad(self.central.word())
        } else {
            f.pad(&format!("{}–{}", self.low, self.high))
        }
    }
}

/// Light of other species over that of the target, as the instrument sees them set to the target.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Interference {
    /// Central value.
    pub fraction: f64,
    /// Lower end of the 68 % interval.
    pub low: f64,
    /// Upper end of the 68 % interval.
    pub high: f64,
}

impl Interference {
    /// A fraction with a relative 1 σ, taken as log-normal: fraction · e^(±s), s² = ln(1 + σ²).
    pub fn new(fraction: f64, relative_uncertainty: f64) -> Self {
        let spread = (relative_uncertainty.powi(2)).ln_1p().sqrt().exp();
        Self {
            fraction,
            low: fraction / spread,
            high: fraction * spread,
        }
    }

    /// The verdict with the words that the interval reaches.
    pub fn verdict(&self) -> VerdictRange {
        VerdictRange {
            central: Verdict::of(self.fraction),
            low: Verdict::of(self.low),
            high: Verdict::of(self.high),
        }
    }
}

/// The line of another species that disturbs most.
#[derive(Clone, Debug, PartialEq)]
pub struct Worst {
    /// Whose line.
    pub species: Species,
    /// Vacuum wavelength, nm.
    pub vacuum_nm: f64,
    /// Its part of the interference fraction.
    pub fraction: f64,
    /// It lies more than two full widths away: its wing does it.
    pub wing: bool,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn borders_are_those_of_the_definition() {
        // The table of verdicts: below 1 %, to 10 %, to 50 %, 50 % and more.
        for (fraction, verdict) in [
            (0.0, Verdict::Clear),
            (0.009_99, Verdict::Clear),
            (0.01, Verdict::Tinged),
            (0.1, Verdict::Blended),
            (0.5, Verdict::Swamped),
            (7.0, Verdict::Swamped),
            (f64::NAN, Verdict::Unrated),
        ] {
            assert_eq!(Verdict::of(fraction), verdict, "{fraction}");
        }
    }

    #[test]
    fn an_interval_over_a_border_shows_both_words() {
        assert_eq!(
            Interference::new(0.008, 0.5).verdict().to_string(),
            "clear–tinged"
        );
        assert_eq!(Interference::new(0.001, 0.2).verdict().to_string(), "clear");
        assert_eq!(
            Interference::new(0.008, 0.5).verdict().central,
            Verdict::Clear
        );
    }
}
