"""An adapter as a two-port Touchstone file, for programs that remove or insert S-parameters."""

from pathlib import Path

import numpy as np

from stdfit.data.ordinary import beginning
from stdfit.validity.adapter import Adapter
from stdfit.validity.thru import LINE_TERMS
from stdfit.writing.export import rounded_up
from stdfit.writing.plain_names import as_ascii

FIRST_LINE = "! Written by stdfit adapter: a two-port, port 1 towards the analyser"

HEADER_ROWS = 9
"""Frequencies at which the head gives the bounds."""


def adapter_touchstone(adapter: Adapter) -> str:
    """Return a Touchstone 1 file: hertz, real and imaginary parts of S11, S21, S12, S22, bounds as comments.

    Comments are ASCII, as the format asks for.
    """
    bounds = adapter.s_bounds
    places = np.unique(np.linspace(0, adapter.known_hz.size - 1, HEADER_ROWS).round().astype(int))
    head = [
        f"adapter: {adapter.name}",
        f"determined: {adapter.created}, stdfit {adapter.version}",
        *(
            f"most like a line: {name} {term.value:.6g} +/- {term.high - term.value:.2g}"
            for (name, _), term in zip(LINE_TERMS, adapter.line, strict=True)
        ),
        *(f"warning: {warning}" for warning in adapter.warnings),
        "S12 = S21: reciprocity is assumed, reflections cannot show it",
        "bounds: 95 % on the error of S11, S21, S22 as complex numbers",
        "",
        "frequency_hz bound_s11 bound_s21 bound_s22 (at some of the frequencies)",
        *(
            " ".join([_plain(adapter.known_hz[k]), *(rounded_up(float(one)) for one in bounds[k])])
            for k in places
        ),
    ]
    rows = [
        " ".join(_plain(value) for value in (f, *(part for one in row for part in (one.real, one.imag))))
        for f, row in zip(adapter.frequency_hz, adapter.s[:, [0, 1, 1, 2]], strict=True)
    ]
    lines = [
        FIRST_LINE,
        *(f"! {as_ascii(line)}".rstrip() for line in head),
        f"# Hz S RI R {_plain(adapter.reference_ohm)}",
        *rows,
    ]
    return "\n".join(lines) + "\n"


def is_adapter_touchstone(path: Path) -> bool:
    """Return whether a file begins like one of this module."""
    line = beginning(path, len(FIRST_LINE) + 2).decode("utf-8", "replace").split("\n")[0]
    return line.rstrip("\r") == FIRST_LINE


def _plain(value: float) -> str:
    """Return a number with all its digits and nothing that is not needed."""
    return repr(float(value)).removesuffix(".0")
