//! Instruments inside an answer, against scipy.

use lineclear::advise::{EmissionModel, InstrumentForm};
use lineclear::calc::shape::{ResponseCurve, hydrogen_stark};
use lineclear::vocabulary::atom::Species;

use super::invented::{conditions, one_line, spectrum, vet};

/// CODATA 2022: u c²/k, K.
const MASS_KELVIN: f64 = 1.660_539_068_92e-27 * 299_792_458.0 * 299_792_458.0 / 1.380_649e-23;
const NM: f64 = 500.0;

fn measured() -> ResponseCurve {
    let path = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/tests/reference/emission/harrow_bay_response.csv"
    );
    let text = std::fs::read_to_string(path).unwrap();
    let points: Vec<(f64, f64)> = text
        .lines()
        .filter(|l| !l.starts_with('#'))
        .skip(1)
        .map(|l| {
            let (x, y) = l.split_once(',').unwrap();
            (x.parse().unwrap(), y.parse().unwrap())
        })
        .collect();
    ResponseCurve::new(&points).unwrap()
}

#[test]
fn what_an_instrument_sees_is_good_to_a_millionth_of_the_peak() {
    let path = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/tests/reference/emission/seen.csv"
    );
    let mut rows = 0;
    for row in csv::Reader::from_path(path).unwrap().records() {
        let row = row.unwrap();
        let cell = |i: usize| row[i].parse::<f64>().unwrap();
        let (sigma, hwhm, offset, want) = (cell(2), cell(3), cell(4), cell(5));
        let (form, fwhm) = match &row[0] {
            "triangular" => (InstrumentForm::Triangular, cell(1)),
            "rectangular" => (InstrumentForm::Rectangular, cell(1)),
            _ => {
                let curve = measured();
                let fwhm = curve.fwhm_nm();
                (InstrumentForm::Measured(curve), fwhm)
            }
        };
        let mut conditions = conditions(EmissionModel::Visible, 8000.0);
        conditions.details.instrument = form;
        // σ = λ √(kT/mc²) and γ = λ² A/(4πc), made the same for both lines.
        let mass = 50.0;
        conditions.gas_temperature_k = (sigma / NM).powi(2) * mass * MASS_KELVIN;
        let rate = |nm: f64| {
            let hwhm_m = (hwhm * 1e-9).max(1e-18);
            4.0 * std::f64::consts::PI * 299_792_458.0 * hwhm_m / (nm * 1e-9).powi(2)
        };
        let mut target = one_line(21, NM, rate(NM));
        let mut other = one_line(22, NM + offset, rate(NM + offset));
        target.mass_u = mass;
        other.mass_u = mass * ((NM + offset) / NM).powi(2);
        let answer = vet(&[target, other], "Sc I", NM, fwhm, conditions);
        let got = answer.interference.unwrap().fraction;
        // What the program promises.
        assert!((got - want).abs() <= 1e-6, "{row:?}: {got}");
        rows += 1;
    }
    assert_eq!(rows, 84);
}

#[test]
fn a_line_behind_a_rectangular_slit_is_clear_outside_of_it() {
    // A wide slit of 0.1 nm sees nothing 0.06 nm away, but all of what is 0.04 nm away.
    let fraction = |offset: f64, form: InstrumentForm| {
        let mut conditions = conditions(EmissionModel::Visible, 8000.0);
        conditions.details.instrument = form;
        let spectra = [one_line(21, NM, 1e7), one_line(22, NM + offset, 1e7)];
        vet(&spectra, "Sc I", NM, 0.1, conditions)
            .interference
            .unwrap()
            .fraction
    };
    // Natural wings of 1e7 s⁻¹ (1e-6 nm) reach out to 1e-5.
    assert!(fraction(0.06, InstrumentForm::Rectangular) < 1e-4);
    assert!((fraction(0.04, InstrumentForm::Rectangular) - 1.0).abs() < 1e-4);
    // A triangle falls by 1 − |d|/w (common practice); its tip is cut by the Doppler width of
    // 7e-4 nm: 1 − 0.8 σ/w = 0.994.
    let part = fraction(0.04, InstrumentForm::Triangular);
    assert!((part - 0.6).abs() < 6e-3, "{part}");
}

