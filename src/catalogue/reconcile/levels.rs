//! Which level reports mean the same level.

use std::collections::HashSet;

use vocabulary::atom::Species;

use super::choose::{Candidate, best_by_uncertainty};
use super::label::Agreement;
use super::{Apart, ApartReason, DerivedLevel, Label, LevelReport, SourceReports};

/// A level in the making: the reports that joined it.
struct Anchor {
    energy_per_cm: f64,
    uncertainty_per_cm: f64,
    scale_per_cm: f64,
    label: Label,
    twice_j: Option<u16>,
    g: Option<f64>,
    reports: Vec<(usize, usize)>,
}

/// A report that may mean an anchor; the better the smaller.
#[derive(Clone, Copy, PartialEq)]
struct Pairing {
    class: u8,
    deviation: f64,
    report: usize,
    anchor: usize,
}

/// The levels, the level that each report joined, the reports kept apart.
pub(super) type Joined = (Vec<DerivedLevel>, Vec<Vec<Option<usize>>>, Vec<Apart>);

/// Joins level reports, source by source in rank.
pub(super) fn join(species: Species, reports: &[SourceReports]) -> Joined {
    let mut anchors: Vec<Anchor> = Vec::new();
    let mut anchor_of: Vec<Vec<usize>> = Vec::with_capacity(reports.len());
    let mut apart = Vec::new();
    for (source, of) in reports.iter().enumerate() {
        let mut taken = pairings(species, of, &anchors, source, &mut apart);
        let mut order: Vec<usize> = (0..of.levels.len()).collect();
        order.sort_by(|&a, &b| {
            of.levels[a]
                .energy_per_cm
                .total_cmp(&of.levels[b].energy_per_cm)
        });
        let joined = order
            .iter()
            .filter_map(|&report| Some((report, taken[report]?)));
        let mut known = Known::new(of, joined.collect());
        for report in order {
            let place = taken[report].unwrap_or_else(|| {
                same_in_source(species, of, report, &known).unwrap_or_else(|| {
                    known.fresh.push((report, anchors.len()));
                    anchors.push(Anchor::new(&of.levels[report], of));
                    anchors.len() - 1
                })
            });
            taken[report] = Some(place);
            anchors[place].take(&of.levels[report], source, report);
        }
        anchor_of.push(taken.into_iter().flatten().collect());
        anchors_in_order(&mut anchors, &mut anchor_of);
    }
    conclude(reports, anchors, anchor_of, apart)
}

/// Reports of one source whose anchor is known, with it; both lists by energy.
struct Known {
    /// Those that joined an anchor of a source before.
    joined: Vec<(usize, usize)>,
    /// Those that became one.
    fresh: Vec<(usize, usize)>,
    /// Largest 1 σ of the source, cm⁻¹.
    widest: f64,
}

impl Known {
    fn new(of: &SourceReports, joined: Vec<(usize, usize)>) -> Self {
        let sigmas = of.levels.iter().map(|level| level.uncertainty_per_cm);
        Self {
            joined,
            fresh: Vec::new(),
            widest: sigmas.fold(0.0, f64::max),
        }
    }

    /// Those within a reach of an energy.
    fn near<'k>(
        &'k self,
        of: &'k SourceReports,
        energy_per_cm: f64,
        reach: f64,
    ) -> impl Iterator<Item = (usize, usize)> + 'k {
        let energy = move |entry: &(usize, usize)| of.levels[entry.0].energy_per_cm;
        [&self.joined, &self.fresh]
            .into_iter()
            .flat_map(move |list| {
                let from = list.partition_point(|entry| energy(entry) < energy_per_cm - reach);
                list[from..]
                    .iter()
                    .take_while(move |entry| energy(entry) <= energy_per_cm + reach)
                    .copied()
            })
    }
}

/// A row that repeats a level of its own source: same label, same J, same energy within 3 σ; where
/// the label names configuration and term, the uncertainty of the source's scale is added, since
/// some sources are made of parts on scales of their own. The nearest in energy is taken.
fn same_in_source(
    species: Species,
    of: &SourceReports,
    report: usize,
    known: &Known,
) -> Option<usize> {
    let level = &of.levels[report];
    let named = level.label.configuration.is_some() && level.label.term.is_some();
    let scale = if named {
        of.source.scale_at(level.energy_per_cm)
    } else {
        0.0
    };
    let distance = |other: usize| (level.energy_per_cm - of.levels[other].energy_per_cm).abs();
    let same = |&(earlier, _): &(usize, usize)| {
        let other = &of.levels[earlier];
        let sigma = level.uncertainty_per_cm.hypot(other.uncertainty_per_cm);
        level.twice_j == other.twice_j
            && level.g == other.g
            && same_name(&level.label, &other.label, species)
            && distance(earlier) <= 3.0 * sigma + scale
    };
    let reach = 3.0 * level.uncertainty_per_cm.hypot(known.widest) + scale;
    known
        .near(of, level.energy_per_cm, reach)
        .filter(same)
        .min_by(|a, b| distance(a.0).total_cmp(&distance(b.0)).then(a.0.cmp(&b.0)))
        .map(|(_, anchor)| anchor)
}

