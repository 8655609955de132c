//! Levels that break the Rydberg–Ritz curve of their series.

use vocabulary::atom::{limit, mass_u};
use vocabulary::light::constants::{ELECTRON_MASS_U, RYDBERG_PER_CM};
use vocabulary::report::Reports;

use super::finding::{Finding, Place, Rule};
use crate::calc::series::{
    LabelledLevel, Limit, Member, Series, SeriesError, SeriesInput, fit, group_series,
};

/// Members below which a curve judges nobody.
const LEAST_MEMBERS: usize = 5;

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    let labelled: Vec<LabelledLevel<'_>> = of
        .levels
        .iter()
        .filter(|l| !l.computed)
        .filter_map(|level| {
            Some(LabelledLevel {
                energy_per_cm: level.energy_per_cm,
                uncertainty_per_cm: level.uncertainty_per_cm,
                configuration: level.configuration.as_deref()?,
                term: level.term.as_deref().unwrap_or(""),
                twice_j: level.j?.twice(),
            })
        })
        .collect();
    for series in group_series(&labelled) {
        if series.members.len() >= LEAST_MEMBERS {
            outliers(of, &series, found);
        }
    }
}

/// The members that the fit sets aside, with their pull.
fn outliers(of: &Reports, series: &Series, found: &mut Vec<Finding>) {
    let Some(input) = input(of, series) else {
        return;
    };
    let mut curve = None;
    let (apart, misfit): (Vec<(u32, f64)>, Option<f64>) = match fit(&input) {
        Ok(fit) => {
            let apart = fit.perturbed.clone();
            curve = Some(fit);
            (apart, None)
        }
        Err(SeriesError::Perturbed { members, misfit }) => {
            (members.iter().map(|n| (*n, misfit)).collect(), Some(misfit))
        }
        Err(_) => return,
    };
    // A series that is perturbed as a whole is physics, not a slip: one finding for all.
    if let (Some(misfit), true) = (misfit, apart.len() > series.members.len() / 4) {
        found.push(perturbed_series(of, series, misfit));
        return;
    }
    for (n, pull) in apart {
        let expected = curve.as_ref().and_then(|c| c.predict(n).ok());
        found.extend(outlier(
            of,
            series,
            n,
            pull,
            expected.map(|p| p.energy_per_cm),
        ));
    }
}

fn input(of: &Reports, series: &Series) -> Option<SeriesInput> {
    let core = series.core_on_ground().ok()?;
    let limit = limit(of.species)?;
    let mass = mass_u(of.species)?;
    let strangers = of.sources.iter().map(|s| s.scale_at(limit.energy_per_cm));
    let scale = strangers.fold(0.0, f64::max).min(1.0);
    Some(SeriesInput {
        core_charge: u32::from(of.species.core_charge()),
        rydberg_per_cm: RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / mass),
        l: series.key.l,
        core,
        limit: Limit::Fixed {
            per_cm: limit.energy_per_cm,
            sigma_per_cm: limit.uncertainty_per_cm.hypot(scale),
        },
        members: members(of, series),
    })
}

/// The members; where they come from several sources, their σ holds what each source declares for
/// its scale.
fn members(of: &Reports, series: &Series) -> Vec<Member> {
    let source = |member: &Member| {
        of.levels
            .iter()
            .find(|l| l.energy_per_cm == member.energy_per_cm)
            .map(|l| l.source)
    };
    let first = series.members.first().and_then(source);
    let mixed = series.members.iter().any(|m| source(m) != first);
    let widened = |member: &Member| {
        let scale = source(member)
            .filter(|_| mixed)
            .map_or(0.0, |s| of.sources[s].scale_at(member.energy_per_cm));
        Member {
            uncertainty_per_cm: member.uncertainty_per_cm.hypot(scale),
            ..*member
        }
    };
    series.members.iter().map(widened).collect()
}

fn name(series: &Series) -> String {
    let letter = crate::calc::series::orbital_letter(series.key.l).unwrap_or('?');
    let j = f64::from(series.key.twice_j) / 2.0;
    format!("{} n{letter} {} J={j}", series.key.core, series.key.term)
        .trim()
        .to_owned()
}

fn perturbed_series(of: &Reports, series: &Series, misfit: f64) -> Finding {
    let energy = series.members.last().map_or(f64::NAN, |m| m.energy_per_cm);
    Finding {
        rule: Rule::SeriesOutlier,
        species: of.species,
        source: source_at(of, energy),
        place: Place::whole(format!("{} series {}", of.species, name(series))),
        size: misfit,
        unit: "misfit",
        advice: "no smooth quantum defect describes its members: levels of another configuration \
                 cross it, or a label is wrong"
            .to_owned(),
    }
}

/// The source of the concluded level at an energy.
fn source_at(of: &Reports, energy_per_cm: f64) -> String {
    of.levels
        .iter()
        .find(|l| l.energy_per_cm == energy_per_cm)
        .map_or_else(|| "?".into(), |l| of.sources[l.source].key.to_string())
}

fn outlier(
    of: &Reports,
    series: &Series,
    n: u32,
    pull: f64,
    expected_per_cm: Option<f64>,
) -> Option<Finding> {
    let member = series.members.iter().find(|m| m.n == n)?;
    let level = of
        .levels
        .iter()
        .find(|l| l.energy_per_cm == member.energy_per_cm)?;
    let (_, report) = level.reports.iter().find(|(s, _)| *s == level.source)?;
    let source = &of.sources[level.source];
    let lead = expected_per_cm.map_or_else(
        || format!("do not lead to n = {n} here"),
        |e| format!("lead to {e:.2} for n = {n}"),
    );
    Some(Finding {
        rule: Rule::SeriesOutlier,
        species: of.species,
        source: source.key.to_string(),
        place: Place::level(of.species, source.levels.get(*report)?),
        size: pull,
        unit: "sigma",
        advice: format!(
            "the other {} members of the series {} {lead}: check energy and label, or note which \
             configuration perturbs it",
            series.members.len() - 1,
            name(series),
        ),
    })
}
