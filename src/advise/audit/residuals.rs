//! How far each given position lies from where the levels put it.

use vocabulary::light::Air;
use vocabulary::report::{ReportedSource, Reports};
use vocabulary::spectrum::LineKind;

/// A given position against the one that follows from levels.
#[derive(Clone, Copy, Debug)]
pub(super) struct Residual {
    /// Index of the line in its source.
    pub line: usize,
    /// Given, cm⁻¹.
    pub given_per_cm: f64,
    /// Expected, cm⁻¹.
    pub expected_per_cm: f64,
    /// 1 σ of the difference, cm⁻¹.
    pub sigma_per_cm: f64,
}

impl Residual {
    pub fn off_per_cm(&self) -> f64 {
        self.given_per_cm - self.expected_per_cm
    }

    pub fn misfits(&self) -> bool {
        // A position and its levels are the same number printed twice where σ is zero: 1e-3 cm⁻¹
        // is the rounding that all tables leave.
        self.off_per_cm().abs() > 3.0 * self.sigma_per_cm + 1e-3
    }

    /// The difference over what the index of air would make of it: 1 where a wavelength in air was
    /// declared as vacuum, −1 the other way round. `None` outside the index or where the shift of
    /// air does not stand out of the uncertainty.
    pub fn air_fraction(&self) -> Option<f64> {
        let expected_nm = 1e7 / self.expected_per_cm;
        let index = Air::standard().index(expected_nm).ok()?.index;
        let shift_per_cm = self.expected_per_cm * (index - 1.0);
        (shift_per_cm > 5.0 * self.sigma_per_cm).then(|| self.off_per_cm() / shift_per_cm)
    }
}

/// All residuals of a source against its own levels, else against what the line is concluded to
/// be from other sources. Blends and means stand for several lines and are left out.
pub(super) fn of_source(of: &Reports, source: usize) -> Vec<Residual> {
    let own = &of.sources[source];
    own.lines
        .iter()
        .enumerate()
        .filter(|(_, line)| !matches!(line.kind, LineKind::Blend | LineKind::Mean))
        .filter_map(|(index, line)| {
            let (given, sigma) = line.wavenumber_per_cm.zip(line.uncertainty_per_cm)?;
            let (expected, levels) = own
                .ritz(line)
                .or_else(|| concluded(of, source, own, index))?;
            (given > 0.0 && expected > 0.0).then_some(Residual {
                line: index,
                given_per_cm: given,
                expected_per_cm: expected,
                sigma_per_cm: sigma.hypot(levels),
            })
        })
        .collect()
}

/// The concluded position of a line that joined one of another source.
fn concluded(of: &Reports, source: usize, own: &ReportedSource, line: usize) -> Option<(f64, f64)> {
    let joined = &of.lines[own.lines[line].joined?];
    (joined.position_source != source)
        .then_some((joined.wavenumber_per_cm, joined.uncertainty_per_cm))
}
