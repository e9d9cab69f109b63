"""A second reader of readings, short and strict, that shares nothing with the first: what may the numbers be?"""

import cmath
import math
import re

UNITS = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
PLAIN = re.compile(r"[-+]?(\d+\.?\d*|\.\d+)([eEdD][-+]?\d+)?\Z", re.ASCII)


def number(word: str) -> float:
    if not PLAIN.match(word):
        raise ValueError(word)
    value = float(word.replace("D", "e").replace("d", "e"))
    if not math.isfinite(value):
        raise ValueError(word)
    return value


def pair(kind: str, x: float, y: float) -> complex:
    if kind == "ri":
        return complex(x, y)
    return cmath.rect(10 ** (x / 20) if kind == "db" else x, math.radians(y))


def decoded(data: bytes) -> str:
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        return data.decode("utf-16")
    return data.removeprefix(b"\xef\xbb\xbf").decode("latin-1")


def touchstone(data: bytes, port: int) -> list[tuple[float, complex]]:
    """Return frequency and S11 or S22 of version 1 files, in 50 Ω; anything else is a ValueError."""
    unit, kind, ohm, seen, rows = 1e9, "ma", 50.0, False, []
    for line in re.split(r"\r\n|\r|\n", decoded(data).rstrip("\x1a")):
        line = line.split("!")[0].strip()
        if not line:
            continue
        if line.startswith("#"):
            words = line[1:].lower().split()
            if not seen:
                seen = True
                for place, word in enumerate(words):
                    if word in UNITS:
                        unit = UNITS[word]
                    elif word in ("ri", "ma", "db"):
                        kind = word
                    elif word == "r":
                        ohm = number(words.pop(place + 1))
                    elif word != "s":
                        raise ValueError(word)
            continue
        if not seen or line.startswith("["):
            raise ValueError("no option line, or another version")
        rows.append([number(word) for word in re.split(r"[ \t\x0b\x0c]+", line)])
    found = _rows(rows, unit, kind, port)
    return found if ohm == 50.0 else [(f, in_50_ohm(gamma, ohm)) for f, gamma in found]


def in_50_ohm(gamma: complex, ohm: float) -> complex:
    above, below = ohm * (1 + gamma), 50.0 * (1 - gamma)
    return (above - below) / (above + below)


def _rows(rows, unit, kind, port):
    widths = {len(row) for row in rows}
    if widths not in ({3}, {9}):
        raise ValueError("columns")
    place = 1 if port == 1 else 7
    return [(row[0] * unit, pair(kind, row[place], row[place + 1])) for row in rows]


def columns(data: bytes) -> list[tuple[float, complex]]:
    """Return frequency and Γ of a CSV file with the header of the seeds; anything else is a ValueError."""
    lines = [line for line in re.split(r"\r\n|\r|\n", decoded(data).rstrip("\x1a")) if line.strip()]
    lines = [line for line in lines if not line.lstrip().startswith("#")]
    mark = next((mark for mark in ";\t" if mark in lines[0]), ",")
    head = ["_".join(re.findall("[a-z0-9]+", word.lower())) for word in lines[0].split(mark)]
    place = [head.index(word) for word in ("frequency_hz", "gamma_re", "gamma_im")]
    if any(head.count(head[k]) > 1 for k in place):
        raise ValueError("a column twice")
    found = []
    for line in lines[1:]:
        words = [word.strip().strip('"') for word in line.strip().split(mark)]
        if len(words) != len(head):
            raise ValueError("columns")
        f, x, y = (number(words[k]) for k in place)
        found.append((f, complex(x, y)))
    return found


def expected(name: str, data: bytes, port: int = 1) -> list[tuple[float, complex]] | None:
    """Return what a file of readings may be read as, or None where it should not be read at all."""
    # A Touchstone file is one under any name.
    readers = [lambda: touchstone(data, port)]
    if name.lower().endswith(".csv"):
        readers.insert(0, lambda: columns(data))
    for reader in readers:
        try:
            return reader()
        except (ValueError, IndexError, ArithmeticError):
            continue
    return None
