//! Angular momentum quantum numbers, integer or half-integer.

use std::fmt;

/// A non-negative multiple of ½, kept as twice its value.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct HalfInteger(u16);

impl HalfInteger {
    /// The value `twice / 2`.
    pub const fn from_twice(twice: u16) -> Self {
        Self(twice)
    }

    /// Twice the value, always a whole number.
    pub const fn twice(self) -> u16 {
        self.0
    }

    /// The value as a floating-point number.
    pub fn value(self) -> f64 {
        f64::from(self.0) / 2.0
    }

    /// Statistical weight 2J + 1 of a level with this J.
    pub fn weight(self) -> f64 {
        f64::from(self.0) + 1.0
    }

    /// Reads `2`, `5/2`, `2.5` or `2.`; `None` for anything that is no non-negative multiple of ½.
    pub fn parse(text: &str) -> Option<Self> {
        let text = text.trim();
        if let Some((numerator, denominator)) = text.split_once('/') {
            let numerator: u16 = numerator.trim().parse().ok()?;
            return (denominator.trim() == "2").then_some(Self(numerator));
        }
        let value: f64 = text.parse().ok()?;
        let twice = 2.0 * value;
        (value.is_finite() && (0.0..=65_535.0).contains(&twice) && twice.fract() == 0.0)
            .then_some(Self(twice as u16))
    }
}

impl fmt::Display for HalfInteger {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.0.is_multiple_of(2) {
            write!(f, "{}", self.0 / 2)
        } else {
            write!(f, "{}/2", self.0)
        }
    }
}
