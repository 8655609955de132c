//! Grouping the labelled levels of one species into Rydberg series.

use std::collections::BTreeMap;

use super::label::{OuterElectron, bare_term, outer_electron, parents, shells};
use super::{Core, Member, SeriesError};

/// A level as its label tells it.
#[derive(Clone, Debug, PartialEq)]
pub struct LabelledLevel<'a> {
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ of the energy, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Configuration, shells separated by blanks.
    pub configuration: &'a str,
    /// Term with a trailing `o` for odd parity; may be empty.
    pub term: &'a str,
    /// Twice J.
    pub twice_j: u16,
}

/// What the members of a series share.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SeriesKey {
    /// Core: shells and parent terms.
    pub core: String,
    /// Orbital angular momentum of the outer electron.
    pub l: u32,
    /// Term without its numbering letter.
    pub term: String,
    /// Twice J.
    pub twice_j: u16,
}

/// A series as the labels group it.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// What its members share.
    pub key: SeriesKey,
    /// Members in order of n.
    pub members: Vec<Member>,
    /// Members left out because their outer shell holds several equivalent electrons
    /// (`4s2` in the series `4s ns`): exchange inside the shell moves them off the Ritz curve.
    pub equivalent: Vec<u32>,
    /// Values of n between the lowest and highest member for which no level is held.
    pub missing: Vec<u32>,
    /// Values of n that two levels claim; neither is used.
    pub contested: Vec<u32>,
    /// Whether the core is the ground state of the next ion, so that the ionisation energy
    /// is the limit.
    pub ground_core: bool,
}

impl Series {
    /// Kind of the core, if the ionisation energy is the limit of the series.
    ///
    /// # Errors
    /// [`SeriesError::CoreChanging`] for an excited core, [`SeriesError::SplitCore`] for a core
    /// with L > 0 whose J the label does not give.
    pub fn core_on_ground(&self) -> Result<Core, SeriesError> {
        if !self.ground_core {
            let letter = super::orbital_letter(self.key.l).unwrap_or('?');
            return Err(SeriesError::CoreChanging {
                configuration: format!("{} n{letter}", self.key.core).trim().to_owned(),
            });
        }
        if !single_limit(&self.key.core) {
            return Err(SeriesError::SplitCore {
                core: self.key.core.clone(),
            });
        }
        Ok(Core::of_label(&self.key.core))
    }
}

/// Whether a core has one limit: an S term, a named J, a closed shell or an s shell.
fn single_limit(core: &str) -> bool {
    if let Some(parent) = parents(core).last() {
        let bare: String = parent.chars().skip_while(char::is_ascii_digit).collect();
        return bare.starts_with('S')
            || bare.contains('/')
            || bare.ends_with(|c: char| c.is_ascii_digit());
    }
    shells(core)
        .last()
        .is_none_or(|(_, l, q)| *l == 0 || *q == 4 * l + 2)
}

