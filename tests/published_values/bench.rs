//! The invented bench data are what their README says: truths fit their peaks, errors have the stated size, and the
//! temperatures that were put in come out of a straight line.

use std::path::PathBuf;

use super::printed::{Row, number, table};

/// CODATA 2022, eV/K.
const BOLTZMANN_EV_PER_K: f64 = 8.617_333_262e-5;

fn bench(name: &str) -> Vec<Row> {
    table(&format!("bench/{name}.csv"))
}

fn sets() -> Vec<String> {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/reference/published/bench");
    let mut names: Vec<String> = std::fs::read_dir(folder)
        .unwrap()
        .filter_map(|entry| {
            let name = entry.unwrap().file_name().into_string().unwrap();
            Some(
                name.strip_prefix("peaks-")?
                    .strip_suffix(".csv")?
                    .to_owned(),
            )
        })
        .collect();
    names.sort();
    names
}

#[test]
fn peaks_are_printed_lines_moved_by_the_stated_error() {
    let (mut squares, mut count, mut second_order) = (0.0, 0.0, 0);
    for set in sets() {
        let (peaks, truths) = (
            bench(&format!("peaks-{set}")),
            bench(&format!("truth-{set}")),
        );
        assert_eq!(peaks.len(), truths.len(), "{set}");
        for (peak, truth) in peaks.iter().zip(&truths) {
            assert_eq!(peak["position_nm"], truth["position_nm"], "{set}");
            let order = number(truth, "order");
            let error = number(peak, "position_nm") - order * number(truth, "wavelength_nm");
            squares += (error / number(peak, "uncertainty_nm")).powi(2);
            count += 1.0;
            second_order += usize::from(order > 1.0);
        }
    }
    assert!(sets().len() >= 9 && count >= 380.0 && second_order >= 5);
    // χ² of about 400 errors: its relative σ is √(2/400) = 0.07; three of them.
    let chi: f64 = squares / count;
    assert!((chi - 1.0).abs() < 0.21, "{chi}");
}

/// T in K and its 1 σ from ln(I λ/gA) against E, weights alike.
fn straight_line(rows: &[Row]) -> (f64, f64) {
    let points: Vec<(f64, f64)> = rows
        .iter()
        .map(|row| {
            let weighted = number(row, "weighted_rate_per_s");
            let height = number(row, "intensity") * number(row, "wavelength_nm") / weighted;
            (number(row, "upper_energy_ev"), height.ln())
        })
        .collect();
    let n = f64::from(u32::try_from(points.len()).unwrap());
    let (sum_x, sum_y) = points
        .iter()
        .fold((0.0, 0.0), |(x, y), p| (x + p.0, y + p.1));
    let sum_xx: f64 = points.iter().map(|p| p.0 * p.0).sum();
    let sum_xy: f64 = points.iter().map(|p| p.0 * p.1).sum();
    let spread = sum_xx - sum_x * sum_x / n;
    let slope = (sum_xy - sum_x * sum_y / n) / spread;
    let kelvin = -1.0 / (BOLTZMANN_EV_PER_K * slope);
    let error = number(&rows[0], "relative_uncertainty") / spread.sqrt();
    (kelvin, error * BOLTZMANN_EV_PER_K * kelvin * kelvin)
}

#[test]
fn plots_give_the_temperature_that_was_put_in() {
    let plots = bench("plots");
    assert_eq!(plots.len(), 3);
    for plot in plots {
        let mut rows = bench(&format!("plot-{}", plot["name"]));
        rows.retain(|row| row["species"].ends_with(" I"));
        let (kelvin, sigma) = straight_line(&rows);
        // Two programs, one closed form; intensities are printed to six digits.
        let fitted = number(&plot, "fitted_temperature_k");
        assert!(
            (kelvin / fitted - 1.0).abs() < 1e-4,
            "{kelvin} against {fitted}"
        );
        let put_in = number(&plot, "invented_temperature_k");
        assert!(
            (kelvin - put_in).abs() <= 2.0 * sigma,
            "{kelvin} ± {sigma}, put in {put_in}"
        );
    }
}

#[test]
fn pixels_follow_the_stated_dispersion_but_for_two() {
    let (pixels, truths) = (bench("pixels-neon"), bench("truth-pixels-neon"));
    assert_eq!(pixels.len(), truths.len());
    let mut wrong = 0;
    for (row, truth) in pixels.iter().zip(&truths) {
        let x = number(row, "pixel");
        let off_nm = 575.0 + 0.08 * x - 2.5e-6 * x * x - number(row, "wavelength_nm");
        let right = truth["entry"] == "right";
        // 0.05 pixel of noise at 0.08 nm each: five σ is 0.02 nm; a wrong entry is off by six pixels.
        assert_eq!(off_nm.abs() < 0.02, right, "{row:?}: {off_nm}");
        wrong += usize::from(!right);
    }
    assert_eq!(wrong, 2);
}
