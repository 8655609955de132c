//! How each target of a record is found in a row.

use std::collections::BTreeMap;

use serde::Deserialize;

/// Where a cell comes from; exactly one of the four.
#[derive(Clone, Debug, Default, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct Part {
    /// Column by its name in the header.
    pub column: Option<String>,
    /// Column by its number, from 1.
    pub position: Option<usize>,
    /// First and last byte of a table of fixed width, from 1, both inside.
    pub bytes: Option<[usize; 2]>,
    /// The same text for every row.
    pub constant: Option<String>,
}

/// The medium that wavelengths are stated in.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum MediumName {
    /// Vacuum.
    Vacuum,
    /// Standard air.
    Air,
    /// Vacuum below a boundary, standard air from it on.
    AirAbove {
        /// The boundary, nm.
        boundary_nm: f64,
    },
}

impl MediumName {
    /// Reads `vacuum`, `air` or `air-above-200nm`.
    pub fn parse(text: &str) -> Option<Self> {
        match text.trim() {
            "vacuum" => Some(Self::Vacuum),
            "air" => Some(Self::Air),
            other => {
                let boundary = other.strip_prefix("air-above-")?.strip_suffix("nm")?;
                let boundary_nm = crate::number::parse(boundary).ok()?.value;
                (boundary_nm > 0.0).then_some(Self::AirAbove { boundary_nm })
            }
        }
    }
}

/// The medium, stated once or found in a column.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(untagged)]
pub enum MediumSpec {
    /// The same for every row.
    Name(String),
    /// From a column that says `vacuum` or `air`.
    Column(MediumColumn),
}

/// A column that names the medium.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct MediumColumn {
    /// Column by name.
    pub column: Option<String>,
    /// Column by its number, from 1.
    pub position: Option<usize>,
    /// Byte range in fixed width.
    pub bytes: Option<[usize; 2]>,
    /// Texts of the column and the medium they mean, where they are not the plain words.
    #[serde(default)]
    pub words: BTreeMap<String, String>,
}

/// A checked medium.
#[derive(Clone, Debug, PartialEq)]
pub enum MediumChoice {
    /// The same for every row.
    Fixed(MediumName),
    /// From a column.
    Column(Part, BTreeMap<String, MediumName>),
}

/// A number that is not printed as it is meant.
#[derive(Clone, Copy, Debug, Deserialize, PartialEq, Eq)]
#[serde(rename_all = "lowercase")]
pub enum NumberScale {
    /// The decimal logarithm of the value.
    Log10,
    /// Hundredths.
    Percent,
    /// An uncertainty in powers of ten: relative 1 σ = 10^x − 1.
    Dex,
}

/// A source's own grades and the relative 1 σ that each is taken to mean.
pub type Grades = BTreeMap<String, f64>;

/// How to take a merged cell apart.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(untagged)]
pub enum Split {
    /// `bracketed`: `588.995095(3)`, the bracket counts units of the last digit.
    Word(String),
    /// One piece between separators.
    Piece(Piece),
}

/// One piece of a cell that holds several.
#[derive(Clone, Debug, Deserialize, PartialEq, Eq)]
#[serde(deny_unknown_fields)]
pub struct Piece {
    /// The separator; a blank stands for any run of blanks.
    pub at: String,
    /// Which piece, from 1; from the end where negative.
    pub take: i32,
}

/// One target: where its cell is and how to read it.
#[derive(Clone, Debug, Default, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct Cell {
    /// Column by its name in the header.
    pub column: Option<String>,
    /// Column by its number, from 1.
    pub position: Option<usize>,
    /// First and last byte of a table of fixed width, from 1, both inside.
    pub bytes: Option<[usize; 2]>,
    /// The same text for every row.
    pub constant: Option<String>,
    /// Several cells, joined in this order; empty ones are left out.
    pub parts: Option<Vec<Part>>,
    /// What stands between joined cells; nothing where absent.
    pub join: Option<String>,
    /// Unit; needed for every quantity that has one.
    pub unit: Option<String>,
    /// Medium; needed for wavelengths, refused elsewhere.
    pub medium: Option<MediumSpec>,
    /// Texts that mean a missing value here, besides those of the table.
    #[serde(default)]
    pub missing: Vec<String>,
    /// A cell that begins with one of these characters is missing (`<`, `>` of a limit).
    pub missing_if_flagged: Option<String>,
    /// Characters cut off both ends before the cell is read.
    pub flags: Option<String>,
    /// Not printed as it is meant.
    pub scale: Option<NumberScale>,
    /// Translation of the source's own grades to a relative 1 σ.
    pub grades: Option<Grades>,
    /// How to take a merged cell apart.
    pub split: Option<Split>,
}

