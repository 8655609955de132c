//! How an upper level decays: its lifetime, where it goes, and what is not known about that.

use std::collections::HashMap;
use std::sync::Arc;

use vocabulary::spectrum::{Level, Strength};

use super::atom::{Atom, same_level};

/// A decay to one lower level.
#[derive(Clone, Debug, PartialEq)]
pub struct Decay {
    /// Where it goes.
    pub lower: Arc<Level>,
    /// Rate, s⁻¹; `None` where parity and J allow it and no rate is held.
    pub rate_per_s: Option<f64>,
}

/// What is known of the decays of one level.
#[derive(Clone, Debug, PartialEq)]
pub struct Decays {
    /// All decays that are held or that parity and J allow.
    pub decays: Vec<Decay>,
    /// Sum of the held rates, s⁻¹; a lower bound where decays are not rated.
    pub sum_per_s: f64,
    /// Measured lifetime and its 1 σ, ns.
    pub measured_ns: Option<(f64, f64)>,
    /// A source claims to list lines between excited states of the species. Without such a claim
    /// the level may decay to levels that are not held.
    pub excited_states_listed: bool,
}

/// Whether a transition leads back to its start for good.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Cycling {
    /// No other level that is held can be reached by electric dipole decay, and a source claims
    /// to list the levels between excited states.
    Closed,
    /// A part of the decays goes elsewhere.
    Leaks {
        /// The part.
        fraction: f64,
    },
    /// Decays that may go elsewhere are not rated; the part is smaller than this, 2 σ.
    AtMost {
        /// The bound.
        fraction: f64,
    },
    /// The held data do not tell.
    Unrated,
}

impl Cycling {
    /// Mean number of photons that an atom scatters before it is lost, 1/(1 − b): a lower bound
    /// for `AtMost`, `None` where it is not lost or nothing is known.
    pub fn photons(self) -> Option<f64> {
        match self {
            Self::Leaks { fraction } | Self::AtMost { fraction } if fraction > 0.0 => {
                Some(1.0 / fraction)
            }
            _ => None,
        }
    }

    /// The word of the answers.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Closed => "closed",
            Self::Leaks { .. } => "leaks",
            Self::AtMost { .. } => "leaks at most",
            Self::Unrated => "unrated",
        }
    }
}

impl Decays {
    /// Decay rate, s⁻¹: one over the measured lifetime, else the sum of what is held; `None`
    /// where neither is.
    pub fn total_per_s(&self) -> Option<f64> {
        match self.measured_ns {
            Some((lifetime_ns, _)) => Some(1e9 / lifetime_ns),
            None if self.sum_per_s > 0.0 => Some(self.sum_per_s),
            None => None,
        }
    }

    /// Lifetime, ns: measured, else one over the sum of what is held (an upper bound where decays
    /// are not rated).
    pub fn lifetime_ns(&self) -> Option<f64> {
        self.total_per_s().map(|rate| 1e9 / rate)
    }

    /// What the held rates miss of the measured decay rate, as a fraction (negative where they
    /// exceed it), and its 1 σ from the lifetime.
    pub fn missing_fraction(&self) -> Option<(f64, f64)> {
        let (lifetime_ns, sigma_ns) = self.measured_ns?;
        let held = self.sum_per_s * lifetime_ns * 1e-9;
        Some((1.0 - held, held * sigma_ns / lifetime_ns))
    }

    /// Whether all decays of weight are held with their rate, as far as the sources claim.
    pub fn is_complete(&self) -> bool {
        self.excited_states_listed && self.unrated().next().is_none()
    }

    /// Levels that parity and J allow without a held rate.
    pub fn unrated(&self) -> impl Iterator<Item = &Arc<Level>> {
        self.decays
            .iter()
            .filter(|d| d.rate_per_s.is_none())
            .map(|d| &d.lower)
    }
}

/// Whether electric dipole radiation can join two levels: parities differ and the J close a
/// triangle with 1. `None` where a parity or J is not known.
pub fn dipole_allowed(one: &Level, other: &Level) -> Option<bool> {
    if one.parity? == other.parity? {
        return Some(false);
    }
    let (a, b) = (one.j?.twice(), other.j?.twice());
    Some(a.abs_diff(b) <= 2 && a + b >= 2)
}

/// Decays of all levels of an atom list, by level, found when they are needed.
pub struct DecayBook<'a> {
    atoms: &'a [Atom],
    by_upper: Vec<Option<HashMap<u32, Vec<usize>>>>,
    known: HashMap<(usize, u32), Arc<Decays>>,
}

impl<'a> DecayBook<'a> {
    /// An empty book.
    pub fn new(atoms: &'a [Atom]) -> Self {
        Self {
            atoms,
            by_upper: vec![None; atoms.len()],
            known: HashMap::new(),
        }
    }

    /// The decays of a level of one of the atoms.
    pub fn of(&mut self, atom: usize, level: &Level) -> Arc<Decays> {
        if let Some(known) = self.known.get(&(atom, level.number)) {
            return Arc::clone(known);
        }
        let found = Arc::new(self.find(atom, level));
        self.known.insert((atom, level.number), Arc::clone(&found));
        found
    }

