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
