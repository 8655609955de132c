//! Widths, Voigt profiles and instruments: against scipy 1.17 (`tests/reference/shape`), papers,
//! limits.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::shape::{
    FWHM_PER_SIGMA, Instrument, LineWidths, Profile, ResponseCurve, ShapeError, Voigt,
    doppler_sigma_relative, natural_fwhm_hz, overlap, wavelength_width_nm,
};
use proptest::prelude::*;
use table::{assert_close, rows};

fn widths(sigma_nm: f64, hwhm_nm: f64) -> LineWidths {
    LineWidths { sigma_nm, hwhm_nm }
}

#[test]
fn voigt_density_agrees_with_the_reference_library() {
    let table = rows("shape/voigt.csv");
    assert_eq!(table.len(), 126);
    for row in table {
        let voigt = Voigt::new(widths(row[0], row[1])).unwrap();
        if row[3] > 1e-290 {
            // Claimed: 1e-9, and e^(−x²) at x = 40 σ amplifies rounding by 2 x².
            assert_close(voigt.density(row[2]), row[3], 1e-9, "density");
        } else {
            assert!(voigt.density(row[2]) <= 1e-280);
        }
    }
}

#[test]
fn voigt_width_is_exact_and_the_closed_form_as_good_as_published() {
    let mut worst = 0.0_f64;
    for row in rows("shape/width.csv") {
        let voigt = Voigt::new(widths(row[0], row[1])).unwrap();
        assert_close(voigt.fwhm(), row[2], 1e-9, "exact width");
        worst = worst.max((voigt.fwhm_estimate() / row[2] - 1.0).abs());
    }
    // Olivero & Longbothum 1977 state 0.02 %.
    assert!(worst < 2.5e-4, "{worst}");
    assert!(worst > 1e-5, "the closed form is not exact, {worst}");
}

#[test]
fn a_profile_has_unit_area() {
    for (sigma, hwhm) in [(0.01, 0.0), (0.01, 0.004), (0.0, 0.02)] {
        let voigt = Voigt::new(widths(sigma, hwhm)).unwrap();
        // Substitute offset = s tan θ, so that Lorentzian wings are counted to infinity.
        let scale = 0.01;
        let steps = 20_000;
        let h = std::f64::consts::PI / f64::from(steps);
        let area: f64 = (0..steps)
            .map(|k| {
                let theta = -std::f64::consts::FRAC_PI_2 + (f64::from(k) + 0.5) * h;
                voigt.density(scale * theta.tan()) * scale / theta.cos().powi(2) * h
            })
            .sum();
        assert_close(area, 1.0, 1e-6, "area by the midpoint rule");
    }
}

/// Lines of no Lorentzian, or no Gaussian, width.
#[test]
fn limits_of_the_voigt_profile() {
    let gauss = Voigt::new(widths(0.5, 0.0)).unwrap();
    assert_close(gauss.fwhm(), FWHM_PER_SIGMA * 0.5, 1e-9, "Gaussian FWHM");
    let lorentz = Voigt::new(widths(0.0, 0.5)).unwrap();
    assert_close(lorentz.fwhm(), 1.0, 1e-9, "Lorentzian FWHM");
    assert_close(lorentz.peak(), 2.0 / std::f64::consts::PI, 1e-14, "1/(π γ)");
    let narrow = Voigt::new(widths(1e-20, 0.5)).unwrap();
    assert_close(narrow.density(3.0), lorentz.density(3.0), 1e-12, "σ → 0");
    let far = Voigt::new(widths(0.01, 0.001)).unwrap();
    let wing = 0.001 / std::f64::consts::PI / 100.0;
    assert_close(far.density(10.0), wing, 1e-5, "wing γ/(π Δ²)");
    assert_eq!(Voigt::new(widths(0.0, 0.0)), Err(ShapeError::NoWidth));
    assert!(Voigt::new(widths(-1.0, 0.0)).is_err());
    assert!(Voigt::new(widths(f64::NAN, 0.0)).is_err());
}