/// H I with the levels of Hβ (n = 4 → 2) as one line.
fn h_beta() -> lineclear::advise::Spectrum {
    let mut h = spectrum(
        Species::new(1, 1),
        &[
            (0.0, 2.0, "1s", "2S"),
            (82_259.0, 4.0, "2p", "2Po"),
            (102_823.0, 6.0, "4d", "2D"),
        ],
        &[(0, 1, Some(6e8)), (1, 2, Some(2e7))],
    );
    h.limit_per_cm = Some(109_678.8);
    h.mass_u = 1.008;
    h
}

#[test]
fn h_beta_in_a_plasma_has_its_published_stark_width() {
    // Gigosos, González & Cardeñoso 2003, Spectrochim. Acta B 58, 1489 (from memory): FWHM 4.800 nm
    // (n/1e23 m⁻³)^0.68116: 4.80 nm at 1e23, 1.00 nm at 1e22. An older theory, Griem 1974 (from
    // memory, α½ ≈ 0.0084 nm per CGS field unit at 1e16 cm⁻³, 2.61 e n^(2/3) = 58 units): 2 α½ F0 =
    // 0.99 nm. Both say some 5–10 %.
    let nm = 1e7 / (102_823.0 - 82_259.0);
    for (density, fwhm) in [(1e23, 4.80), (1e22, 1.00)] {
        let mut conditions = conditions(EmissionModel::Visible, 8065.5);
        conditions.electron_density_per_m3 = Some(density);
        let answer = vet(&[h_beta()], "H I", nm, 0.05, conditions);
        let stark = answer.pressure.stark.unwrap();
        assert!(
            (stark.fwhm_nm / fwhm - 1.0).abs() < 0.08,
            "{density:e}: {stark:?}"
        );
        let direct = hydrogen_stark(1, (2, 4), density, 1.0).unwrap();
        assert_eq!(stark, direct);
    }
}

#[test]
fn a_stark_wing_reaches_a_neighbour_as_a_lorentzian() {
    // The instrument (0.02 nm) and Doppler widths are small against 1 nm: at half a width off, the
    // neighbour of equal light, itself narrow, is reached with 1/2 of Hβ's peak over its own.
    let nm = 1e7 / (102_823.0 - 82_259.0);
    let mut conditions = conditions(EmissionModel::Visible, 8065.5);
    conditions.electron_density_per_m3 = Some(1e22);
    conditions.gas_temperature_k = 300.0;
    let width = hydrogen_stark(1, (2, 4), 1e22, 1.0).unwrap().fwhm_nm;
    let at = nm + width / 2.0;
    let part = |offset_to: f64| {
        let mut narrow = one_line(21, offset_to, 1e7);
        narrow.mass_u = 1e6;
        // Without a configuration no Stark width is to be had.
        let bare = |l: &lineclear::vocabulary::spectrum::Level| {
            std::sync::Arc::new(lineclear::vocabulary::spectrum::Level {
                configuration: None,
                ..l.clone()
            })
        };
        for line in &mut narrow.lines {
            line.upper = line.upper.as_deref().map(bare);
            line.lower = line.lower.as_deref().map(bare);
        }
        let answer = vet(
            &[h_beta(), narrow],
            "Sc I",
            offset_to,
            0.02,
            conditions.clone(),
        );
        answer.interference.unwrap().fraction
    };
    let ratio = part(at) / part(nm);
    // Instrument and Doppler width (0.02 and 0.006 nm) blunt a peak of 1 nm by (0.02)² or so.
    assert!((ratio - 0.5).abs() < 2e-3, "{ratio}");
}

#[test]
fn van_der_waals_width_grows_with_the_gas() {
    use lineclear::advise::Gas;
    let width = |density_per_m3: f64| {
        let mut conditions = conditions(EmissionModel::Visible, 8065.5);
        conditions.details.gas = vec![Gas {
            atomic_number: 18,
            mass_u: 39.948,
            density_per_m3,
        }];
        let spectra = [one_line(21, NM, 1e7)];
        let answer = vet(&spectra, "Sc I", NM, 0.05, conditions);
        answer.pressure.van_der_waals.unwrap().fwhm_nm
    };
    // In proportion, by the impact approximation.
    assert!((width(2e25) / width(1e25) - 2.0).abs() < 1e-12);
    // At 1 bar and 1000 K (7.2e24 m⁻³) lines in the visible have some 0.01 nm: common practice.
    assert!((1e-3..0.1).contains(&width(7.2e24)), "{}", width(7.2e24));
}
