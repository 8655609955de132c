//! A line as it is typed: a position, or a species with a position.

use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Air, Medium, SpectralQuantity, SpectralRange};

use super::CliError;
use crate::advise::Wanted;

/// Reads `587.56nm`, `He I@587.56nm`, `"He I 587.56nm"`, `He@587.56nm`.
pub fn wanted(text: &str, medium: Medium) -> Result<Wanted, CliError> {
    let (request, position) = parts(text)?;
    let wavenumber = position.wavenumber_per_cm(medium, Air::standard())?;
    Ok(Wanted {
        request,
        vacuum_nm: 1e7 / wavenumber,
        typed: text.trim().to_owned(),
    })
}

fn parts(text: &str) -> Result<(Option<SpeciesRequest>, SpectralQuantity), CliError> {
    if let Some((species, position)) = text.split_once('@') {
        return Ok((Some(species.trim().parse()?), joined(position).parse()?));
    }
    let words: Vec<&str> = text.split_whitespace().collect();
    for split in (1..words.len()).rev() {
        let species = words[..split].join(" ").parse::<SpeciesRequest>();
        let position = words[split..].concat().parse::<SpectralQuantity>();
        if let (Ok(species), Ok(position)) = (species, position) {
            return Ok((Some(species), position));
        }
    }
    // A position behind something that is no species: what is wrong is the species.
    if let [species @ .., last] = words.as_slice()
        && !species.is_empty()
        && last.parse::<SpectralQuantity>().is_ok()
        && species.concat().parse::<SpectralQuantity>().is_err()
        && species.concat().parse::<f64>().is_err()
    {
        species.join(" ").parse::<SpeciesRequest>()?;
    }
    if text.parse::<SpeciesRequest>().is_ok() {
        let typed = text.trim();
        return Err(CliError::Usage(format!(
            "`{typed}` names a species but no line of it; write the position behind it, such as \
             \"{typed} 587.56nm\""
        )));
    }
    Ok((None, joined(text).parse()?))
}

/// `587.56 nm` is one word.
fn joined(text: &str) -> String {
    text.split_whitespace().collect()
}

/// A range of no width to speak of around a vacuum wavelength (nm).
pub fn around(vacuum_nm: f64) -> Result<SpectralRange, CliError> {
    let wavenumber = 1e7 / vacuum_nm;
    SpectralRange::from_wavenumbers_per_cm(wavenumber * (1.0 - 1e-12), wavenumber * (1.0 + 1e-12))
        .ok_or(CliError::Options(
            "the position lies beyond all that can be reckoned with; write one such as 587.56nm",
        ))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_is_read_in_every_spelling() {
        for text in [
            "He I@587.56nm",
            "He I 587.56nm",
            "HeI 587.56 nm",
            "He I@ 587.56 nm",
            "He I 5875.6A",
        ] {
            let wanted = wanted(text, Medium::Vacuum).unwrap();
            assert_eq!(wanted.request, Some("He I".parse().unwrap()), "{text}");
            assert!((wanted.vacuum_nm - 587.56).abs() < 1e-9, "{text}");
        }
        assert_eq!(wanted("587.56 nm", Medium::Vacuum).unwrap().request, None);
        let isotope = wanted("6Li I 670.8nm", Medium::Vacuum).unwrap();
        assert_eq!(isotope.request, Some("6Li I".parse().unwrap()));
    }

    #[test]
    fn a_line_without_position_is_refused() {
        for text in ["He I", "", "He I@", "@587nm", "Xx I 587nm"] {
            assert!(wanted(text, Medium::Auto).is_err(), "{text}");
        }
    }
}
