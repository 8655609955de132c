//! Search of routes: all ways of up to three steps, each by another laser.

use std::collections::BTreeMap;
use std::sync::Arc;

use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::spectrum::{Level, Line, PositionOrigin, RateOrigin};

use super::series::{RydbergLevel, RydbergSeries};
use super::{Coincidence, MOST_STEPS, Question, Route, Short, Step, StepEnd, Target};
use crate::advise::Spectrum;
use crate::advise::tune::{Laser, LaserError, MHZ_PER_CM, Populated, strength};
use crate::calc::plasma::absorption_f;

/// Least distance within which another line counts as close, cm⁻¹ (1.5 GHz).
const CLOSE_PER_CM: f64 = 0.05;
/// The same in Doppler widths.
const CLOSE_DOPPLER_WIDTHS: f64 = 3.0;
/// So many coincidences are named per step.
const NAMED: usize = 3;

pub(super) struct Search<'a> {
    question: &'a Question,
    spectrum: &'a Spectrum,
    populated: &'a Populated,
    /// Lines by number of their lower level.
    from: Vec<Vec<&'a Line>>,
}

impl<'a> Search<'a> {
    pub(super) fn new(
        question: &'a Question,
        spectrum: &'a Spectrum,
        populated: &'a Populated,
    ) -> Result<Self, LaserError> {
        if spectrum.levels.is_empty() {
            return Err(LaserError::NoLevels {
                species: spectrum.species.to_string(),
            });
        }
        let mut from = vec![Vec::new(); spectrum.levels.len()];
        for line in &spectrum.lines {
            if let (Some(lower), Some(_)) = (&line.lower, &line.upper)
                && let Some(lines) = from.get_mut(lower.number as usize)
            {
                lines.push(line);
            }
        }
        Ok(Self {
            question,
            spectrum,
            populated,
            from,
        })
    }

