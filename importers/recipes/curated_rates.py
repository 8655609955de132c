"""Rates of multiplet members that were not entered, from those that were, by the fractions of LS coupling.

A(J' -> J) = A(term) (sigma/sigma0)^3 (2L'+1)(2J+1) {L' J' S; J L 1}^2 for J' -> J of one multiplet of S, L' -> S, L
(Condon & Shortley 1935, The Theory of Atomic Spectra, chapter 9, section 2; Cowan 1981, The Theory of Atomic Structure and Spectra, eq. 14.49).
Used only where at least two members with an entered rate agree with the fractions to 15 %, none departs by more, and two
thirds of the ion's multiplets that can be tested keep to the fractions: many do not (Ar II 4s 2P - 4p by up to a factor 8;
rates derived for Co I, where two of eight multiplets agree, missed those of Morton 2003 by up to a factor 11).
"""
import itertools
import math
import re

from curated_labels import ls_term

TOLERANCE = 0.15


def triangle(a, b, c):
    """The triangle factor of three angular momenta; None where they make no triangle."""
    if c < abs(a - b) or c > a + b or (a + b + c) % 1:
        return None
    f = math.factorial
    return f(int(a + b - c)) * f(int(a - b + c)) * f(int(-a + b + c)) / f(int(a + b + c + 1))


def six_j(a, b, c, d, e, f):
    """Wigner 6j symbol by Racah's sum (Edmonds 1957, eq. 6.3.7)."""
    factors = [triangle(a, b, c), triangle(a, e, f), triangle(d, b, f), triangle(d, e, c)]
    if None in factors:
        return 0.0
    low = int(max(a + b + c, a + e + f, d + b + f, d + e + c))
    high = int(min(a + b + d + e, b + c + e + f, a + c + d + f))
    fact, total = math.factorial, 0.0
    for t in range(low, high + 1):
        bottom = (fact(t - int(a + b + c)) * fact(t - int(a + e + f)) * fact(t - int(d + b + f)) * fact(t - int(d + e + c))
                  * fact(int(a + b + d + e) - t) * fact(int(b + c + e + f) - t) * fact(int(a + c + d + f) - t))
        total += (-1) ** t * fact(t + 1) / bottom
    return math.sqrt(math.prod(factors)) * total


def fraction(spin, l_lower, j_lower, l_upper, j_upper):
    """Share of the upper level's decay to the lower term that ends on `j_lower` (equal wavenumbers)."""
    symbol = six_j(l_upper, j_upper, spin, j_lower, l_lower, 1)
    return (2 * l_upper + 1) * (2 * j_lower + 1) * symbol * symbol


def multiplets(levels):
    """Yields (lower levels, upper levels, S, L lower, L upper) of every electric-dipole multiplet that LS coupling allows."""
    terms = {}
    for level in levels:
        ls = ls_term(level["term"])
        if ls and level["configuration"] and level["j"] != "":
            terms.setdefault((level["configuration"], level["term"]), []).append(level)
    clean = {key: members for key, members in terms.items() if len({m["j"] for m in members}) == len(members)}
    for (a, one), (b, two) in itertools.combinations(sorted(clean.items()), 2):
        lower, upper = sorted((one, two), key=lambda members: sum(m["e"] for m in members) / len(members))
        (s1, l1, odd1), (s2, l2, odd2) = ls_term(lower[0]["term"]), ls_term(upper[0]["term"])
        if s1 == s2 and odd1 != odd2 and abs(l1 - l2) <= 1 and l1 + l2 >= 1:
            yield lower, upper, s1, l1, l2


def members(lower, upper, spin, l_lower, l_upper):
    """Every component: (lower level, upper level, its rate for a term rate of one at a wavenumber of one)."""
    for low, up in itertools.product(lower, upper):
        share = fraction(spin, l_lower, float(low["j"]), l_upper, float(up["j"]))
        if share > 0 and up["e"] > low["e"]:
            yield low, up, share * (up["e"] - low["e"]) ** 3


