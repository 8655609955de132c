//! Spectral quantities, ranges, widths and conditions: what is read and what is said.

use vocabulary::light::{
    Air, Medium, NumberDensity, PositionMedium, SpectralQuantity, SpectralRange, SpectralUnit,
    SpectralWidth, Temperature, TypedRange,
};

fn range(text: &str, medium: Medium) -> Result<SpectralRange, String> {
    let typed: TypedRange = text.parse().map_err(|e| format!("{e}"))?;
    typed
        .resolve(medium, Air::standard())
        .map_err(|e| e.to_string())
}

fn vacuum(text: &str) -> SpectralRange {
    range(text, Medium::Vacuum).unwrap_or_else(|e| panic!("{text}: {e}"))
}

/// Ten units in the last place: each conversion is a few multiplications.
fn close(a: f64, b: f64) -> bool {
    (a - b).abs() <= 2e-15 * b.abs()
}

#[test]
fn every_unit_is_read_and_shown() {
    for unit in SpectralUnit::all() {
        let text = format!("12.5{unit}");
        let read: SpectralQuantity = text.parse().unwrap();
        assert_eq!(
            (read.value, read.unit, read.unit_assumed),
            (12.5, unit, false)
        );
        assert_eq!(read.to_string(), text);
    }
    for (typed, unit) in [
        ("6562.8 Å", SpectralUnit::Angstrom),
        ("6562.8\u{212b}", SpectralUnit::Angstrom),
        ("6562.8Angstrom", SpectralUnit::Angstrom),
        ("0.65628µm", SpectralUnit::Micrometre),
        ("0.65628μm", SpectralUnit::Micrometre),
        ("15237.4 cm^-1", SpectralUnit::PerCm),
        ("15237.4cm⁻¹", SpectralUnit::PerCm),
        ("1eV", SpectralUnit::Electronvolt),
        ("1e3meV", SpectralUnit::MilliElectronvolt),
        ("4.568e14Hz", SpectralUnit::Hertz),
    ] {
        assert_eq!(
            typed.parse::<SpectralQuantity>().unwrap().unit,
            unit,
            "{typed}"
        );
    }
    let bare: SpectralQuantity = "656.28".parse().unwrap();
    assert!(bare.unit_assumed && bare.unit == SpectralUnit::Nanometre);
}

#[test]
fn quantities_of_all_kinds_give_the_same_wavenumber() {
    let air = Air::standard();
    let wavenumber = |text: &str| {
        let quantity: SpectralQuantity = text.parse().unwrap();
        quantity.wavenumber_per_cm(Medium::Vacuum, air).unwrap()
    };
    for text in ["500nm", "5000A", "0.5um", "500000pm"] {
        assert!(close(wavenumber(text), 20_000.0), "{text}");
    }
    // Exact in the SI: c = 299 792 458 m/s; e and h give 1 eV = 8065.543 937 cm-1 (CODATA 2022).
    assert!(close(wavenumber("599.584916THz"), 20_000.0));
    assert!(
        (wavenumber("1eV") - 8_065.543_937).abs() < 5e-7,
        "printed digits"
    );
    assert!(close(wavenumber("1000meV"), wavenumber("1eV")));
}

#[test]
fn ranges_are_read_in_all_forms() {
    for text in [
        "656..657nm",
        "656nm..657nm",
        "656nm..657",
        "6560..6570A",
        "656.5+-0.5nm",
        "656.5±0.5nm",
        "656.5nm+-5A",
        "656.5nm±0.5",
        "656 .. 657 nm",
        "6560A..657nm",
    ] {
        let read = vacuum(text);
        assert!(close(read.vacuum_low_nm, 656.0), "{text}");
        assert!(close(read.vacuum_high_nm, 657.0), "{text}");
        assert!(close(read.wavenumber_high_per_cm, 1e7 / 656.0), "{text}");
        assert!(!read.unit_assumed && read.read_in == Some(PositionMedium::Vacuum));
    }
    assert!(vacuum("656..657").unit_assumed);
    let wavenumbers = vacuum("15000..20000cm-1");
    assert!(close(wavenumbers.vacuum_low_nm, 500.0));
    assert_eq!(wavenumbers.read_in, None);
    assert!(close(
        vacuum("1.8..1.9eV").wavenumber_low_per_cm,
        vacuum("1800..1900meV").wavenumber_low_per_cm
    ));
    let mixed = vacuum("500nm..15000cm-1");
    assert!(close(mixed.wavenumber_high_per_cm, 20_000.0));
    assert!(close(mixed.wavenumber_low_per_cm, 15_000.0));
    let around = vacuum("500nm+-10cm-1");
    assert!(close(around.wavenumber_low_per_cm, 19_990.0));
    assert!(close(around.wavenumber_high_per_cm, 20_010.0));
    let around = vacuum("20000cm-1+-1nm");
    assert!(close(around.vacuum_low_nm, 499.0) && close(around.vacuum_high_nm, 501.0));
    let in_air = range("20000cm-1+-1nm", Medium::Auto).unwrap();
    assert_eq!(in_air.read_in, Some(PositionMedium::Air));
    // 2 nm of air are 2 nm times n = 1.00028 of vacuum.
    assert!(
        (in_air.width_nm() - 2.000_56).abs() < 1e-4,
        "{}",
        in_air.width_nm()
    );
}

