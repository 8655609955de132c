//! What the Zα expansions leave out, tabulated over Z and interpolated.
//!
//! Self-energy: for Z = 1 the remainders G_SE(α) of the CODATA adjustment (Tiesinga, Mohr, Newell &
//! Taylor 2021, Rev. Mod. Phys. 93, 025010, table of G_SE; values from memory). For Z ≥ 10 the
//! function F(Zα) of a point nucleus (Mohr 1974, Ann. Phys. 88, 52; Mohr 1982, Phys. Rev. A 26,
//! 2338; Mohr 1992, Phys. Rev. A 46, 4421; values from memory to four decimals, their third
//! differences are smooth), from which the expansion is subtracted here.
//!
//! Uehling: computed from Dirac wave functions in closed form (`tests/reference/one_electron/uehling.py`).

/// Nodes of every table below.
pub(super) const NODES: [f64; 12] = [
    1.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0, 80.0, 90.0, 100.0, 110.0,
];

/// The remainders at [`NODES`] for one state.
pub(super) type Row = [f64; 12];

/// Uehling remainder of ns1/2, n = 1 … 5.
pub(super) const UEHLING_S_HALF: [Row; 5] = [
    [
        -0.6187239, -0.5532376, -0.5200460, -0.5058807, -0.5042782, -0.5128670, -0.5313297,
        -0.5610879, -0.6058770, -0.6736535, -0.7819965, -0.9759868,
    ],
    [
        -0.8088724, -0.7316438, -0.6924644, -0.6780649, -0.6816215, -0.7012906, -0.7382491,
        -0.7968748, -0.8865463, -1.0265659, -1.2599277, -1.6996712,
    ],
    [
        -0.8145303, -0.7366902, -0.6970433, -0.6823117, -0.6856160, -0.7050638, -0.7417691,
        -0.8000017, -0.8889168, -1.0272891, -1.2566801, -1.6854093,
    ],
    [
        -0.8065786, -0.7290255, -0.6893605, -0.6742977, -0.6769303, -0.6952751, -0.7302668,
        -0.7858389, -0.8704948, -1.0016413, -1.2175943, -1.6173796,
    ],
    [
        -0.7983624, -0.7211739, -0.6815761, -0.6662784, -0.6683605, -0.6857694, -0.7192961,
        -0.7726038, -0.8536774, -0.9788529, -1.1839580, -1.5610699,
    ],
];

/// Uehling remainder of np1/2, n = 2 … 5.
pub(super) const UEHLING_P_HALF: [Row; 4] = [
    [
        -0.0640057, -0.0629987, -0.0643167, -0.0679676, -0.0742125, -0.0837561, -0.0979265,
        -0.1191374, -0.1519500, -0.2057045, -0.3020334, -0.5014557,
    ],
    [
        -0.0758587, -0.0746682, -0.0762341, -0.0805555, -0.0879266, -0.0991544, -0.1157578,
        -0.1404815, -0.1784700, -0.2401485, -0.3493407, -0.5715372,
    ],
    [
        -0.0800070, -0.0787353, -0.0803335, -0.0847876, -0.0923814, -0.1039176, -0.1209079,
        -0.1460724, -0.1844741, -0.2462823, -0.3544860, -0.5714371,
    ],
    [
        -0.0819271, -0.0806093, -0.0821961, -0.0866626, -0.0942784, -0.1058264, -0.1227841,
        -0.1478015, -0.1857884, -0.2465477, -0.3520794, -0.5615308,
    ],
];

/// Uehling remainder of np3/2, n = 2 … 5.
pub(super) const UEHLING_P_THREE_HALVES: [Row; 4] = [
    [
        -0.0141324, -0.0129592, -0.0119612, -0.0111902, -0.0105916, -0.0101313, -0.0097863,
        -0.0095414, -0.0093868, -0.0093171, -0.0093305, -0.0094286,
    ],
    [
        -0.0167497, -0.0153750, -0.0142347, -0.0133847, -0.0127581, -0.0123133, -0.0120240,
        -0.0118739, -0.0118545, -0.0119639, -0.0122060, -0.0125910,
    ],
    [
        -0.0176658, -0.0162199, -0.0150281, -0.0141479, -0.0135082, -0.0130649, -0.0127906,
        -0.0126687, -0.0126914, -0.0128578, -0.0131740, -0.0136535,
    ],
    [
        -0.0180898, -0.0166103, -0.0153928, -0.0144959, -0.0138462, -0.0133990, -0.0131258,
        -0.0130099, -0.0130434, -0.0132256, -0.0135632, -0.0140703,
    ],
];

/// Self-energy function F(Zα) of 1s at Z = 10, 20 … 110.
pub(super) const SELF_ENERGY_ONE_S: [f64; 11] = [
    4.6542, 3.2463, 2.552, 2.1352, 1.8643, 1.6838, 1.5674, 1.5032, 1.4875, 1.5302, 1.6554,
];

/// Self-energy function F(Zα) of 2s at Z = 10, 20 … 110.
pub(super) const SELF_ENERGY_TWO_S: [f64; 11] = [
    4.8941, 3.5063, 2.8391, 2.455, 2.2244, 2.0948, 2.0435, 2.065, 2.169, 2.387, 2.798,
];