macro_rules! columns {
    ($($(#[doc = $doc:literal])+ $name:ident,)+) => {
        /// Target → cell. Every key is a target; unknown keys are refused.
        #[derive(Clone, Debug, Default, Deserialize, PartialEq)]
        #[serde(deny_unknown_fields)]
        pub struct Columns {
            $($(#[doc = $doc])+ pub $name: Option<Cell>,)+
        }

        impl Columns {
            /// Whether no target is mapped.
            pub fn is_empty(&self) -> bool {
                self.named().next().is_none()
            }

            /// All targets in use, by name.
            pub fn named(&self) -> impl Iterator<Item = (&'static str, &Cell)> {
                [$((stringify!($name), self.$name.as_ref()),)+]
                    .into_iter()
                    .filter_map(|(name, cell)| Some((name, cell?)))
            }

            /// The target of this name in its fixed spelling.
            pub fn target_name(name: &str) -> Option<&'static str> {
                [$(stringify!($name),)+].into_iter().find(|known| *known == name)
            }

            /// The target of this name, to be filled in; `None` where there is no such target.
            pub fn target(&mut self, name: &str) -> Option<&mut Option<Cell>> {
                match name {
                    $(stringify!($name) => Some(&mut self.$name),)+
                    _ => None,
                }
            }
        }
    };
}

columns! {
    /// Species in words: `Fe II`.
    species,
    /// Element: symbol or nuclear charge.
    element,
    /// Stage: Roman numeral or number, 1 for the neutral atom.
    stage,
    /// Net charge, 0 for the neutral atom; instead of the stage.
    charge,
    /// Mass number of an isotope.
    isotope,
    /// Level: energy above the ground level.
    energy,
    /// Level: 1 σ of the energy.
    energy_uncertainty,
    /// Level: electron configuration.
    configuration,
    /// Level: term, trailing `o` for odd parity.
    term,
    /// Level: total angular momentum.
    j,
    /// Level: statistical weight.
    g,
    /// Line: `line`, `mean`, `blend` or `isotope`.
    kind,
    /// Line: wavelength, with its medium.
    wavelength,
    /// Line: 1 σ of the wavelength.
    wavelength_uncertainty,
    /// Line: vacuum wavenumber.
    wavenumber,
    /// Line: 1 σ of the wavenumber.
    wavenumber_uncertainty,
    /// Line: frequency.
    frequency,
    /// Line: 1 σ of the frequency.
    frequency_uncertainty,
    /// Line: photon energy.
    photon_energy,
    /// Line: 1 σ of the photon energy.
    photon_energy_uncertainty,
    /// Line: whether the position is a difference of levels (`true`, `false`).
    from_levels,
    /// Line: energy of the lower level.
    lower_energy,
    /// Line: 1 σ of it.
    lower_energy_uncertainty,
    /// Line: configuration of the lower level.
    lower_configuration,
    /// Line: term of the lower level.
    lower_term,
    /// Line: J of the lower level.
    lower_j,
    /// Line: weight of the lower level.
    lower_g,
    /// Line: energy of the upper level.
    upper_energy,
    /// Line: 1 σ of it.
    upper_energy_uncertainty,
    /// Line: configuration of the upper level.
    upper_configuration,
    /// Line: term of the upper level.
    upper_term,
    /// Line: J of the upper level.
    upper_j,
    /// Line: weight of the upper level.
    upper_g,
    /// Line: spontaneous emission rate.
    rate,
    /// Line: absorption oscillator strength f.
    oscillator_strength,
    /// Line: g f, the lower level's weight times f.
    gf,
    /// Line: decimal logarithm of g f.
    log_gf,
    /// Line: relative 1 σ of the rate (or of f): a fraction, percent, dex or a grade.
    rate_uncertainty,
    /// Line: `published` or `derived`.
    rate_origin,
    /// Line: the source's own intensity.
    intensity,
}

impl Cell {
    /// A cell found by column name.
    pub fn named(column: &str) -> Self {
        Self {
            column: Some(column.to_owned()),
            ..Self::default()
        }
    }

    /// All places that this cell reads.
    pub fn sources(&self) -> Vec<Part> {
        let own = Part {
            column: self.column.clone(),
            position: self.position,
            bytes: self.bytes,
            constant: self.constant.clone(),
        };
        let mut all = self.parts.clone().unwrap_or_default();
        if self.parts.is_none() || own != Part::default() {
            all.insert(0, own);
        }
        if let Some(MediumSpec::Column(medium)) = &self.medium {
            all.push(medium.part());
        }
        all
    }
}

impl MediumColumn {
    /// Where the cell is.
    pub fn part(&self) -> Part {
        Part {
            column: self.column.clone(),
            position: self.position,
            bytes: self.bytes,
            constant: None,
        }
    }
}

impl MediumSpec {
    /// Checks the words.
    ///
    /// # Errors
    /// The word that is no medium.
    pub fn choice(&self) -> Result<MediumChoice, String> {
        match self {
            Self::Name(name) => MediumName::parse(name)
                .map(MediumChoice::Fixed)
                .ok_or_else(|| name.clone()),
            Self::Column(column) => {
                let words = column.words.iter().map(|(word, name)| {
                    let medium = MediumName::parse(name).ok_or_else(|| name.clone())?;
                    Ok::<_, String>((word.clone(), medium))
                });
                Ok(MediumChoice::Column(
                    column.part(),
                    words.collect::<Result<_, _>>()?,
                ))
            }
        }
    }
}