/// One label, or one with and one without the parents of the same.
fn same_name(a: &Label, b: &Label, species: Species) -> bool {
    let parents = |l: &Label| l.configuration.as_ref().is_some_and(|c| c.contains('('));
    a == b || (parents(a) != parents(b) && a.agreement(b, species) == Agreement::Same)
}

/// Keeps anchors sorted by energy, so that neighbours are found by halving.
fn anchors_in_order(anchors: &mut Vec<Anchor>, anchor_of: &mut [Vec<usize>]) {
    let mut order: Vec<usize> = (0..anchors.len()).collect();
    order.sort_by(|&a, &b| {
        anchors[a]
            .energy_per_cm
            .total_cmp(&anchors[b].energy_per_cm)
    });
    let mut place = vec![0; anchors.len()];
    for (new, &old) in order.iter().enumerate() {
        place[old] = new;
    }
    let mut old: Vec<Option<Anchor>> = anchors.drain(..).map(Some).collect();
    anchors.extend(order.iter().filter_map(|&i| old[i].take()));
    for anchor in anchor_of.iter_mut().flatten() {
        *anchor = place[*anchor];
    }
}

/// The anchor of each report of one source, where there is one and it is the only one.
fn pairings(
    species: Species,
    of: &SourceReports,
    anchors: &[Anchor],
    source: usize,
    apart: &mut Vec<Apart>,
) -> Vec<Option<usize>> {
    let widest = anchors.iter().map(Anchor::reach).fold(0.0, f64::max);
    let by_report: Vec<Vec<Pairing>> = (0..of.levels.len())
        .map(|report| candidates(species, of, report, anchors, widest))
        .collect();
    let mut all: Vec<Pairing> = by_report.iter().flatten().copied().collect();
    all.sort_by(|a, b| {
        (a.class.cmp(&b.class))
            .then(a.deviation.total_cmp(&b.deviation))
            .then(a.report.cmp(&b.report))
            .then(a.anchor.cmp(&b.anchor))
    });
    let mut taken = vec![None; of.levels.len()];
    let mut claimed = vec![false; anchors.len()];
    let mut ambiguous = vec![false; of.levels.len()];
    for pair in &all {
        if taken[pair.report].is_some() || claimed[pair.anchor] || ambiguous[pair.report] {
            continue;
        }
        let open = |p: &&Pairing| p.class == pair.class && !claimed[p.anchor];
        if pair.class > 0 && by_report[pair.report].iter().filter(open).count() > 1 {
            let reason = ApartReason::SeveralCandidates;
            apart.push(Apart {
                source,
                report: pair.report,
                is_level: true,
                reason,
            });
            ambiguous[pair.report] = true;
            continue;
        }
        taken[pair.report] = Some(pair.anchor);
        claimed[pair.anchor] = true;
    }
    taken
}

/// All anchors that a report may mean.
fn candidates(
    species: Species,
    of: &SourceReports,
    report: usize,
    anchors: &[Anchor],
    widest: f64,
) -> Vec<Pairing> {
    let mut out = Vec::new();
    let level = &of.levels[report];
    let own_scale = of.source.scale_at(level.energy_per_cm);
    let reach = 3.0 * level.uncertainty_per_cm
        + own_scale
        + widest
        + one_electron_reach(species, level.energy_per_cm);
    let from = anchors.partition_point(|a| a.energy_per_cm < level.energy_per_cm - reach);
    for (offset, anchor) in anchors[from..].iter().enumerate() {
        if anchor.energy_per_cm > level.energy_per_cm + reach {
            break;
        }
        if !weights_agree(level, anchor) {
            continue;
        }
        let class = match level.label.agreement(&anchor.label, species) {
            Agreement::Same => 0,
            Agreement::Unknown => 1,
            Agreement::Otherwise => 2,
            Agreement::OtherTerm => 3,
            Agreement::Different => continue,
        };
        let sigma = level.uncertainty_per_cm.hypot(anchor.uncertainty_per_cm);
        let scale = own_scale
            + anchor.scale_per_cm
            + if class == 0 {
                one_electron_reach(species, level.energy_per_cm)
            } else {
                0.0
            };
        let difference = (level.energy_per_cm - anchor.energy_per_cm).abs();
        let bound = if class == 3 {
            sigma
        } else {
            3.0 * sigma + scale
        };
        if difference <= bound {
            let deviation = difference / (sigma + scale).max(f64::MIN_POSITIVE);
            out.push(Pairing {
                class,
                deviation,
                report,
                anchor: from + offset,
            });
        }
    }
    out
}

