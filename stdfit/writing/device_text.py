"""What a kit does to devices, in words, columns and plain data."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError
from stdfit.validity.device.bound import (
    DeviceMap,
    by_magnitude,
    common_top,
    device_map,
    residual_terms,
    three_of,
)
from stdfit.validity.device.ideal import cost_of_ideal
from stdfit.validity.device.questions import (
    Answer,
    answers,
    impedance_within,
    phase_within,
    return_loss_within,
)
from stdfit.validity.kit import Kit
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency, good_to

ROUND_GHZ = (0.01, 0.03, 0.06, 0.1, 0.3, 0.6, 1.0, 3.0, 6.0, 10.0, 20.0, 30.0, 60.0, 100.0)
"""Frequencies at which a line or two of figures are told."""

TABLE_GHZ = (
    0.01,
    0.03,
    0.1,
    0.3,
    1.0,
    2.0,
    3.0,
    4.0,
    5.0,
    6.0,
    8.0,
    10.0,
    12.0,
    15.0,
    18.0,
    26.0,
    33.0,
    40.0,
    67.0,
    110.0,
)
"""Frequencies of a table where none are asked for."""

COMMENT = "the kit's part alone: connections, drift and noise of the day come on top"


def round_frequencies(
    low_hz: float, top_hz: float, count: int, choice_ghz: Sequence[float] = ROUND_GHZ
) -> FloatArray:
    """Return the highest `count` round frequencies within a band, or its top where it holds none.

    Examples
    --------
    >>> (round_frequencies(5e7, 8e9, 3) / 1e9).tolist()
    [1.0, 3.0, 6.0]
    """
    inside = [1e9 * one for one in choice_ghz if low_hz <= 1e9 * one <= top_hz]
    return np.array(inside[-count:] or [top_hz])


def device_rows(errors: DeviceMap, magnitudes: Sequence[float]) -> tuple[list[str], list[list[float]]]:
    """Return column names and one row of figures for each frequency."""
    terms = residual_terms(errors)
    worst, typical = by_magnitude(errors, magnitudes)
    names = ["frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db"]
    names += [f"{word}_at_{one:g}" for one in magnitudes for word in ("worst", "typical")]
    figures = np.stack([worst, typical], axis=2).reshape(errors.frequency_hz.size, -1)
    head = [
        errors.frequency_hz,
        _db(terms.directivity),
        _db(terms.source_match),
        _spread_db(terms.reflection_tracking),
    ]
    return names, np.column_stack([*head, figures]).tolist()


def _db(magnitude: FloatArray) -> FloatArray:
    """Return −20·log10 of a magnitude: the larger, the better."""
    return np.asarray(-20.0 * np.log10(np.maximum(magnitude, 1e-15)))


def _spread_db(magnitude: FloatArray) -> FloatArray:
    """Return −20·log10(1 − |T|): by how much a reflection may be shown too small, which is the larger side."""
    with np.errstate(divide="ignore"):
        return np.asarray(-20.0 * np.log10(np.maximum(1.0 - magnitude, 0.0)))


def device_data(kit: Kit, errors: DeviceMap, magnitudes: Sequence[float]) -> dict[str, Any]:
    """Return what `device_text` says, as data; figures without a bound are null."""
    names, rows = device_rows(errors, magnitudes)
    told = [
        {name: (value if np.isfinite(value) else None) for name, value in zip(names, row, strict=True)}
        for row in rows
    ]
    return {"name": kit.name, "standards": [one.name for one in errors.definitions], "device": told}


def device_text(kit: Kit, errors: DeviceMap, magnitudes: Sequence[float]) -> str:
    """Return residual terms and bounds on devices over frequency."""
    _, rows = device_rows(errors, magnitudes)
    used = ", ".join(one.name for one in errors.definitions)
    lines = [f"{kit.name}: an analyser corrected with {used}, 95 %", f"({COMMENT})", ""]
    lines += ["What is left in the analyser", *aligned(term_rows(rows)), ""]
    lines += ["Bound on the error of Γ of a device, worst phase (typical phase)"]
    table = [["frequency", *(f"|Γ| = {one:g}" for one in magnitudes)]]
    for row in rows:
        pairs = np.reshape(row[4:], (-1, 2))
        told = [told_if(worst, f"{worst:.2g} ({typical:.2g})") for worst, typical in pairs]
        table.append([frequency(row[0]), *told])
    return "\n".join([*lines, *aligned(table)]) + "\n"


def term_rows(rows: Sequence[Sequence[float]]) -> list[list[str]]:
    """Return the table of residual terms."""
    table = [["frequency", "directivity", "source match", "reflection tracking"]]
    table += [
        [
            frequency(f),
            told_if(d, f"{d:.1f} dB"),
            told_if(m, f"{m:.1f} dB"),
            told_if(t, f"± {t:.2g} dB"),
        ]
        for f, d, m, t, *_ in rows
    ]
    return table


def told_if(figure: float, text: str, otherwise: str = "no bound") -> str:
    """Return the text of a figure, or what stands for a figure that is infinite: two standards are the same."""
    return text if np.isfinite(figure) else otherwise


def answer_lines(found: Sequence[Answer]) -> list[str]:
    """Return the answers to questions about devices."""
    rows = [["asked", "good to", "ends because"]]
    rows += [[one.question.label, good_to(one.limit_hz), one.reason] for one in found]
    return aligned(rows, indent="")


def answer_data(found: Sequence[Answer]) -> list[dict[str, Any]]:
    """Return the answers as data."""
    return [
        {
            "asked": one.question.label,
            "limit_hz": one.limit_hz,
            "held_back_by": one.holds_back or None,
            "reason": one.reason,
        }
        for one in found
    ]


@dataclass(frozen=True, slots=True, eq=False)
class WholeKit:
    """What a kit does to devices: its residual terms at a few frequencies, and the answers to usual questions."""

    errors: DeviceMap
    answers: tuple[Answer, ...]


def whole_kit(kit: Kit) -> WholeKit | None:
    """Return what a kit does to devices, or None where it does not hold three standards with a common band."""
    try:
        three = three_of(kit)
    except RequestError:
        return None
    low, top = max(one.read_low_hz for one in three), min(common_top(three), kit.top_hz)
    if top < low:
        return None
    errors = device_map(kit, three, round_frequencies(low, top, 3))
    asked = [return_loss_within(20.0, 1.0), impedance_within(kit.reference_ohm, 2.0, kit.reference_ohm)]
    return WholeKit(errors, tuple(answers(kit, [*asked, phase_within(2.0)])))


def as_a_kit(kit: Kit) -> list[str]:
    """Return what a kit does to devices in a few lines; none where it does not hold three standards."""
    whole = whole_kit(kit)
    if whole is None:
        return []
    lines = [f"As a kit ({COMMENT})"]
    lines += aligned(term_rows(device_rows(whole.errors, ())[1]))
    lines += [f"  {one.question.label}: {answer_end(one)}" for one in whole.answers]
    return [*lines, f"  {ideal_line(whole.errors)}"]


def answer_end(one: Answer) -> str:
    """Say up to where a question is answered, and what holds it back."""
    end = f"to {frequency(one.limit_hz)}" if one.limit_hz > 0.0 else "none"
    holds = f", held back by {one.holds_back}" if one.holds_back else ""
    return f"{end}{holds}"


def ideal_line(errors: DeviceMap) -> str:
    """Say in one line what ideal standards would have cost."""
    cost = cost_of_ideal(errors)
    bound = by_magnitude(errors, (1.0,))[0][:, 0]
    told = ", ".join(
        f"{told_if(one, f'{one:.2g}', 'any amount')} at {frequency(hertz)}"
        for one, hertz in zip(cost, errors.frequency_hz, strict=True)
    )
    own = ", ".join(told_if(one, f"{one:.2g}", "any amount") for one in bound)
    return (
        f"were the standards typed in as ideal, a device's Γ would be wrong by up to {told}; "
        f"with these values by at most {own}"
    )
