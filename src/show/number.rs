//! Numbers as the trade prints them: with as many digits as their uncertainty allows.

/// A value with its 1 σ in brackets, in units of the last digit: `587.5621(3)`. A larger σ is
/// rounded into whole digits; σ of zero or missing gives six significant digits.
pub fn with_uncertainty(value: f64, sigma: f64) -> String {
    if !(sigma.is_finite() && sigma > 0.0) {
        return format!("{value:.4}");
    }
    let mut decimals = (-sigma.log10().floor()).max(0.0) as usize;
    let mut last = (sigma * 10f64.powi(decimals as i32)).round();
    if last >= 10.0 && decimals > 0 {
        decimals -= 1;
        last = (last / 10.0).round();
    }
    let decimals = decimals.min(9);
    format!("{value:.decimals$}({last:.0})")
}

/// As [`with_uncertainty`], with five decimals at most: a smaller σ shows as one unit of the fifth.
pub fn in_table(value: f64, sigma: f64) -> String {
    with_uncertainty(value, if sigma > 0.0 { sigma.max(1e-5) } else { sigma })
}

/// As [`percent`], without the blank, for narrow columns.
pub fn percent_in_table(fraction: f64) -> String {
    percent(fraction).replace(' ', "")
}

/// A rate such as `6.16e7`, three significant digits.
pub fn rate(rate_per_s: f64) -> String {
    format!("{rate_per_s:.2e}")
}

/// A fraction as a percentage with two significant digits: `0.32 %`, `12 %`, `<0.001 %`.
pub fn percent(fraction: f64) -> String {
    let value = 100.0 * fraction;
    match value {
        0.0 => "0 %".into(),
        v if v.is_nan() => "?".into(),
        v if v < 0.001 => "<0.001 %".into(),
        v if v >= 1e4 => format!("{v:.1e} %"),
        v if v >= 9.95 => format!("{v:.0} %"),
        v => {
            let decimals = (1 - v.log10().floor() as i32).max(0) as usize;
            format!("{v:.decimals$} %")
        }
    }
}

/// A fraction near 1 as a percentage with two digits of what is missing: `99.948 %`; others as
/// [`percent`].
pub fn purity(fraction: f64) -> String {
    let missing = 100.0 * (1.0 - fraction);
    match missing {
        m if !(0.0..=10.0).contains(&m) => percent(fraction),
        m if m < 1e-4 => ">99.9999 %".into(),
        m => {
            let decimals = (1 - m.log10().floor() as i32).max(0) as usize;
            format!("{:.decimals$} %", 100.0 - m)
        }
    }
}

/// A relative uncertainty in whole per cent, at least 1: ` ±1%`; ` ±?` where it is not stated.
pub fn plus_minus(relative: Option<f64>) -> String {
    relative.map_or_else(
        || " ±?".into(),
        |r| format!(" ±{:.0}%", (100.0 * r).max(1.0)),
    )
}

/// A width or distance with three significant digits.
pub(super) fn short(nm: f64) -> String {
    let digits = format!("{nm:.2e}");
    digits
        .parse::<f64>()
        .map_or(digits, |value| value.to_string())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_follow_the_uncertainty() {
        assert_eq!(with_uncertainty(587.562_148, 0.000_31), "587.5621(3)");
        assert_eq!(with_uncertainty(587.562_148, 0.000_097), "587.5621(1)");
        assert_eq!(with_uncertainty(587.562_148, 12.0), "588(12)");
        assert_eq!(with_uncertainty(587.562_148, 0.0), "587.5621");
    }

    #[test]
    fn purities_show_what_is_missing() {
        assert_eq!(purity(0.999_48), "99.948 %");
        assert_eq!(purity(0.95), "95.0 %");
        assert_eq!(purity(0.5), "50 %");
        assert_eq!(purity(1.0), ">99.9999 %");
        assert_eq!(purity(f64::NAN), "?");
    }

    #[test]
    fn percentages_keep_two_digits() {
        assert_eq!(percent(0.003_21), "0.32 %");
        assert_eq!(percent(0.123), "12 %");
        assert_eq!(percent(0.0123), "1.2 %");
        assert_eq!(percent(1e-7), "<0.001 %");
        assert_eq!(percent(0.0), "0 %");
    }
}
