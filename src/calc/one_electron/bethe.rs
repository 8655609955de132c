//! Bethe logarithms ln k0(n, l), computed by `tests/reference/one_electron/bethe_logarithms.py`, which
//! agrees with the published values (Drake & Swainson 1990, Phys. Rev. A 41, 1243) where known.

use super::bethe_table::{HELD_N, TABLE};

/// ln k0(n, l). Exact to 1e-9 for n ≤ 20; beyond by a straight line in 1/n² through the last two n held (error
/// below 1e-4 of it); for l ≥ 19 by a fall with (l + ½)⁻⁴ from l = 18, where it moves hydrogen by less than 10 Hz.
pub(super) fn bethe_logarithm(n: u32, l: u32) -> f64 {
    if n <= HELD_N {
        return held(n, l);
    }
    let last = HELD_N - 2;
    if l > last {
        return bethe_logarithm(n, last) * ((f64::from(last) + 0.5) / (f64::from(l) + 0.5)).powi(4);
    }
    let place = |n: u32| 1.0 / f64::from(n * n);
    let (a, b) = (held(HELD_N - 1, l), held(HELD_N, l));
    b + (a - b) * (place(n) - place(HELD_N)) / (place(HELD_N - 1) - place(HELD_N))
}

fn held(n: u32, l: u32) -> f64 {
    TABLE[(n * (n - 1) / 2 + l) as usize]
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Drake & Swainson 1990, Phys. Rev. A 41, 1243 (from memory); tolerance: of our quadrature.
    #[test]
    fn low_states_match_published_values() {
        let published = [
            (1, 0, 2.984_128_555_765),
            (2, 0, 2.811_769_893_121),
            (3, 0, 2.767_663_612_492),
            (4, 0, 2.749_811_840_454),
            (5, 0, 2.740_823_727_855),
            (2, 1, -0.030_016_708_630),
            (3, 1, -0.038_190_229_385),
            (4, 1, -0.041_954_894_598),
            (5, 1, -0.044_034_695_592),
            (3, 2, -0.005_232_148_141),
            (4, 2, -0.006_740_938_877),
            (4, 3, -0.001_733_661_482),
            (5, 4, -0.000_772_098_902),
        ];
        for (n, l, value) in published {
            let error = (bethe_logarithm(n, l) - value).abs();
            assert!(error < 2e-9, "n = {n}, l = {l}: {error:e}");
        }
    }

    /// As n grows, nS tends to 2.722 654 335 and nP to −0.049 054 54 (Poquérusse 1981, Phys. Lett. A 82, 232; from
    /// memory). At n = 1000 the remaining step is about 1/n².
    #[test]
    fn high_states_tend_to_the_published_limits() {
        for (l, limit) in [(0, 2.722_654_335), (1, -0.049_054_54)] {
            let error = (bethe_logarithm(1000, l) - limit).abs();
            assert!(error < 1e-4, "l = {l}: {error:e}");
        }
    }

    #[test]
    fn the_fall_with_l_is_smooth_where_the_table_ends() {
        for n in [10, 20, 21, 50] {
            let values: Vec<f64> = (2..n).map(|l| bethe_logarithm(n, l)).collect();
            assert!(
                values
                    .windows(2)
                    .all(|pair| pair[0] < pair[1] && pair[1] < 0.0),
                "n = {n}"
            );
        }
    }

    /// The table is what the script wrote, row by row.
    #[test]
    fn every_row_is_the_kept_one() {
        let kept = include_str!("../../../tests/reference/one_electron/bethe_logarithms.csv");
        let mut rows = 0;
        for row in kept.lines().skip(1) {
            let mut cells = row.split(',');
            let mut next = || cells.next().unwrap();
            let (n, l) = (next().parse().unwrap(), next().parse().unwrap());
            let value: f64 = next().parse().unwrap();
            assert_eq!(held(n, l), value, "{row}");
            rows += 1;
        }
        assert_eq!(rows, TABLE.len());
    }
}
