//! The scope ledger: what is held of a species, band by band, and what its sources claim there.

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::spectrum::{Completeness, Line, LineKind, PositionOrigin, Scope};

/// The claim that counts at a vacuum wavelength (nm): the most complete, then that of the widest
/// band. Verdicts go by it.
pub fn best_claim(scopes: &[Scope], nm: f64) -> Option<&Scope> {
    let here = |s: &&Scope| (s.from_nm..=s.to_nm).contains(&nm);
    scopes.iter().filter(here).max_by(|a, b| {
        (a.completeness.cmp(&b.completeness))
            .then((b.to_nm - b.from_nm).total_cmp(&(a.to_nm - a.from_nm)))
    })
}

/// One band of one species.
#[derive(Clone, Debug, PartialEq)]
pub struct Band {
    /// Whose.
    pub species: Species,
    /// Start, vacuum nm.
    pub from_nm: f64,
    /// End, vacuum nm.
    pub to_nm: f64,
    /// The claim that counts; `None` where no source claims anything.
    pub claim: Option<Completeness>,
    /// Keys of the sources that claim it.
    pub claimed_by: Vec<Arc<str>>,
    /// What is held there.
    pub held: Held,
}

/// How many lines are held, by what they rest on.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Held {
    /// Lines that a table lists.
    pub listed: usize,
    /// Of these, lines with a rate.
    pub rated: usize,
    /// Listed lines whose position comes from a paper.
    pub paper: usize,
    /// Listed lines whose position was entered by hand.
    pub curated: usize,
    /// Listed lines whose position comes from a model atom.
    pub model: usize,
    /// Lines that no table lists and nobody rates, but that follow from levels.
    pub ritz: usize,
    /// Lines that no table lists and that the calculator made or rated.
    pub computed: usize,
}

impl Held {
    fn count(&mut self, line: &Line, kind: &str) {
        match line {
            _ if line.is_unlisted_and_unrated() => self.ritz += 1,
            _ if line.kind == LineKind::Ritz => self.computed += 1,
            _ if line.position_origin == PositionOrigin::Computed => self.computed += 1,
            _ => {
                self.listed += 1;
                self.rated += usize::from(line.rate_per_s.is_some());
                match kind {
                    "paper" => self.paper += 1,
                    "curated" => self.curated += 1,
                    "model" => self.model += 1,
                    _ => {}
                }
            }
        }
    }
}

/// The bands of a species by wavelength; `kind_of` gives the kind of a source by its key.
pub fn bands(
    species: Species,
    scopes: &[Scope],
    lines: &[Line],
    kind_of: &dyn Fn(&str) -> String,
) -> Vec<Band> {
    let mut edges: Vec<f64> = scopes.iter().flat_map(|s| [s.from_nm, s.to_nm]).collect();
    let place = |l: &Line| 1e7 / l.wavenumber_per_cm;
    edges.extend(lines.iter().map(place).reduce(f64::min));
    edges.extend(lines.iter().map(place).reduce(f64::max));
    edges.sort_by(f64::total_cmp);
    edges.dedup();
    let mut bands: Vec<Band> = Vec::new();
    for pair in edges.windows(2) {
        let middle = 0.5 * (pair[0] + pair[1]);
        let claim = best_claim(scopes, middle).map(|s| s.completeness);
        let claimed_by = claimants(scopes, middle, claim);
        match bands.last_mut() {
            Some(last) if last.claim == claim && last.claimed_by == claimed_by => {
                last.to_nm = pair[1];
            }
            _ => bands.push(Band {
                species,
                from_nm: pair[0],
                to_nm: pair[1],
                claim,
                claimed_by,
                held: Held::default(),
            }),
        }
    }
    for line in lines {
        let after = bands.partition_point(|b| b.to_nm < place(line));
        let last = bands.len().saturating_sub(1);
        if let Some(band) = bands.get_mut(after.min(last)) {
            band.held.count(line, &kind_of(&line.position_source));
        }
    }
    bands.retain(|b| b.claim.is_some() || b.held != Held::default());
    bands
}

fn claimants(scopes: &[Scope], nm: f64, claim: Option<Completeness>) -> Vec<Arc<str>> {
    let mut keys: Vec<Arc<str>> = scopes
        .iter()
        .filter(|s| Some(s.completeness) == claim && (s.from_nm..=s.to_nm).contains(&nm))
        .map(|s| s.source.clone())
        .collect();
    keys.sort();
    keys.dedup();
    keys
}

#[cfg(test)]
mod tests {
    use super::*;

    fn scope(from_nm: f64, to_nm: f64, completeness: Completeness, source: &str) -> Scope {
        Scope {
            from_nm,
            to_nm,
            completeness,
            source: Arc::from(source),
        }
    }

    #[test]
    fn bands_part_where_the_best_claim_changes() {
        use Completeness::{Full, GroundTerm, Strong};
        let scopes = [
            scope(100.0, 900.0, GroundTerm, "b"),
            scope(100.0, 900.0, GroundTerm, "a"),
            scope(300.0, 600.0, Strong, "c"),
            scope(400.0, 500.0, Full, "d"),
        ];
        let iron = Species::new(26, 1);
        let bands = bands(iron, &scopes, &[], &|_| String::new());
        let found: Vec<(f64, f64, Completeness, usize)> = bands
            .iter()
            .map(|b| (b.from_nm, b.to_nm, b.claim.unwrap(), b.claimed_by.len()))
            .collect();
        let expected = [
            (100.0, 300.0, GroundTerm, 2),
            (300.0, 400.0, Strong, 1),
            (400.0, 500.0, Full, 1),
            (500.0, 600.0, Strong, 1),
            (600.0, 900.0, GroundTerm, 2),
        ];
        assert_eq!(found, expected);
    }
}
