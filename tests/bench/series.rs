//! How long the fit of a Rydberg series takes: the target is below 1 ms each.

use lineclear::calc::series::{Core, Limit, Member, SeriesInput, fit};

fn main() {
    divan::main();
}

/// Rb nS½ from 5S, with the Ritz coefficients of Li, Mourachko, Noel & Gallagher 2003
/// (Phys. Rev. A 67, 052502) and alternating errors of 0.01 cm⁻¹.
fn rubidium(members: u32, core: Core) -> SeriesInput {
    let limit_per_cm = 33_690.8;
    let rydberg_per_cm = 109_736.6;
    let member = |n: u32| {
        let defect = 3.131_18 + 0.178_4 / (f64::from(n) - 3.131_18).powi(2);
        let slip = if n.is_multiple_of(2) { 0.01 } else { -0.01 };
        Member {
            n,
            energy_per_cm: limit_per_cm - rydberg_per_cm / (f64::from(n) - defect).powi(2) + slip,
            uncertainty_per_cm: 0.01,
        }
    };
    SeriesInput {
        core_charge: 1,
        rydberg_per_cm,
        l: 0,
        core,
        limit: Limit::Fixed {
            per_cm: limit_per_cm,
            sigma_per_cm: 0.01,
        },
        members: (5..5 + members).map(member).collect(),
    }
}

#[divan::bench(args = [4, 8, 16])]
fn rigid_core(bencher: divan::Bencher<'_, '_>, members: u32) {
    let input = rubidium(members, Core::Rigid);
    bencher.bench_local(|| fit(divan::black_box(&input)));
}

#[divan::bench(args = [4, 8, 16])]
fn soft_core(bencher: divan::Bencher<'_, '_>, members: u32) {
    let input = rubidium(members, Core::Soft);
    bencher.bench_local(|| fit(divan::black_box(&input)));
}

/// A member that stands out makes the fit look at each one in turn.
#[divan::bench(args = [8, 16])]
fn perturbed_member(bencher: divan::Bencher<'_, '_>, members: u32) {
    let mut input = rubidium(members, Core::Rigid);
    input.members[4].energy_per_cm += 5.0;
    bencher.bench_local(|| fit(divan::black_box(&input)));
}
