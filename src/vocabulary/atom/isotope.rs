//! Isotopes from the bundled table `data/elements/isotopes.csv`, and masses of species.

use std::sync::OnceLock;

use super::Species;
use super::element::element;
use crate::light::constants::ELECTRON_MASS_U;

/// One isotope.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Isotope {
    /// Nuclear charge Z.
    pub atomic_number: u8,
    /// Mass number A.
    pub mass_number: u16,
    /// Mass of the neutral atom, u.
    pub mass_u: f64,
    /// 1 σ of the mass, u.
    pub mass_uncertainty_u: Option<f64>,
    /// Share of the natural mixture, a fraction of 1; `None` where it does not occur naturally.
    pub abundance: Option<f64>,
    /// 1 σ of the share, a fraction of 1.
    pub abundance_uncertainty: Option<f64>,
}

const TABLE: &str = include_str!("../../../data/elements/isotopes.csv");

/// The known isotopes of an element in order of mass number; empty outside Z = 1–118.
/// Only the rows of this element are read.
pub fn isotopes(atomic_number: u8) -> impl Iterator<Item = Isotope> {
    rows_of(atomic_number).lines().filter_map(read_row)
}

/// One isotope; `None` where none with this mass number is known.
pub fn isotope(atomic_number: u8, mass_number: u16) -> Option<Isotope> {
    isotopes(atomic_number).find(|i| i.mass_number == mass_number)
}

/// Mass of the atom or ion, u: the isotope's mass, or the standard mass of the natural mixture,
/// less the electrons that are gone. Binding energies of the electrons (below 1e-6 of the mass) are
/// left out. `None` for a species that does not exist.
pub fn mass_u(species: Species) -> Option<f64> {
    let neutral_u = match species.isotope {
        Some(mass_number) => isotope(species.atomic_number, mass_number)?.mass_u,
        None => element(species.atomic_number)?.mass_u,
    };
    Some(neutral_u - f64::from(species.charge()) * ELECTRON_MASS_U)
}

/// The part of the table that belongs to one element. The table is ordered by Z.
fn rows_of(atomic_number: u8) -> &'static str {
    static STARTS: OnceLock<Vec<usize>> = OnceLock::new();
    let starts = STARTS.get_or_init(element_starts);
    let index = usize::from(atomic_number);
    match (starts.get(index), starts.get(index + 1)) {
        (Some(&from), Some(&to)) => TABLE.get(from..to).unwrap_or(""),
        _ => "",
    }
}

/// Byte where the rows of each Z start (index 0 is the header), and the end of the table.
fn element_starts() -> Vec<usize> {
    let mut starts = vec![0];
    let mut at = 0;
    let mut last = "";
    for line in TABLE.split_inclusive('\n') {
        let number = line.split(',').next().unwrap_or("");
        if at > 0 && number != last {
            starts.push(at);
            last = number;
        }
        at += line.len();
    }
    starts.push(at);
    starts
}

fn read_row(row: &str) -> Option<Isotope> {
    let mut fields = row.split(',');
    let atomic_number = fields.next()?.parse().ok()?;
    let mass_number = fields.next()?.parse().ok()?;
    let mass_u = fields.next()?.parse().ok()?;
    let mut optional = || fields.next()?.parse::<f64>().ok();
    Some(Isotope {
        atomic_number,
        mass_number,
        mass_u,
        mass_uncertainty_u: optional(),
        abundance: optional().map(|percent| percent / 100.0),
        abundance_uncertainty: optional().map(|percent| percent / 100.0),
    })
}

/// The known mass number nearest to one that is not known.
pub(super) fn nearest_mass_number(atomic_number: u8, mass_number: u16) -> Option<u16> {
    isotopes(atomic_number)
        .map(|i| i.mass_number)
        .min_by_key(|known| known.abs_diff(mass_number))
}
