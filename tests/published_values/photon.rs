//! One photon in five units against exact arithmetic (`tests/reference/published/photon.py`).

use super::printed::{number, table};
use vocabulary::light::{Air, Conversion, Medium, SpectralQuantity, SpectralUnit};

/// The table prints 15 digits (up to 5e-15), and each conversion is a few products in f64 (1e-15).
const RELATIVE: f64 = 1e-14;

fn close(what: &str, value: f64, expected: f64) {
    assert!(
        (value / expected - 1.0).abs() <= RELATIVE,
        "{what}: {value:e} against {expected:e}"
    );
}

#[test]
fn a_photon_has_one_energy_in_every_unit() {
    let rows = table("photon.csv");
    assert!(rows.len() >= 20);
    for row in &rows {
        let nm = SpectralUnit::parse("nm").unwrap();
        let quantity = SpectralQuantity::new(number(row, "vacuum_wavelength_nm"), nm).unwrap();
        let found = Conversion::of(quantity, Medium::Vacuum, Air::standard()).unwrap();
        for (column, value) in [
            ("vacuum_wavelength_nm", found.vacuum_wavelength_nm),
            ("wavenumber_per_cm", found.wavenumber_per_cm),
            ("frequency_thz", found.frequency_thz),
            ("energy_ev", found.energy_ev),
            ("momentum_kg_m_per_s", found.momentum_kg_m_per_s),
        ] {
            let place = format!("{column} at {} nm", row["vacuum_wavelength_nm"]);
            close(&place, value, number(row, column));
        }
    }
}

/// And back: from each unit to the wavelength.
#[test]
fn every_unit_leads_back_to_the_wavelength() {
    for row in table("photon.csv") {
        for (column, unit) in [
            ("wavenumber_per_cm", "cm-1"),
            ("frequency_thz", "THz"),
            ("energy_ev", "eV"),
        ] {
            let unit = SpectralUnit::parse(unit).unwrap();
            let quantity = SpectralQuantity::new(number(&row, column), unit).unwrap();
            let found = Conversion::of(quantity, Medium::Auto, Air::standard()).unwrap();
            let expected = number(&row, "vacuum_wavelength_nm");
            assert!(
                (found.vacuum_wavelength_nm / expected - 1.0).abs() <= RELATIVE,
                "{column}: {} nm against {expected}",
                found.vacuum_wavelength_nm
            );
        }
    }
}
