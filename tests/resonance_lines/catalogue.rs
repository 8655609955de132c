//! The tables as the bundled catalogue holds them.

use lineclear::catalogue::Catalogue;
use vocabulary::atom::Species;
use vocabulary::spectrum::{LineKind, PositionOrigin};

use super::tables::{MHZ_PER_CM, number, table};

/// Every row of the table is one line of its isotope, measured, with the position and the rate of this source to their
/// printed digits; no isotope has a line twice.
#[test]
fn the_catalogue_holds_every_line_once() {
    let catalogue = Catalogue::bundled_in_memory(&mut |_, _| {}).unwrap();
    let mut found = 0;
    for row in table("lines.csv") {
        let species: Species = row["species"].parse().unwrap();
        let levels = catalogue.levels(species).unwrap();
        let wavenumber = 1e7 / number(&row, "wavelength_nm");
        let sigma =
            wavenumber * number(&row, "wavelength_uncertainty_nm") / number(&row, "wavelength_nm");
        // 30 MHz: far less than the distance of two lines of one isotope here, far more than any rounding.
        let near = 30.0 / MHZ_PER_CM;
        let lines = catalogue
            .lines(species, &levels, wavenumber - near, wavenumber + near)
            .unwrap();
        let own: Vec<_> = lines
            .iter()
            .filter(|line| &*line.position_source == "resonance-lines")
            .collect();
        assert_eq!(own.len(), 1, "{row:?}: {lines:?}");
        assert_eq!(lines.len(), 1, "{row:?} stands twice: {lines:?}");
        let line = own[0];
        assert_ne!(line.position_origin, PositionOrigin::Computed);
        // The paper tables give deuterium as a species of its own, so that its lines are plain lines.
        let expected = if row["species"] == "D I" {
            LineKind::Line
        } else {
            LineKind::Isotope
        };
        assert_eq!(line.kind, expected, "{row:?}: {line:?}");
        let off = (line.wavenumber_per_cm - wavenumber).abs();
        assert!(off <= sigma.max(1e-9), "{row:?}: {off} cm⁻¹ off");
        // A paper table with a smaller σ may give the rate (Li I of Morton 2003); then the two agree to 1 %.
        let ours = line.rate_source.as_deref() == Some("resonance-lines");
        let ratio = line.rate_per_s.unwrap() / number(&row, "rate_per_s");
        let tolerance = if ours { 1e-9 } else { 0.01 };
        assert!((ratio - 1.0).abs() < tolerance, "{row:?}: {ratio}");
        found += 1;
    }
    assert!(found >= 76, "{found}");
}
