#!/usr/bin/env python3
"""Dispersions fitted by numpy, for `marks --fit` and the polynomial beneath it.

`polynomials.csv`: weighted least squares of `numpy.polynomial.Chebyshev.fit` (weights are roots of those of the program) and the
variance of the curve from the design matrix. `pixels-N.csv`: printed lamp lines (../attribution/lamps.csv) on invented
pixels with noise, some entries wrong; `fits.csv`: what a robust fit of our own in numpy makes of them: least median of squares
(Rousseeuw 1984) over 20 000 random samples, then least squares over what lies within 2.5 robust standard deviations until
the choice stays. Air to vacuum by Ciddor 1996, written out here.   Usage: python3 fits.py   (numpy 2.4)
"""
import csv
import pathlib

import numpy as np

HERE = pathlib.Path(__file__).parent


def vacuum(air_nm):
    """Standard air, Ciddor 1996, Appl. Opt. 35, 1566, equation 1."""
    nm = np.array(air_nm)
    for _ in range(5):
        s = (1e3 / nm) ** 2
        n = 1 + 1e-8 * (5792105 / (238.0185 - s) + 167917 / (57.362 - s))
        nm = air_nm * n
    return nm


def polynomials():
    rows = []
    for number in range(1, 9):
        rng = np.random.default_rng(100 + number)
        order, count = int(rng.integers(1, 6)), int(rng.integers(8, 30))
        x = np.round(np.sort(rng.uniform(0, 4096, count)), 3)
        y = np.round(400 + 0.07 * x - 2e-6 * x**2 + 1e-10 * x**3 + rng.normal(0, 0.01, count), 6)
        w = np.round(rng.uniform(0.3, 4, count), 3)
        curve = np.polynomial.Chebyshev.fit(x, y, order, w=np.sqrt(w))
        design = lambda at: np.polynomial.chebyshev.chebvander(np.polynomial.polyutils.mapdomain(at, curve.domain, curve.window), order)
        covariance = np.linalg.inv(design(x).T * w @ design(x))
        for at in (0.0, 1000.5, 4095.0):
            basis = design(np.array([at]))[0]
            points = " ".join(f"{a} {b} {c}" for a, b, c in zip(x, y, w))
            rows.append([number, order, points, at, repr(float(curve(at))), repr(float(basis @ covariance @ basis))])
    with open(HERE / "polynomials.csv", "w", newline="", encoding="utf-8") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(["fit", "order", "x_y_weight", "at", "value", "variance"])
        writer.writerows(rows)


def robust(x, y, order, rng):
    best = (np.inf, None)
    for _ in range(20000):
        sample = rng.choice(len(x), order + 1, replace=False)
        trial = np.polynomial.Polynomial.fit(x[sample], y[sample], order)
        square = np.sort((y - trial(x)) ** 2)[min((len(x) + order + 2) // 2, len(x)) - 1]
        if square < best[0]:
            best = (square, trial)
    scale = 1.4826 * (1 + 5 / (len(x) - order - 1)) * np.sqrt(best[0])
    curve, used = best[1], np.full(len(x), False)
    for _ in range(20):
        now = np.abs(y - curve(x)) <= 2.5 * scale
        if (now == used).all():
            break
        used = now
        curve = np.polynomial.Polynomial.fit(x[used], y[used], order)
        scale = np.sqrt(((y - curve(x))[used] ** 2).sum() / (used.sum() - order - 1))
    return curve, used, scale


def fits():
    lamps = list(csv.DictReader(open(HERE.parent / "attribution" / "lamps.csv", encoding="utf-8")))
    table = []
    setups = [("neon", 580, 880, 1), ("neon", 580, 760, 2), ("argon", 690, 970, 2), ("argon", 690, 930, 3), ("mercury", 250, 580, 3)]
    for number, (lamp, low, high, order) in enumerate(setups, 1):
        rng = np.random.default_rng(200 + number)
        air = np.array([float(r["wavelength_nm"]) for r in lamps if r["lamp"] == lamp and low < float(r["wavelength_nm"]) < high])
        true = vacuum(air)
        slope = (true[-1] - true[0]) / 1900
        given = np.polynomial.Polynomial([true[0] - 50 * slope, slope, -slope * 2e-5, slope * 4e-9][: order + 1])
        x = 50 + (true - true[0]) / slope
        for _ in range(50):
            x -= (given(x) - true) / given.deriv()(x)
        x += rng.normal(0, 0.05, len(air))
        wrong = rng.choice(len(air), 3 if len(air) > 14 else 2, replace=False)
        x[wrong] += rng.choice([-1, 1], len(wrong)) * rng.uniform(4, 9, len(wrong))
        x = np.round(x, 3)
        curve, used, _ = robust(x, true, order, rng)
        residual = (true - curve(x))[used]
        sigma = np.sqrt((residual**2).sum() / (used.sum() - order - 1))
        design = np.polynomial.polynomial.polyvander((x[used] - 1000) / 1000, order)
        covariance = np.linalg.inv(design.T @ design)
        row = lambda at: np.polynomial.polynomial.polyvander(np.array([(at - 1000) / 1000]), order)[0]
        end = lambda at: sigma * np.sqrt(row(at) @ covariance @ row(at))
        with open(HERE / f"pixels-{number}.csv", "w", newline="", encoding="utf-8") as out:
            writer = csv.writer(out, lineterminator="\n")
            writer.writerow(["pixel", "wavelength_nm"])
            writer.writerows(zip(x, air))
        table.append([number, lamp, low, high, order, " ".join(str(int(i)) for i in np.flatnonzero(~used)),
                      " ".join(str(int(i)) for i in sorted(wrong)), repr(float(curve(0.0))), repr(float(curve(1000.0))),
                      repr(float(curve(2047.0))), repr(float(np.sqrt((residual**2).mean()))), repr(float(sigma)),
                      repr(float(end(0.0))), repr(float(end(2047.0)))])
    with open(HERE / "fits.csv", "w", newline="", encoding="utf-8") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(["fit", "lamp", "from_nm", "to_nm", "order", "rejected", "wrong", "vacuum_nm_at_0", "vacuum_nm_at_1000",
                         "vacuum_nm_at_2047", "rms_nm", "standard_deviation_nm", "uncertainty_nm_at_0", "uncertainty_nm_at_2047"])
        writer.writerows(table)


if __name__ == "__main__":
    polynomials()
    fits()
