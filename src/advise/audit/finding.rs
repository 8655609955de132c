//! A finding, and where it is.

use std::cmp::Ordering;
use std::fmt;

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium};
use vocabulary::report::{ReportedLevel, ReportedLine};

use crate::advise::placed;

/// The rules of the audit.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Rule {
    /// Rows that carry the name of another species.
    Species,
    /// Wavelengths in air that are declared as vacuum.
    AirAsVacuum,
    /// Wavelengths in vacuum that are declared as air.
    VacuumAsAir,
    /// Energies declared in another unit than they are given in.
    EnergyUnit,
    /// All lines of one level miss by the same amount.
    LevelOff,
    /// A wavelength that its levels do not give.
    RitzMisfit,
    /// Levels of one parity combine as if they were not.
    Parity,
    /// ΔJ that the kind of radiation forbids.
    DeltaJ,
    /// A J that the term does not have.
    TermJ,
    /// Two sources name one level with different J.
    JDiffers,
    /// Two sources give the level of one name at different energies.
    LevelDiffers,
    /// A line names a level that the table of levels does not hold.
    LevelUnlisted,
    /// A level that breaks the Rydberg–Ritz curve of its series.
    SeriesOutlier,
    /// Levels that no line touches.
    Isolated,
    /// A line whose two levels are concluded from sources of different scales.
    ScalesMixed,
    /// Rates that differ from those of other sources by one factor.
    RateScale,
    /// Rates that differ by the ratio of the weights.
    WeightFactor,
    /// More oscillator strength than electrons.
    StrengthSum,
    /// Rates out of a level that its lifetime does not allow.
    Lifetime,
}

impl Rule {
    /// Every rule.
    pub const ALL: [Self; 19] = [
        Self::Species,
        Self::AirAsVacuum,
        Self::VacuumAsAir,
        Self::EnergyUnit,
        Self::LevelOff,
        Self::RitzMisfit,
        Self::Parity,
        Self::DeltaJ,
        Self::TermJ,
        Self::JDiffers,
        Self::LevelDiffers,
        Self::LevelUnlisted,
        Self::SeriesOutlier,
        Self::Isolated,
        Self::ScalesMixed,
        Self::RateScale,
        Self::WeightFactor,
        Self::StrengthSum,
        Self::Lifetime,
    ];

    /// Its name in answers and in lists of known findings.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Species => "species",
            Self::AirAsVacuum => "air-as-vacuum",
            Self::VacuumAsAir => "vacuum-as-air",
            Self::EnergyUnit => "energy-unit",
            Self::LevelOff => "level-off",
            Self::RitzMisfit => "ritz-misfit",
            Self::Parity => "parity",
            Self::DeltaJ => "delta-j",
            Self::TermJ => "term-j",
            Self::JDiffers => "j-differs",
            Self::LevelDiffers => "level-differs",
            Self::LevelUnlisted => "level-unlisted",
            Self::SeriesOutlier => "series-outlier",
            Self::Isolated => "isolated",
            Self::ScalesMixed => "scales-mixed",
            Self::RateScale => "rate-scale",
            Self::WeightFactor => "weight-factor",
            Self::StrengthSum => "strength-sum",
            Self::Lifetime => "lifetime",
        }
    }
}

impl fmt::Display for Rule {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

/// Which table of a source.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Table {
    /// Its levels.
    Levels,
    /// Its lines.
    Lines,
}

impl fmt::Display for Table {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Levels => "levels",
            Self::Lines => "lines",
        })
    }
}

/// Where a finding is.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// In words: `Fe I level 415.933 J=3`, `Fe I 438.3545 nm`, `Fe I, 12 lines`.
    pub subject: String,
    /// Table and row (line of the file), where it is about one row.
    pub row: Option<(Table, u64)>,
}

impl Place {
    /// A place that is a row of the table of levels, or a level that a line names.
    pub fn level(species: Species, level: &ReportedLevel) -> Self {
        let j = level
            .j
            .map_or_else(String::new, |j| format!(" J={}", j.value()));
        let table = if level.own_row {
            Table::Levels
        } else {
            Table::Lines
        };
        Self {
            subject: format!("{species} level {}{j}", level.energy_per_cm),
            row: Some((table, level.row)),
        }
    }

    /// A place that is a line.
    pub fn line(species: Species, line: &ReportedLine, wavenumber_per_cm: f64) -> Self {
        Self {
            subject: format!("{species} {}", wavelength(wavenumber_per_cm)),
            row: Some((Table::Lines, line.row)),
        }
    }

    /// A place that is no single row.
    pub fn whole(subject: String) -> Self {
        Self { subject, row: None }
    }
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.subject)?;
        match self.row {
            Some((table, row)) => write!(f, " ({table}, row {row})"),
            None => Ok(()),
        }
    }
}

/// A wavelength with its unit, in air from 200 to 2000 nm and in vacuum elsewhere.
pub(super) fn wavelength(wavenumber_per_cm: f64) -> String {
    match placed(wavenumber_per_cm, 0.0, Medium::Auto, Air::standard()) {
        Ok(at) if at.wavelength_nm < 100.0 => format!("{:.5} nm", at.wavelength_nm),
        Ok(at) => format!("{:.4} nm", at.wavelength_nm),
        Err(_) => format!("{wavenumber_per_cm} cm-1"),
    }
}

/// Something that is wrong or looks wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct Finding {
    /// Which rule it breaks.
    pub rule: Rule,
    /// Whose.
    pub species: Species,
    /// Key of the source.
    pub source: String,
    /// Where.
    pub place: Place,
    /// How large, in `unit`.
    pub size: f64,
    /// Unit of the size: `cm-1`, `nm`, `times`, `levels` …
    pub unit: &'static str,
    /// What is wrong and what to do.
    pub advice: String,
}

impl Finding {
    /// By species, source, rule, row, then words.
    pub fn order(&self, other: &Self) -> Ordering {
        let key = |f: &Self| (f.species.code(), f.rule, f.place.row);
        (self.species.code().cmp(&other.species.code()))
            .then_with(|| self.source.cmp(&other.source))
            .then_with(|| key(self).cmp(&key(other)))
            .then_with(|| self.place.subject.cmp(&other.place.subject))
            .then_with(|| self.advice.cmp(&other.advice))
    }
}
