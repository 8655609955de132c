//! Time per point of the Voigt function. Seeded points as work on line lists sees them: `core` within
//! 5 Gaussian widths, `wing` beyond 7, `mixed` log-uniform in both arguments (x 1e-2–1e4, y 1e-8–1e2).
//!
//! `cargo bench --bench voigt`; the peer figure is `tests/bench/voigt_peer.py` on like points.

use divan::{Bencher, black_box, counter::ItemsCount};
use lineclear::calc::shape::voigt_function;

fn main() {
    divan::main();
}

/// Logarithmic ranges of x and y.
struct Points {
    x: (f64, f64),
    y: (f64, f64),
}

const COUNT: usize = 10_000;

impl Points {
    fn make(&self) -> Vec<(f64, f64)> {
        let mut state = 0x2545_f491_4f6c_dd1d_u64;
        let mut uniform = move || {
            state ^= state << 13;
            state ^= state >> 7;
            state ^= state << 17;
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        let mut log = move |(low, high): (f64, f64)| low * (high / low).powf(uniform());
        (0..COUNT).map(|_| (log(self.x), log(self.y))).collect()
    }
}

fn run(bencher: Bencher, points: &Points) {
    let points = points.make();
    bencher.counter(ItemsCount::new(COUNT)).bench_local(|| {
        black_box(&points)
            .iter()
            .map(|&(x, y)| voigt_function(x, y))
            .sum::<f64>()
    });
}

#[divan::bench]
fn core(bencher: Bencher) {
    run(
        bencher,
        &Points {
            x: (1e-2, 5.0),
            y: (1e-4, 5.0),
        },
    );
}

#[divan::bench]
fn wing(bencher: Bencher) {
    run(
        bencher,
        &Points {
            x: (7.0, 1e4),
            y: (1e-4, 1e2),
        },
    );
}

#[divan::bench]
fn mixed(bencher: Bencher) {
    run(
        bencher,
        &Points {
            x: (1e-2, 1e4),
            y: (1e-8, 1e2),
        },
    );
}
