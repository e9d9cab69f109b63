"""What drawings tell of standards, in words, as lines to paste into a bench file, and as plain data."""

from collections.abc import Sequence
from math import floor, isfinite, log10
from typing import Any

from stdfit.circuits.connectors import family_of
from stdfit.circuits.standard import PARAMETERS
from stdfit.data.drawing_records import Drawing
from stdfit.validity.drawing.evidence import DrawnPart, DrawnValue
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency

TWO_SIDED = 1.96
HELD = "a lossless end is even in frequency"


def drawing_text(drawing: Drawing, found: Sequence[DrawnPart]) -> str:
    """Return what each part's dimensions tell, and the lines for its bench file."""
    lines = [drawing.name]
    for one in found:
        lines += ["", f"{one.name}: {_title(one)}, to {frequency(one.to_hz)}"]
        lines += aligned([["what", "value (± 95 %)", "", "how", "most of its uncertainty"], *_rows(one)])
        if isfinite(one.next_mode_hz):
            lines.append(f"  next mode (TE11) from {frequency(one.next_mode_hz)} on{_connector(drawing)}")
        lines += [f"  {note}" for note in one.notes]
        if one.values:
            lines += ["", f"  for the bench file, in the table of '{one.name}':", *paste_lines(one)]
    return "\n".join(lines) + "\n"


def paste_lines(one: DrawnPart) -> list[str]:
    """Return the lines that give a part's values in a bench file."""
    lines = []
    for value in one.values:
        digits = _digits(value.u)
        told = f"{{ value = {value.value:.{digits}f}, u = {value.u:.{digits}f} }}"
        lines.append(f"given.{value.name} = {told if value.u > 0.0 else repr(value.value)}")
    return lines + [f"given.{name} = 0.0" for name in one.held]


def drawing_data(drawing: Drawing, found: Sequence[DrawnPart]) -> dict[str, Any]:
    """Return what `drawing_text` says, as data."""
    family = family_of(drawing.connector)
    return {
        "name": drawing.name,
        "connector": drawing.connector,
        "connector_top_hz": family.top_hz if family.name else None,
        "parts": [
            {
                "name": one.name,
                "kind": one.kind,
                "end": one.form or None,
                "to_hz": one.to_hz,
                "next_mode_hz": one.next_mode_hz if isfinite(one.next_mode_hz) else None,
                "values": [
                    {
                        "name": value.name,
                        "value": value.value,
                        "unit": _unit(one.kind, value.name),
                        "u": value.u,
                        "low_95": value.value - TWO_SIDED * value.u,
                        "high_95": value.value + TWO_SIDED * value.u,
                        "how": value.how,
                        "u_parts": dict(value.parts),
                    }
                    for value in one.values
                ],
                "held_at_zero": list(one.held),
                "notes": list(one.notes),
            }
            for one in found
        ],
    }


def _rows(one: DrawnPart) -> list[list[str]]:
    rows = []
    for value in one.values:
        digits = max(_digits(value.u) - 1, 0)
        told = f"{value.value:.{digits}f} ± {_half(value)}" if value.u > 0.0 else f"{value.value:g} (exact)"
        most, share = value.most
        rows.append(
            [
                _label(one.kind, value.name),
                told,
                _unit(one.kind, value.name),
                value.how,
                f"{most} ({100 * share:.0f} %)" if most else "",
            ]
        )
    if one.held:
        names = ", ".join(_label(one.kind, name) for name in one.held)
        rows.append([names, "0 (held)", "", _why_held(one), ""])
    return rows


def _why_held(one: DrawnPart) -> str:
    return HELD if one.kind == "open" else "the skin's reactance needs no more"


def _half(value: DrawnValue) -> str:
    half = TWO_SIDED * value.u
    return f"{half:.2g}" if half < 99.5 else f"{half:.0f}"


def _digits(u: float) -> int:
    """Return the decimals that keep a value to a hundredth of its standard uncertainty."""
    return 6 if u <= 0.0 else min(max(2 - floor(log10(u)), 0), 12)


def _title(one: DrawnPart) -> str:
    ends = {"chip": "load of chips", "flat": "flat short", "shielded": "shielded open", "flush": "flush open"}
    return ends.get(one.form, f"{one.kind}, its end not drawn")


def _connector(drawing: Drawing) -> str:
    family = family_of(drawing.connector)
    if not family.name:
        return ""
    if family.recommended_hz is not None and family.recommended_hz < family.top_hz:
        return f"; {family.name} is recommended up to {frequency(family.recommended_hz)}"
    return f"; {family.name} is good to {frequency(family.top_hz)}"


def _label(kind: str, name: str) -> str:
    return next(one.label for one in PARAMETERS[kind] if one.name == name)


def _unit(kind: str, name: str) -> str:
    return next(one.unit for one in PARAMETERS[kind] if one.name == name)
