//! Hyperfine components of a line: where they lie and how its strength is shared among them.

use vocabulary::atom::HalfInteger;

use crate::calc::angular::hyperfine_share;

/// Hyperfine constants of a level. Model: magnetic dipole and electric quadrupole to first order
/// (Casimir 1936, *On the Interaction between Atomic Nuclei and Electrons*; Armstrong 1971, *Theory of the
/// Hyperfine Structure of Free Atoms*, equation II-22); levels that mix by the hyperfine
/// interaction itself move by more.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Constants {
    /// Nuclear spin I.
    pub nuclear_spin: HalfInteger,
    /// Dipole constant A and its 1 σ, MHz.
    pub a_mhz: (f64, f64),
    /// Quadrupole constant B and its 1 σ, MHz.
    pub b_mhz: (f64, f64),
}

/// One component F → F′ of a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Component {
    /// F of the lower level.
    pub lower_f: HalfInteger,
    /// F of the upper level.
    pub upper_f: HalfInteger,
    /// Share of the line's strength; the shares of a line add up to 1.
    pub share: f64,
    /// Distance from the centre of gravity, MHz.
    pub offset_mhz: f64,
    /// 1 σ of the distance, MHz.
    pub offset_uncertainty_mhz: f64,
    /// The upper F can decay to this lower F alone: the component cycles.
    pub closed: bool,
}

impl Constants {
    /// Shift of the level F from its centre of gravity and its 1 σ, MHz:
    /// A K/2 + B [3K(K+1)/4 − I(I+1)J(J+1)] / [2I(2I−1)J(2J−1)], K = F(F+1) − I(I+1) − J(J+1).
    /// The quadrupole counts for I, J ≥ 1 only.
    pub fn shift_mhz(&self, j: HalfInteger, f: HalfInteger) -> (f64, f64) {
        let square = |x: f64| x * (x + 1.0);
        let (i, j, f) = (self.nuclear_spin.value(), j.value(), f.value());
        let k = square(f) - square(i) - square(j);
        let dipole = k / 2.0;
        let quadrupole = if i >= 1.0 && j >= 1.0 {
            (0.75 * square(k) - square(i) * square(j))
                / (2.0 * i * (2.0 * i - 1.0) * j * (2.0 * j - 1.0))
        } else {
            0.0
        };
        let shift = self.a_mhz.0 * dipole + self.b_mhz.0 * quadrupole;
        let sigma = (self.a_mhz.1 * dipole).hypot(self.b_mhz.1 * quadrupole);
        (shift, sigma)
    }
}

/// F from |I − J| to I + J.
pub fn total_momenta(i: HalfInteger, j: HalfInteger) -> impl Iterator<Item = HalfInteger> {
    let (i, j) = (i.twice(), j.twice());
    (i.abs_diff(j)..=i + j)
        .step_by(2)
        .map(HalfInteger::from_twice)
}

/// All dipole components of a line, by position.
pub fn components(
    (lower_j, lower): (HalfInteger, &Constants),
    (upper_j, upper): (HalfInteger, &Constants),
) -> Vec<Component> {
    let spin = lower.nuclear_spin;
    let share = |f: HalfInteger, f_upper: HalfInteger| {
        hyperfine_share(spin, (lower_j, f), (upper_j, f_upper))
    };
    let mut out = Vec::new();
    for upper_f in total_momenta(spin, upper_j) {
        let reached = total_momenta(spin, lower_j)
            .filter(|f| share(*f, upper_f) > 0.0)
            .count();
        for lower_f in total_momenta(spin, lower_j) {
            let share = share(lower_f, upper_f);
            if share > 0.0 {
                let (low, low_sigma) = lower.shift_mhz(lower_j, lower_f);
                let (high, high_sigma) = upper.shift_mhz(upper_j, upper_f);
                out.push(Component {
                    lower_f,
                    upper_f,
                    share,
                    offset_mhz: high - low,
                    offset_uncertainty_mhz: low_sigma.hypot(high_sigma),
                    closed: reached == 1,
                });
            }
        }
    }
    out.sort_by(|a, b| a.offset_mhz.total_cmp(&b.offset_mhz));
    out
}
