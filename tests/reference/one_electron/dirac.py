#!/usr/bin/env python3
"""Dirac binding energies of a point nucleus in units of R_inf hc, by mpmath at 50 digits; dirac.csv.
Fine-structure constant as in CODATA 2022."""
import csv
import mpmath as mp

mp.mp.dps = 50
ALPHA = mp.mpf("7.2973525643e-3")

with open("dirac.csv", "w", newline="") as handle:
    out = csv.writer(handle, lineterminator="\n")
    out.writerow(["Z", "n", "twice_j", "binding_rydberg"])
    for z in (1, 2, 3, 10, 30, 54, 92, 110):
        for n in (1, 2, 3, 7, 20, 50):
            for k in sorted({1, 2, (n + 1) // 2, n}):
                if k > n:
                    continue
                za = z * ALPHA
                gamma = mp.sqrt(k * k - za * za)
                f = 1 / mp.sqrt(1 + (za / (n - k + gamma)) ** 2)
                out.writerow([z, n, 2 * k - 1, mp.nstr((1 - f) * 2 / ALPHA**2, 20)])
