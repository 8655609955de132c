//! The best report for a quantity.

use super::SourceKind;

/// A report as far as its choice goes.
#[derive(Clone, Copy, Debug)]
pub(super) struct Candidate {
    /// Made by calculation.
    pub computed: bool,
    /// Kind of its source.
    pub kind: SourceKind,
    /// 1 σ in any one unit; `None` comes last.
    pub uncertainty: Option<f64>,
    /// Index of the source in rank.
    pub source: usize,
    /// Index of the report in the source.
    pub report: usize,
}

/// Like uncertainties: the same power of two, so that likeness is a property of each report and
/// the choice does not depend on the order of comparison.
fn octave(uncertainty: Option<f64>) -> i32 {
    match uncertainty {
        Some(u) if u > 0.0 => u.log2().floor() as i32,
        Some(_) => i32::MIN,
        None => i32::MAX,
    }
}

/// Smallest 1 σ; at like σ a measurement before a calculation, a paper before memory, then the
/// rank of the source. A computed value never displaces a measured one.
pub(super) fn best_by_uncertainty(
    candidates: impl Iterator<Item = Candidate>,
) -> Option<Candidate> {
    candidates.min_by(|a, b| {
        (a.computed.cmp(&b.computed))
            .then(octave(a.uncertainty).cmp(&octave(b.uncertainty)))
            .then(a.kind.cmp(&b.kind))
            .then(a.source.cmp(&b.source))
            .then(a.report.cmp(&b.report))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn candidate(computed: bool, kind: SourceKind, uncertainty: f64, source: usize) -> Candidate {
        Candidate {
            computed,
            kind,
            uncertainty: Some(uncertainty),
            source,
            report: 0,
        }
    }

    #[test]
    fn smaller_sigma_wins_then_paper_and_computed_never_displaces() {
        let all = [
            candidate(true, SourceKind::Computed, 1e-6, 3),
            candidate(false, SourceKind::Curated, 0.010, 2),
            candidate(false, SourceKind::Paper, 0.012, 1),
            candidate(false, SourceKind::Paper, 0.1, 0),
        ];
        assert_eq!(
            best_by_uncertainty(all.into_iter()).map(|c| c.source),
            Some(1)
        );
        let alone = best_by_uncertainty(all[..1].iter().copied());
        assert_eq!(alone.map(|c| c.source), Some(3));
    }
}
