//! Filters and detectors against published formulas, limits and properties.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::filter::{
    Blocking, CurveUnit, Detector, Filter, FilterError, Illumination, Shape, SpectralCurve,
    tilt_ratio,
};
use lineclear::calc::shape::{LineWidths, Voigt};
use proptest::prelude::*;
use table::assert_close;

const HEAD_ON: Illumination = Illumination {
    tilt_deg: 0.0,
    f_number: None,
    warming_k: 0.0,
};

fn filter(shape: Shape) -> Filter {
    Filter::new(shape, 656.3, 1.0, 0.6).unwrap()
}

fn at(filter: &Filter, light: Illumination, nm: f64) -> f64 {
    filter.seen(light).unwrap().transmission(nm).unwrap()
}

/// By definition of peak and FWHM.
#[test]
fn every_shape_has_its_peak_and_half_width() {
    for shape in [Shape::Cavities(1), Shape::Cavities(3), Shape::Gaussian] {
        let filter = filter(shape);
        assert_close(at(&filter, HEAD_ON, 656.3), 0.6, 1e-14, "peak");
        for edge in [655.8, 656.8] {
            assert_close(at(&filter, HEAD_ON, edge), 0.3, 1e-9, "half");
        }
    }
    let slab = filter(Shape::Rectangular);
    assert_eq!(at(&slab, HEAD_ON, 656.7), 0.6);
    assert_eq!(at(&slab, HEAD_ON, 656.9), 0.0);
}

/// 1/(1 + x²N): at one FWHM from the centre (x = 2) 1/5, 1/17, 1/65 of the peak for 1, 2, 3
/// cavities, and the Lorentzian of one cavity is that of a Voigt profile without Gaussian part.
#[test]
fn more_cavities_fall_off_more_steeply() {
    for (cavities, part) in [(1, 5.0), (2, 17.0), (3, 65.0)] {
        let filter = filter(Shape::Cavities(cavities));
        assert_close(
            at(&filter, HEAD_ON, 657.3),
            0.6 / part,
            1e-9,
            "one FWHM away",
        );
    }
    let lorentz = Voigt::new(LineWidths {
        sigma_nm: 0.0,
        hwhm_nm: 0.5,
    })
    .unwrap();
    let one = filter(Shape::Cavities(1));
    for offset in [0.1, 0.7, 3.0] {
        let want = 0.6 * lorentz.density(offset) / lorentz.peak();
        assert_close(at(&one, HEAD_ON, 656.3 + offset), want, 1e-9, "Lorentzian");
    }
}

/// Lissberger & Wilcock 1959: λ(θ) = λ₀ √(1 − sin²θ/n²); for small angles the shift is λ₀ θ²/(2
/// n²), and that of a cone's centre half that of its steepest rays. Worked by hand for 656.3 nm, n
/// = 2.05, 10°: sin 10° = 0.173648, ratio 0.996406, shift 2.36 nm.
#[test]
fn tilt_and_cone_shift_as_published() {
    let ratio = tilt_ratio(10.0, 2.05).unwrap();
    assert!((656.3 * (1.0 - ratio) - 2.36).abs() < 0.005);
    let small = 2.0_f64;
    let shift = 1.0 - tilt_ratio(small, 2.0).unwrap();
    // The next term is θ²/3 of it, 4e-4.
    assert_close(shift, small.to_radians().powi(2) / 8.0, 1e-3, "θ²/2n²");
    let filter = filter(Shape::Cavities(2));
    let beam = Illumination {
        f_number: Some(8.0),
        ..HEAD_ON
    };
    let half_angle = (1.0_f64 / 16.0).asin();
    let cone_shift = 656.3 - filter.seen(beam).unwrap().centre_nm();
    let steepest = 656.3 * half_angle.powi(2) / 8.0;
    assert_close(cone_shift, steepest / 2.0, 5e-3, "half the steepest ray's");
}

