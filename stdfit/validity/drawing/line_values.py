"""Delay, loss and impedance of a drawn part's line."""

from collections.abc import Mapping
from itertools import pairwise
from math import sqrt

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import BenchError
from stdfit.circuits.coaxial.dimensions import delay_s, line_impedance_ohm, offset_loss_ohm_per_s
from stdfit.circuits.coaxial.sides import AIR_ER
from stdfit.data.drawing_records import PartEntry, SectionEntry
from stdfit.validity.drawing.evidence import DrawnValue
from stdfit.validity.drawing.fields import static_step
from stdfit.validity.drawing.one_line import LARGEST_RATIO, POINTS, TOLD, OneLine, one_line
from stdfit.validity.drawing.spread import spread

UNSURE_LOSS = 0.5
"""Relative standard uncertainty of a loss from conductivity: plating, polish, joints (common practice, no source)."""

_OF_LINE = ("length_mm", "inner_mm", "outer_mm", "dielectric", "pin_mm")


def line_values(
    part: PartEntry, end: ComplexArray, to_hz: float, reference_ohm: float, file: object
) -> tuple[list[DrawnValue], list[str]]:
    """Return what a drawing tells of the offset line, and notes.

    τ = Σ l·√ε/c, Z = (η0/2π√ε)·ln(D/d), r = Σ rk·τk/τ; of several sections the one line that comes nearest.

    Parameters
    ----------
    part : PartEntry
    end : complex array of shape (POINTS,)
        Reflection of the end at `grid(to_hz)`.
    to_hz : float
        Top of the band.
    reference_ohm : float
    file : path
        The drawing, for messages.

    Raises
    ------
    BenchError
        Sections whose impedances differ too much for one line.
    """
    sections, notes = part.sections, list[str]()
    known = [one.inner_m is not None for one in sections]
    long = [one.length_m is not None for one in sections]
    if not sections:
        return [], []
    if not all(long):
        if any(long):
            notes.append("a section has no length, so that the delay is not known")
        if len(sections) > 1 or not known[0]:
            return [], notes
        shifts = spread(part, lambda one: {"z0": _impedance(one.sections[0])}, _of_line)
        return [
            DrawnValue("offset_z0_ohm", _impedance(sections[0]), shifts.get("z0", {}), "ln(outer/inner)")
        ], notes
    if not all(known):
        notes.append("a section has no diameters, so that the impedance is not known")
        shifts = spread(part, lambda one: {"delay": 1e12 * sum(_delays(one))}, _of_line)
        delay = DrawnValue(
            "offset_delay_ps", 1e12 * sum(_delays(part)), shifts.get("delay", {}), "length·√ε/c"
        )
        return [delay], notes
    _refuse_filter(part, file)
    steps = _steps(sections)

    def reduced(one: PartEntry) -> OneLine:
        impedances = [_impedance(section) for section in one.sections]
        return one_line(_delays(one), impedances, steps, end, grid(to_hz), reference_ohm)

    def figures(one: PartEntry) -> Mapping[str, float]:
        line = reduced(one)
        return {"delay": 1e12 * line.delay_s, "z0": line.z0_ohm}

    found = reduced(part)
    shifts = spread(part, figures, _of_line)
    # The line that is right at low frequency and the one that is best over the band are limits of what is meant.
    by_delay = {"sections as one line": 1e12 * abs(found.delay_s - found.low_delay_s) / sqrt(3.0)}
    by_z0 = {"sections as one line": abs(found.z0_ohm - found.low_z0_ohm) / sqrt(3.0)}
    how = "length·√ε/c" if len(sections) == 1 else f"{len(sections)} sections as one line"
    values = [
        DrawnValue("offset_delay_ps", 1e12 * found.delay_s, {**shifts.get("delay", {}), **by_delay}, how)
    ]
    values += _loss(part)
    values.append(
        DrawnValue(
            "offset_z0_ohm",
            found.z0_ohm,
            {**shifts.get("z0", {}), **by_z0},
            "ln(outer/inner)" if len(sections) == 1 else how,
        )
    )
    if found.apart > TOLD:
        notes.append(
            f"one line stands for the {len(sections)} sections within {TOLD:g} of Γ up to "
            f"{found.holds_to_hz / 1e9:.3g} GHz; at the top of the band it is off by up to "
            f"{found.apart:.2g}, which readings will show as misfit"
        )
    return values, notes


def grid(to_hz: float) -> np.ndarray:
    """Return the frequencies at which chain and line are compared."""
    return np.linspace(to_hz / POINTS, to_hz, POINTS)


def _of_line(label: str) -> bool:
    return label.startswith(_OF_LINE)


def _impedance(section: SectionEntry) -> float:
    assert section.inner_m is not None and section.outer_m is not None  # the caller looked
    return line_impedance_ohm(section.inner_m.value, section.outer_m.value, section.permittivity.value)


def _delays(part: PartEntry) -> list[float]:
    """Return the delay of each section, the pin's end in the last one's."""
    delays = []
    for section in part.sections:
        assert section.length_m is not None  # the caller looked
        delays.append(delay_s(section.length_m.value, section.permittivity.value))
    if part.end is not None and part.end.pin_m is not None:
        pin = part.end.pin_m.value
        # What stands out of a face is in air; in a pipe the reader of drawings has seen to it that it is all one.
        out = part.end.form == "flush" and pin > 0.0
        delays[-1] += delay_s(pin, AIR_ER if out else part.sections[-1].permittivity.value)
    return delays


def _steps(sections: tuple[SectionEntry, ...]) -> list[float]:
    found = []
    for one, other in pairwise(sections):
        assert one.inner_m is not None and one.outer_m is not None  # the caller looked
        assert other.inner_m is not None and other.outer_m is not None
        before = (one.inner_m.value, one.outer_m.value)
        after = (other.inner_m.value, other.outer_m.value)
        found.append(static_step(before, after, one.permittivity.value, other.permittivity.value))
    return found


def _refuse_filter(part: PartEntry, file: object) -> None:
    z0s = [_impedance(one) for one in part.sections]
    if max(z0s) > LARGEST_RATIO * min(z0s):
        raise BenchError(
            f"its sections have {min(z0s):.3g} … {max(z0s):.3g} Ω: a filter, for which no one offset line stands",
            f"draw a part whose impedances differ by less than a factor of {LARGEST_RATIO:g}, or leave it out",
            file=str(file),
            key=f"part[{part.name}].section",
        )


def _loss(part: PartEntry) -> list[DrawnValue]:
    """Return the offset loss at 1 GHz, where the conductor is named."""
    if part.conductivity is None:
        return []
    delays = np.abs(_delays(part))
    if not delays.sum() > 0.0:
        return []
    losses = []
    for section in part.sections:
        assert section.inner_m is not None and section.outer_m is not None  # the caller looked
        losses.append(
            offset_loss_ohm_per_s(
                section.inner_m.value,
                section.outer_m.value,
                part.conductivity,
                er=section.permittivity.value,
                roughness_m=part.roughness_m,
            )
        )
    value = float(np.dot(losses, delays) / delays.sum()) * 1e-9
    return [
        DrawnValue(
            "offset_loss_gohm_per_s",
            value,
            {"surface of the conductors": UNSURE_LOSS * value},
            f"skin effect of {part.conductor}",
        )
    ]