/// Groups levels by core, l, term and J, in that order.
///
/// Levels whose label shows no outermost electron belong to no series and are left out.
pub fn group_series(levels: &[LabelledLevel<'_>]) -> Vec<Series> {
    let grounds = ground_cores(levels);
    let mut groups: BTreeMap<SeriesKey, Vec<(OuterElectron, &LabelledLevel<'_>)>> = BTreeMap::new();
    for level in levels {
        if let Some(outer) = outer_electron(level.configuration) {
            let key = SeriesKey {
                core: outer.core.clone(),
                l: outer.l,
                term: bare_term(level.term).to_owned(),
                twice_j: level.twice_j,
            };
            groups.entry(key).or_default().push((outer, level));
        }
    }
    groups
        .into_iter()
        .map(|(key, found)| collect(key, &found, &grounds))
        .collect()
}

fn collect(
    key: SeriesKey,
    found: &[(OuterElectron, &LabelledLevel<'_>)],
    grounds: &GroundCores,
) -> Series {
    let mut by_n: BTreeMap<u32, Vec<&LabelledLevel<'_>>> = BTreeMap::new();
    let mut equivalent = Vec::new();
    for (outer, level) in found {
        if outer.occupancy > 1 {
            equivalent.push(outer.n);
        } else {
            by_n.entry(outer.n).or_default().push(level);
        }
    }
    equivalent.sort_unstable();
    let contested = by_n
        .iter()
        .filter(|(_, l)| l.len() > 1)
        .map(|(n, _)| *n)
        .collect();
    let members: Vec<Member> = by_n
        .iter()
        .filter(|(_, levels)| levels.len() == 1)
        .map(|(n, levels)| Member {
            n: *n,
            energy_per_cm: levels[0].energy_per_cm,
            uncertainty_per_cm: levels[0].uncertainty_per_cm,
        })
        .collect();
    Series {
        missing: gaps(&members),
        ground_core: grounds.contain(&key.core),
        key,
        members,
        equivalent,
        contested,
    }
}

fn gaps(members: &[Member]) -> Vec<u32> {
    members
        .windows(2)
        .flat_map(|pair| pair[0].n + 1..pair[1].n)
        .collect()
}

/// Cores that the ground configuration of the species leaves when one electron is taken away.
struct GroundCores {
    shells: Option<Vec<(u32, u32, u32)>>,
    best_parent: Option<String>,
}

impl GroundCores {
    fn contain(&self, core: &str) -> bool {
        let Some(expected) = &self.shells else {
            return false;
        };
        let mut held = shells(core);
        held.sort_unstable();
        if !held
            .iter()
            .rev()
            .zip(expected.iter().rev())
            .all(|(a, b)| a == b)
            || held.len() > expected.len()
        {
            return false;
        }
        match parents(core).last() {
            None => true,
            Some(parent) => self.best_parent.as_deref() == Some(*parent),
        }
    }
}

fn ground_cores(levels: &[LabelledLevel<'_>]) -> GroundCores {
    let ground = levels
        .iter()
        .filter(|level| !level.configuration.trim().is_empty())
        .min_by(|a, b| a.energy_per_cm.total_cmp(&b.energy_per_cm))
        .and_then(|level| outer_electron(level.configuration));
    let Some(ground) = ground else {
        return GroundCores {
            shells: None,
            best_parent: None,
        };
    };
    let mut expected = shells(&ground.core);
    expected.sort_unstable();
    let best_parent = levels
        .iter()
        .filter_map(|level| outer_electron(level.configuration))
        .filter(|outer| {
            let mut held = shells(&outer.core);
            held.sort_unstable();
            held == expected
        })
        .filter_map(|outer| Some((*parents(&outer.core).last()?).to_owned()))
        .max_by(|a, b| {
            hund(a, &expected)
                .partial_cmp(&hund(b, &expected))
                .unwrap_or(std::cmp::Ordering::Equal)
        });
    GroundCores {
        shells: Some(expected),
        best_parent,
    }
}

/// Order of parent terms by Hund's rules: multiplicity, L, and J where the label names one
/// (largest J lowest for a shell more than half full).
fn hund(parent: &str, core: &[(u32, u32, u32)]) -> (u32, u32, f64) {
    let text = parent.replace(['<', '>'], "");
    let digits: String = text.chars().take_while(char::is_ascii_digit).collect();
    let multiplicity = digits.parse().unwrap_or(0);
    let letter = text
        .chars()
        .nth(digits.len())
        .map_or(' ', |c| c.to_ascii_lowercase());
    let orbital = super::orbital_number(letter).unwrap_or(0);
    let rest: String = text
        .chars()
        .skip(digits.len() + 1)
        .filter(|c| *c != 'o')
        .collect();
    let j = match rest.split_once('/') {
        Some((top, bottom)) => {
            top.parse().unwrap_or(0.0) / bottom.parse::<f64>().unwrap_or(1.0).max(1.0)
        }
        None => rest.parse().unwrap_or(-1.0),
    };
    let more_than_half = core
        .iter()
        .find(|(_, l, q)| *q < 4 * l + 2)
        .is_some_and(|(_, l, q)| *q > 2 * l + 1);
    (multiplicity, orbital, if more_than_half { j } else { -j })
}