    fn held(&mut self, atom: usize, upper: u32) -> Vec<Strength> {
        let strengths = &self.atoms[atom].spectrum.strengths;
        let index = self.by_upper[atom].get_or_insert_with(|| {
            let mut index: HashMap<u32, Vec<usize>> = HashMap::new();
            for (at, strength) in strengths.iter().enumerate() {
                if let Some(upper) = strength.upper {
                    index.entry(upper).or_default().push(at);
                }
            }
            index
        });
        let at = index.get(&upper).map_or(&[][..], Vec::as_slice);
        at.iter().map(|&at| strengths[at]).collect()
    }

    fn find(&mut self, atom: usize, level: &Level) -> Decays {
        let this = &self.atoms[atom];
        let mut decays = Vec::new();
        for strength in self.held(atom, level.number) {
            let lower = strength
                .lower
                .and_then(|l| this.spectrum.levels.get(l as usize));
            if let Some(lower) = lower {
                add(&mut decays, lower, strength.rate_per_s);
            }
        }
        for lower in below(&this.spectrum.levels, level) {
            add(&mut decays, lower, None);
        }
        let mut measured_ns = this
            .lifetimes
            .get(&level.number)
            .map(|l| (l.lifetime_ns, l.uncertainty_ns));
        if let Some((mixture, twin)) = self.twin(atom, level) {
            let other = self.of(mixture, &twin);
            measured_ns = measured_ns.or(other.measured_ns);
            for decay in &other.decays {
                if !decays
                    .iter()
                    .any(|d| same_level(&decay.lower, &d.lower) && d.rate_per_s.is_some())
                {
                    decays.retain(|d| !same_level(&decay.lower, &d.lower));
                    decays.push(decay.clone());
                }
            }
        }
        Decays {
            sum_per_s: decays.iter().filter_map(|d| d.rate_per_s).sum(),
            decays,
            measured_ns,
            excited_states_listed: this.lists_excited_states()
                || this
                    .mixture
                    .is_some_and(|m| self.atoms[m].lists_excited_states()),
        }
    }

    /// The same level in the natural mixture, for an isotope.
    fn twin(&self, atom: usize, level: &Level) -> Option<(usize, Arc<Level>)> {
        let mixture = self.atoms[atom].mixture?;
        let levels = &self.atoms[mixture].spectrum.levels;
        let twin = levels.iter().find(|other| same_level(level, other))?;
        Some((mixture, Arc::clone(twin)))
    }

    /// Whether a line leads back to its start, and where else its upper level goes.
    pub fn cycling(&mut self, atom: usize, lower: &Level, upper: &Level) -> Cycling {
        let decays = self.of(atom, upper);
        let branching = self.atoms[atom]
            .branching
            .get(&(lower.number, upper.number))
            .copied();
        let elsewhere: Vec<&Decay> = decays
            .decays
            .iter()
            .filter(|d| !same_level(&d.lower, lower))
            .collect();
        let rated: f64 = elsewhere.iter().filter_map(|d| d.rate_per_s).sum();
        match branching {
            // The papers give no other decay of any weight.
            Some((fraction, _)) if fraction >= 1.0 && rated == 0.0 => return Cycling::Closed,
            Some((fraction, _)) if fraction < 1.0 => {
                return Cycling::Leaks {
                    fraction: 1.0 - fraction,
                };
            }
            _ => {}
        }
        if elsewhere.is_empty() {
            return match decays.excited_states_listed {
                true => Cycling::Closed,
                false => Cycling::Unrated,
            };
        }
        let back = decays.sum_per_s - rated;
        if elsewhere.iter().all(|d| d.rate_per_s.is_some()) && back > 0.0 {
            return Cycling::Leaks {
                fraction: rated / decays.sum_per_s,
            };
        }
        self.bounded(&decays, rated, back)
    }

    /// Some decays are not rated: what the lifetime leaves for them.
    fn bounded(&self, decays: &Decays, rated: f64, back: f64) -> Cycling {
        let Some((missing, sigma)) = decays.missing_fraction().filter(|_| back > 0.0) else {
            return match rated {
                r if r > 0.0 && back > 0.0 => Cycling::Leaks {
                    fraction: r / decays.sum_per_s,
                },
                _ => Cycling::Unrated,
            };
        };
        let total = decays.total_per_s().unwrap_or(decays.sum_per_s);
        let known = rated / total;
        if missing > 2.0 * sigma {
            Cycling::Leaks {
                fraction: (known + missing).min(1.0),
            }
        } else if rated > 0.0 {
            Cycling::Leaks { fraction: known }
        } else {
            Cycling::AtMost {
                fraction: (missing.max(0.0) + 2.0 * sigma).min(1.0),
            }
        }
    }
}

fn add(decays: &mut Vec<Decay>, lower: &Arc<Level>, rate_per_s: Option<f64>) {
    match decays.iter_mut().find(|d| d.lower.number == lower.number) {
        Some(decay) => {
            if let Some(rate) = rate_per_s {
                *decay.rate_per_s.get_or_insert(0.0) += rate;
            }
        }
        None => decays.push(Decay {
            lower: Arc::clone(lower),
            rate_per_s,
        }),
    }
}

/// Levels below that electric dipole radiation can reach.
fn below<'l>(levels: &'l [Arc<Level>], upper: &'l Level) -> impl Iterator<Item = &'l Arc<Level>> {
    levels
        .iter()
        .take_while(|l| l.energy_per_cm < upper.energy_per_cm)
        .filter(|l| dipole_allowed(l, upper) == Some(true))
}
