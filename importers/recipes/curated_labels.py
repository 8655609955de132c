"""Settles the label of a level where the two hand entries name it differently.

A label is a configuration (shells separated by single blanks, parents in parentheses) and a term (a letter before it where the
entry gives one, trailing `o` for odd parity). What both entries say is kept; what only one of them says is kept where the other
left it blank or coarser; what they contradict each other in is decided by hand in `curated_decisions.toml` or left empty.
"""
import re

ORBITAL = {"s": 0, "p": 1, "d": 2, "f": 3, "g": 4, "h": 5, "i": 6}
SHELL = re.compile(r"^(\d+)([spdfghi])(\d*)$")
LETTERS = "SPDFGHIKLMNOQ"
LS_TERM = re.compile(r"^(?:([a-z]) )?(\d+)([SPDFGHIKLMNOQ])(o?)$")


def tidy(text):
    """Single blanks, parents in one style, no ruler marks."""
    text = re.sub(r"<([^>]*)>", r"\1", text or "")
    text = re.sub(r"^([a-z])(?=\d+[SPDFGHIKLMNOQ])", r"\1 ", text.replace(".", " ").replace("*", "o").replace("°", "o"))
    return re.sub(r"\s+", " ", text).strip()


def without_parents(configuration):
    """The shells alone: `3d9 (2D) 4s` -> `3d9 4s`, `5d3/2` -> `5d`."""
    bare = re.sub(r"\([^)]*\)", " ", configuration)
    bare = re.sub(r"(\d[spdfghi])\d+/\d+", r"\1", bare)
    return re.sub(r"\s+", " ", bare).strip()


def parents(configuration):
    """The parent terms inside a configuration."""
    return set(re.findall(r"\([^)]*\)", configuration))


def plain_index(text):
    """A seniority figure behind a term, as in `3P2` for the second 3P of a shell, says nothing about parity or J."""
    return re.sub(r"(\d[SPDFGHIKLMNOQ])\d(?!/)", r"\1", text)


def bare_term(term):
    """The term without the letter before it."""
    return re.sub(r"^[a-z] ", "", plain_index(term))


def parity_of(configuration):
    """0 even, 1 odd, None where the shells do not tell."""
    total, seen = 0, False
    for word in without_parents(configuration).split():
        match = SHELL.match(word)
        if not match:
            return None
        total += ORBITAL[match[2]] * int(match[3] or 1)
        seen = True
    return total % 2 if seen else None


def term_parity(term):
    """0 even, 1 odd, None without a term."""
    return None if not term else int(term.endswith("o"))


def ls_term(term):
    """(S, L, odd) of a term in LS coupling, else None."""
    match = LS_TERM.match(term or "")
    if not match:
        return None
    return (int(match[2]) - 1) / 2, LETTERS.index(match[3]), bool(match[4])


def split_other(label):
    """`other entry: CONFIGURATION TERM` -> (configuration, term)."""
    text = tidy(label.removeprefix("other entry:"))
    match = re.search(r"(?:^| )((?:[a-z] )?(?:\d+[SPDFGHIKLMNOQ]\d?o?|\d?\[[\d/]+\]o?|\([\d/]+,[\d/]+\)o?)|o)$", text)
    if not match:
        return text, ""
    return text[: match.start()].strip(), match[1]


def settle(row):
    """(configuration, term, how) from one entered level; how says which rule settled it, `open` that none did."""
    mine = cleaned(row["configuration"], row["term"])
    if row["label"] == "agrees":
        return *mine, "both entries"
    other = cleaned(*split_other(row["label"]))
    conf, conf_how = settle_configuration(mine[0], other[0])
    term, term_how = settle_term(mine[1], other[1])
    return conf, term, worst(conf_how, term_how)


def cleaned(configuration, term):
    """One entry's label; the seniority figure goes only where the coupling is LS (elsewhere the figure is a J)."""
    configuration, term = blank_parity_words(tidy(configuration)), tidy(term)
    term = "" if term == "o" else term
    if ls_term(plain_index(term)):
        return plain_index(configuration), plain_index(term)
    return configuration, term


def blank_parity_words(configuration):
    """`odd` in place of a configuration names none."""
    return "" if configuration in ("odd", "even", "o") else configuration


def settle_term(a, b):
    if a == b:
        return a, "both entries"
    if not a or not b:
        return "", "term in one entry"
    if bare_term(a) == bare_term(b) and " " in a + b and not (" " in a and " " in b):
        return max(a, b, key=len), "fuller entry"
    return "", "open"


def settle_configuration(a, b):
    if a == b:
        return a, "both entries"
    if not a or not b:
        return a or b, "configuration in one entry"
    if without_parents(a) == without_parents(b):
        fuller, other = sorted((a, b), key=lambda c: (len(parents(c)), len(c)), reverse=True)
        if parents(other) <= parents(fuller):
            return fuller, "fuller entry"
        return without_parents(a), "shells agree, parents do not"
    return "", "open"


def worst(*hows):
    order = ["both entries", "fuller entry", "configuration in one entry", "term in one entry", "shells agree, parents do not", "open"]
    return max(hows, key=order.index)
