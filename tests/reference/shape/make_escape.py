"""Reference values of self-absorption factor and escape probability, by scipy quad.

Run: python3 make_escape.py   (scipy 1.17; writes escape.csv beside it)
"""
import csv
import pathlib

import numpy as np
from scipy.integrate import quad
from scipy.special import voigt_profile

HERE = pathlib.Path(__file__).parent
rows = []
for sigma, hwhm in ((1.0, 0.0), (1.0, 0.05), (1.0, 1.0), (0.0, 1.0)):
    peak = voigt_profile(0.0, sigma, hwhm)
    h = lambda x: voigt_profile(x, sigma, hwhm) / peak
    # Piecewise in ln x out to where nothing is left, or the wing is exactly 1/x^2.
    for depth in (0.0, 1e-3, 0.1, 1.0, 10.0, 1e3, 1e5):
        far = 40.0 if hwhm == 0 else 1e4 * max(1.0, depth**0.5)
        edges = np.concatenate([[0.0], np.logspace(-2, np.log10(far), 60)])
        total = lambda f: 2 * sum(quad(f, a, b, epsabs=1e-15, epsrel=1e-11, limit=200)[0] for a, b in zip(edges, edges[1:]))
        # Beyond `far` both integrands are the thin wing hwhm/(pi x^2)/peak.
        rest = 2 * hwhm / np.pi / far
        thin = lambda x: (-np.expm1(-depth * h(x)) / depth if depth else h(x)) * peak
        out = total(thin) + rest
        escape = total(lambda x: h(x) * np.exp(-depth * h(x)) * peak) + rest
        rows.append((sigma, hwhm, depth, out, escape))
with open(HERE / "escape.csv", "w", newline="") as out:
    table = csv.writer(out, lineterminator="\n")
    table.writerow(["sigma", "hwhm", "optical_depth", "self_absorption", "escape"])
    table.writerows([[repr(float(c)) for c in row] for row in rows])
