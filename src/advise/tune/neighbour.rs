//! Absorption of other elements close to a transition.

use vocabulary::atom::Species;

use super::{Atom, MHZ_PER_CM, Populated, Transition, strength};

/// Offsets up to so many Doppler widths count as close.
const CLOSE_DOPPLER_WIDTHS: f64 = 5.0;
/// How many neighbours are named.
const NAMED: usize = 3;

/// A line of another element that absorbs close by.
#[derive(Clone, Debug, PartialEq)]
pub struct Neighbour {
    /// Whose.
    pub species: Species,
    /// Vacuum wavelength, nm.
    pub vacuum_nm: f64,
    /// Distance, MHz; positive where the neighbour lies above.
    pub offset_mhz: f64,
    /// Its cross-section times population over those of the transition, where both are known.
    pub relative_absorption: Option<f64>,
}

struct Absorber {
    atom: usize,
    wavenumber_per_cm: f64,
    /// Peak cross-section (Doppler, up to a common factor) times population.
    weight: Option<f64>,
}

/// Finds, for each transition, what other elements absorb within [`CLOSE_DOPPLER_WIDTHS`].
/// `transitions` are in order of wavenumber.
pub fn find(transitions: &mut [Transition], atoms: &[Atom], populated: &[Populated]) {
    let elements = |z: u8| atoms.iter().any(|a| a.spectrum.species.atomic_number != z);
    let Some(first) = atoms.first() else {
        return;
    };
    if !elements(first.spectrum.species.atomic_number) {
        return;
    }
    let absorbers = absorbers(atoms, populated);
    for transition in transitions {
        let own = atoms[transition.atom].spectrum.species.atomic_number;
        let at = transition.line.wavenumber_per_cm;
        let reach = CLOSE_DOPPLER_WIDTHS * transition.doppler_width_mhz / MHZ_PER_CM;
        let from = absorbers.partition_point(|a| a.wavenumber_per_cm < at - reach);
        let mut close: Vec<Neighbour> = absorbers[from..]
            .iter()
            .take_while(|a| a.wavenumber_per_cm <= at + reach)
            .filter(|a| atoms[a.atom].spectrum.species.atomic_number != own)
            .map(|a| Neighbour {
                species: atoms[a.atom].spectrum.species,
                vacuum_nm: 1e7 / a.wavenumber_per_cm,
                offset_mhz: (a.wavenumber_per_cm - at) * MHZ_PER_CM,
                relative_absorption: relative(a, transition, atoms),
            })
            .collect();
        close.sort_by(|a, b| a.offset_mhz.abs().total_cmp(&b.offset_mhz.abs()));
        close.truncate(NAMED);
        transition.neighbours = close;
    }
}

fn absorbers(atoms: &[Atom], populated: &[Populated]) -> Vec<Absorber> {
    let mut out = Vec::new();
    for (atom, populated) in populated.iter().enumerate() {
        // An isotope repeats its mixture.
        if atoms[atom].mixture.is_some() {
            continue;
        }
        for line in &atoms[atom].spectrum.lines {
            if let Some(lower) = line.lower.as_ref().filter(|l| populated.holds(l.number)) {
                out.push(Absorber {
                    atom,
                    wavenumber_per_cm: line.wavenumber_per_cm,
                    weight: weight(
                        line,
                        lower.g,
                        populated.fraction(lower.number),
                        &atoms[atom],
                    ),
                });
            }
        }
    }
    out.sort_by(|a, b| a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm));
    out
}

/// λ³ A g_u/g_l √m times population: the Doppler peak cross-section up to a common factor.
fn weight(
    line: &vocabulary::spectrum::Line,
    lower_weight: Option<f64>,
    population: Option<f64>,
    atom: &Atom,
) -> Option<f64> {
    let dipole = strength::Dipole {
        vacuum_nm: 1e7 / line.wavenumber_per_cm,
        rate_per_s: line.rate_per_s?,
        lower_weight: lower_weight?,
        upper_weight: line.upper.as_ref()?.g?,
    };
    Some(dipole.integrated_m2_hz() * dipole.vacuum_nm * atom.spectrum.mass_u.sqrt() * population?)
}

fn relative(absorber: &Absorber, transition: &Transition, atoms: &[Atom]) -> Option<f64> {
    let lower = transition.line.lower.as_ref()?;
    let atom = &atoms[transition.atom];
    let own = weight(&transition.line, lower.g, transition.lower_population, atom)?;
    absorber.weight.filter(|_| own > 0.0).map(|w| w / own)
}