    fn starts(&self) -> impl Iterator<Item = &'a Arc<Level>> {
        self.spectrum
            .levels
            .iter()
            .filter(|l| self.populated.holds(l.number))
    }

    pub(super) fn routes(&self) -> Vec<Route> {
        let mut routes = Vec::new();
        for start in self.starts() {
            self.climb(start, &mut Vec::new(), &mut routes);
        }
        routes
    }

    fn climb(&self, level: &Arc<Level>, taken: &mut Vec<Step>, routes: &mut Vec<Route>) {
        if taken.len() == MOST_STEPS {
            return;
        }
        let lasers = &self.question.lasers;
        let free = (0..lasers.len()).filter(|l| !taken.iter().any(|s| s.laser == *l));
        for laser in free.collect::<Vec<_>>() {
            for end in self.last_steps(level, laser) {
                let mut steps = taken.clone();
                steps.push(end);
                routes.push(Route {
                    score: score(&steps),
                    steps,
                });
            }
            let lines = self
                .from
                .get(level.number as usize)
                .map_or(&[][..], Vec::as_slice);
            for line in lines
                .iter()
                .filter(|l| lasers[laser].range.contains_per_cm(l.wavenumber_per_cm))
            {
                let Some(step) = bound_step(line, laser, &lasers[laser]) else {
                    continue;
                };
                let StepEnd::Level(upper) = step.end.clone() else {
                    continue;
                };
                taken.push(step);
                if self.is_target(&upper) {
                    routes.push(Route {
                        score: score(taken),
                        steps: taken.clone(),
                    });
                } else {
                    self.climb(&upper, taken, routes);
                }
                taken.pop();
            }
        }
    }

    fn is_target(&self, level: &Level) -> bool {
        match &self.question.target {
            Target::Levels(levels) => levels.iter().any(|l| l.number == level.number),
            _ => false,
        }
    }

    /// Steps from a level into a series or the continuum.
    fn last_steps(&self, level: &Arc<Level>, laser: usize) -> Vec<Step> {
        match &self.question.target {
            Target::Levels(_) => Vec::new(),
            Target::Series(series, n) => series
                .iter()
                .filter(|s| s.is_reached_from(level))
                .filter_map(|s| self.step_into_series(level, laser, s, *n))
                .collect(),
            Target::Limit(limit) => self
                .step_into_continuum(level, laser, *limit)
                .into_iter()
                .collect(),
        }
    }

    fn step_into_series(
        &self,
        level: &Arc<Level>,
        laser: usize,
        series: &RydbergSeries,
        n: Option<u32>,
    ) -> Option<Step> {
        let source = &self.question.lasers[laser];
        let members: Vec<(RydbergLevel, f64)> = series
            .members
            .iter()
            .filter(|m| n.is_none_or(|n| m.n == n))
            .map(|m| (*m, m.energy_per_cm - level.energy_per_cm))
            .filter(|(_, wavenumber)| source.range.contains_per_cm(*wavenumber))
            .collect();
        let &(first, wavenumber) = members.first()?;
        let sigma = first
            .uncertainty_per_cm
            .hypot(level.energy_uncertainty_per_cm);
        // A series is reached anywhere between its first and last member.
        let mismatch = members
            .iter()
            .map(|(_, w)| mismatch(source, *w))
            .fold(1.0, f64::min);
        let strength = self.strength_into(level, series, first);
        Some(Step {
            laser,
            from: Arc::clone(level),
            wavenumber_per_cm: (wavenumber, sigma),
            rate_per_s: strength.rate_per_s,
            rate_origin: strength.rate_origin,
            oscillator_strength: strength.oscillator_strength,
            strength_relative_uncertainty: strength.relative_uncertainty,
            scaled: strength.scaled,
            mismatch,
            coincidences: Vec::new(),
            sources: series.sources.clone(),
            position_origin: first.origin,
            end: StepEnd::Rydberg {
                term: series.term.clone(),
                l: series.l,
                j: series.j.to_string(),
                members,
            },
        })
    }

    /// The strength of the step to a member of a series: that of its held line where a paper
    /// rates it, else as calculated, else f of the highest member with a held rate scaled as n*⁻³
    /// (the density of a Rydberg orbital at the core; Gallagher 1994, *Rydberg Atoms*, table 2.2).
    fn strength_into(
        &self,
        level: &Level,
        series: &RydbergSeries,
        member: RydbergLevel,
    ) -> Strength {
        let lines = self.from.get(level.number as usize);
        let held: Vec<(RydbergLevel, &Line)> = lines
            .into_iter()
            .flatten()
            .filter_map(|line| Some((series.holds(line.upper.as_ref()?)?, *line)))
            .collect();
        let published = held.iter().find(|(held, line)| {
            held.n == member.n && line.rate_origin.is_some_and(|o| o != RateOrigin::Computed)
        });
        if let Some((_, line)) = published {
            return Strength::held(line);
        }
        if let Some(joint) = series.joint(level, member) {
            return Strength {
                rate_per_s: Some(joint.rate_per_s),
                rate_origin: Some(RateOrigin::Computed),
                oscillator_strength: Some(joint.oscillator_strength),
                relative_uncertainty: Some(joint.relative_uncertainty),
                scaled: false,
            };
        }
        let scaled = held
            .iter()
            .filter_map(|(held, line)| Some((*held, oscillator_strength(line)?)))
            .max_by_key(|(held, _)| held.n)
            .map(|(held, f)| f * (held.effective / member.effective).powi(3));
        Strength {
            oscillator_strength: scaled,
            scaled: scaled.is_some(),
            ..Strength::default()
        }
    }

    fn step_into_continuum(&self, level: &Arc<Level>, laser: usize, limit: f64) -> Option<Step> {
        let source = &self.question.lasers[laser];
        let threshold = limit - level.energy_per_cm;
        let high = source.range.wavenumber_high_per_cm;
        if threshold <= 0.0 || high < threshold {
            return None;
        }
        let low = source.range.wavenumber_low_per_cm.max(threshold);
        let sigma =
            vocabulary::atom::limit(self.spectrum.species).map_or(0.0, |l| l.uncertainty_per_cm);
        Some(Step {
            laser,
            from: Arc::clone(level),
            end: StepEnd::Continuum {
                excess_ev: (
                    (low - threshold) / PER_CM_PER_EV,
                    (high - threshold) / PER_CM_PER_EV,
                ),
                threshold_per_cm: threshold,
            },
            wavenumber_per_cm: (low, sigma),
            rate_per_s: None,
            rate_origin: None,
            oscillator_strength: None,
            strength_relative_uncertainty: None,
            scaled: false,
            mismatch: 0.0,
            coincidences: Vec::new(),
            sources: vec![Arc::clone(&level.source)],
            position_origin: PositionOrigin::Ritz,
        })
    }

    /// How far the lasers lead.
    pub(super) fn short(&self) -> Short {
        let mut reached = BTreeMap::new();
        for start in self.starts() {
            self.spread(start, &mut Vec::new(), &mut reached);
        }
        let reached: Vec<Arc<Level>> = reached.into_values().collect();
        let missing = (reached.iter())
            .flat_map(|level| self.needed(level).map(move |w| (Arc::clone(level), w)))
            .min_by(|a, b| self.distance(a.1).total_cmp(&self.distance(b.1)));
        Short { reached, missing }
    }

    /// Collects the levels that free lasers reach from a level, short of the last step.
    fn spread(
        &self,
        level: &Arc<Level>,
        used: &mut Vec<usize>,
        reached: &mut BTreeMap<u32, Arc<Level>>,
    ) {
        if used.len() + 1 == MOST_STEPS {
            return;
        }
        let lasers = &self.question.lasers;
        for laser in (0..lasers.len())
            .filter(|l| !used.contains(l))
            .collect::<Vec<_>>()
        {
            let lines = self.from.get(level.number as usize).into_iter().flatten();
            for line in lines.filter(|l| lasers[laser].range.contains_per_cm(l.wavenumber_per_cm)) {
                let Some(upper) = &line.upper else { continue };
                reached.insert(upper.number, Arc::clone(upper));
                used.push(laser);
                self.spread(upper, used, reached);
                used.pop();
            }
        }
    }

    /// Wavenumbers of the steps from a level to the target, cm⁻¹.
    fn needed(&self, level: &Level) -> Box<dyn Iterator<Item = f64> + '_> {
        let energy = level.energy_per_cm;
        match &self.question.target {
            Target::Levels(targets) => {
                let is_target = |l: &Level| targets.iter().any(|t| t.number == l.number);
                let lines = self.from.get(level.number as usize).into_iter().flatten();
                let to_target = lines.filter(move |l| l.upper.as_deref().is_some_and(is_target));
                Box::new(to_target.map(|l| l.wavenumber_per_cm))
            }
            Target::Series(series, n) => {
                let joined: Vec<&RydbergSeries> =
                    series.iter().filter(|s| s.is_reached_from(level)).collect();
                let members = joined.into_iter().flat_map(|s| &s.members);
                let wanted = members.filter(move |m| n.is_none_or(|n| m.n == n));
                let above = wanted.map(move |m| m.energy_per_cm - energy);
                Box::new(above.filter(|w| *w > 0.0))
            }
            Target::Limit(limit) => Box::new(Some(limit - energy).into_iter().filter(|w| *w > 0.0)),
        }
    }

    /// Whether any laser reaches any line from a populated level.
    pub(super) fn any_first_step(&self) -> bool {
        self.starts().any(|start| {
            self.from.get(start.number as usize).is_some_and(|lines| {
                lines.iter().any(|l| {
                    let reaches = |s: &Laser| s.range.contains_per_cm(l.wavenumber_per_cm);
                    self.question.lasers.iter().any(reaches)
                })
            })
        })
    }

    /// Distance of a wavenumber from the nearest laser range, cm⁻¹; negative inside one.
    fn distance(&self, wavenumber_per_cm: f64) -> f64 {
        let lasers = self.question.lasers.iter();
        let far = lasers.map(|l| {
            let below = l.range.wavenumber_low_per_cm - wavenumber_per_cm;
            let above = wavenumber_per_cm - l.range.wavenumber_high_per_cm;
            below.max(above)
        });
        far.fold(f64::INFINITY, f64::min)
    }

    /// `; the nearest is 780.241 nm (vacuum)`.
    pub(super) fn nearest_first_step(&self) -> String {
        self.starts()
            .filter_map(|start| self.from.get(start.number as usize))
            .flatten()
            .map(|l| l.wavenumber_per_cm)
            .min_by(|a, b| self.distance(*a).total_cmp(&self.distance(*b)))
            .map_or_else(String::new, |w| {
                format!("; the nearest is {:.3} nm in vacuum", 1e7 / w)
            })
    }
}

