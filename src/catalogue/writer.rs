//! Records of one source become its reports.

use std::collections::{BTreeSet, HashMap};
use std::num::NonZeroU32;
use std::path::PathBuf;

use importers::record::{LevelEnd, LevelRecord, LineRecord, Place, Record};
use importers::{Sink, SinkError};
use rusqlite::{Connection, Statement, params};
use vocabulary::atom::HalfInteger;

use super::derive::Labels;
use super::ingest::{kind_number, rate_origin_number};

/// A level report about to be stored.
#[derive(Clone, Copy)]
pub(super) struct NewLevel {
    pub species: i64,
    pub source: i64,
    pub number: u32,
    pub place: u64,
    pub energy_per_cm: f64,
    pub energy_uncertainty_per_cm: f64,
    pub configuration: Option<i64>,
    pub term: Option<i64>,
    pub twice_j: Option<u16>,
    pub g: Option<f64>,
    pub computed: bool,
    pub own_row: bool,
}

/// A line report about to be stored.
#[derive(Clone, Copy)]
pub(super) struct NewLine {
    pub species: i64,
    pub source: i64,
    pub number: u32,
    pub place: u64,
    pub wavenumber_per_cm: Option<f64>,
    pub wavenumber_uncertainty_per_cm: Option<f64>,
    pub from_levels: bool,
    pub lower: Option<u32>,
    pub upper: Option<u32>,
    pub lower_twice_j: Option<u16>,
    pub upper_twice_j: Option<u16>,
    pub rate_per_s: Option<f64>,
    pub rate_relative_uncertainty: Option<f64>,
    pub rate_origin: Option<u8>,
    pub intensity: Option<f64>,
    pub kind: u8,
    pub computed: bool,
}

/// The statements that store reports, prepared once.
pub(super) struct Inserts<'c> {
    level: Statement<'c>,
    line: Statement<'c>,
}

impl<'c> Inserts<'c> {
    pub fn prepare(connection: &'c Connection) -> rusqlite::Result<Self> {
        let level = connection.prepare(
            "INSERT INTO level_report (species, source, number, place, energy_per_cm,
                 energy_uncertainty_per_cm, configuration, term, twice_j, g, computed, own_row)
             VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12)",
        )?;
        let line = connection.prepare(
            "INSERT INTO line_report (species, source, number, place, wavenumber_per_cm,
                 wavenumber_uncertainty_per_cm, from_levels, lower, upper, lower_twice_j,
                 upper_twice_j, rate_per_s, rate_relative_uncertainty, rate_origin, intensity,
                 kind, computed)
             VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17)",
        )?;
        Ok(Self { level, line })
    }

    pub fn level(&mut self, l: &NewLevel) -> rusqlite::Result<()> {
        self.level.execute(params![
            l.species,
            l.source,
            l.number,
            l.place,
            l.energy_per_cm,
            l.energy_uncertainty_per_cm,
            l.configuration,
            l.term,
            l.twice_j,
            l.g,
            l.computed,
            l.own_row,
        ])?;
        Ok(())
    }

    pub fn line(&mut self, l: &NewLine) -> rusqlite::Result<()> {
        self.line.execute(params![
            l.species,
            l.source,
            l.number,
            l.place,
            l.wavenumber_per_cm,
            l.wavenumber_uncertainty_per_cm,
            l.from_levels,
            l.lower,
            l.upper,
            l.lower_twice_j,
            l.upper_twice_j,
            l.rate_per_s,
            l.rate_relative_uncertainty,
            l.rate_origin,
            l.intensity,
            l.kind,
            l.computed,
        ])?;
        Ok(())
    }
}

/// The levels of one source, found by species, energy and J as printed. A large table names a
/// million levels, so each takes few bytes.
#[derive(Default)]
struct KnownLevels {
    /// The first level of each kind.
    first: hashbrown::HashMap<(u64, u64), u32>,
    all: Vec<KnownLevel>,
}

