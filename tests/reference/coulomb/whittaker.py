"""Values of the decaying Coulomb function for tests/coulomb_reference.rs.

P(rho) = N W_{nu, l+1/2}(2 rho / nu) with N^-2 = nu^2 Gamma(nu+l+1) Gamma(nu-l), by mpmath (30 digits), which has
its own Whittaker function; and the exact hydrogenic dipole integrals by quadrature of Laguerre polynomials.
Run: python3 whittaker.py > whittaker.csv ; python3 whittaker.py hydrogen > hydrogen.csv
"""
import sys
from mpmath import mp, mpf, gamma, sqrt, whitw, laguerre, exp, quad, inf, factorial, linspace

mp.dps = 30


def orbital(nu, l, rho):
    nu, rho = mpf(nu), mpf(rho)
    norm = 1 / sqrt(nu**2 * gamma(nu + l + 1) * gamma(nu - l))
    return norm * whitw(nu, mpf(l) + mpf(1) / 2, 2 * rho / nu)


def hydrogen(n, l, r):
    norm = sqrt((mpf(2) / n) ** 3 * factorial(n - l - 1) / (2 * n * factorial(n + l)))
    x = 2 * r / n
    return r * norm * exp(-x / 2) * x**l * laguerre(n - l - 1, 2 * l + 1, x)


def functions():
    print("nu,l,rho,p")
    cases = [("1.627", 0), ("2.117", 1), ("2.99", 2), ("3.3", 0), ("4.56", 1), ("7.87", 2), ("12.35", 3), ("26.87", 0), ("37.4", 1)]
    for nu, l in cases:
        top = 2 * mpf(nu) * (mpf(nu) + 3)
        for share in ("0.15", "0.4", "0.7", "1"):
            # A point of the grid in sqrt(rho) of step 0.01.
            x = int(sqrt(top * mpf(share)) * 100) / mpf(100)
            rho = x * x
            print(f"{nu},{l},{mp.nstr(rho, 20)},{mp.nstr(orbital(nu, l, rho), 18)}")


def integrals():
    print("n,l,n_lower,l_lower,integral_a0")
    for n, l, m, k in [(2, 1, 1, 0), (3, 1, 2, 0), (3, 2, 2, 1), (3, 0, 2, 1), (4, 3, 3, 2), (6, 1, 2, 0), (10, 4, 7, 3), (12, 11, 11, 10), (20, 1, 5, 2)]:
        value = quad(lambda r: hydrogen(n, l, r) * r * hydrogen(m, k, r), linspace(0, 6 * max(n, m) ** 2, 60))
        print(f"{n},{l},{m},{k},{mp.nstr(abs(value), 15)}")


if __name__ == "__main__":
    integrals() if sys.argv[1:] == ["hydrogen"] else functions()