#[test]
fn a_tilted_cone_lies_around_its_chief_ray_and_closes_to_it() {
    let filter = filter(Shape::Gaussian);
    let tilted = |f_number| Illumination {
        tilt_deg: 8.0,
        f_number,
        warming_k: 0.0,
    };
    let chief = filter.seen(tilted(None)).unwrap().centre_nm();
    let slow = filter.seen(tilted(Some(200.0))).unwrap().centre_nm();
    // Half angle 0.14°: the second-order shift is 656 · (0.0025)²/16 = 0.0003 nm.
    assert!((chief - slow).abs() < 1e-3, "{chief} {slow}");
    // A fast cone smears: lower at the chief ray's centre.
    assert!(at(&filter, tilted(Some(8.0)), chief) < 0.9 * at(&filter, tilted(None), chief));
    // The mean of the rays of a tilted cone, by plain sums over cone and azimuth.
    let half = (1.0_f64 / 16.0).asin();
    let tilt = 8.0_f64.to_radians();
    let steps = 400;
    let (mut sum, mut count) = (0.0, 0.0);
    for i in 0..steps {
        let alpha = half * (f64::from(i) + 0.5) / f64::from(steps);
        for k in 0..steps {
            let azimuth = std::f64::consts::TAU * (f64::from(k) + 0.5) / f64::from(steps);
            let cosine = alpha.cos() * tilt.cos() - alpha.sin() * tilt.sin() * azimuth.cos();
            let ratio = (1.0 - (1.0 - cosine * cosine) / 4.0).sqrt();
            let offset = 2.0 * (chief / ratio - 656.3);
            sum += alpha.sin() * 0.6 * (-std::f64::consts::LN_2 * offset * offset).exp();
            count += alpha.sin();
        }
    }
    let got = at(&filter, tilted(Some(8.0)), chief);
    assert_close(got, sum / count, 3e-3, "48 rays against 160 000");
}

#[test]
fn warming_moves_the_passband() {
    let filter = filter(Shape::Cavities(2)).with_drift(0.02).unwrap();
    let warm = Illumination {
        warming_k: 15.0,
        ..HEAD_ON
    };
    assert_close(at(&filter, warm, 656.6), 0.6, 1e-12, "0.3 nm further");
    assert_close(
        filter.seen(warm).unwrap().centre_nm(),
        656.6,
        1e-12,
        "centre",
    );
    let moved = filter.seen(HEAD_ON).unwrap().shifted(0.3);
    assert_close(moved.transmission(656.6).unwrap(), 0.6, 1e-12, "shifted");
}

#[test]
fn blocking_is_a_floor_inside_its_limits_and_unknown_outside() {
    let filter = filter(Shape::Cavities(3))
        .with_blocking(Blocking {
            optical_density: 4.0,
            from_nm: 200.0,
            to_nm: 1100.0,
        })
        .unwrap();
    assert_close(at(&filter, HEAD_ON, 400.0), 1e-4, 1e-12, "OD 4");
    let seen = filter.seen(HEAD_ON).unwrap();
    assert_eq!(seen.transmission(150.0), None);
    assert_eq!(seen.transmission(1200.0), None);
}

fn curve() -> SpectralCurve {
    let points: Vec<_> = (0..101)
        .map(|k| {
            let nm = 650.0 + 0.1 * f64::from(k);
            (nm, 80.0 / (1.0 + (nm - 655.0).powi(4)))
        })
        .collect();
    SpectralCurve::new(&points, CurveUnit::Percent).unwrap()
}