/// FWHM = 7.16e-7 λ √(T/M): Doppler width of a line (common practice), and H-alpha at 10 000 K,
/// b = √(2kT/m) = 12.85 km/s (common practice in astronomy: 12.85 √(T₄) km/s).
#[test]
fn doppler_widths() {
    let sigma = doppler_sigma_relative(1000.0, 40.0).unwrap();
    assert_close(
        sigma * FWHM_PER_SIGMA,
        7.16e-7 * 5.0,
        1e-3,
        "argon at 1000 K",
    );
    let hydrogen = doppler_sigma_relative(1e4, 1.008).unwrap();
    let b_km_per_s = hydrogen * 2_f64.sqrt() * 299_792.458;
    assert_close(b_km_per_s, 12.85, 1e-3, "hydrogen at 10 000 K");
    assert!(doppler_sigma_relative(0.0, 1.0).is_err());
    assert!(doppler_sigma_relative(300.0, f64::NAN).is_err());
}

/// Na D2: upper level 16.25 ns, natural width 9.79 MHz (D. A. Steck, *Sodium D Line Data*), at 589
/// nm.
#[test]
fn natural_width_of_sodium() {
    let width_hz = natural_fwhm_hz(1.0 / 16.249e-9, 0.0).unwrap();
    assert_close(width_hz, 9.795e6, 1e-3, "FWHM in Hz");
    // Lorentz's classical damping width, 1.18e-5 nm at every wavelength for A = γ_classical
    // (common practice): γ = 2.223e13/λ(nm)² per s.
    let classical = natural_fwhm_hz(2.223e13 / 589.0_f64.powi(2), 0.0).unwrap();
    assert_close(
        wavelength_width_nm(589.0, classical),
        1.18e-5,
        5e-3,
        "classical width",
    );
    assert!(natural_fwhm_hz(-1.0, 0.0).is_err());
}

const MEASURED: [(f64, f64); 9] = [
    (-0.15, 0.0),
    (-0.08, 0.1),
    (-0.05, 0.5),
    (-0.01, 0.97),
    (0.0, 1.0),
    (0.03, 0.8),
    (0.06, 0.3),
    (0.12, 0.04),
    (0.2, 0.0),
];

fn instrument(kind: f64, width_nm: f64) -> Instrument {
    match kind as u8 {
        0 => Instrument::Triangular { fwhm_nm: width_nm },
        1 => Instrument::Rectangular { width_nm },
        _ => Instrument::Measured(ResponseCurve::new(&MEASURED).unwrap()),
    }
}

#[test]
fn convolution_is_good_to_a_millionth_of_the_peak() {
    let table = rows("shape/convolved.csv");
    assert_eq!(table.len(), 216);
    for row in table {
        let [kind, width, sigma, hwhm, offset, want] = row[..] else {
            panic!("six columns")
        };
        let profile = Profile::new(widths(sigma, hwhm), Some(&instrument(kind, width))).unwrap();
        let error = (profile.density(offset) - want).abs() / profile.centre();
        // What the program promises is 1e-6; the algorithm claims 1e-8.
        assert!(error <= 3e-8, "{row:?}: {}", profile.density(offset));
    }
}

#[test]
fn a_gaussian_instrument_adds_variances() {
    let blurred = Profile::new(
        widths(0.03, 0.01),
        Some(&Instrument::Gaussian {
            fwhm_nm: 0.04 * FWHM_PER_SIGMA,
        }),
    )
    .unwrap();
    let whole = Profile::new(widths(0.05, 0.01), None).unwrap();
    for offset in [0.0, 0.02, 0.3] {
        assert_close(
            blurred.density(offset),
            whole.density(offset),
            1e-12,
            "σ² add",
        );
    }
}

#[test]
fn a_line_without_width_shows_the_instrument() {
    for kind in [0.0, 1.0, 2.0] {
        let device = instrument(kind, 0.1);
        let bare = Profile::new(widths(0.0, 0.0), Some(&device)).unwrap();
        let thin = Profile::new(widths(1e-5, 0.0), Some(&device)).unwrap();
        for offset in [0.02, -0.03, 0.3] {
            assert_eq!(bare.density(offset), device.density(offset));
            // Corners of the response are rounded over 1e-5 nm.
            assert!((thin.density(offset) - bare.density(offset)).abs() < 1e-2);
        }
    }
    assert_eq!(
        Profile::new(widths(0.0, 0.0), None).unwrap_err(),
        ShapeError::NoWidth
    );
}

#[test]
fn overlap_is_one_on_the_line_and_falls_off() {
    let slit = Instrument::Triangular { fwhm_nm: 0.1 };
    for device in [None, Some(&slit)] {
        let line = Profile::new(widths(0.002, 0.0005), device).unwrap();
        assert_close(overlap(&line, &line, 0.0), 1.0, 1e-12, "on the line");
        let mut last = 1.0;
        for step in 1..40 {
            let now = overlap(&line, &line, 0.005 * f64::from(step));
            assert!(now <= last + 1e-7 && now >= 0.0, "{step}: {now}");
            last = now;
        }
    }
    // A broad line puts less on the target than a narrow one.
    let narrow = Profile::new(widths(0.002, 0.0), Some(&slit)).unwrap();
    let broad = Profile::new(widths(0.2, 0.0), Some(&slit)).unwrap();
    assert!(overlap(&narrow, &broad, 0.0) < 0.3);
}

