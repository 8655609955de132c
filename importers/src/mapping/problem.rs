//! What can be wrong with the cells of a row.

use thiserror::Error;
use vocabulary::atom::SpeciesError;
use vocabulary::light::AirError;

use crate::number::NumberError;

/// What is wrong with a cell or a row, as a clause that says what was expected.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum Problem {
    /// No number.
    #[error(transparent)]
    Number(#[from] NumberError),
    /// No species.
    #[error(transparent)]
    Species(#[from] SpeciesError),
    /// A species without its stage of ionisation.
    #[error("the species has no single stage of ionisation; write Fe II, not Fe")]
    NoStage,
    /// A stage that is neither a Roman numeral nor a number.
    #[error("expected a stage of ionisation such as II or 2")]
    Stage,
    /// A cell that every row must have.
    #[error("expected a value, found nothing")]
    Missing,
    /// No angular momentum.
    #[error("expected an angular momentum such as 2, 5/2 or 2.5")]
    Momentum,
    /// A weight that is not positive.
    #[error("expected a statistical weight above zero")]
    Weight,
    /// J and g contradict each other.
    #[error("the statistical weight should be 2J + 1 = {expected}")]
    WeightAgainstMomentum {
        /// 2J + 1.
        expected: f64,
    },
    /// An energy below the ground level.
    #[error("expected an energy above the ground level, zero or more")]
    NegativeEnergy,
    /// A wavelength, wavenumber, frequency or photon energy that is not positive.
    #[error("expected a value above zero")]
    NotPositive,
    /// A zero or negative uncertainty.
    #[error("expected an uncertainty above zero; an empty cell means one unit of the last digit")]
    Uncertainty,
    /// A bracket that holds no uncertainty.
    #[error("expected digits in brackets behind the number, such as 588.995095(3)")]
    Bracket,
    /// Fewer pieces than asked for.
    #[error("the cell has no piece {take} between `{at}`")]
    Piece {
        /// The separator.
        at: String,
        /// Which piece was asked for.
        take: i32,
    },
    /// No medium.
    #[error("expected vacuum or air")]
    Medium,
    /// The index of air is not known there.
    #[error(transparent)]
    Air(#[from] AirError),
    /// A kind of line that does not exist.
    #[error("expected line, mean, blend or isotope")]
    Kind,
    /// No yes or no.
    #[error("expected true or false")]
    Truth,
    /// No origin of a rate.
    #[error("expected published or derived")]
    Origin,
    /// A rate that is zero or negative.
    #[error("expected a value above zero; a mark for unknown rates belongs under `missing`")]
    NoRate,
    /// A grade that the description does not translate.
    #[error("the description does not translate this grade; it knows {known}")]
    Grade {
        /// The grades that it knows.
        known: String,
    },
    /// The upper level lies below the lower one.
    #[error(
        "the upper level ({upper_per_cm} cm-1) does not lie above the lower one ({lower_per_cm} cm-1)"
    )]
    LevelOrder {
        /// Lower energy.
        lower_per_cm: f64,
        /// Upper energy.
        upper_per_cm: f64,
    },
    /// Position and levels contradict each other.
    #[error(
        "the line at {line_per_cm:.3} cm-1 contradicts its levels, which are {levels_per_cm:.3} cm-1 apart{hint}"
    )]
    PositionAgainstLevels {
        /// Wavenumber of the position.
        line_per_cm: f64,
        /// Difference of the levels.
        levels_per_cm: f64,
        /// A likely reason.
        hint: &'static str,
    },
    /// A row that says neither where the line is nor between which levels.
    #[error("the row gives neither a position nor both levels")]
    NoPosition,
    /// Control characters in a label.
    #[error("the text holds control characters")]
    Control,
}

/// A problem with the cell that it was found in.
#[derive(Clone, Debug, PartialEq)]
pub struct CellFault {
    /// Column name, where one column is at fault.
    pub column: Option<String>,
    /// The text found.
    pub text: String,
    /// What is wrong.
    pub problem: Problem,
}

impl CellFault {
    /// Whether the index of air is not known at the wavelength.
    pub fn is_beyond_air(&self) -> bool {
        matches!(self.problem, Problem::Air(_))
    }

    /// A fault of the row as a whole.
    pub fn row(problem: Problem) -> Fault {
        Box::new(Self {
            column: None,
            text: String::new(),
            problem,
        })
    }
}

/// A fault behind a pointer, so that good rows do not carry its size.
pub type Fault = Box<CellFault>;
