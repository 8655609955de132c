//! Robust statistics of small samples.

/// The median; `None` of nothing. Values must be numbers.
pub(super) fn median(values: impl Iterator<Item = f64>) -> Option<f64> {
    let mut sorted: Vec<f64> = values.collect();
    sorted.sort_by(f64::total_cmp);
    let upper = *sorted.get(sorted.len() / 2)?;
    if sorted.len() % 2 == 1 {
        return Some(upper);
    }
    Some(0.5 * (sorted[sorted.len() / 2 - 1] + upper))
}

/// 1 σ from the median absolute deviation (× 1.4826, exact for normal errors; common practice).
pub(super) fn spread(values: impl Iterator<Item = f64> + Clone) -> Option<f64> {
    let middle = median(values.clone())?;
    median(values.map(|v| (v - middle).abs())).map(|m| 1.4826 * m)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn medians_of_even_and_odd_samples() {
        assert_eq!(median([3.0, 1.0, 2.0].into_iter()), Some(2.0));
        assert_eq!(median([4.0, 1.0, 2.0, 3.0].into_iter()), Some(2.5));
        assert_eq!(median(std::iter::empty()), None);
        assert_eq!(spread([1.0, 2.0, 3.0].into_iter()), Some(1.4826));
    }
}