/// A level, and the next one of the same species, energy and J.
#[derive(Clone, Copy)]
struct KnownLevel {
    number: u32,
    configuration: Option<NonZeroU32>,
    term: Option<NonZeroU32>,
    next: u32,
}

/// Marks the last level of its kind.
const LAST: u32 = u32::MAX;

impl KnownLevels {
    fn key(species: i64, energy_per_cm: f64, twice_j: Option<u16>) -> (u64, u64) {
        let j = twice_j.map_or(0, |j| u64::from(j) + 1);
        (energy_per_cm.to_bits(), species.cast_unsigned() << 20 | j)
    }

    /// Numbers of labels count from 1 and are far fewer than 2³².
    fn short(label: Option<i64>) -> Option<NonZeroU32> {
        label
            .and_then(|id| u32::try_from(id).ok())
            .and_then(NonZeroU32::new)
    }

    fn of_kind(&self, key: (u64, u64)) -> impl Iterator<Item = (u32, KnownLevel)> {
        let at = |index: u32| Some((index, *self.all.get(index as usize)?));
        let first = self.first.get(&key).and_then(|index| at(*index));
        std::iter::successors(first, move |(_, level)| at(level.next))
    }

    fn add(&mut self, key: (u64, u64), number: u32, labels: [Option<i64>; 2]) {
        let index = u32::try_from(self.all.len()).unwrap_or(LAST);
        let last = self.of_kind(key).last();
        match last {
            Some((last, _)) => self.all[last as usize].next = index,
            None => {
                self.first.insert(key, index);
            }
        }
        let [configuration, term] = labels.map(Self::short);
        self.all.push(KnownLevel {
            number,
            configuration,
            term,
            next: LAST,
        });
    }

    /// The first level of a kind whose labels do not contradict these.
    fn find(&self, key: (u64, u64), labels: [Option<i64>; 2]) -> Option<u32> {
        let [configuration, term] = labels.map(Self::short);
        let agrees = |ours: Option<NonZeroU32>, theirs: Option<NonZeroU32>| {
            ours.zip(theirs).is_none_or(|(a, b)| a == b)
        };
        self.of_kind(key)
            .find(|(_, l)| agrees(configuration, l.configuration) && agrees(term, l.term))
            .map(|(_, level)| level.number)
    }
}

/// Writes records as reports of one source.
pub struct ReportWriter<'c> {
    connection: &'c Connection,
    inserts: Inserts<'c>,
    path: PathBuf,
    source: i64,
    labels: &'c mut Labels,
    numbers: HashMap<i64, Numbers>,
    levels: KnownLevels,
    pub(super) records: u64,
}

#[derive(Clone, Copy, Default)]
struct Numbers {
    levels: u32,
    lines: u32,
}

impl<'c> ReportWriter<'c> {
    pub(super) fn new(
        connection: &'c Connection,
        path: PathBuf,
        source: i64,
        labels: &'c mut Labels,
    ) -> rusqlite::Result<Self> {
        Ok(Self {
            connection,
            inserts: Inserts::prepare(connection)?,
            path,
            source,
            labels,
            numbers: HashMap::new(),
            levels: KnownLevels::default(),
            records: 0,
        })
    }

    pub(super) fn species(&self) -> BTreeSet<i64> {
        self.numbers.keys().copied().collect()
    }

    fn level(&mut self, record: &LevelRecord, own_row: bool) -> rusqlite::Result<u32> {
        let species = record.species.code();
        let configuration = self.label(record.configuration.as_deref())?;
        let term = self.label(record.term.as_deref())?;
        let twice_j = record.j.map(HalfInteger::twice);
        let numbers = self.numbers.entry(species).or_default();
        let number = numbers.levels;
        numbers.levels += 1;
        self.inserts.level(&NewLevel {
            species,
            source: self.source,
            number,
            place: record.place.line,
            energy_per_cm: record.energy_per_cm,
            energy_uncertainty_per_cm: record.energy_uncertainty_per_cm,
            configuration,
            term,
            twice_j,
            g: record.g,
            computed: record.computed,
            own_row,
        })?;
        let key = KnownLevels::key(species, record.energy_per_cm, twice_j);
        self.levels.add(key, number, [configuration, term]);
        Ok(number)
    }