#[test]
fn response_curves() {
    let curve = ResponseCurve::new(&MEASURED).unwrap();
    // Half of the highest response (0.5) is met at -0.05 and at 0.03 + 0.03 · 0.3/0.5 = 0.048.
    assert_close(curve.fwhm_nm(), 0.098, 1e-12, "FWHM");
    assert_eq!(curve.density(-0.2), 0.0);
    assert_eq!(curve.density(0.2001), 0.0);
    let bad = |points: &[(f64, f64)]| ResponseCurve::new(points).unwrap_err();
    assert!(matches!(
        bad(&[(0.0, 1.0)]),
        ShapeError::FewPoints { points: 1 }
    ));
    assert!(matches!(
        bad(&[(0.0, 1.0), (0.0, 2.0)]),
        ShapeError::NotRising { point: 2, .. }
    ));
    assert!(matches!(
        bad(&[(0.0, 1.0), (1.0, f64::NAN)]),
        ShapeError::BadResponse { .. }
    ));
    assert_eq!(bad(&[(0.0, 0.0), (1.0, 0.0)]), ShapeError::NoArea);
    let zero = Instrument::Gaussian { fwhm_nm: 0.0 };
    assert!(Profile::new(widths(0.1, 0.0), Some(&zero)).is_err());
}

#[test]
fn widths_of_one_line_combine() {
    let line = LineWidths::new(500.0, 1000.0, 40.0, 1e7).unwrap();
    let wide = line.with_lorentz(0.02).with_gaussian(0.03);
    assert_close(wide.hwhm_nm, line.hwhm_nm + 0.01, 1e-14, "half widths add");
    assert_close(
        wide.sigma_nm.powi(2),
        line.sigma_nm.powi(2) + 9e-4,
        1e-12,
        "variances add",
    );
    assert!(LineWidths::new(-1.0, 1000.0, 40.0, 0.0).is_err());
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    /// A Voigt profile is even and falls on both sides, whatever its widths.
    #[test]
    fn profiles_fall_off(
        log_sigma in -6.0..1.0_f64, log_hwhm in -9.0..1.0_f64, offset in 0.0..100.0_f64, further in 1e-6..10.0_f64,
    ) {
        let voigt = Voigt::new(widths(10_f64.powf(log_sigma), 10_f64.powf(log_hwhm))).unwrap();
        let near = voigt.density(offset);
        prop_assert!(near >= 0.0 && near.is_finite());
        prop_assert_eq!(near, voigt.density(-offset));
        // Where the methods of w(z) meet, their relative errors (2e-10) may step.
        prop_assert!(voigt.density(offset + further) <= near * (1.0 + 4e-10));
        prop_assert!(voigt.fwhm() > 0.0);
    }

    /// The exact width lies within the 0.02 % of Olivero & Longbothum at any ratio of widths.
    #[test]
    fn closed_form_width_is_near_the_exact_one(log_ratio in -6.0..6.0_f64) {
        let voigt = Voigt::new(widths(1.0, 10_f64.powf(log_ratio))).unwrap();
        prop_assert!((voigt.fwhm() / voigt.fwhm_estimate() - 1.0).abs() < 2.5e-4);
    }

    /// Blurring moves no light: the profile seen through a slit has the area of the line.
    #[test]
    fn blurring_keeps_the_area(width in 0.02..0.3_f64, log_sigma in -3.0..-1.0_f64) {
        let slit = Instrument::Rectangular { width_nm: width };
        let profile = Profile::new(widths(10_f64.powf(log_sigma), 0.0), Some(&slit)).unwrap();
        let reach = width + 1.0;
        let steps = 2000;
        let h = 2.0 * reach / f64::from(steps);
        let area: f64 = (0..steps)
            .map(|k| profile.density((f64::from(k) + 0.5) * h - reach) * h)
            .sum();
        // The midpoint rule at 1e-3 nm steps of an edge at least 1e-3 nm wide.
        prop_assert!((area - 1.0).abs() < 1e-2, "{}", area);
    }
}