#[test]
fn the_medium_of_a_range_is_that_of_its_centre() {
    let medium = |text: &str| range(text, Medium::Auto).unwrap().read_in;
    assert_eq!(medium("656..657nm"), Some(PositionMedium::Air));
    assert_eq!(medium("121..122nm"), Some(PositionMedium::Vacuum));
    assert_eq!(medium("2100..2200nm"), Some(PositionMedium::Vacuum));
    assert_eq!(medium("150..200nm"), Some(PositionMedium::Vacuum));
    assert_eq!(medium("200..2000nm"), Some(PositionMedium::Air));
    assert_eq!(medium("15000..60000cm-1"), None);
    assert_eq!(medium("150..200nm"), Some(PositionMedium::Vacuum));
    let air = range("588.995..589.592nm", Medium::Auto).unwrap();
    // Na D lines: 588.995 nm in air is 589.158 nm in vacuum (common practice).
    assert!(
        (air.vacuum_low_nm - 589.158).abs() < 1e-3,
        "{}",
        air.vacuum_low_nm
    );
    assert!(!air.air_extrapolated);
    assert!(range("201..202nm", Medium::Auto).unwrap().air_extrapolated);
}

#[test]
fn each_range_error_is_one_sentence_that_helps() {
    let crossing = "`190..210nm` crosses 200 nm, where the medium changes between air and vacuum; \
                    add --medium vacuum or --medium air";
    let table = [
        ("", "a range is missing; write one such as 656..657nm"),
        (
            "656..656nm",
            "`656..656nm`: the range is empty; its ends must differ",
        ),
        (
            "6560A..656nm",
            "`6560A..656nm`: the range is empty; its ends must differ",
        ),
        (
            "656+-0nm",
            "`656+-0nm`: the range is empty; its ends must differ",
        ),
        (
            "657..656nm",
            "`657..656nm`: the range runs backwards; write the smaller number first",
        ),
        (
            "656.28nm",
            "`656.28nm` is a position, not a range; write 656..657nm or 656.28+-0.3nm",
        ),
        (
            "1+-2nm",
            "`1+-2nm`: the range reaches down to zero; make it narrower than its centre",
        ),
        (
            "656..657nM",
            "`657nM`: `nM` is no unit of a spectral position (did you mean nm?); write nm, A, um, pm, cm-1, meV, eV, keV or Hz to PHz",
        ),
        (
            "656..657furlong",
            "`657furlong`: `furlong` is no unit of a spectral position; write nm, A, um, pm, cm-1, meV, eV, keV or Hz to PHz",
        ),
        (
            "nan..657nm",
            "`nan`: a spectral position must be a finite number, such as 656.28nm",
        ),
        (
            "656..infnm",
            "`infnm`: a spectral position must be a finite number, such as 656.28nm",
        ),
        (
            "656..1e999nm",
            "`1e999nm`: a spectral position must be a finite number, such as 656.28nm",
        ),
        ("-5..657nm", "`-5`: a spectral position must be above zero"),
        ("0..657nm", "`0`: a spectral position must be above zero"),
        ("656+--1nm", "`656+--1nm`: a half width must be above zero"),
        (
            "abc..657nm",
            "`abc`: `abc` is not a number; write a spectral position such as 656.28nm",
        ),
        (
            "..657nm",
            "a spectral position is missing; write one such as 656.28nm",
        ),
        (
            "656,2..657nm",
            "`656,2`: `,2` is no unit of a spectral position; write nm, A, um, pm, cm-1, meV, eV, keV or Hz to PHz",
        ),
        ("190..210nm", crossing),
    ];
    for (typed, expected) in table {
        match range(typed, Medium::Auto) {
            Ok(read) => panic!("`{typed}` was read as {read:?}"),
            Err(message) => assert_eq!(message, expected),
        }
    }
    assert!(range("190..210nm", Medium::Vacuum).is_ok());
    assert!(range("190..210nm", Medium::Air).is_ok());
    assert_eq!(
        range("100..110nm", Medium::Air).unwrap_err(),
        "100 nm: the index of air is known from 185 to 2500 nm only; use vacuum wavelengths (--medium vacuum)"
    );
}

