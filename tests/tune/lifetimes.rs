// Sums of held decay rates against published lifetimes.

use lineclear::advise::Spectrum;
use lineclear::advise::tune::{Atom, DecayBook};
use lineclear::catalogue::Catalogue;
use lineclear::vocabulary::atom::Species;
use lineclear::vocabulary::light::Air;

use super::{common, published};

fn atom(catalogue: &Catalogue, species: Species) -> Atom {
    let levels = catalogue.levels(species).unwrap();
    Atom::new(Spectrum {
        species,
        amount: 1.0,
        named: true,
        lines: catalogue.lines(species, &levels, 0.0, f64::INFINITY).unwrap(),
        strengths: catalogue.strengths(species).unwrap(),
        limit_per_cm: None,
        mass_u: 1.0,
        scopes: Vec::new(),
        levels,
    })
}

/// The sum of the rates out of an upper level agrees with its published lifetime, or decays that
/// are not rated are named: |τ ΣA − 1| within 3 σ of lifetime and rates together (10 % where a
/// rate states no σ, which the sources that state none are good for), or, where decays are not
/// rated, ΣA stays below. A level whose rates are all missing counts as named.
#[test]
fn held_rates_add_up_to_published_lifetimes() {
    let catalogue = Catalogue::open(common::catalogue()).unwrap();
    let rows = published("lifetimes.csv");
    let (mut summed, mut named, mut wrong) = (0, 0, Vec::new());
    for row in &rows {
        let species: Species = row["species"].parse().unwrap();
        let atoms = [atom(&catalogue, species)];
        let nm: f64 = row["strongest_decay_nm"].parse().unwrap();
        let vacuum_nm = match row["medium"].as_str() {
            "air" => Air::standard().to_vacuum_nm(nm).unwrap().nm,
            _ => nm,
        };
        let fits = |l: &&lineclear::vocabulary::spectrum::Line| {
            l.upper.as_ref().is_some_and(|u| {
                row["upper_j"].is_empty()
                    || u.j.is_some_and(|j| j.to_string() == row["upper_j"])
            })
        };
        let far = |l: &lineclear::vocabulary::spectrum::Line| (1e7 / l.wavenumber_per_cm - vacuum_nm).abs();
        let line = atoms[0]
            .spectrum
            .lines
            .iter()
            .filter(fits)
            .min_by(|a, b| far(a).total_cmp(&far(b)))
            .filter(|l| far(l) < 0.02);
        let Some(line) = line else {
            wrong.push(format!("{species} {nm}: no such line"));
            continue;
        };
        let upper = line.upper.as_ref().unwrap();
        let decays = DecayBook::new(&atoms).of(0, upper);
        let (lifetime, sigma): (f64, f64) =
            (row["lifetime_ns"].parse().unwrap(), row["uncertainty_ns"].parse().unwrap());
        let part = decays.sum_per_s * lifetime * 1e-9;
        let unrated = decays.unrated().count();
        let tolerance =
            3.0 * (sigma / lifetime).hypot(line.rate_relative_uncertainty.unwrap_or(0.1)).max(0.01);
        if (part - 1.0).abs() <= tolerance {
            summed += 1;
        } else if species.to_string() == "Ca II" && (part - 1.0).abs() < 0.05 {
            // The compiled rates of the mixture stand 4 % above the fast-beam lifetimes of Jin &
            // Church 1993, which the single isotopes rest on; an answer that uses both says so.
            named += 1;
        } else if unrated > 0 && part < 1.0 {
            named += 1;
        } else {
            wrong.push(format!("{species} {nm}: {part:.3} of the decay rate, {unrated} unrated"));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert_eq!(summed + named, rows.len());
    // Most sums must be whole: a catalogue that lost its rates would name them all.
    assert!(summed >= 40, "{summed} of {} add up", rows.len());
}
