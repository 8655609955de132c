//! Species with one electron outside a core: levels missing from their series, and rates of lines
//! that no table rates.

use std::cmp::Ordering;
use std::collections::{BTreeMap, HashSet};

use vocabulary::atom::{Species, limit};
use vocabulary::spectrum::{LineKind, RateOrigin};

use crate::calc::coulomb::{
    BoundLevel, ComputedLevel, ComputedLine, RateClass, Setting, predict_bound_lines,
    predict_scaled_series,
};
use crate::calc::series::{LabelledLevel, outer_electron};
use crate::catalogue::reconcile::{
    Derived, DerivedLevel, Label, LevelReport, LineReport, RankedSource, SourceReports,
};

/// Highest n of the levels that are filled in.
const HIGHEST_N: u32 = 20;
/// 1 σ of ln A beyond which a computed rate says too little to be held.
const LARGEST_RATE_SIGMA: f64 = 1.0;
/// Lines below this wavenumber (40 µm) are not held, cm⁻¹.
const LOWEST_WAVENUMBER_PER_CM: f64 = 250.0;

/// Whether a species can have series: it has several electrons, is no single isotope, and its
/// ionisation energy is known.
pub(super) fn may_fill(species: Species) -> bool {
    !species.is_one_electron() && species.isotope.is_none() && limit(species).is_some()
}

/// What the calculator adds to the levels that tables hold; `None` where it adds nothing.
pub(super) fn reports(
    species: Species,
    tables: &[SourceReports],
    held: &Derived,
    source: &RankedSource,
) -> Option<SourceReports> {
    let scale_per_cm = widest_scale(held);
    let setting = Setting::of(species)?;
    let mut named = named_levels(held, &setting);
    let predicted = missing(&named, &setting, held);
    let first_made = named.len();
    named.extend(predicted.iter().map(Named::made));
    let lines = without_twins(lines(&named, &setting), &named, &setting, held);
    let lines = unambiguous(lines, &named, tables, held);
    if predicted.is_empty() && lines.is_empty() {
        return None;
    }
    let of_held = named[..first_made]
        .iter()
        .map(|level| level.held_report(held, scale_per_cm));
    let of_made = named[first_made..].iter().map(Named::made_report);
    Some(SourceReports {
        source: source.clone(),
        levels: of_held.chain(of_made).collect(),
        lines: lines.iter().map(|line| line_report(line, &named)).collect(),
    })
}

/// By how much the scale of the table of a level may be off, cm⁻¹.
fn scale_at(held: &Derived, place: usize) -> f64 {
    let level = &held.levels[place];
    held.sources[level.source].scale_at(level.energy_per_cm)
}

/// The largest of them, so that a level is found again whatever tables say of it.
fn widest_scale(held: &Derived) -> f64 {
    let scales = (0..held.levels.len()).map(|place| scale_at(held, place));
    scales.fold(0.0, f64::max)
}

/// A level with its label in one form.
struct Named {
    configuration: String,
    term: String,
    twice_j: u16,
    energy_per_cm: f64,
    uncertainty_per_cm: f64,
    /// Distance to the limit: that of the fit for a level that was made.
    binding_per_cm: f64,
    /// Index of the held level; `None` for one that was made.
    place: Option<usize>,
}

impl Named {
    fn of_held(place: usize, level: &DerivedLevel, setting: &Setting) -> Option<Self> {
        let configuration = setting.one_form(level.label.configuration.as_deref()?)?;
        let bound = level.energy_per_cm < setting.limit_per_cm;
        (bound && !level.computed).then_some(Self {
            configuration,
            term: level.label.term.as_deref()?.to_owned(),
            twice_j: level.twice_j?,
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.uncertainty_per_cm,
            binding_per_cm: setting.limit_per_cm - level.energy_per_cm,
            place: Some(place),
        })
    }

    fn made(level: &ComputedLevel) -> Self {
        Self {
            configuration: level.configuration.clone(),
            term: level.term.clone(),
            twice_j: level.twice_j,
            energy_per_cm: level.prediction.energy_per_cm,
            uncertainty_per_cm: level.prediction.uncertainty_per_cm,
            binding_per_cm: level.prediction.binding_per_cm,
            place: None,
        }
    }

    fn name(&self) -> Name {
        (self.configuration.clone(), self.term.clone(), self.twice_j)
    }

