"""Reference values for the plasma tests, with mpmath at 40 digits.

Run: python3 make_reference.py   (mpmath 1.4; writes the CSV files beside it)
"""
import csv
import pathlib

import mpmath as mp

mp.mp.dps = 40
HERE = pathlib.Path(__file__).parent
# CODATA 2022.
H, C, E, K = mp.mpf("6.62607015e-34"), mp.mpf(299792458), mp.mpf("1.602176634e-19"), mp.mpf("1.380649e-23")
ELECTRON_KG, RYDBERG_PER_CM = mp.mpf("9.1093837139e-31"), mp.mpf("109737.31568157")
PER_CM_PER_EV = E / (H * C) / 100


def write(name, header, rows):
    with open(HERE / name, "w", newline="") as out:
        table = csv.writer(out, lineterminator="\n")
        table.writerow(header)
        table.writerows([[repr(float(cell)) for cell in row] for row in rows])


def weight(b):
    return 1 - mp.exp(-b) * (1 + b)


def hydrogen(kt_ev):
    """Planck-Larkin partition function of all shells of hydrogen (infinite nuclear mass)."""
    kt = kt_ev * PER_CM_PER_EV

    def shell(n):
        binding = RYDBERG_PER_CM / (n * n)
        return 2 * n * n * mp.exp(-(RYDBERG_PER_CM - binding) / kt) * weight(binding / kt)

    return mp.nsum(lambda n: shell(mp.mpf(n)), [1, mp.inf])


def saha(t_k, chi_ev, u_ratio):
    cube = (2 * mp.pi * ELECTRON_KG * K * t_k / H**2) ** mp.mpf("1.5")
    return mp.log(2 * u_ratio * cube) - chi_ev * E / (K * t_k)


write("planck_larkin.csv", ["binding_over_kt", "factor"],
      [(b, weight(mp.mpf(b))) for b in (1e-8, 1e-5, 1e-3, 0.02, 0.0299, 0.0301, 0.1, 0.5, 1.0, 3.0, 10.0, 40.0, 800.0)])
write("hydrogen_partition.csv", ["kt_ev", "value"], [(t, hydrogen(mp.mpf(t))) for t in (0.5, 1.0, 2.0, 3.0, 10.0)])
write("saha.csv", ["temperature_k", "limit_ev", "partition_ratio", "ln_ratio_per_m3"],
      [(t, x, u, saha(mp.mpf(t), mp.mpf(x), mp.mpf(u)))
       for t in (300.0, 5777.0, 1e4, 1e6) for x in (4.0, 13.6, 400.0) for u in (0.5, 2.0)])


def free_free(initial, final):
    """Free-free Gaunt factor of Sommerfeld 1931 in the form of Karzas & Latter 1961 and Biedenharn
    1956; electron energies over Z^2 Ry before and after the emission."""
    ki, kf = mp.sqrt(initial), mp.sqrt(final)
    ni, nf = 1 / ki, 1 / kf
    ratio = 4 * ki * kf / (ki - kf) ** 2

    def integral(l):
        size = abs(mp.gamma(l + 1 + 1j * ni) * mp.gamma(l + 1 + 1j * nf)) / mp.gamma(2 * l + 2)
        front = ratio ** (l + 1) * mp.exp(mp.pi * abs(ni - nf) / 2) * size / 4
        phase = abs((kf - ki) / (kf + ki)) ** (1j * (ni + nf))
        return front * mp.re(phase * mp.hyp2f1(l + 1 - 1j * nf, l + 1 - 1j * ni, 2 * l + 2, -ratio))

    i0, i1 = integral(0), integral(1)
    both = (ni**2 + nf**2 + 2 * ni**2 * nf**2) * i0 - 2 * ni * nf * mp.sqrt((1 + ni**2) * (1 + nf**2)) * i1
    return 2 * mp.sqrt(3) / (mp.pi * ni * nf) * both * i0


def averaged(gamma2, u, nodes):
    """Mean over Maxwellian electrons: integral of g(x) exp(-x) dx, x = final electron energy over kT.
    The nodes are Gauss-Legendre in ln x, which keeps the logarithm at small u tame."""
    total = mp.mpf(0)
    for x, weight in nodes:
        total += weight * mp.exp(-x) * free_free((x + u) / gamma2, x / gamma2)
    return total


def nodes_in_log(low, high, count):
    import numpy as np

    t, w = np.polynomial.legendre.leggauss(count)
    a, b = mp.log(low), mp.log(high)
    half, middle = (b - a) / 2, (a + b) / 2
    out = [(mp.exp(middle + half * mp.mpf(float(v))), half * mp.mpf(float(k)) * mp.exp(middle + half * mp.mpf(float(v))))
           for v, k in zip(t, w)]
    return out


def gaunt_table():
    """g on a net of log10(gamma^2) -3..3 and log10(u) -4..1.5, step 0.5 (src/calc/plasma/gaunt_table.rs
    holds ln g of the same net to five digits; a test compares them all); also 40 points between."""
    import random

    mp.mp.dps = 30
    nodes = nodes_in_log(mp.mpf("1e-5"), mp.mpf(40), 28)
    # Below x = 1e-5 the integrand is taken as constant: 1e-5 of the whole.
    nodes.append((mp.mpf("1e-5"), mp.mpf("1e-5")))
    grid = [(mp.mpf(g) / 2, mp.mpf(u) / 2) for g in range(-6, 7) for u in range(-8, 4)]
    write("gaunt.csv", ["log_gamma2", "log_u", "gaunt"], [(g, u, averaged(10**g, 10**u, nodes)) for g, u in grid])
    rng = random.Random(2014)
    between = [(rng.uniform(-2.9, 2.9), rng.uniform(-3.9, 1.4)) for _ in range(40)]
    write("gaunt_between.csv", ["log_gamma2", "log_u", "gaunt"],
          [(g, u, averaged(mp.mpf(10) ** g, mp.mpf(10) ** u, nodes)) for g, u in between])


if __name__ == "__main__":
    gaunt_table()
