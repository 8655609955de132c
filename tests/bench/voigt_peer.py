"""Time per point of scipy.special.wofz on points as `voigt.rs` makes them. Run: python3 voigt_peer.py"""
import time

import numpy as np
from scipy.special import wofz

rng = np.random.default_rng(1)
KINDS = {"core": ((1e-2, 5), (1e-4, 5)), "wing": ((7, 1e4), (1e-4, 1e2)), "mixed": ((1e-2, 1e4), (1e-8, 1e2))}


def points(low, high):
    return low * (high / low) ** rng.random(10_000)


for name, (x, y) in KINDS.items():
    z = points(*x) + 1j * points(*y)
    rounds = []
    for _ in range(100):
        start = time.perf_counter()
        wofz(z)
        rounds.append((time.perf_counter() - start) / z.size * 1e9)
    print(f"{name}: median {np.median(rounds):.1f} ns, fastest {min(rounds):.1f} ns per point")
