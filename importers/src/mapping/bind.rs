//! Looking up the columns and units of one table.

use super::cell::{Bound, Marks, Place};
use super::level::LevelPlan;
use super::line::LinePlan;
use super::plan::MappingError;
use super::position::{MediumPlan, PositionPlan};
use super::rate::{RatePlan, RateQuantity, UncertaintyPlan};
use super::species::{SpeciesPlan, Words};
use crate::row::ColumnInfo;
use crate::source::{Cell, Ignore, MediumChoice, MediumName, NumberScale, Part, TableDescription};
use crate::unit::{self, Dialect, ToPerCm, Unit, UnitError};

/// Looks up columns and units of one table.
pub(super) struct Binder<'a> {
    pub table: &'a TableDescription,
    pub columns: &'a [ColumnInfo],
    pub marks: Marks,
}

impl Binder<'_> {
    pub(super) fn place(&self, target: &str, part: &Part) -> Result<Place, MappingError> {
        if let Some(text) = &part.constant {
            return Ok(Place::Constant(text.clone()));
        }
        let missing = |column: String| MappingError::NoColumn {
            target: target.to_owned(),
            column,
            known: quoted(self.columns.iter().map(|c| c.name.as_str())),
        };
        if let Some(position) = part.position {
            let index = position.wrapping_sub(1);
            return match self.columns.get(index) {
                Some(_) => Ok(Place::Column(index)),
                None => Err(missing(format!("number {position}"))),
            };
        }
        let name = match (&part.column, part.bytes) {
            (Some(name), _) => name.clone(),
            (None, Some(range)) => range_name(range),
            (None, None) => return Err(missing(String::new())),
        };
        let mut found = (0..self.columns.len()).filter(|i| self.columns[*i].name == name);
        match (found.next(), found.next()) {
            (Some(index), None) => Ok(Place::Column(index)),
            (Some(_), Some(_)) => Err(MappingError::TwoColumns { column: name }),
            (None, _) => Err(missing(name)),
        }
    }

    fn bound(&self, target: &str, cell: &Cell) -> Result<Bound, MappingError> {
        let parts = match &cell.parts {
            Some(parts) => parts.clone(),
            None => vec![own_part(cell)],
        };
        let places = parts
            .iter()
            .map(|part| self.place(target, part))
            .collect::<Result<Vec<_>, _>>()?;
        let name = match places.as_slice() {
            [Place::Column(index)] => self.columns[*index].name.clone(),
            _ => target.to_owned(),
        };
        let limit = self.limit_flag(&name);
        let mut bound = Bound::new(name, places, cell, &self.table.missing, self.marks);
        bound.limit = limit;
        Ok(bound)
    }

    /// The column of limit flags that belongs to a column (`l_x` to `x`).
    fn limit_flag(&self, name: &str) -> Option<usize> {
        let flag = format!("l_{name}");
        let cds = |column: &&ColumnInfo| column.dialect == Dialect::Cds && column.name == flag;
        let found = self.columns.iter().find(cds)?;
        self.columns
            .iter()
            .position(|column| std::ptr::eq(column, found))
    }

    /// A cell whose unit may say that it holds a logarithm.
    fn measured(&self, target: &str, cell: &Cell) -> Result<Bound, MappingError> {
        let mut bound = self.bound(target, cell)?;
        if let Some(Ok(unit)) = self.unit(target, cell)
            && unit.logarithm
        {
            bound.scale = Some(NumberScale::Log10);
        }
        Ok(bound)
    }

    fn optional(&self, target: &str, cell: Option<&Cell>) -> Result<Option<Bound>, MappingError> {
        cell.map(|cell| self.bound(target, cell)).transpose()
    }

    pub(super) fn species(&self) -> Result<SpeciesPlan, MappingError> {
        let columns = &self.table.columns;
        let element = self.optional("element", columns.element.as_ref())?;
        let stage = self.optional("stage", columns.stage.as_ref())?;
        let charge = self.optional("charge", columns.charge.as_ref())?;
        let whole = self.optional("species", columns.species.as_ref())?;
        let words = match (whole, element, stage, charge) {
            (Some(whole), None, ..) => Words::Whole(whole),
            (None, Some(element), Some(stage), None) => Words::Parts { element, stage },
            (None, Some(element), None, Some(charge)) => Words::Charge { element, charge },
            _ => {
                return Err(MappingError::NoTarget {
                    what: "which species a row is about",
                });
            }
        };
        let isotope = self.optional("isotope", columns.isotope.as_ref())?;
        Ok(SpeciesPlan::new(words, isotope))
    }

    /// The unit that the mapping states, else that of the column.
    fn unit(&self, target: &str, cell: &Cell) -> Option<Result<Unit, MappingError>> {
        let (text, dialect) = match (&cell.unit, self.own_column(target, cell)) {
            (Some(text), _) => (text.clone(), Dialect::Mapping),
            (None, Some(column)) => (column.unit.clone()?, column.dialect),
            (None, None) => return None,
        };
        Some(
            unit::parse(&text, dialect).map_err(|problem| MappingError::Unit {
                target: target.to_owned(),
                problem,
            }),
        )
    }

    /// The one column that a cell reads.
    fn own_column(&self, target: &str, cell: &Cell) -> Option<&ColumnInfo> {
        match self.place(target, &own_part(cell)) {
            Ok(Place::Column(index)) => self.columns.get(index),
            _ => None,
        }
    }

    fn spectral(
        &self,
        target: &str,
        cell: &Cell,
        example: &'static str,
    ) -> Result<(Unit, ToPerCm), MappingError> {
        let unit = self
            .unit(target, cell)
            .ok_or_else(|| MappingError::NoUnit {
                target: target.to_owned(),
                example,
            })??;
        let to_per_cm = unit
            .to_per_cm()
            .ok_or_else(|| wrong_kind(target, cell, "a spectral quantity"))?;
        Ok((unit, to_per_cm))
    }

    fn energy(
        &self,
        target: &str,
        cell: Option<&Cell>,
    ) -> Result<Option<(Bound, f64)>, MappingError> {
        let Some(cell) = cell else {
            return Ok(None);
        };
        match self.spectral(target, cell, "\"cm-1\" or \"eV\"")?.1 {
            ToPerCm::Times(factor) => Ok(Some((self.measured(target, cell)?, factor))),
            ToPerCm::Over(_) => Err(wrong_kind(target, cell, "an energy")),
        }
    }

    pub(super) fn level_table(&self) -> Result<LevelPlan, MappingError> {
        let columns = &self.table.columns;
        let plan = self.level(
            "",
            [
                &columns.energy,
                &columns.energy_uncertainty,
                &columns.configuration,
                &columns.term,
                &columns.j,
                &columns.g,
            ],
        )?;
        if plan.energy.is_none() {
            return Err(MappingError::NoTarget {
                what: "the energy of a level",
            });
        }
        Ok(plan)
    }

    fn level(&self, side: &str, cells: [&Option<Cell>; 6]) -> Result<LevelPlan, MappingError> {
        let [energy, uncertainty, configuration, term, j, g] = cells;
        let name = |target: &str| format!("{side}{target}");
        let text = |target: &str, cell: &Option<Cell>| self.optional(&name(target), cell.as_ref());
        Ok(LevelPlan {
            energy: self.energy(&name("energy"), energy.as_ref())?,
            uncertainty: self.energy(&name("energy_uncertainty"), uncertainty.as_ref())?,
            configuration: text("configuration", configuration)?,
            term: text("term", term)?,
            j: text("j", j)?,
            g: text("g", g)?,
        })
    }

    pub(super) fn line_table(&self) -> Result<LinePlan, MappingError> {
        let c = &self.table.columns;
        let lower = self.level(
            "lower_",
            [
                &c.lower_energy,
                &c.lower_energy_uncertainty,
                &c.lower_configuration,
                &c.lower_term,
                &c.lower_j,
                &c.lower_g,
            ],
        )?;
        let upper = self.level(
            "upper_",
            [
                &c.upper_energy,
                &c.upper_energy_uncertainty,
                &c.upper_configuration,
                &c.upper_term,
                &c.upper_j,
                &c.upper_g,
            ],
        )?;
        let position = self.position()?;
        if position.is_none() && (lower.is_empty() || upper.is_empty()) {
            return Err(MappingError::NoTarget {
                what: "where a line is",
            });
        }
        Ok(LinePlan {
            kind: self.optional("kind", c.kind.as_ref())?,
            position,
            from_levels: self.optional("from_levels", c.from_levels.as_ref())?,
            lower,
            upper,
            rate: self.rate()?,
            intensity: self.optional("intensity", c.intensity.as_ref())?,
        })
    }

    fn position(&self) -> Result<Option<PositionPlan>, MappingError> {
        let c = &self.table.columns;
        let wavelength = (&c.wavelength, &c.wavelength_uncertainty, "wavelength");
        let others = [
            (&c.wavenumber, &c.wavenumber_uncertainty, "wavenumber"),
            (&c.frequency, &c.frequency_uncertainty, "frequency"),
            (
                &c.photon_energy,
                &c.photon_energy_uncertainty,
                "photon_energy",
            ),
        ];
        for (cell, uncertainty, target) in std::iter::once(wavelength).chain(others) {
            let Some(cell) = cell else {
                continue;
            };
            let example = if target == "wavelength" {
                "\"nm\""
            } else {
                "\"cm-1\", \"eV\" or \"Hz\""
            };
            let (unit, to_per_cm) = self.spectral(target, cell, example)?;
            if unit.is_length() != (target == "wavelength") {
                return Err(wrong_kind(target, cell, "this quantity"));
            }
            return Ok(Some(PositionPlan {
                value: self.measured(target, cell)?,
                to_per_cm,
                medium: self.medium(target, cell, &unit)?,
                uncertainty: self.position_uncertainty(target, uncertainty.as_ref(), &unit)?,
            }));
        }
        Ok(None)
    }

    fn position_uncertainty(
        &self,
        target: &str,
        cell: Option<&Cell>,
        unit: &Unit,
    ) -> Result<Option<(Bound, f64)>, MappingError> {
        let Some(cell) = cell else {
            return Ok(None);
        };
        let target = format!("{target}_uncertainty");
        let factor = match self.unit(&target, cell) {
            None => 1.0,
            Some(own) => own?
                .ratio_to(unit)
                .ok_or_else(|| wrong_kind(&target, cell, "the quantity it belongs to"))?,
        };
        Ok(Some((self.bound(&target, cell)?, factor)))
    }

    fn medium(
        &self,
        target: &str,
        cell: &Cell,
        unit: &Unit,
    ) -> Result<Option<(MediumPlan, f64)>, MappingError> {
        if !unit.is_length() {
            return Ok(None);
        }
        let choice = match (&cell.medium, &self.table.medium) {
            (Some(spec), _) => spec.choice().ok(),
            (None, Some(name)) => MediumName::parse(name).map(MediumChoice::Fixed),
            (None, None) => None,
        };
        let plan = match choice.ok_or(MappingError::NoMedium)? {
            MediumChoice::Fixed(medium) => MediumPlan::Fixed(medium),
            MediumChoice::Column(part, words) => {
                let place = self.place(target, &part)?;
                let name = match &place {
                    Place::Column(index) => self.columns[*index].name.clone(),
                    Place::Constant(_) => target.to_owned(),
                };
                MediumPlan::Column { place, name, words }
            }
        };
        let nm = unit.scaled_factor(9);
        Ok(Some((plan, nm)))
    }

    fn rate(&self) -> Result<RatePlan, MappingError> {
        let c = &self.table.columns;
        let quantity = if let Some(cell) = &c.rate {
            let unit = self.unit("rate", cell).ok_or(MappingError::NoUnit {
                target: "rate".to_owned(),
                example: "\"s-1\"",
            })??;
            let factor = unit
                .to_per_s()
                .ok_or_else(|| wrong_kind("rate", cell, "a rate"))?;
            Some(("rate", cell, RateQuantity::Rate(factor)))
        } else if let Some(cell) = &c.oscillator_strength {
            Some((
                "oscillator_strength",
                cell,
                RateQuantity::OscillatorStrength,
            ))
        } else if let Some(cell) = &c.gf {
            Some(("gf", cell, RateQuantity::WeightedStrength))
        } else {
            let cell = c.log_gf.as_ref();
            cell.map(|cell| ("log_gf", cell, RateQuantity::LogWeightedStrength))
        };
        let value = match quantity {
            None => None,
            Some((target, cell, quantity)) => Some(self.strength(target, cell, quantity)?),
        };
        Ok(RatePlan {
            value,
            uncertainty: self.rate_uncertainty()?,
            origin: self.optional("rate_origin", c.rate_origin.as_ref())?,
        })
    }

    /// The cell of a rate or strength; `[-]` on a weighted strength means its logarithm.
    fn strength(
        &self,
        target: &str,
        cell: &Cell,
        quantity: RateQuantity,
    ) -> Result<(Bound, RateQuantity), MappingError> {
        let logarithm = matches!(self.unit(target, cell), Some(Ok(unit)) if unit.logarithm);
        Ok(match quantity {
            RateQuantity::LogWeightedStrength => (self.bound(target, cell)?, quantity),
            RateQuantity::WeightedStrength if logarithm => {
                (self.bound(target, cell)?, RateQuantity::LogWeightedStrength)
            }
            quantity => (self.measured(target, cell)?, quantity),
        })
    }

    fn rate_uncertainty(&self) -> Result<Option<UncertaintyPlan>, MappingError> {
        let target = "rate_uncertainty";
        let Some(cell) = &self.table.columns.rate_uncertainty else {
            return Ok(None);
        };
        let (factor, absolute) = match self.unit(target, cell).transpose()? {
            None => (1.0, false),
            Some(unit) => match (unit.to_number(), unit.to_per_s()) {
                (Some(factor), _) => (factor, false),
                (None, Some(factor)) => (factor, true),
                (None, None) => return Err(wrong_kind(target, cell, "a rate or a fraction")),
            },
        };
        Ok(Some(UncertaintyPlan {
            value: self.bound(target, cell)?,
            grades: cell.grades.clone(),
            factor,
            absolute,
        }))
    }

    pub(super) fn check_unmapped(&self) -> Result<(), MappingError> {
        let Ignore::Names(ignored) = &self.table.ignore else {
            return Ok(());
        };
        let mut used = vec![false; self.columns.len()];
        for (target, cell) in self.table.columns.named() {
            for part in cell.sources() {
                if let Place::Column(index) = self.place(target, &part)? {
                    used[index] = true;
                }
            }
        }
        for rule in self
            .table
            .skip
            .iter()
            .filter_map(|rule| rule.column.as_ref())
        {
            for (index, column) in self.columns.iter().enumerate() {
                used[index] |= column.name == *rule;
            }
        }
        let left = self.columns.iter().zip(&used);
        let left = left.filter(|(column, used)| !**used && !ignored.contains(&column.name));
        let left = quoted(left.map(|(column, _)| column.name.as_str()));
        if left.is_empty() {
            return Ok(());
        }
        Err(MappingError::Unmapped { columns: left })
    }
}

/// The name of a column that is a byte range.
pub(crate) fn range_name([first, last]: [usize; 2]) -> String {
    format!("bytes {first}-{last}")
}

fn own_part(cell: &Cell) -> Part {
    Part {
        column: cell.column.clone(),
        position: cell.position,
        bytes: cell.bytes,
        constant: cell.constant.clone(),
    }
}

fn wrong_kind(target: &str, cell: &Cell, wanted: &'static str) -> MappingError {
    MappingError::Unit {
        target: target.to_owned(),
        problem: UnitError::WrongKind {
            text: cell.unit.clone().unwrap_or_default(),
            wanted,
        },
    }
}

/// Names in quotes, at most twenty of them.
fn quoted<'a>(names: impl Iterator<Item = &'a str>) -> String {
    let names: Vec<String> = names
        .map(|name| format!("`{}`", crate::sink::shown(name)))
        .collect();
    if names.len() > 20 {
        return format!("{} and {} more", names[..20].join(", "), names.len() - 20);
    }
    names.join(", ")
}
