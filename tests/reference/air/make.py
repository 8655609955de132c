"""Makes index.csv: refractive index of air, from the equations of Ciddor 1996 written down anew.

P. E. Ciddor, Applied Optics 35, 1566 (1996): Eqs. 1-5, 12 and the steps of Appendix B, kept in
the paper's own order (densities in kg/m3 with molar masses and the gas constant), with 40 digits.
Nothing is shared with the program: it drops molar masses and the gas constant from its ratios.
The columns `vacuum_back_nm` solve n(x) a = x for the air wavelength a by bisection.
Made with mpmath 1.4.1. Run: python3 make.py > index.csv
"""
from mpmath import mp, mpf, exp

mp.dps = 40
K = [mpf(x) for x in ("238.0185", "5792105", "57.362", "167917")]
W = [mpf(x) for x in ("295.235", "2.6422", "-0.032380", "0.004028")]
A = [mpf(x) for x in ("1.58123e-6", "-2.9331e-8", "1.1043e-10")]
B = [mpf(x) for x in ("5.707e-6", "-2.051e-8")]
C = [mpf(x) for x in ("1.9898e-4", "-2.376e-6")]
D, E = mpf("1.83e-11"), mpf("-0.765e-8")
R, MV = mpf("8.314510"), mpf("0.018015")


def z(t, p, x):
    kelvin = t + mpf("273.15")
    return (1 - p / kelvin * (A[0] + A[1] * t + A[2] * t**2 + (B[0] + B[1] * t) * x
                              + (C[0] + C[1] * t) * x**2)
            + (p / kelvin)**2 * (D + E * x**2))


def density(t, p, x, ma):
    return p * ma / (z(t, p, x) * R * (t + mpf("273.15"))) * (1 - x * (1 - MV / ma))


def index(nm, t, p, humidity, co2):
    s2 = (1000 / mpf(nm))**2
    t, p, humidity, co2 = map(mpf, (t, p, humidity, co2))
    nas = (K[1] / (K[0] - s2) + K[3] / (K[2] - s2)) / 10**8
    naxs = nas * (1 + mpf("0.534e-6") * (co2 - 450))
    nws = mpf("1.022") * (W[0] + W[1] * s2 + W[2] * s2**2 + W[3] * s2**3) / 10**8
    kelvin = t + mpf("273.15")
    svp = exp(mpf("1.2378847e-5") * kelvin**2 - mpf("1.9121316e-2") * kelvin
              + mpf("33.93711047") - mpf("6.3431645e3") / kelvin)
    f = mpf("1.00062") + mpf("3.14e-8") * p + mpf("5.6e-7") * t**2
    xw = f * humidity * svp / p
    ma = (mpf("28.9635") + mpf("12.011e-6") * (co2 - 400)) / 1000
    rho_axs = density(mpf(15), mpf(101325), mpf(0), ma)
    rho_ws = density(mpf(20), mpf(1333), mpf(1), ma)
    scale = p / (z(t, p, xw) * R * kelvin)
    rho_a, rho_w = scale * ma * (1 - xw), scale * MV * xw
    return 1 + rho_a / rho_axs * naxs + rho_w / rho_ws * nws


def back(air_nm, state):
    low, high = air_nm, air_nm * (1 + mpf("0.002"))
    for _ in range(110):
        middle = (low + high) / 2
        if middle / index(middle, *state) < air_nm:
            low = middle
        else:
            high = middle
    return low


STATES = [(15, 101325, 0, 450), (20, 100000, 0, 450), (20, 80000, 0, 400), (30, 100000, "0.5", 450),
          (-10, 101325, "0.3", 350), (40, 120000, "0.9", 600), (20, 101325, 1, 450)]
WAVELENGTHS = [185, 200, 230, 253.7, 300, 365, 404.7, 435.8, 486.1, 546.2, 589.2, 632.99, 656.5, 780.2,
               852.3, 1064, 1300, 1690, 2000, 2500]
print("vacuum_nm,temperature_celsius,pressure_pa,relative_humidity,co2_ppm,refractivity_e8,"
      "air_nm,vacuum_back_nm")
for state in STATES:
    for nm in WAVELENGTHS:
        n = index(str(nm), *state)
        round_air = mpf(mp.nstr(mpf(str(nm)) / n, 12))
        print(nm, *state, mp.nstr((n - 1) * 10**8, 14), mp.nstr(round_air, 12),
              mp.nstr(back(round_air, state), 16), sep=",")