    fn label(&mut self, text: Option<&str>) -> rusqlite::Result<Option<i64>> {
        text.map(|text| self.labels.id(self.connection, text))
            .transpose()
    }

    fn line(&mut self, record: &LineRecord) -> rusqlite::Result<()> {
        let lower = self.end(record, record.lower.as_ref())?;
        let upper = self.end(record, record.upper.as_ref())?;
        let species = record.species.code();
        let numbers = self.numbers.entry(species).or_default();
        let number = numbers.lines;
        numbers.lines += 1;
        // J of an end of which no level is linked.
        let unless = |linked: Option<u32>, end: Option<&LevelEnd>| match linked {
            Some(_) => None,
            None => end.and_then(|e| e.j).map(HalfInteger::twice),
        };
        self.inserts.line(&NewLine {
            species,
            source: self.source,
            number,
            place: record.place.line,
            wavenumber_per_cm: record.wavenumber_per_cm,
            wavenumber_uncertainty_per_cm: record.wavenumber_uncertainty_per_cm,
            from_levels: record.from_levels,
            lower,
            upper,
            lower_twice_j: unless(lower, record.lower.as_ref()),
            upper_twice_j: unless(upper, record.upper.as_ref()),
            rate_per_s: record.rate_per_s,
            rate_relative_uncertainty: record.rate_relative_uncertainty,
            rate_origin: record.rate_origin.map(rate_origin_number),
            intensity: record.intensity,
            kind: kind_number(record.kind),
            computed: record.computed,
        })
    }

    /// The level report that an end of a line means; made where no table gave it.
    fn end(&mut self, line: &LineRecord, end: Option<&LevelEnd>) -> rusqlite::Result<Option<u32>> {
        let Some((end, energy_per_cm)) = end.and_then(|e| e.energy_per_cm.map(|v| (e, v))) else {
            return Ok(None);
        };
        let configuration = self.label(end.configuration.as_deref())?;
        let term = self.label(end.term.as_deref())?;
        let twice_j = end.j.map(HalfInteger::twice);
        let key = KnownLevels::key(line.species.code(), energy_per_cm, twice_j);
        if let Some(known) = self.levels.find(key, [configuration, term]) {
            return Ok(Some(known));
        }
        let record = LevelRecord {
            species: line.species,
            energy_per_cm,
            energy_uncertainty_per_cm: end.energy_uncertainty_per_cm.unwrap_or(UNSTATED_PER_CM),
            configuration: end.configuration.clone(),
            term: end.term.clone(),
            j: end.j,
            g: end.g,
            computed: line.computed,
            place: Place {
                file: line.place.file.clone(),
                line: line.place.line,
            },
        };
        self.level(&record, false).map(Some)
    }
}

/// 1 σ of a level energy for which nothing is stated, cm⁻¹: readers give one unit of the last
/// printed digit, so this is met only by records made without one.
const UNSTATED_PER_CM: f64 = 1.0;

impl Sink for ReportWriter<'_> {
    fn accept(&mut self, record: Record) -> std::result::Result<(), SinkError> {
        self.records += 1;
        match &record {
            Record::Level(level) => self.level(level, true).map(|_| ()),
            Record::Line(line) => self.line(line),
        }
        .map_err(|e| Box::new(e) as SinkError)
    }
}

impl std::fmt::Debug for ReportWriter<'_> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(
            f,
            "reports of source {} into {}",
            self.source,
            self.path.display()
        )
    }
}
