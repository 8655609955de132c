//! From a species to its nucleus.

use vocabulary::atom::{Isotope, Species, element, isotope, isotopes};

use super::error::OneElectronError;
use super::hyperfine::NuclearMoment;
use super::nucleus::Nucleus;

/// Root-mean-square charge radii (Z, A, fm) (Angeli & Marinova 2013, At. Data Nucl. Data Tables 99, 69; from
/// memory, hence a 1 σ of [`RADIUS_UNCERTAINTY_FM`]).
#[rustfmt::skip]
const RADII_FM: [(u8, u16, f64); 41] = [
    (3, 6, 2.589), (3, 7, 2.444), (4, 9, 2.519), (5, 10, 2.428), (5, 11, 2.406), (6, 12, 2.470),
    (6, 13, 2.461), (7, 14, 2.558), (8, 16, 2.699), (9, 19, 2.898), (10, 20, 3.006), (11, 23, 2.994),
    (12, 24, 3.057), (13, 27, 3.061), (14, 28, 3.122), (15, 31, 3.189), (16, 32, 3.261), (17, 35, 3.365),
    (18, 40, 3.427), (19, 39, 3.435), (20, 40, 3.478), (21, 45, 3.546), (22, 48, 3.592), (23, 51, 3.600),
    (24, 52, 3.645), (25, 55, 3.706), (26, 56, 3.738), (27, 59, 3.788), (28, 58, 3.776), (29, 63, 3.882),
    (30, 64, 3.928), (36, 84, 4.188), (42, 98, 4.409), (47, 107, 4.545), (50, 120, 4.652), (54, 132, 4.786),
    (74, 184, 5.366), (79, 197, 5.437), (82, 208, 5.501), (83, 209, 5.521), (92, 238, 5.857),
];

/// 1 σ of the table above, fm.
const RADIUS_UNCERTAINTY_FM: f64 = 0.03;

impl Nucleus {
    /// The nucleus of a one-electron species. A natural mixture is taken as its most abundant isotope (where none
    /// is natural, the isotope nearest to the standard mass), so H is ¹H and He II is ⁴He⁺.
    pub fn of(species: Species) -> Result<Self, OneElectronError> {
        if !species.is_one_electron() {
            return Err(OneElectronError::NotOneElectron {
                symbol: species.to_string(),
                electrons: species.atomic_number.saturating_sub(species.charge()),
            });
        }
        if let Some(known) = well_known(species) {
            return Ok(known);
        }
        let found = held(species).ok_or_else(|| OneElectronError::NoMass {
            symbol: species.to_string(),
        })?;
        let doubt = found.mass_uncertainty_u.unwrap_or(1e-3);
        let nucleus = Self::from_atomic_mass(found.atomic_number, found.mass_u, doubt)?;
        let radius = RADII_FM
            .iter()
            .find(|row| (row.0, row.1) == (found.atomic_number, found.mass_number));
        match radius {
            Some(&(_, _, radius_fm)) => nucleus.with_radius(radius_fm, RADIUS_UNCERTAINTY_FM),
            None => Ok(nucleus),
        }
    }
}

impl NuclearMoment {
    /// Spin and moment of the nucleus of H, D, T or ³He⁺; `None` for other species.
    pub fn of(species: Species) -> Option<Self> {
        match (species.atomic_number, species.stage, species.isotope) {
            (1, 1, None | Some(1)) => Some(Self::PROTON),
            (1, 1, Some(2)) => Some(Self::DEUTERON),
            (1, 1, Some(3)) => Some(Self::TRITON),
            (2, 2, Some(3)) => Some(Self::HELION),
            _ => None,
        }
    }
}

fn well_known(species: Species) -> Option<Nucleus> {
    match (species.atomic_number, species.isotope) {
        (1, None | Some(1)) => Some(Nucleus::PROTON),
        (1, Some(2)) => Some(Nucleus::DEUTERON),
        (1, Some(3)) => Some(Nucleus::TRITON),
        (2, Some(3)) => Some(Nucleus::HELION),
        (2, None | Some(4)) => Some(Nucleus::ALPHA),
        _ => None,
    }
}

fn held(species: Species) -> Option<Isotope> {
    let number = species.atomic_number;
    if let Some(mass_number) = species.isotope {
        return isotope(number, mass_number);
    }
    let abundance = |i: &Isotope| i.abundance.unwrap_or(0.0);
    let commonest = isotopes(number).max_by(|a, b| abundance(a).total_cmp(&abundance(b)))?;
    if abundance(&commonest) > 0.0 {
        return Some(commonest);
    }
    let standard_u = element(number)?.mass_u;
    let distance = |i: &Isotope| (i.mass_u - standard_u).abs();
    isotopes(number).min_by(|a, b| distance(a).total_cmp(&distance(b)))
}
