//! Constants against the CODATA 2022 table that scipy.constants 1.17.1 carries
//! (`tests/reference/constants/`, with its script).

use vocabulary::light::constants as c;
use vocabulary::light::thermal::{peak_frequency_thz, peak_wavelength_nm};

use crate::support::{assert_relative, number, rows};

/// What this program has under each name, in the unit of the table.
fn ours() -> [(&'static str, f64); 17] {
    [
        ("speed of light in vacuum", c::SPEED_OF_LIGHT_M_PER_S),
        ("Planck constant", c::PLANCK_J_S),
        ("elementary charge", c::ELEMENTARY_CHARGE_C),
        ("Boltzmann constant", c::BOLTZMANN_J_PER_K),
        ("Avogadro constant", c::AVOGADRO_PER_MOL),
        ("Rydberg constant", c::RYDBERG_PER_CM * 100.0),
        ("fine-structure constant", c::FINE_STRUCTURE),
        ("Bohr radius", c::BOHR_RADIUS_M),
        ("electron mass", c::ELECTRON_MASS_KG),
        ("electron mass in u", c::ELECTRON_MASS_U),
        ("atomic mass constant", c::ATOMIC_MASS_UNIT_KG),
        (
            "vacuum electric permittivity",
            c::VACUUM_PERMITTIVITY_F_PER_M,
        ),
        (
            "electron volt-inverse meter relationship",
            c::PER_CM_PER_EV * 100.0,
        ),
        (
            "kelvin-inverse meter relationship",
            c::PER_CM_PER_KELVIN * 100.0,
        ),
        ("electron volt-kelvin relationship", c::KELVIN_PER_EV),
        (
            "Wien wavelength displacement law constant",
            peak_wavelength_nm(1.0) * 1e-9,
        ),
        (
            "Wien frequency displacement law constant",
            peak_frequency_thz(1.0) * 1e12,
        ),
    ]
}

#[test]
fn every_constant_is_that_of_codata_2022() {
    assert_eq!(c::CODATA_YEAR, 2022);
    let table = rows("tests/reference/constants/constants.csv");
    assert_eq!(table.len(), ours().len());
    for (row, (name, value)) in table.iter().zip(ours()) {
        assert_eq!(row[0], name);
        // A few roundings of a 53-bit product, far below any stated uncertainty.
        assert_relative(value, number(&row[1]), 1e-15, name);
    }
}

#[test]
fn measured_constants_agree_with_each_other() {
    let c0 = c::SPEED_OF_LIGHT_M_PER_S;
    // α² m c / (2 h) = R∞ (definition); the adjustment keeps it to the digits that it prints.
    let rydberg = c::FINE_STRUCTURE.powi(2) * c::ELECTRON_MASS_KG * c0 / (2.0 * c::PLANCK_J_S);
    assert_relative(
        rydberg,
        c::RYDBERG_PER_CM * 100.0,
        1e-10,
        "R from alpha and m",
    );
    let bohr = c::FINE_STRUCTURE / (4.0 * std::f64::consts::PI * c::RYDBERG_PER_CM * 100.0);
    assert_relative(bohr, c::BOHR_RADIUS_M, 1e-10, "a0 from alpha and R");
    let ratio = c::ELECTRON_MASS_KG / c::ATOMIC_MASS_UNIT_KG;
    assert_relative(ratio, c::ELECTRON_MASS_U, 1e-10, "electron mass in u");
    let charge_square = c::ELEMENTARY_CHARGE_C.powi(2);
    let alpha = charge_square / (2.0 * c::VACUUM_PERMITTIVITY_F_PER_M * c::PLANCK_J_S * c0);
    assert_relative(alpha, c::FINE_STRUCTURE, 1e-10, "alpha from e, eps0, h, c");
}