/// One-electron levels are named by n, l, j alone: scales of tables differ by 1e-5 at the most.
fn one_electron_reach(species: Species, energy_per_cm: f64) -> f64 {
    if species.is_one_electron() {
        1e-5 * energy_per_cm.abs()
    } else {
        0.0
    }
}

fn weights_agree(level: &LevelReport, anchor: &Anchor) -> bool {
    match (level.twice_j, anchor.twice_j) {
        (Some(a), Some(b)) => a == b,
        (None, None) => level.g.zip(anchor.g).is_none_or(|(a, b)| a == b),
        _ => false,
    }
}

impl Anchor {
    fn new(level: &LevelReport, of: &SourceReports) -> Self {
        Self {
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.uncertainty_per_cm,
            scale_per_cm: of.source.scale_at(level.energy_per_cm),
            label: level.label.clone(),
            twice_j: level.twice_j,
            g: level.g,
            reports: Vec::new(),
        }
    }

    fn reach(&self) -> f64 {
        3.0 * self.uncertainty_per_cm + self.scale_per_cm
    }

    /// The first report of an anchor fixes its energy; later ones may only add a missing label.
    fn take(&mut self, level: &LevelReport, source: usize, report: usize) {
        self.reports.push((source, report));
        if self.label.is_empty() {
            self.label = level.label.clone();
        }
        self.label.term = self.label.term.take().or_else(|| level.label.term.clone());
        self.label.configuration = self
            .label
            .configuration
            .take()
            .or_else(|| level.label.configuration.clone());
    }
}

/// Values of each level from its best report; mean levels whose components are held fall away.
fn conclude(
    reports: &[SourceReports],
    anchors: Vec<Anchor>,
    anchor_of: Vec<Vec<usize>>,
    apart: Vec<Apart>,
) -> Joined {
    let mut levels: Vec<(usize, DerivedLevel)> = Vec::with_capacity(anchors.len());
    let resolved = multiplets(&anchors);
    for (index, anchor) in anchors.iter().enumerate() {
        let is_mean = anchor.twice_j.is_none() && anchor.g.is_some() && is_named(&anchor.label);
        let components_held = || resolved.iter().any(|l| l.same_multiplet(&anchor.label));
        if !(is_mean && components_held()) {
            levels.push((index, concluded(reports, anchor)));
        }
    }
    levels.sort_by(|(_, a), (_, b)| {
        (a.energy_per_cm.total_cmp(&b.energy_per_cm))
            .then(a.twice_j.cmp(&b.twice_j))
            .then(a.label.configuration.cmp(&b.label.configuration))
            .then(a.label.term.cmp(&b.label.term))
    });
    let mut place = vec![None; anchors.len()];
    for (new, (old, _)) in levels.iter().enumerate() {
        place[*old] = Some(new);
    }
    let level_of = anchor_of
        .into_iter()
        .map(|of| of.into_iter().map(|a| place[a]).collect())
        .collect();
    (
        levels.into_iter().map(|(_, level)| level).collect(),
        level_of,
        apart,
    )
}

/// Whether a label names a multiplet.
fn is_named(label: &Label) -> bool {
    label.configuration.is_some() && label.term.is_some()
}

/// Names of the multiplets of which a level with J is held, each once.
fn multiplets(anchors: &[Anchor]) -> Vec<&Label> {
    let mut seen = HashSet::new();
    anchors
        .iter()
        .filter(|a| a.twice_j.is_some() && is_named(&a.label))
        .map(|a| &a.label)
        .filter(|l| seen.insert((&l.configuration, &l.term)))
        .collect()
}

fn concluded(reports: &[SourceReports], anchor: &Anchor) -> DerivedLevel {
    let at = |&(source, report): &(usize, usize)| &reports[source].levels[report];
    let best = best_by_uncertainty(anchor.reports.iter().map(|place| Candidate {
        computed: at(place).computed,
        kind: reports[place.0].source.kind,
        uncertainty: Some(at(place).uncertainty_per_cm),
        source: place.0,
        report: place.1,
    }));
    let (source, report) = best.map_or(anchor.reports[0], |c| (c.source, c.report));
    let level = &reports[source].levels[report];
    DerivedLevel {
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.uncertainty_per_cm,
        label: anchor.label.clone(),
        twice_j: anchor.twice_j,
        g: anchor.twice_j.map(|j| f64::from(j) + 1.0).or(anchor.g),
        computed: anchor.reports.iter().all(|place| at(place).computed),
        source,
    }
}
