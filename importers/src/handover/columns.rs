//! The columns of the tables that are handed on, the same in every format.

/// What the cells of a column are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// Words.
    Text,
    /// A number.
    Number,
    /// A whole number.
    Integer,
    /// True or false.
    Truth,
}

/// A cell about to be written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Cell<'a> {
    /// No value.
    Missing,
    /// Words.
    Text(&'a str),
    /// A number.
    Number(f64),
    /// A whole number.
    Integer(i64),
    /// True or false.
    Truth(bool),
}

/// Units in use.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// cm⁻¹.
    PerCm,
    /// s⁻¹.
    PerS,
    /// nm.
    Nanometre,
    /// None.
    Plain,
}

/// A column.
#[derive(Clone, Copy, Debug)]
pub struct Column {
    /// Name; that of the JSON key, with its unit.
    pub name: &'static str,
    /// Kind of its cells.
    pub kind: Kind,
    /// Unit.
    pub unit: Quantity,
    /// Word of the IVOA's UCD1+ list, where one fits.
    pub ucd: Option<&'static str>,
    /// What it is.
    pub description: &'static str,
}

impl Quantity {
    /// The unit in the notation of VOUnits 1.1.
    pub fn vounit(self) -> Option<&'static str> {
        match self {
            Self::PerCm => Some("cm**-1"),
            Self::PerS => Some("s**-1"),
            Self::Nanometre => Some("nm"),
            Self::Plain => None,
        }
    }

    /// The unit in the free notation of ECSV.
    pub fn free(self) -> Option<&'static str> {
        match self {
            Self::PerCm => Some("1 / cm"),
            Self::PerS => Some("1 / s"),
            Self::Nanometre => Some("nm"),
            Self::Plain => None,
        }
    }
}

const fn text(name: &'static str, ucd: &'static str, description: &'static str) -> Column {
    column(name, Kind::Text, Quantity::Plain, ucd, description)
}

const fn column(
    name: &'static str,
    kind: Kind,
    unit: Quantity,
    ucd: &'static str,
    description: &'static str,
) -> Column {
    Column {
        name,
        kind,
        unit,
        ucd: if ucd.is_empty() { None } else { Some(ucd) },
        description,
    }
}

use Kind::{Integer, Number, Truth};
use Quantity::{Nanometre, PerCm, PerS, Plain};

const SPECIES: Column = text("species", "", "atom or ion, I being the neutral atom");
const CONFIGURATION: Column = text(
    "configuration",
    "phys.atmol.configuration",
    "electron configuration",
);
const TERM: Column = text(
    "term",
    "phys.atmol.term",
    "term, o behind it for odd parity",
);
const RATE: Column = column(
    "rate_per_s",
    Number,
    PerS,
    "phys.atmol.transProb",
    "rate of spontaneous emission",
);
const RATE_UNCERTAINTY: Column = column(
    "rate_relative_uncertainty",
    Number,
    Plain,
    "stat.error;phys.atmol.transProb",
    "1 sigma of the rate over the rate",
);
const RATE_ORIGIN: Column = text("rate_origin", "", "published, derived or computed");
const KIND: Column = text("kind", "", "line, mean, blend or isotope");
const WAVENUMBER: Column = column(
    "wavenumber_per_cm",
    Number,
    PerCm,
    "em.wavenumber",
    "wavenumber in vacuum",
);
const WAVENUMBER_UNCERTAINTY: Column = column(
    "wavenumber_uncertainty_per_cm",
    Number,
    PerCm,
    "stat.error;em.wavenumber",
    "1 sigma of the wavenumber",
);
const ENERGY: Column = column(
    "energy_per_cm",
    Number,
    PerCm,
    "phys.energy;phys.atmol.level",
    "energy above the ground level",
);
const ENERGY_UNCERTAINTY: Column = column(
    "energy_uncertainty_per_cm",
    Number,
    PerCm,
    "stat.error;phys.energy;phys.atmol.level",
    "1 sigma of the energy",
);
const J: Column = column(
    "j",
    Number,
    Plain,
    "phys.atmol.qn",
    "total angular momentum",
);
const G: Column = column(
    "g",
    Number,
    Plain,
    "phys.atmol.sweight",
    "statistical weight",
);

