//! Ranges to be scanned: `0.5..5eV:20`, `1e19..1e21m-3:9`.

use vocabulary::light::{NumberDensity, Temperature};

use super::CliError;

/// How many values a range stands for where no number follows.
const STEPS: u32 = 20;

/// Temperatures at equal ratios, ends included; none where the text is no range.
pub fn temperatures(text: &str) -> Result<Vec<Temperature>, CliError> {
    let example = "a range of temperatures such as 0.5..5eV:20";
    let Some((first, last, count)) = ends(text, example)? else {
        return Ok(Vec::new());
    };
    let (first, last): (Temperature, Temperature) = (first.parse()?, last.parse()?);
    let values = spread(text, first.ev(), last.ev(), count, example)?;
    Ok(values
        .into_iter()
        .filter_map(Temperature::from_ev)
        .collect())
}

/// Densities (m⁻³) at equal ratios, ends included; none where the text is no range.
pub fn densities(text: &str) -> Result<Vec<f64>, CliError> {
    let example = "a range of densities such as 1e19..1e21m-3:9";
    let Some((first, last, count)) = ends(text, example)? else {
        return Ok(Vec::new());
    };
    let (first, last): (NumberDensity, NumberDensity) = (first.parse()?, last.parse()?);
    spread(text, first.per_m3(), last.per_m3(), count, example)
}

/// The geometric middle of a scan; `None` of an empty one.
pub fn middle(values: impl Iterator<Item = f64>) -> Option<f64> {
    let values: Vec<f64> = values.collect();
    let (first, last) = (values.first()?, values.last()?);
    Some((first * last).sqrt().clamp(*first, *last))
}

/// First and last value with their unit, and how many; `None` where the text is no range.
fn ends(text: &str, example: &str) -> Result<Option<(String, String, u32)>, CliError> {
    let Some((from, rest)) = text.split_once("..") else {
        return Ok(None);
    };
    let (to, count) = match rest.split_once(':') {
        Some((to, count)) => {
            let count = count.trim().parse::<u32>().ok();
            let count = count
                .filter(|n| (2..=1000).contains(n))
                .ok_or_else(|| bad(text, "the number of steps lies between 2 and 1000", example))?;
            (to.trim(), count)
        }
        None => (rest.trim(), STEPS),
    };
    let from = from.trim();
    // The unit of the end is that of the beginning, where that has none.
    let first = match (from.parse::<f64>(), unit(to)) {
        (Ok(_), Some(unit)) => format!("{from}{unit}"),
        _ => from.to_owned(),
    };
    Ok(Some((first, to.to_owned(), count)))
}

/// What stands behind the number: of `1e21m-3` `m-3`.
fn unit(text: &str) -> Option<&str> {
    (1..=text.len())
        .rev()
        .filter(|&end| text.is_char_boundary(end))
        .find(|&end| text[..end].trim_end().parse::<f64>().is_ok())
        .map(|end| &text[end..])
}

fn spread(
    text: &str,
    first: f64,
    last: f64,
    count: u32,
    example: &str,
) -> Result<Vec<f64>, CliError> {
    if first >= last {
        let problem = "the range is empty or runs backwards";
        return Err(bad(text, problem, example));
    }
    let at = |step: u32| first * (last / first).powf(f64::from(step) / f64::from(count - 1));
    Ok((0..count).map(at).collect())
}

fn bad(text: &str, problem: &str, example: &str) -> CliError {
    CliError::Usage(format!("`{text}`: {problem}; write {example}"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_range_is_spread_at_equal_ratios() {
        let values = densities("1e19..1e21m-3:3").unwrap();
        assert_eq!(values.len(), 3);
        for (value, expected) in values.iter().zip([1e19, 1e20, 1e21]) {
            // Powers of ten through logarithms: rounding only.
            assert!((value / expected - 1.0).abs() < 1e-12, "{value}");
        }
        assert_eq!(densities("1e13cm-3..1e21m-3:5").unwrap().len(), 5);
        assert_eq!(temperatures("0.5..5eV").unwrap().len(), 20);
        assert!(temperatures("1eV").unwrap().is_empty());
    }

    #[test]
    fn a_range_that_cannot_be_scanned_is_refused() {
        for text in ["5..1eV", "1..1eV", "1..5eV:1", "1..5eV:x", "1..5", "..5eV"] {
            assert!(temperatures(text).is_err(), "{text}");
        }
        for text in ["1e21..1e19m-3", "1e19..1e21", "0..1e20m-3"] {
            assert!(densities(text).is_err(), "{text}");
        }
    }
}
