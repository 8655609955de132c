"""Reference values for the line-shape tests, from scipy (wofz, voigt_profile) and scipy.optimize.

Run: python3 make_reference.py   (scipy 1.17, numpy 2; writes the CSV files beside it)
"""
import csv
import pathlib

import mpmath
import numpy as np
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import voigt_profile, wofz

HERE = pathlib.Path(__file__).parent


def write(name, header, rows):
    with open(HERE / name, "w", newline="") as out:
        table = csv.writer(out, lineterminator="\n")
        table.writerow(header)
        table.writerows([[repr(float(cell)) for cell in row] for row in rows])


def faddeeva():
    """w(x + iy) on a logarithmic net and at random points; every 40th row checked with mpmath."""
    rng = np.random.default_rng(1994)
    net_x = np.concatenate([[0.0], np.logspace(-3, 6, 31), [0.14, 0.28, 0.42, 0.56, 1.12, 2.8, 5.6, 6.7823]])
    net_y = np.concatenate([[0.0], np.logspace(-8, 4, 37)])
    points = [(x, y) for x in net_x for y in net_y]
    points += list(zip(10 ** rng.uniform(-1, 1.2, 800), 10 ** rng.uniform(-8, 1, 800)))
    points += list(zip(rng.uniform(0, 8, 800), 10 ** rng.uniform(-8, 1, 800)))
    rows = []
    for x, y in points:
        w = wofz(complex(x, y))
        rows.append((x, y, w.real, w.imag))
    mpmath.mp.dps = 60
    for x, y, real, imaginary in rows[::40]:
        if x < 1e2 and y < 25:
            z = mpmath.mpc(x, y)
            exact = mpmath.exp(-z * z) * mpmath.erfc(-1j * z)
            assert abs(exact.real - real) <= 2e-13 * abs(exact.real), (x, y)
    write("faddeeva.csv", ["x", "y", "real", "imaginary"], rows)


def voigt():
    rows = []
    for sigma in (0.5, 1.0, 0.02):
        for gamma in (0.0, 1e-6, 1e-3, 0.1, 1.0, 20.0):
            for offset in (0.0, 0.01, 0.3, 1.0, 2.5, 7.0, 40.0):
                rows.append((sigma, gamma, offset, voigt_profile(offset, sigma, gamma)))
    write("voigt.csv", ["sigma", "hwhm", "offset", "density"], rows)


def width():
    rows = []
    for ratio in (0.0, 1e-4, 0.01, 0.1, 0.3, 0.7, 1.0, 2.0, 5.0, 30.0, 1e3):
        top = voigt_profile(0.0, 1.0, ratio)
        half = brentq(lambda v: voigt_profile(v, 1.0, ratio) - top / 2, 0.0, 10 + 10 * ratio, xtol=1e-14, rtol=1e-14)
        rows.append((1.0, ratio, 2 * half))
    write("width.csv", ["sigma", "hwhm", "fwhm"], rows)


def respond(kind, width, points=None):
    """Instrument response of unit area, and its breakpoints."""
    if kind == "triangular":
        return (lambda v: max(0.0, 1 - abs(v) / width) / width), [-width, 0.0, width]
    if kind == "rectangular":
        return (lambda v: 1 / width if abs(v) <= width / 2 else 0.0), [-width / 2, width / 2]
    xs, ys = np.array(points).T
    area = np.trapezoid(ys, xs)
    return (lambda v: float(np.interp(v, xs, ys, left=0.0, right=0.0)) / area), list(xs)


MEASURED = [(-0.15, 0.0), (-0.08, 0.1), (-0.05, 0.5), (-0.01, 0.97), (0.0, 1.0), (0.03, 0.8), (0.06, 0.3), (0.12, 0.04), (0.2, 0.0)]


def convolved():
    rows = []
    for number, (kind, width) in enumerate((("triangular", 0.1), ("rectangular", 0.1), ("measured", 0.0))):
        response, breaks = respond(kind, width, MEASURED)
        for sigma in (0.001, 0.01, 0.05):
            for gamma in (0.0, 1e-4, 0.02):
                for offset in (0.0, 0.03, 0.05, 0.09, 0.15, 0.4, -0.07, 2.0):
                    total = 0.0
                    # Substituting breakpoints around the narrow line keeps quad accurate.
                    marks = sorted({*breaks, *(m for k in (-8, -3, -1, 0, 1, 3, 8)
                                               for m in [offset + k * max(sigma, gamma)]
                                               if breaks[0] < m < breaks[-1])})
                    for a, b in zip(marks, marks[1:]):
                        total += quad(lambda v: response(v) * voigt_profile(offset - v, sigma, gamma), a, b,
                                      epsabs=1e-13, epsrel=1e-12, limit=400)[0]
                    rows.append((number, width, sigma, gamma, offset, total))
    write("convolved.csv", ["kind", "width", "sigma", "hwhm", "offset", "density"], rows)


if __name__ == "__main__":
    faddeeva()
    voigt()
    width()
    convolved()
