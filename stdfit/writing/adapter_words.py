"""An adapter in words and aligned columns, and as data for JSON."""

from typing import Any

import numpy as np

from stdfit.validity.adapter import Adapter, s_at
from stdfit.validity.thru import LINE_TERMS, LineTerm, Thru
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency

ROWS = 8
"""Frequencies of the table."""

LABELS = ("delay", "loss", "impedance")


def adapter_summary(adapter: Adapter) -> str:
    """Return what a user must see of an adapter."""
    low, high = adapter.band
    places = np.unique(np.linspace(0, adapter.known_hz.size - 1, ROWS).round().astype(int))
    s, bounds = np.abs(s_at(adapter, adapter.known_hz[places])), adapter.s_bounds[places]
    rows = [["frequency", "|S11|", "|S21|", "|S22|", "bounds on S11, S21, S22"]]
    rows += [
        [frequency(float(f)), *(f"{one:.4f}" for one in size), ", ".join(f"{one:.2g}" for one in own)]
        for f, size, own in zip(adapter.known_hz[places], s, bounds, strict=True)
    ]
    lines = [
        f"{adapter.name}: {frequency(low)} to {frequency(high)}, {adapter.reference_ohm:g} Ω",
        "",
        "As a line (± 95 %)",
        *aligned(line_rows(adapter.line)),
        "",
        "S-parameters, with 95 % bounds",
        *aligned(rows),
    ]
    return "\n".join(lines) + "\n"


def line_rows(line: tuple[LineTerm, LineTerm, LineTerm]) -> list[list[str]]:
    """Return delay, loss and impedance with their 95 % uncertainty."""
    return [
        [label, f"{term.value:.{_digits(term)}f} ± {term.high - term.value:.2g}", unit]
        for label, (_, unit), term in zip(LABELS, LINE_TERMS, line, strict=True)
    ]


def _digits(term: LineTerm) -> int:
    """Return decimals that show the second digit of the uncertainty."""
    half = term.high - term.value
    return int(np.clip(1 - np.floor(np.log10(half)), 0, 6)) if half > 0.0 else 4


def thru_lines(thru: Thru) -> list[str]:
    """Return the thru of a kit."""
    return [f"Thru: {thru.name} (± 95 %)", *aligned(line_rows(thru.line))]


def line_data(line: tuple[LineTerm, LineTerm, LineTerm]) -> dict[str, Any]:
    """Return delay, loss and impedance as data."""
    return {
        name: {"value": term.value, "u": term.u, "low_95": term.low, "high_95": term.high}
        for (name, _), term in zip(LINE_TERMS, line, strict=True)
    }


def adapter_data(adapter: Adapter) -> dict[str, Any]:
    """Return what `adapter_summary` says, at all frequencies that have bounds, as data."""
    s, bounds, terms = s_at(adapter, np.asarray(adapter.known_hz)), adapter.s_bounds, adapter.term_bounds
    return {
        "name": adapter.name,
        "reference_impedance_ohm": adapter.reference_ohm,
        "from_hz": adapter.band[0],
        "to_hz": adapter.band[1],
        **line_data(adapter.line),
        "frequency_hz": adapter.known_hz.tolist(),
        **{f"s{name}_abs": np.abs(s[:, k]).tolist() for k, name in enumerate(("11", "21", "22"))},
        **{f"s{name}_bound": bounds[:, k].tolist() for k, name in enumerate(("11", "21", "22"))},
        **{f"term_{k}_bound": terms[:, k].tolist() for k in range(3)},
        "ancestors": [
            {"name": one.name, "created": one.created, "sha256": one.sha256, "of": one.of}
            for one in adapter.ancestors
        ],
        "warnings": list(adapter.warnings),
    }
