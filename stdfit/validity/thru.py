"""A two-port in the few numbers that are typed in for a thru: delay, loss and impedance."""

from collections.abc import Sequence
from dataclasses import dataclass

LINE_TERMS = (("delay_ps", "ps"), ("loss_gohm_per_s", "GΩ/s"), ("z0_ohm", "Ω"))
"""The terms of a line with their units, in the order in which they are kept."""


@dataclass(frozen=True, slots=True)
class LineTerm:
    """One number of a line.

    Attributes
    ----------
    value, u, low, high : float
        Value, standard uncertainty and 95 % interval, in the unit of the term.
    """

    value: float
    u: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Thru:
    """The thru of a kit.

    Attributes
    ----------
    name : str
        Of the adapter that it is.
    line : tuple of three LineTerm
        In the order of `LINE_TERMS`.
    sha256 : str
        Of the adapter file.
    """

    name: str
    line: tuple[LineTerm, LineTerm, LineTerm]
    sha256: str


def line_faults(line: Sequence[LineTerm]) -> list[tuple[str, str]]:
    """Return (key, what is wrong) of terms that cannot be: empty where all is well."""
    faults = []
    for (name, _), term in zip(LINE_TERMS, line, strict=True):
        largest = max(abs(number) for number in (term.value, term.u, term.low, term.high))
        if not largest < float("inf"):
            faults.append((name, "a value is not a finite number"))
        elif not term.low <= term.value <= term.high:
            faults.append((name, "the value lies outside its own 95 % interval"))
    if not faults and line[2].value <= 0.0:
        faults.append((LINE_TERMS[2][0], "not above 0"))
    return faults