/// How strong a step is, as far as it is known.
#[derive(Clone, Copy, Debug, Default)]
struct Strength {
    rate_per_s: Option<f64>,
    rate_origin: Option<RateOrigin>,
    oscillator_strength: Option<f64>,
    relative_uncertainty: Option<f64>,
    scaled: bool,
}

impl Strength {
    fn held(line: &Line) -> Self {
        Self {
            rate_per_s: line.rate_per_s,
            rate_origin: line.rate_origin,
            oscillator_strength: oscillator_strength(line),
            relative_uncertainty: line.rate_relative_uncertainty,
            scaled: false,
        }
    }
}

fn bound_step(line: &Line, laser: usize, source: &Laser) -> Option<Step> {
    let mut sources = vec![Arc::clone(&line.position_source)];
    sources.extend(line.rate_source.clone());
    Some(Step {
        laser,
        from: Arc::clone(line.lower.as_ref()?),
        end: StepEnd::Level(Arc::clone(line.upper.as_ref()?)),
        wavenumber_per_cm: (line.wavenumber_per_cm, line.wavenumber_uncertainty_per_cm),
        rate_per_s: line.rate_per_s,
        rate_origin: line.rate_origin,
        oscillator_strength: oscillator_strength(line),
        strength_relative_uncertainty: line.rate_relative_uncertainty,
        scaled: false,
        mismatch: mismatch(source, line.wavenumber_per_cm),
        coincidences: Vec::new(),
        sources,
        position_origin: line.position_origin,
    })
}

