"""What two lines put at the first one through an instrument, by scipy.

Run: python3 seen.py   (scipy 1.17, numpy 2; writes seen.csv beside it)

Each row: form of the instrument, its FWHM (nm), Gaussian σ and Lorentzian HWHM of both lines (nm),
offset of the second from the first (nm), and (R * φ)(offset)/(R * φ)(0) for lines of equal light.
The measured response is that of harrow_bay_response.csv (invented).
"""
import csv
import pathlib

import numpy as np
from scipy.integrate import quad
from scipy.special import voigt_profile

HERE = pathlib.Path(__file__).parent


def measured():
    rows = [line.split(",") for line in (HERE / "harrow_bay_response.csv").read_text().splitlines()
            if line and not line.startswith("#")]
    return [(float(x), float(y)) for x, y in rows[1:]]


def pieces(form, width):
    if form == "triangular":
        return [(-width, 0.0), (0.0, 1.0), (width, 0.0)]
    if form == "rectangular":
        return [(-width / 2, 1.0), (width / 2, 1.0)]
    return measured()


def seen(points, sigma, hwhm, offset):
    xs, ys = np.array(points).T
    core = max(sigma, hwhm)
    total = 0.0
    for (a, low), (b, high) in zip(points, points[1:]):
        f = lambda v: (low + (high - low) * (v - a) / (b - a)) * voigt_profile(offset - v, sigma, hwhm)
        cuts = sorted({a, b} | {c for k in (-50, -5, -1, 0, 1, 5, 50) for c in [offset + k * core] if a < c < b})
        for c, d in zip(cuts, cuts[1:]):
            total += quad(f, c, d, epsabs=0.0, epsrel=1e-12, limit=500)[0]
    return total / np.trapezoid(ys, xs)


def main():
    out = []
    for form, width in (("triangular", 0.1), ("rectangular", 0.08), ("measured", 0.0)):
        points = pieces(form, width)
        for sigma, hwhm in ((0.0008, 0.0), (0.002, 0.0005), (0.001, 0.02), (0.03, 0.004)):
            centre = seen(points, sigma, hwhm, 0.0)
            for offset in (-0.21, -0.06, -0.015, 0.01, 0.045, 0.09, 0.3):
                out.append((form, width, sigma, hwhm, offset, seen(points, sigma, hwhm, offset) / centre))
    with open(HERE / "seen.csv", "w", newline="") as file:
        table = csv.writer(file, lineterminator="\n")
        table.writerow(["form", "fwhm_nm", "sigma_nm", "hwhm_nm", "offset_nm", "part"])
        table.writerows([[r[0]] + [repr(float(c)) for c in r[1:]] for r in out])


main()