def term_scale(known):
    """(scale, relative 1 sigma, largest departure) from [(rate, relative uncertainty, prediction)], or None where it is not allowed."""
    if len(known) < 2:
        return None
    weights = [1 / max(sigma, 0.005) ** 2 for _, sigma, _ in known]
    logs = [math.log(rate / prediction) for rate, _, prediction in known]
    mean = sum(w * x for w, x in zip(weights, logs)) / sum(weights)
    departure = max(abs(math.expm1(x - mean)) for x in logs)
    if departure > TOLERANCE:
        return None
    sigma = math.sqrt(1 / sum(weights)) if departure < 0.01 else min(s for _, s, _ in known)
    return math.exp(mean), sigma, departure


# How far a derived rate may be off where the coupling is good, per kind of ion (1 sigma, relative). The first is a floor; the
# second holds where a d or f shell is open or fewer than three multiplets of the ion could be tested: of 27 rates derived for
# Ti I, V I and Fe I that Morton 2003 gives as well, 22 lie within it.
SPREAD_CLOSED, SPREAD_OPEN = 0.05, 0.3
ENOUGH_MULTIPLETS, GOOD_SHARE = 3, 2 / 3
CAPACITY = {"d": 10, "f": 14}


def open_inner_shell(configuration):
    """Whether the configuration holds a partly filled d or f shell beside other valence electrons."""
    shells = re.findall(r"(?:^| )\d+([spdfghi])(\d*)(?= |$)", configuration)
    counts = [(l, int(n or 1)) for l, n in shells]
    return any(l in CAPACITY and 1 < n < CAPACITY[l] for l, n in counts) or sum(l in CAPACITY and n == 1 for l, n in counts) > 1


def known_members(parts, rated):
    return [(*rated[key(low, up)], value) for low, up, value in parts if key(low, up) in rated]


def departures(parts, rated):
    """Departures of the rated members of one multiplet from the fractions, natural logs, allowing for the fitted scale."""
    logs = [math.log(rate / value) for rate, _, value in known_members(parts, rated)]
    if len(logs) < 2:
        return []
    mean = sum(logs) / len(logs)
    return [abs(x - mean) * math.sqrt(len(logs) / (len(logs) - 1)) for x in logs]


def ion_spread(groups, rated):
    """1 sigma floor for the ion, or None where fewer than two thirds of its tested multiplets keep to the fractions."""
    tested = [d for d in (departures(parts, rated) for _, parts in groups) if d]
    agreeing = sum(max(d) < TOLERANCE for d in tested)
    if not tested or agreeing < GOOD_SHARE * len(tested):
        return None
    if len(tested) < ENOUGH_MULTIPLETS:
        return SPREAD_OPEN
    values = sorted(x for d in tested for x in d)
    return max(SPREAD_CLOSED, 2 * values[int(0.68 * len(values))])


def derive(levels, rated, wanted=None):
    """{(lower text, lower J, upper text, upper J): (rate, relative uncertainty)} of the components without an entered rate.

    `rated` maps the same keys to (rate, relative uncertainty) of the members that may be trusted; `wanted` says which keys
    are still without a rate (default: all that are not in `rated`).
    """
    groups = [(group, list(members(*group))) for group in multiplets(levels)]
    floor = ion_spread(groups, rated)
    out = {}
    if floor is None:
        return out
    for (lower, upper, *_), parts in groups:
        scale = term_scale(known_members(parts, rated))
        if scale is None:
            continue
        inner = open_inner_shell(lower[0]["configuration"]) or open_inner_shell(upper[0]["configuration"])
        spread = max(floor, scale[2], SPREAD_OPEN if inner else 0.0)
        for low, up, value in parts:
            if key(low, up) not in rated and (wanted is None or wanted(key(low, up))):
                out[key(low, up)] = (scale[0] * value, math.hypot(scale[1], spread))
    return out


def key(low, up):
    return low["text"], low["j"], up["text"], up["j"]