/// The rows of the sources: levels and lines in one table, told apart by `record`.
pub const REPORTS: &[Column] = &[
    text("record", "", "level or line"),
    text("source", "meta.bib", "key of the source"),
    SPECIES,
    column(
        "number",
        Integer,
        Plain,
        "",
        "counts the levels, and the lines, of a source and species from 0",
    ),
    column(
        "row",
        Integer,
        Plain,
        "",
        "line of the table that the source came from",
    ),
    ENERGY,
    ENERGY_UNCERTAINTY,
    CONFIGURATION,
    TERM,
    J,
    G,
    column(
        "own_row",
        Truth,
        Plain,
        "",
        "a level that is a row of its table; else one that a line names",
    ),
    WAVENUMBER,
    WAVENUMBER_UNCERTAINTY,
    column(
        "from_levels",
        Truth,
        Plain,
        "",
        "the source computed the position from its levels",
    ),
    column("lower", Integer, Plain, "", "number of the lower level"),
    column("upper", Integer, Plain, "", "number of the upper level"),
    column(
        "lower_j",
        Number,
        Plain,
        "",
        "J of a lower level that is not given",
    ),
    column(
        "upper_j",
        Number,
        Plain,
        "",
        "J of an upper level that is not given",
    ),
    RATE,
    RATE_UNCERTAINTY,
    RATE_ORIGIN,
    column(
        "intensity",
        Number,
        Plain,
        "spect.line.intensity",
        "the source's own intensity",
    ),
    KIND,
    column("computed", Truth, Plain, "", "computed, not measured"),
];

macro_rules! level_end {
    ($end:literal) => {
        [
            column(
                concat!($end, "_level"),
                Integer,
                Plain,
                "",
                concat!(
                    "number of the ",
                    $end,
                    " level among the levels of the species"
                ),
            ),
            column(
                concat!($end, "_energy_per_cm"),
                Number,
                PerCm,
                "phys.energy;phys.atmol.level",
                concat!("energy of the ", $end, " level above the ground level"),
            ),
            column(
                concat!($end, "_energy_uncertainty_per_cm"),
                Number,
                PerCm,
                "stat.error;phys.energy;phys.atmol.level",
                concat!("1 sigma of the energy of the ", $end, " level"),
            ),
            text(
                concat!($end, "_configuration"),
                "phys.atmol.configuration",
                concat!("configuration of the ", $end, " level"),
            ),
            text(
                concat!($end, "_term"),
                "phys.atmol.term",
                concat!("term of the ", $end, " level"),
            ),
            column(
                concat!($end, "_j"),
                Number,
                Plain,
                "phys.atmol.qn",
                concat!("J of the ", $end, " level"),
            ),
            column(
                concat!($end, "_g"),
                Number,
                Plain,
                "phys.atmol.sweight",
                concat!("statistical weight of the ", $end, " level"),
            ),
            text(
                concat!($end, "_source"),
                "meta.bib",
                concat!("key of the source of the ", $end, " level"),
            ),
        ]
    };
}

const LOWER: [Column; 8] = level_end!("lower");
const UPPER: [Column; 8] = level_end!("upper");

/// Lines as concluded, each with its levels.
pub const LINES: &[Column] = &[
    SPECIES,
    column(
        "vacuum_wavelength_nm",
        Number,
        Nanometre,
        "em.wl",
        "wavelength in vacuum",
    ),
    column(
        "air_wavelength_nm",
        Number,
        Nanometre,
        "em.wl",
        "wavelength in standard air (Ciddor 1996), from 185 to 2500 nm",
    ),
    WAVENUMBER,
    WAVENUMBER_UNCERTAINTY,
    text("position_origin", "", "measured, ritz or computed"),
    text(
        "position_source",
        "meta.bib",
        "key of the source of the position",
    ),
    text(
        "kind",
        "",
        "line, mean, blend, isotope, or ritz: listed by no table, it follows from levels",
    ),
    LOWER[0],
    LOWER[1],
    LOWER[2],
    LOWER[3],
    LOWER[4],
    LOWER[5],
    LOWER[6],
    LOWER[7],
    UPPER[0],
    UPPER[1],
    UPPER[2],
    UPPER[3],
    UPPER[4],
    UPPER[5],
    UPPER[6],
    UPPER[7],
    RATE,
    RATE_UNCERTAINTY,
    RATE_ORIGIN,
    text("rate_source", "meta.bib", "key of the source of the rate"),
];

/// Levels as concluded.
pub const LEVELS: &[Column] = &[
    SPECIES,
    column(
        "level",
        Integer,
        Plain,
        "",
        "number among the levels of the species, by energy from 0",
    ),
    ENERGY,
    ENERGY_UNCERTAINTY,
    CONFIGURATION,
    TERM,
    J,
    G,
    column("computed", Truth, Plain, "", "computed, not measured"),
    text("source", "meta.bib", "key of the source"),
];