#[test]
fn widths_keep_their_kind() {
    let width = |text: &str| text.parse::<SpectralWidth>().unwrap();
    assert!(close(width("50pm").at_nm(500.0), 0.05));
    assert!(close(width("0.5A").at_nm(500.0), 0.05));
    // Δλ = λ² Δσ: 1 cm-1 at 500 nm is 0.025 nm (common practice).
    assert!(close(width("1cm-1").at_nm(500.0), 0.025));
    assert!(close(width("29.9792458GHz").at_nm(500.0), 0.025));
    assert!(close(width("0.025nm").at_per_cm(500.0), 1.0));
    assert!(width("0.1").unit_assumed);
    for (typed, expected) in [
        ("-1nm", "`-1nm`: a width must be above zero"),
        ("0nm", "`0nm`: a width must be above zero"),
        ("", "a width is missing; write one such as 0.1nm"),
        (
            "1parsec",
            "`1parsec`: `parsec` is no unit of a width; write nm, A, um, pm, cm-1, meV, eV, keV or Hz to PHz",
        ),
    ] {
        let error = typed.parse::<SpectralWidth>().unwrap_err().to_string();
        assert_eq!(error, expected);
    }
}

#[test]
fn temperatures_and_densities_need_their_unit() {
    let temperature = |text: &str| text.parse::<Temperature>().unwrap();
    // 1 eV is 11 604.518 12 K (CODATA 2022).
    assert!(
        (temperature("1eV").kelvin() - 11_604.518_12).abs() < 5e-6,
        "printed digits"
    );
    assert!(close(temperature("11600K").kelvin(), 11_600.0));
    assert!(close(temperature("0.5 keV").ev(), 500.0));
    assert_eq!(temperature("1eV").to_string(), "1eV");
    let density = |text: &str| text.parse::<NumberDensity>().unwrap();
    assert!(close(density("1e14cm-3").per_m3(), 1e20));
    assert!(close(density("1e20m-3").per_cm3(), 1e14));
    assert_eq!(density("1e14cm-3").to_string(), "1e20m-3");
    let wrong = |text: &str| text.parse::<Temperature>().unwrap_err().to_string();
    assert_eq!(
        wrong("1"),
        "`1`: a temperature needs its unit; write 1eV or 1K"
    );
    assert_eq!(wrong("0K"), "`0K`: a temperature must be above zero");
    assert_eq!(wrong("-1eV"), "`-1eV`: a temperature must be above zero");
    assert_eq!(
        wrong("1EV"),
        "`1EV`: `EV` is no unit of a temperature (did you mean eV?); write K, meV, eV or keV"
    );
    assert_eq!(
        wrong("NaN"),
        "`NaN`: a temperature must be a finite number, such as 1eV or 11600K"
    );
    let wrong = |text: &str| text.parse::<NumberDensity>().unwrap_err().to_string();
    assert_eq!(
        wrong("1e20"),
        "`1e20`: a density needs its unit; write 1e20m-3 or 1e20cm-3"
    );
    assert_eq!(
        wrong("1e20km-3"),
        "`1e20km-3`: `km-3` is no unit of a density; write m-3 or cm-3"
    );
}

#[test]
fn lines_are_shown_in_the_medium_that_was_asked_for() {
    let shown = |medium: Medium, nm: f64| medium.show(nm, Air::standard());
    let sodium = shown(Medium::Auto, 589.158_33).unwrap();
    // Na D2 stands at 588.9950 nm in air (common practice).
    assert!((sodium.nm - 588.995_0).abs() < 1.5e-4, "{}", sodium.nm);
    assert_eq!(sodium.medium, PositionMedium::Air);
    assert!(!sodium.air_extrapolated);
    assert!(shown(Medium::Auto, 250.0).unwrap().air_extrapolated);
    for (medium, nm) in [
        (Medium::Auto, 121.567),
        (Medium::Vacuum, 589.0),
        (Medium::Auto, 2058.7),
    ] {
        let line = shown(medium, nm).unwrap();
        assert_eq!((line.nm, line.medium), (nm, PositionMedium::Vacuum));
    }
    assert!(shown(Medium::Air, 121.567).is_err());
    assert!(shown(Medium::Auto, f64::NAN).unwrap().nm.is_nan());
}

#[test]
fn media_have_three_names() {
    for medium in [Medium::Auto, Medium::Vacuum, Medium::Air] {
        assert_eq!(medium.to_string().parse::<Medium>().unwrap(), medium);
    }
    let error = "water".parse::<Medium>().unwrap_err().to_string();
    assert_eq!(error, "`water` is no medium; write auto, vacuum or air");
}
