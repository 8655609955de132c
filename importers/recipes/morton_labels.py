"""Level labels as the Morton tables print them, turned into `configuration` and `term`.

`4s24p5(2Po3/2)6d 2[1/2]o` becomes configuration `4s2 4p5 (2Po3/2) 6d` and term `2[1/2]o`.
Shells stand apart by single blanks, parents stand in parentheses, a trailing `o` marks odd parity.
Used by the other recipes here; Python standard library only.
"""
import re

ORBITALS = "spdfghiklmnoqr"
TERM = re.compile(
    r"^(?:(?P<prefix>[a-z]) ?)?"
    r"(?P<term>\d+[A-Z](?:\d+(?:/2)?)?o?|\d*(?:/2)?\[\d+(?:/2)?\]o?|\(\d+(?:/2)?,\d+(?:/2)?\)o?)$"
)


def split_digits(digits, orbital, previous_n):
    """Occupation and next principal number out of the digits between two orbitals.

    `10` after d and before s is `d10 …`; `24` after s is s², n = 4; `10` after p is n = 10.
    A candidate must respect the Pauli limit and must not step below n = 2.
    """
    limit = 2 * (2 * ORBITALS.index(orbital) + 1)
    choices = []
    for cut in range(len(digits)):
        occupation, n = digits[:cut], digits[cut:]
        if n.startswith("0") or (occupation and not 2 <= int(occupation) <= limit):
            continue
        if len(n) > 2 or int(n) > 60:
            continue
        falls = int(n) < previous_n - 2
        choices.append((falls, len(n), occupation, n))
    if not choices:
        return None
    return min(choices)[2:]


def split_shells(text):
    """`3s23p10d` → ['3s2', '3p', '10d']; None where the text is not a run of shells."""
    head = re.match(r"^(\d{1,2})([a-z])", text)
    if not head:
        return None
    shells, rest = [], text
    number, rest = head[1], text[len(head[1]):]
    while rest:
        match = re.match(r"^([a-z])(\d*)(.*)$", rest)
        if not match or match[1] not in ORBITALS:
            return None
        orbital, digits, tail = match.groups()
        if int(number) <= ORBITALS.index(orbital):
            return None
        if not tail:
            limit = 2 * (2 * ORBITALS.index(orbital) + 1)
            if digits and not 1 <= int(digits) <= limit:
                return None
            shells.append(f"{number}{orbital}{digits}")
            return shells
        parts = split_digits(digits, orbital, int(number))
        if parts is None:
            return None
        shells.append(f"{number}{orbital}{parts[0]}")
        number, rest = parts[1], tail
    return None


def clean_parent(parent):
    """`(3P<2>)` → `(3P2)`; `(a 5D)` and `(b3D)` → without the letter, which the parent's term does not need."""
    parent = parent.replace("<", "").replace(">", "").replace(" ", "")
    return re.sub(r"^\((?:[a-z])(?=\d)", "(", parent)


def configuration(text):
    """A configuration with its shells apart, or None where it cannot be read for certain."""
    text = text.strip().rstrip("?")
    if not text:
        return None
    out = []
    for piece in re.findall(r"\([^)]*\)|[^\s()]+|\s+", text):
        if piece.isspace():
            continue
        if piece.startswith("("):
            parent = clean_parent(piece)
            if not re.match(r"^\((?:\d+[A-Z]o?(?:\d+(?:/2)?)?o?|\d+(?:/2)?,\d+(?:/2)?)\)$", parent):
                return None
            out.append(parent)
            continue
        subscript = re.match(r"^(\d+[a-z]\d*?)(1/2|3/2|5/2|7/2)$", piece)
        if subscript:
            shells = split_shells(subscript[1])
            if shells is None:
                return None
            shells[-1] += f"({subscript[2]})"
        else:
            shells = split_shells(piece)
        if shells is None:
            return None
        out.extend(shells)
    return " ".join(out)


def parity(config):
    """0 even, 1 odd, None unknown: the sum of l over all electrons (closed core shells are even)."""
    if not config:
        return None
    total = 0
    for shell in config.split():
        if shell.startswith("("):
            continue
        match = re.match(r"^\d+([a-z])(\d*)(?:\(\d/2\))?$", shell)
        if not match:
            return None
        total += ORBITALS.index(match[1]) * int(match[2] or 1)
    return total % 2


def electrons(config):
    """Number of electrons in the printed shells, or None."""
    shells = [re.match(r"^\d+[a-z](\d*)(?:\(\d/2\))?$", s) for s in config.split() if not s.startswith("(")]
    return None if None in shells or not shells else sum(int(m[1] or 1) for m in shells)


def agree(config, term):
    """Drops a configuration whose electron count cannot give the multiplicity of its own term.

    An odd number of electrons has even multiplicity and the reverse; left-out core shells hold even numbers.
    """
    multiplicity = re.match(r"^(?:[a-z] )?(\d+)[A-Z]", term)
    count = electrons(config) if config else None
    if multiplicity and count is not None and (count + int(multiplicity[1])) % 2 == 0:
        return "", term
    return config, term


def lumps(term, g):
    """True when the weight is the sum of several levels of the term: 8 and 15 of ³D (3 + 5, 3 + 5 + 7)."""
    match = re.match(r"^(?:[a-z] )?(\d+)([SPDFGHIKLMNOQ])o?$", term)
    if not match or not g:
        return False
    spin, orbital = int(match[1]) - 1, 2 * "SPDFGHIKLMNOQ".index(match[2])
    weights = range(abs(orbital - spin) + 1, orbital + spin + 2, 2)
    sums = {0}
    for weight in weights:
        sums |= {s + weight for s in sums}
    return int(g) not in weights and int(g) in sums


def label(text):
    """(configuration, term) of one printed label; either may be empty, nothing is guessed."""
    text = text.strip()
    text = re.sub(r"\b(?:Autoionization|Auto|v wide)\b", "", text).strip()
    if not text or re.search(r"[Uu]nassigned|level|\+", text) or "?" in text:
        return "", ""
    text = re.sub(r"(?<=\d[spdfgh])(?=\d[A-Z]o?$)", " ", text)
    text = re.sub(r"(?<=[\d)])(?=\(\d+(?:/2)?,\d+(?:/2)?\)o?$)", " ", text)
    bare = re.match(r"^(.*?)\s+o$", text)
    if bare:
        return configuration(bare[1]) or "", ""
    for at in [m.start() for m in re.finditer(r"(?:(?<=[\s)])|^)(?=\S)", text)]:
        match = TERM.match(text[at:])
        if match:
            prefix = match["prefix"]
            term = f"{prefix} {match['term']}" if prefix else match["term"]
            return configuration(text[:at]) or "", term
    return configuration(text) or "", ""