#[test]
fn a_measured_filter_is_its_curve() {
    let filter = Filter::measured(curve());
    assert_close(filter.peak(), 0.8, 1e-12, "percent become fractions");
    assert_close(filter.centre_nm(), 655.0, 1e-6, "centre");
    // Half at (nm − 655)⁴ = 1; straight lines between points 0.1 nm apart.
    assert_close(filter.fwhm_nm(), 2.0, 5e-3, "FWHM");
    assert_close(
        at(&filter, HEAD_ON, 655.5),
        0.8 / 1.0625,
        1e-9,
        "on a point",
    );
    assert_eq!(filter.seen(HEAD_ON).unwrap().transmission(700.0), None);
    let tilted = Illumination {
        tilt_deg: 5.0,
        ..HEAD_ON
    };
    let moved = 655.0 * tilt_ratio(5.0, 2.0).unwrap();
    assert_close(at(&filter, tilted, moved), 0.8, 1e-3, "the curve moves");
}

#[test]
fn curves_are_checked() {
    let new = |points: &[(f64, f64)], unit| SpectralCurve::new(points, unit);
    let falling = [(502.0, 0.1), (501.0, 0.5), (500.0, 0.2)];
    assert_eq!(
        new(&falling, CurveUnit::Fraction).unwrap().at(501.0),
        Some(0.5)
    );
    let error = |points: &[(f64, f64)], unit| new(points, unit).unwrap_err().to_string();
    assert_eq!(
        error(&[(500.0, 20.0), (501.0, 120.0)], CurveUnit::Percent),
        "point 2 of the curve, at 501 nm, is 120: percent must not exceed 100"
    );
    assert!(
        error(&[(500.0, 20.0), (501.0, 80.0)], CurveUnit::Fraction).contains("in percent, say so")
    );
    assert!(error(&[(500.0, -0.5), (501.0, 0.8)], CurveUnit::Fraction).contains("negative"));
    assert!(
        error(&[(500.0, f64::NAN), (501.0, 0.8)], CurveUnit::Fraction).contains("give a number")
    );
    assert!(error(&[(500.0, 0.0), (501.0, 0.0)], CurveUnit::Relative).contains("zero"));
    assert_eq!(
        error(
            &[(500.0, 0.1), (501.0, 0.5), (501.0, 0.2)],
            CurveUnit::Fraction
        ),
        "point 3 of the curve, at 501 nm, breaks the order of wavelengths: sort the curve and keep \
         one value per wavelength"
    );
    let mut gappy: Vec<_> = (0..20).map(|k| (500.0 + f64::from(k), 0.5)).collect();
    gappy.push((540.0, 0.5));
    assert_eq!(
        error(&gappy, CurveUnit::Fraction),
        "the curve has a gap from 519 to 540 nm where its points are usually 1.000 nm apart: fill \
         it, or split the curve there"
    );
    assert_eq!(
        new(&[(500.0, 0.5)], CurveUnit::Fraction),
        Err(FilterError::FewPoints { points: 1 })
    );
    let noisy = new(&[(500.0, -0.001), (501.0, 0.8)], CurveUnit::Fraction).unwrap();
    assert_eq!((noisy.negative_points(), noisy.at(500.0)), (1, Some(0.0)));
    let odd = new(&[(500.0, 0.1), (501.0, 0.8)], CurveUnit::Percent).unwrap();
    assert!(odd.looks_like_fraction());
}

#[test]
fn nonsense_is_refused() {
    let steep = tilt_ratio(95.0, 2.0).unwrap_err();
    assert_eq!(
        steep.to_string(),
        "rays at up to 95.0° lie beyond total reflection at 90.0°: tilt less, or use a slower beam"
    );
    // In a medium denser than the filter, n_eff below 1: total reflection at 53.1°.
    assert!(tilt_ratio(54.0, 0.8).is_err() && tilt_ratio(53.0, 0.8).is_ok());
    let filter = filter(Shape::Gaussian);
    let light = |tilt_deg, f_number, warming_k| Illumination {
        tilt_deg,
        f_number,
        warming_k,
    };
    for bad in [
        light(89.0, Some(2.0), 0.0),
        light(-1.0, None, 0.0),
        light(0.0, Some(0.5), 0.0),
        light(f64::NAN, None, 0.0),
        light(0.0, None, f64::NAN),
    ] {
        assert!(filter.seen(bad).is_err(), "{bad:?}");
    }
    for (centre, width, peak) in [
        (0.0, 1.0, 0.5),
        (500.0, 0.0, 0.5),
        (500.0, 1.0, 1.1),
        (500.0, 600.0, 0.5),
        (f64::NAN, 1.0, 0.5),
    ] {
        assert!(Filter::new(Shape::Gaussian, centre, width, peak).is_err());
    }
    assert!(Filter::new(Shape::Cavities(0), 500.0, 1.0, 0.5).is_err());
}

