//! Labels of levels with one electron, (n, l, j).

use std::fmt;

use super::{Configuration, HalfInteger, Term, orbital_letter};

/// A level of H I, He II …, or the outer electron of an alkali, by its quantum numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct OneElectronLabel {
    /// Principal quantum number, above l.
    pub n: u16,
    /// Orbital momentum.
    pub l: u8,
    /// Total momentum, l ± ½.
    pub j: HalfInteger,
}

impl OneElectronLabel {
    /// `None` unless n > l and j = l ± ½ with j ≥ ½.
    pub fn new(n: u16, l: u8, j: HalfInteger) -> Option<Self> {
        let twice_l = 2 * u16::from(l);
        let coupled = j.twice() == twice_l + 1 || (l > 0 && j.twice() == twice_l - 1);
        (n > u16::from(l) && coupled).then_some(Self { n, l, j })
    }

    /// Reads the label off a configuration of a single electron (`2p`), and J. `None` for more
    /// than one electron.
    pub fn from_level(configuration: &Configuration, j: HalfInteger) -> Option<Self> {
        let outer = configuration.outer_electron()?;
        let single = outer.core.is_empty() && outer.electrons == 1;
        single.then(|| Self::new(outer.n, outer.l, j)).flatten()
    }

    /// Configuration, `2p`; l up to 20 has a letter, beyond that it is written `[l=21]`.
    pub fn configuration(self) -> String {
        match orbital_letter(self.l) {
            Some(letter) => format!("{}{letter}", self.n),
            None => format!("{}[l={}]", self.n, self.l),
        }
    }

    /// Term, `2Po`.
    pub fn term(self) -> Term {
        Term::Ls {
            multiplicity: 2,
            l: self.l,
            odd: self.l % 2 == 1,
            prefix: None,
        }
    }
}

/// `2p 3/2`.
impl fmt::Display for OneElectronLabel {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {}", self.configuration(), self.j)
    }
}
