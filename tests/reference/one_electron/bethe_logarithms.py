#!/usr/bin/env python3
"""Bethe logarithms ln k0(n, l) of hydrogen for n <= 20, written to bethe_logarithms.csv.

Method: with H the radial Hamiltonian of the intermediate channel l' = l +- 1, v the velocity operator
acting on |n l>, and J(iy) = <v|(H - E_n + iy)^-1|v>, partial fractions give

    sum_k w_k D_k ln|D_k| = lim [ S ln Y - int_0^Y y Re J(iy) dy ],   S = sum_k w_k D_k,

and ln k0 = n^3/2 sum_k w_k D_k ln(2|D_k|) in atomic units (Bethe & Salpeter 1957, section 19).
No pole lies on the imaginary axis. J is solved in Laguerre functions of exponent 1/n, where
H - E_n + iy is tridiagonal and v has at most n + 1 components.
"""
import csv
import sys
import mpmath as mp
import numpy as np

mp.mp.dps = 60


def laguerre(k, a):
    return [(-1) ** i * mp.binomial(k + a, k - i) / mp.factorial(i) for i in range(k + 1)]


def source(n, l, lp):
    """Components <S_i|v>, with S_i = N_i r^(l'+1) e^(-r/n) L_i^(2l'+1)(2r/n), int S_i S_j / r = delta."""
    # everything in rho = 2 r / n
    poly = laguerre(n - l - 1, 2 * l + 1)
    norm = mp.sqrt(mp.factorial(n - l - 1) / (n * n * mp.factorial(n + l)))  # int u^2 dr = 1
    u = {l + 1 + i: norm * c for i, c in enumerate(poly)}  # u = sum c rho^p e^(-rho/2)
    scale = mp.mpf(2) / n
    v = {}
    for p, c in u.items():
        v[p - 1] = v.get(p - 1, 0) + c * p * scale
        v[p] = v.get(p, 0) - c * scale / 2
        turn = -(l + 1) if lp == l + 1 else l
        v[p - 1] = v.get(p - 1, 0) + c * turn * scale
    out = []
    a = 2 * lp + 1
    for i in range(n + 2):
        s = laguerre(i, a)
        ni = mp.sqrt(mp.factorial(i) / mp.factorial(i + a))
        total = mp.mpf(0)
        for j, cj in enumerate(s):
            for p, c in v.items():
                if c != 0:
                    total += cj * c * mp.gamma(lp + 1 + j + p + 1)
        out.append(float(total * ni / scale))
    weight = (l + 1) / (2 * l + 1) if lp == l + 1 else l / (2 * l + 1)
    return np.array(out) * np.sqrt(weight)


def resolvent(n, lp, b, y):
    """Re <b|(diag + i y O)^-1|b> for an array y."""
    lam = 1.0 / n
    a = 2 * lp + 1
    size = int(60 + 12 * n * np.sqrt(2 * y.max() + lam * lam)) + 4 * n
    m = len(b)
    iy = 1j * y
    pivot = np.full(y.shape, np.inf, dtype=complex)
    for i in range(size, m - 1, -1):
        d = lam * (i + lp + 1) - 1 + iy * ((2 * i + a + 1) / (2 * lam))
        off = -iy * (np.sqrt((i + 1.0) * (i + 1 + a)) / (2 * lam))
        pivot = d - off * off / pivot
    # dense part: eliminate downwards from the bottom, with the right-hand side
    rhs = None
    piv = [None] * m
    right = [None] * m
    below, below_rhs = pivot, np.zeros(y.shape, dtype=complex)
    for i in range(m - 1, -1, -1):
        d = lam * (i + lp + 1) - 1 + iy * ((2 * i + a + 1) / (2 * lam))
        off = -iy * (np.sqrt((i + 1.0) * (i + 1 + a)) / (2 * lam))
        piv[i] = d - off * off / below
        right[i] = b[i] - off * below_rhs / below
        below, below_rhs = piv[i], right[i]
    x = right[0] / piv[0]
    total = b[0] * x
    for i in range(1, m):
        off = -iy * (np.sqrt(float(i) * (i + a)) / (2 * lam))
        x = (right[i] - off * x) / piv[i]
        total = total + b[i] * x
    return total.real


def integrand(n, l, y):
    total = np.zeros(y.shape)
    for lp in (l + 1, l - 1):
        if lp < 0:
            continue
        total += resolvent(n, lp, source(n, l, lp), y)
    return y * y * total * n ** 3 / 2  # dy y J = dt y^2 J


def blocks(n, l, t):
    out = np.empty(t.shape)
    width = 40
    for start in range(0, len(t), width):
        part = slice(start, start + width)
        out[part] = integrand(n, l, np.exp(t[part]))
    return out


def bethe(n, l):
    step = 0.1
    low = -2 * np.log(n) * 1.5 - 24.0
    high = np.log(1e8 / n ** 2) if l == 0 else np.log(3e5)
    t = np.arange(low, high, step)
    g = blocks(n, l, t)
    y = np.exp(t)
    if l == 0:
        tail = t > np.log(1e3)
        s = 1 / np.sqrt(y[tail])
        terms = [s, s**2, s**2 * np.log(s), s**3, s**3 * np.log(s), s**4, s**4 * np.log(s), s**5, s**5 * np.log(s), s**6]
        weight = 1 / s ** 2
        c, *_ = np.linalg.lstsq((np.array(terms) * weight).T, (g[tail] - 1) * weight, rcond=None)
        edge = np.exp(-t[-1] / 2)
        # int_T^inf of s^k dt = 2/k s^k ; of s^k ln s dt = 2/k s^k ln s - 2/k^2 s^k
        rest = 0.0
        for (k, log), ck in zip([(1, 0), (2, 0), (2, 1), (3, 0), (3, 1), (4, 0), (4, 1), (5, 0), (5, 1), (6, 0)], c):
            rest += ck * (2 / k * edge**k * np.log(edge) - 2 / k**2 * edge**k if log else 2 / k * edge**k)
        body = step * (g.sum() - g[-1] / 2)
        # end correction of the trapezium rule at T (value and slope)
        slope = (3 * g[-1] - 4 * g[-2] + g[-3]) / (2 * step)
        body -= step**2 / 12 * slope
        return t[-1] - body - rest + np.log(2)
    body = step * (g.sum() - g[-1] / 2)
    slope = (3 * g[-1] - 4 * g[-2] + g[-3]) / (2 * step)
    body -= step**2 / 12 * slope
    # l >= 1: y^2 Re J falls as a power of y; geometric tail
    ratio = g[-1] / g[-11] if g[-11] != 0 else 0
    decay = -np.log(abs(ratio)) / (10 * step) if ratio > 0 else 1.0
    rest = g[-1] / decay
    return -(body + rest)


if __name__ == "__main__":
    n_max = int(sys.argv[1]) if len(sys.argv) > 1 else 20
    with open("bethe_logarithms.csv", "w", newline="") as handle:
        out = csv.writer(handle, lineterminator="\n")
        out.writerow(["n", "l", "ln_k0"])
        for n in range(1, n_max + 1):
            for l in range(n):
                out.writerow([n, l, f"{bethe(n, l):.12f}"])
            handle.flush()