/// λ = h c/W = 1239.842 nm eV/W: a caesium-like 2.1 eV cathode ends at 590.4 nm (common practice).
#[test]
fn a_photocathode_sees_nothing_beyond_its_threshold() {
    let detector = Detector::default().with_work_function(2.1).unwrap();
    assert_close(
        detector.threshold_nm().unwrap(),
        1239.842 / 2.1,
        1e-6,
        "threshold",
    );
    assert_eq!(detector.response(590.0), Some(1.0));
    assert_eq!(detector.response(591.0), Some(0.0));
    let curved = detector.with_curve(curve());
    assert_eq!(curved.response(500.0), None);
    assert_eq!(curved.response(656.0), Some(0.0));
    assert!(Detector::default().with_work_function(0.0).is_err());
}

#[test]
fn a_broad_line_passes_as_its_convolution_says() {
    // Lorentzian line and Lorentzian filter: half widths add, T₀ γ_f (γ_f + γ)/(Δ² + (γ_f + γ)²).
    let one = filter(Shape::Cavities(1));
    let seen = one.seen(HEAD_ON).unwrap();
    for (hwhm_nm, offset) in [(0.3, 0.0), (0.05, 0.4), (0.001, 2.0)] {
        let widths = LineWidths {
            sigma_nm: 0.0,
            hwhm_nm,
        };
        let got = seen
            .line_transmission(656.3 + offset, widths)
            .unwrap()
            .unwrap();
        let both = 0.5 + hwhm_nm;
        let want = 0.6 * 0.5 * both / (offset * offset + both * both);
        assert_close(got, want, 1e-5, "Lorentzian through Lorentzian");
    }
    let thin = LineWidths::default();
    assert_eq!(seen.line_transmission(656.3, thin).unwrap(), Some(0.6));
}

proptest! {
    /// Transmission is a fraction, whatever the light; blocking never lowers it.
    #[test]
    fn transmission_is_a_fraction(
        nm in 600.0..700.0_f64, tilt_deg in 0.0..30.0_f64, f in 1.0..50.0_f64, cavities in 1_u8..6,
    ) {
        let light = Illumination { tilt_deg, f_number: Some(f), warming_k: 3.0 };
        let plain = filter(Shape::Cavities(cavities));
        let open = at(&plain, light, nm);
        let blocked = plain.with_blocking(Blocking { optical_density: 3.0, from_nm: 300.0, to_nm: 900.0 }).unwrap();
        let floor = at(&blocked, light, nm);
        prop_assert!((0.0..=0.6).contains(&open));
        prop_assert!(floor >= open && floor >= 1e-3);
    }

    /// Widening a passband never lowers what it lets through.
    #[test]
    fn wider_passes_more(offset in -5.0..5.0_f64, width in 0.1..5.0_f64, more in 0.0..5.0_f64) {
        for shape in [Shape::Cavities(2), Shape::Gaussian, Shape::Rectangular] {
            let with = |fwhm| Filter::new(shape.clone(), 500.0, fwhm, 0.5).unwrap();
            let (narrow, wide) = (with(width), with(width + more));
            prop_assert!(at(&wide, HEAD_ON, 500.0 + offset) >= at(&narrow, HEAD_ON, 500.0 + offset));
        }
    }
}