    fn labelled(&self) -> LabelledLevel<'_> {
        LabelledLevel {
            energy_per_cm: self.energy_per_cm,
            uncertainty_per_cm: self.uncertainty_per_cm,
            configuration: &self.configuration,
            term: &self.term,
            twice_j: self.twice_j,
        }
    }

    fn report(&self, label: Label, uncertainty_per_cm: f64) -> LevelReport {
        LevelReport {
            energy_per_cm: self.energy_per_cm,
            uncertainty_per_cm,
            label,
            twice_j: Some(self.twice_j),
            g: None,
            computed: true,
            own_row: false,
        }
    }

    /// A held level again, so that lines can end on it. As it is marked computed, it changes
    /// nothing about the level; its σ takes in what the scales of the tables may differ by, so
    /// that it finds the level.
    fn held_report(&self, held: &Derived, scale_per_cm: f64) -> LevelReport {
        let label = self.place.map(|place| held.levels[place].label.clone());
        let label = label.unwrap_or_default();
        self.report(label, self.uncertainty_per_cm + scale_per_cm)
    }

    fn made_report(&self) -> LevelReport {
        let label = Label {
            configuration: Some(self.configuration.as_str().into()),
            term: Some(self.term.as_str().into()),
        };
        self.report(label, self.uncertainty_per_cm)
    }
}

/// What names a level: configuration in one form, term, twice J.
type Name = (String, String, u16);

/// Measured levels below the limit whose labels show one outer electron. Where tables disagree so
/// far that one name stands at several energies, the level of the best table speaks for the name.
fn named_levels(held: &Derived, setting: &Setting) -> Vec<Named> {
    let mut best: BTreeMap<Name, Named> = BTreeMap::new();
    for (place, level) in held.levels.iter().enumerate() {
        let Some(named) = Named::of_held(place, level, setting) else {
            continue;
        };
        match best.get(&named.name()).and_then(|other| other.place) {
            Some(other) if better(held, place, other) != Ordering::Less => {}
            _ => {
                best.insert(named.name(), named);
            }
        }
    }
    let mut named: Vec<Named> = best.into_values().collect();
    named.sort_by_key(|level| level.place);
    named
}

/// Which of two levels comes from the better table: kind of source first, then 1 σ.
fn better(held: &Derived, one: usize, two: usize) -> Ordering {
    let [a, b] = [one, two].map(|place| &held.levels[place]);
    let kind = |level: &DerivedLevel| held.sources[level.source].kind;
    (kind(a).cmp(&kind(b)))
        .then(a.uncertainty_per_cm.total_cmp(&b.uncertainty_per_cm))
        .then(one.cmp(&two))
}

/// Levels of regular series that nothing is held of, not even their mean over J.
fn missing(named: &[Named], setting: &Setting, held: &Derived) -> Vec<ComputedLevel> {
    let labelled: Vec<LabelledLevel<'_>> = named.iter().map(Named::labelled).collect();
    let unresolved: Vec<&Label> = held
        .levels
        .iter()
        .filter(|level| level.twice_j.is_none())
        .map(|level| &level.label)
        .collect();
    let is_held = |level: &ComputedLevel| {
        let label = Label {
            configuration: Some(level.configuration.as_str().into()),
            term: Some(level.term.as_str().into()),
        };
        unresolved.iter().any(|mean| mean.same_multiplet(&label))
    };
    let scales: Vec<f64> = (named.iter())
        .map(|level| level.place.map_or(0.0, |place| scale_at(held, place)))
        .collect();
    predict_scaled_series(&labelled, &scales, &setting.calc(), HIGHEST_N)
        .into_iter()
        .flat_map(|series| series.levels)
        .filter(|level| level.prediction.energy_per_cm < setting.limit_per_cm && !is_held(level))
        .collect()
}

/// Lines of the levels that the Coulomb approximation covers.
fn lines(named: &[Named], setting: &Setting) -> Vec<ComputedLine> {
    let covered: Vec<usize> = (0..named.len())
        .filter(|&index| is_covered(&named[index].configuration))
        .collect();
    let bound: Vec<BoundLevel<'_>> = covered
        .iter()
        .map(|&index| BoundLevel {
            level: named[index].labelled(),
            binding_per_cm: named[index].binding_per_cm,
        })
        .collect();
    predict_bound_lines(&bound, &setting.calc())
        .into_iter()
        .filter(|line| line.rate.relative_uncertainty <= LARGEST_RATE_SIGMA)
        .map(|line| ComputedLine {
            lower: covered[line.lower],
            upper: covered[line.upper],
            ..line
        })
        .filter(|line| wavenumber_per_cm(line, named) >= LOWEST_WAVENUMBER_PER_CM)
        .collect()
}

/// Where a line lies: the difference of the energies of its levels.
fn wavenumber_per_cm(line: &ComputedLine, named: &[Named]) -> f64 {
    named[line.upper].energy_per_cm - named[line.lower].energy_per_cm
}

/// Whether the core is none of those that the approximation refuses.
fn is_covered(configuration: &str) -> bool {
    outer_electron(configuration)
        .is_some_and(|outer| RateClass::of_jump(&outer.core, outer.l, outer.l + 1).is_ok())
}

