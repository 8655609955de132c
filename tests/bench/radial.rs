//! Throughput of the one-electron calculator: radial integrals per second and whole spectra of one ion.

use lineclear::calc::one_electron::{Nucleus, ShellPair, levels, lines};

fn main() {
    divan::main();
}

/// All integrals of all shell pairs up to n = 20: 2 · lower − 1 of each pair, 2470 in all.
#[divan::bench]
fn integrals_to_n_20(bencher: divan::Bencher) {
    let count: u32 = (2..=20)
        .flat_map(|n| 1..n)
        .map(|lower: u32| 2 * lower - 1)
        .sum();
    bencher
        .counter(divan::counter::ItemsCount::new(count))
        .bench_local(|| {
            let mut pair = ShellPair::default();
            let mut sum = 0.0;
            for upper in 2..=20 {
                for lower in 1..upper {
                    if pair.fill(upper, lower).is_ok() {
                        sum += pair.integral(lower, lower - 1);
                    }
                }
            }
            divan::black_box(sum)
        });
}

#[divan::bench]
fn levels_to_n_20() {
    divan::black_box(levels(&Nucleus::PROTON, 20).is_ok());
}

#[divan::bench]
fn lines_to_n_20() {
    divan::black_box(lines(&Nucleus::PROTON, 20).is_ok());
}