fn oscillator_strength(line: &Line) -> Option<f64> {
    let (lower, upper) = (line.lower.as_ref()?, line.upper.as_ref()?);
    Some(absorption_f(
        line.rate_per_s?,
        upper.g?,
        lower.g?,
        line.wavenumber_per_cm,
    ))
}

/// Distance from the middle of a laser's range over half its width.
fn mismatch(source: &Laser, wavenumber_per_cm: f64) -> f64 {
    let (low, high) = (
        source.range.wavenumber_low_per_cm,
        source.range.wavenumber_high_per_cm,
    );
    ((wavenumber_per_cm - f64::midpoint(low, high)).abs() / ((high - low) / 2.0)).min(1.0)
}

/// Product of f (1 − mismatch²/2); the continuum counts by its mismatch alone.
fn score(steps: &[Step]) -> Option<f64> {
    steps
        .iter()
        .map(|step| {
            let f = match step.end {
                StepEnd::Continuum { .. } => Some(1.0),
                _ => step.oscillator_strength,
            };
            f.map(|f| f * (1.0 - step.mismatch.powi(2) / 2.0))
        })
        .product()
}

/// An absorption line of another species: whose, wavenumber (cm⁻¹), mass (u).
pub(super) type Absorber = (vocabulary::atom::Species, f64);

/// Lines of other species from populated levels, by wavenumber.
pub(super) fn absorbers(
    question: &Question,
    others: &[Spectrum],
) -> Result<Vec<Absorber>, LaserError> {
    let mut out = Vec::new();
    for other in others {
        let populated = Populated::new(other, question.temperature_k, false)?;
        out.extend(
            other
                .lines
                .iter()
                .filter(|l| l.lower.as_ref().is_some_and(|l| populated.holds(l.number)))
                .map(|l| (other.species, l.wavenumber_per_cm)),
        );
    }
    out.sort_by(|a, b| a.1.total_cmp(&b.1));
    Ok(out)
}

pub(super) fn coincidences(
    step: &Step,
    absorbers: &[Absorber],
    question: &Question,
    mass_u: f64,
) -> Vec<Coincidence> {
    let wavenumbers: Vec<f64> = match &step.end {
        StepEnd::Level(_) => vec![step.wavenumber_per_cm.0],
        StepEnd::Rydberg { members, .. } => members.iter().map(|(_, w)| *w).collect(),
        StepEnd::Continuum { .. } => Vec::new(),
    };
    let mut found = Vec::new();
    for at in wavenumbers {
        let doppler_mhz =
            strength::doppler_width_mhz(1e7 / at, question.temperature_k, mass_u).unwrap_or(0.0);
        let reach = CLOSE_PER_CM.max(CLOSE_DOPPLER_WIDTHS * doppler_mhz / MHZ_PER_CM);
        let from = absorbers.partition_point(|a| a.1 < at - reach);
        found.extend(
            absorbers[from..]
                .iter()
                .take_while(|a| a.1 <= at + reach)
                .map(|a| Coincidence {
                    species: a.0,
                    offset_per_cm: a.1 - at,
                }),
        );
    }
    found.sort_by(|a, b| a.offset_per_cm.abs().total_cmp(&b.offset_per_cm.abs()));
    found.truncate(NAMED);
    found
}
