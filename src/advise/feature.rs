//! Features: the components of one multiplet of one species that the instrument sees as one line.

use std::collections::HashMap;

use vocabulary::atom::Species;
use vocabulary::spectrum::{Level, Line};

/// What names a multiplet: configuration and term of both ends; for one-electron ions the two
/// principal quantum numbers, since their terms of one shell differ by fine structure alone.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Multiplet<'l> {
    /// Lower and upper label.
    Labels([&'l str; 4]),
    /// Lower and upper principal quantum number.
    Shells(&'l str, &'l str),
}

/// The multiplet that a line belongs to; `None` where its levels carry no label.
pub fn multiplet(line: &Line) -> Option<Multiplet<'_>> {
    let (lower, upper) = (line.lower.as_deref()?, line.upper.as_deref()?);
    if line.species.is_one_electron() {
        return Some(Multiplet::Shells(shell(lower)?, shell(upper)?));
    }
    Some(Multiplet::Labels([
        lower.configuration.as_deref()?,
        lower.term.as_deref()?,
        upper.configuration.as_deref()?,
        upper.term.as_deref()?,
    ]))
}

/// The digits of `12p`.
fn shell(level: &Level) -> Option<&str> {
    let configuration = level.configuration.as_deref()?;
    let end = configuration.find(|c: char| !c.is_ascii_digit())?;
    (end > 0).then(|| &configuration[..end])
}

/// Groups lines of any species into features. `lines` are (species, vacuum nm) in any order with
/// their line; the result lists, feature by feature, indices into `lines` by wavelength.
pub fn group(lines: &[(f64, &Line)], fwhm_nm: impl Fn(f64) -> f64) -> Vec<Vec<usize>> {
    let mut open: HashMap<(Species, Multiplet<'_>), usize> = HashMap::new();
    let mut features: Vec<Vec<usize>> = Vec::new();
    let mut order: Vec<usize> = (0..lines.len()).collect();
    order.sort_by(|&a, &b| lines[a].0.total_cmp(&lines[b].0));
    for index in order {
        let (nm, line) = lines[index];
        let Some(multiplet) = multiplet(line) else {
            features.push(vec![index]);
            continue;
        };
        let key = (line.species, multiplet);
        let near = open.get(&key).copied().filter(|&feature| {
            let last = features[feature].last().map(|&i| lines[i].0);
            last.is_some_and(|last| nm - last <= fwhm_nm(nm))
        });
        match near {
            Some(feature) => features[feature].push(index),
            None => {
                open.insert(key, features.len());
                features.push(vec![index]);
            }
        }
    }
    features
}

/// Numbers from 0 in the order of first appearance.
pub fn numbered<T: std::hash::Hash + Eq + Copy>(keys: &[T]) -> Vec<usize> {
    let mut numbers = std::collections::HashMap::new();
    keys.iter()
        .map(|key| {
            let next = numbers.len();
            *numbers.entry(*key).or_insert(next)
        })
        .collect()
}
