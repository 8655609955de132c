//! Selection rules: parity and ΔJ of lines, J of terms.
//!
//! Electric dipole lines change parity, with ΔJ = 0 or ±1 and not 0–0. Magnetic dipole and electric
//! quadrupole lines keep parity, magnetic quadrupole lines change it with ΔJ = ±2; all three are
//! slow (common practice; e.g. Cowan, *The Theory of Atomic Structure and Spectra*, 1981, ch. 14).

use vocabulary::atom::{HalfInteger, Term};
use vocabulary::report::{ReportedLevel, ReportedLine, ReportedSource, Reports};
use vocabulary::spectrum::LineKind;

use super::finding::{Finding, Place, Rule};

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    for source in &of.sources {
        for level in &source.levels {
            found.extend(term_j(of, source, level));
        }
        for line in &source.lines {
            if matches!(line.kind, LineKind::Line | LineKind::Isotope) {
                found.extend(line_rules(of, source, line));
            }
        }
    }
}

fn term_j(of: &Reports, source: &ReportedSource, level: &ReportedLevel) -> Option<Finding> {
    let (term, j) = (level.term.as_deref()?, level.j?);
    let allowed = Term::parse(term).allowed_j();
    (!allowed.is_empty() && !allowed.contains(&j)).then(|| {
        let list: Vec<String> = allowed.iter().map(|j| j.value().to_string()).collect();
        Finding {
            rule: Rule::TermJ,
            species: of.species,
            source: source.key.to_string(),
            place: Place::level(of.species, level),
            size: j.value(),
            unit: "J",
            advice: format!(
                "{term} has J = {} only: correct J or the term, or leave the term empty",
                list.join(", ")
            ),
        }
    })
}

/// Fastest forbidden line that is taken for one, s⁻¹: rates of magnetic dipole lines grow with the
/// third power of the wavenumber, and so does the bound.
fn slow_per_s(wavenumber_per_cm: f64) -> f64 {
    // A(M1) = 2.697e-11 σ³ S with S ≤ 20 (common practice), and never less than 100 s⁻¹.
    let dipole = 2.697e-11 * wavenumber_per_cm.powi(3) * 20.0;
    dipole.max(100.0)
}

fn line_rules(of: &Reports, source: &ReportedSource, line: &ReportedLine) -> Option<Finding> {
    let (lower, upper) = source.ends(line)?;
    let wavenumber = source.position(line)?.0;
    let momenta = lower.j.zip(upper.j);
    let slow = line
        .rate_per_s
        .is_none_or(|rate| rate <= slow_per_s(wavenumber));
    let finding = |rule, size, unit, advice: String| {
        Some(Finding {
            rule,
            species: of.species,
            source: source.key.to_string(),
            place: Place::line(of.species, line, wavenumber),
            size,
            unit,
            advice,
        })
    };
    let same_parity = lower.parity.zip(upper.parity).map(|(a, b)| a == b);
    if let Some((a, b)) = momenta {
        let step = f64::from(a.twice().abs_diff(b.twice())) / 2.0;
        if !momentum_allowed(a, b, slow) {
            let advice = format!(
                "J = {} and J = {} do not combine{}: check the J of its levels and which levels it \
                 belongs to",
                a.value(),
                b.value(),
                if slow { "" } else { " at this rate" },
            );
            return finding(Rule::DeltaJ, step, "steps of J", advice);
        }
    }
    if same_parity == Some(true) && !slow {
        let rate = line.rate_per_s.unwrap_or(f64::NAN);
        let advice = "both levels have the same parity and the rate is that of an allowed line: \
                      check the terms of its levels and which levels it belongs to";
        return finding(Rule::Parity, rate, "s-1", advice.to_owned());
    }
    None
}

/// Dipole lines: ΔJ ≤ 1 and not 0–0; slow ones may be quadrupole lines, ΔJ ≤ 2 ≤ J + J′.
fn momentum_allowed(a: HalfInteger, b: HalfInteger, slow: bool) -> bool {
    let (step, sum) = (a.twice().abs_diff(b.twice()), a.twice() + b.twice());
    if !step.is_multiple_of(2) {
        return false;
    }
    (step <= 2 && sum >= 2) || (slow && step <= 4 && sum >= 4)
}