/// Self-energy function F(Zα) of 2p1/2 at Z = 10, 20 … 110.
pub(super) const SELF_ENERGY_TWO_P_HALF: [f64; 11] = [
    -0.1145, -0.0922, -0.0641, -0.0308, 0.0082, 0.0549, 0.1129, 0.1884, 0.2934, 0.453, 0.725,
];

/// Self-energy function F(Zα) of 2p3/2 at Z = 10, 20 … 110.
pub(super) const SELF_ENERGY_TWO_P_THREE_HALVES: [f64; 11] = [
    0.1303, 0.1436, 0.1604, 0.1794, 0.1999, 0.2215, 0.244, 0.2671, 0.2906, 0.3141, 0.3367,
];

/// Self-energy remainder G_SE(α) of nS at (n, G); linear in 1/n between and beyond.
pub(super) const HYDROGEN_S: [(f64, f64); 7] = [
    (1.0, -30.290_24),
    (2.0, -31.185_15),
    (3.0, -31.047_7),
    (4.0, -30.912_0),
    (6.0, -30.711),
    (8.0, -30.606),
    (12.0, -30.532),
];

/// Two-loop coefficient B61 of nS (Tiesinga et al. 2021; from memory).
pub(super) const TWO_LOOP_B61: [(f64, f64); 6] = [
    (1.0, 49.788_9),
    (2.0, 41.892_5),
    (3.0, 39.734_5),
    (4.0, 38.739_8),
    (6.0, 37.793_7),
    (8.0, 37.335_2),
];

/// Two-loop coefficient B60 of nS (Tiesinga et al. 2021; from memory), 1 σ = 10.
pub(super) const TWO_LOOP_B60: [(f64, f64); 6] = [
    (1.0, -78.7),
    (2.0, -63.6),
    (3.0, -60.5),
    (4.0, -58.9),
    (6.0, -56.9),
    (8.0, -55.9),
];

/// Value at `charge` of a table over [`NODES`]: cubic through the four nearest nodes.
pub(super) fn over_charge(row: &Row, charge: f64) -> f64 {
    let above = NODES.partition_point(|&node| node < charge);
    let first = above.saturating_sub(2).min(NODES.len() - 4);
    (first..first + 4)
        .map(|i| {
            let weight: f64 = (first..first + 4)
                .filter(|&k| k != i)
                .map(|k| (charge - NODES[k]) / (NODES[i] - NODES[k]))
                .product();
            weight * row[i]
        })
        .sum()
}

/// Value at `n` of pairs (n, value), linear in 1/n, extended beyond the last by the last slope.
pub(super) fn over_n(pairs: &[(f64, f64)], n: u32) -> f64 {
    let inverse = 1.0 / f64::from(n);
    let last = pairs.len() - 1;
    let upper = pairs
        .partition_point(|pair| pair.0 < f64::from(n))
        .clamp(1, last);
    let ((n0, v0), (n1, v1)) = (pairs[upper - 1], pairs[upper]);
    v1 + (v0 - v1) * (inverse - 1.0 / n1) / (1.0 / n0 - 1.0 / n1)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The Uehling rows are what the script wrote, all of them, to the digits kept.
    #[test]
    fn every_uehling_row_is_the_kept_one() {
        let kept = include_str!("../../../tests/reference/one_electron/uehling.csv");
        let mut rows = 0;
        for row in kept.lines().skip(1) {
            let cells: Vec<f64> = row.split(',').map(|c| c.parse().unwrap()).collect();
            let place = NODES.iter().position(|node| *node == cells[2]).unwrap();
            let n = cells[0] as usize;
            let held = match cells[1] {
                -1.0 => UEHLING_S_HALF[n - 1][place],
                1.0 => UEHLING_P_HALF[n - 2][place],
                _ => UEHLING_P_THREE_HALVES[n - 2][place],
            };
            assert!((held - cells[4]).abs() <= 5.1e-8, "{row}");
            rows += 1;
        }
        assert_eq!(rows, 156);
    }

    /// Interpolation over Z: at each inner node, from its neighbours alone (a cubic through four others), the remainders
    /// come back to 0.02, far below the 1 σ given to them.
    #[test]
    fn tables_are_smooth_over_charge() {
        for row in UEHLING_S_HALF.iter().chain(&UEHLING_P_HALF) {
            for i in 3..NODES.len() - 3 {
                let around = [i - 2, i - 1, i + 1, i + 2];
                let value: f64 = around
                    .iter()
                    .map(|&a| {
                        let weight: f64 = around
                            .iter()
                            .filter(|&&b| b != a)
                            .map(|&b| (NODES[i] - NODES[b]) / (NODES[a] - NODES[b]))
                            .product();
                        weight * row[a]
                    })
                    .sum();
                assert!(
                    (value - row[i]).abs() < 0.02,
                    "Z = {}: {value} {}",
                    NODES[i],
                    row[i]
                );
            }
        }
    }
}