/// Without lines that a table lists between other levels of the same names: they would stand twice.
fn without_twins(
    lines: Vec<ComputedLine>,
    named: &[Named],
    setting: &Setting,
    held: &Derived,
) -> Vec<ComputedLine> {
    let names: Vec<Option<Name>> = (held.levels.iter().enumerate())
        .map(|(place, level)| Named::of_held(place, level, setting).map(|named| named.name()))
        .collect();
    let pairs = || held.lines.iter().filter_map(|l| l.lower.zip(l.upper));
    let listed: HashSet<(&Name, &Name)> = pairs()
        .filter_map(|(lower, upper)| names[lower].as_ref().zip(names[upper].as_ref()))
        .collect();
    let same_levels: HashSet<(usize, usize)> = pairs().collect();
    let kept = lines.into_iter().filter(|line| {
        let [lower, upper] = [&named[line.lower], &named[line.upper]];
        let is_listed = listed.contains(&(&lower.name(), &upper.name()));
        !is_listed || (lower.place.zip(upper.place)).is_some_and(|pair| same_levels.contains(&pair))
    });
    kept.collect()
}

/// Without new lines that would make it doubtful which line a report without levels means: such a
/// report joins a line at its position only where there is a single one.
fn unambiguous(
    lines: Vec<ComputedLine>,
    named: &[Named],
    tables: &[SourceReports],
    held: &Derived,
) -> Vec<ComputedLine> {
    let pairs: HashSet<(usize, usize)> = held
        .lines
        .iter()
        .filter_map(|line| line.lower.zip(line.upper))
        .collect();
    let place = |level: usize| named[level].place;
    let is_new = |line: &ComputedLine| {
        let pair = place(line.lower).zip(place(line.upper));
        pair.is_none_or(|pair| !pairs.contains(&pair))
    };
    let mut fresh: Vec<(f64, f64, usize)> = (lines.iter().enumerate())
        .filter(|(_, line)| is_new(line))
        .map(|(index, line)| (wavenumber_per_cm(line, named), sigma(line, named), index))
        .collect();
    fresh.sort_by(|a, b| a.0.total_cmp(&b.0));
    let widest = fresh.iter().map(|line| line.1).fold(0.0, f64::max);
    let mut doubtful = HashSet::new();
    for (wavenumber, uncertainty) in loose_positions(tables) {
        let within = |position: f64, sigma: f64| {
            (position - wavenumber).abs() <= 3.0 * sigma.hypot(uncertainty)
        };
        let reach = 3.0 * widest.hypot(uncertainty);
        let from = fresh.partition_point(|line| line.0 < wavenumber - reach);
        let near: Vec<usize> = fresh[from..]
            .iter()
            .take_while(|line| line.0 <= wavenumber + reach)
            .filter(|line| within(line.0, line.1))
            .map(|line| line.2)
            .collect();
        if near.is_empty() {
            continue;
        }
        let with_levels = held.lines.iter().filter(|line| line.lower.is_some());
        let held_near = with_levels
            .filter(|line| within(line.wavenumber_per_cm, line.uncertainty_per_cm))
            .count();
        if near.len() + held_near > 1 {
            doubtful.extend(near);
        }
    }
    let kept = lines.into_iter().enumerate();
    kept.filter(|(index, _)| !doubtful.contains(index))
        .map(|(_, line)| line)
        .collect()
}

/// Positions, with their 1 σ, of reports that name no levels.
fn loose_positions(tables: &[SourceReports]) -> impl Iterator<Item = (f64, f64)> {
    tables
        .iter()
        .flat_map(|table| &table.lines)
        .filter(|line| line.lower.is_none() || line.upper.is_none())
        .filter_map(|line| line.wavenumber_per_cm.zip(line.uncertainty_per_cm))
}

fn sigma(line: &ComputedLine, named: &[Named]) -> f64 {
    let [lower, upper] = [line.lower, line.upper].map(|level| named[level].uncertainty_per_cm);
    lower.hypot(upper)
}

fn line_report(line: &ComputedLine, named: &[Named]) -> LineReport {
    LineReport {
        wavenumber_per_cm: Some(wavenumber_per_cm(line, named)),
        uncertainty_per_cm: Some(sigma(line, named)),
        from_levels: true,
        lower: Some(line.lower),
        upper: Some(line.upper),
        lower_twice_j: None,
        upper_twice_j: None,
        rate_per_s: Some(line.rate.per_s),
        rate_relative_uncertainty: Some(line.rate.relative_uncertainty),
        rate_origin: Some(RateOrigin::Computed),
        kind: LineKind::Line,
        computed: true,
    }
}
