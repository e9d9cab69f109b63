"""A drawn part as evidence on the parameters of a standard."""

from math import inf

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import BenchError, RequestError
from stdfit.circuits.coaxial.modes import line_te11_hz, pipe_te11_hz
from stdfit.circuits.open_end import open_end
from stdfit.circuits.standard import IDEAL, PARAMETERS
from stdfit.data.drawing_records import Drawing, PartEntry
from stdfit.validity.drawing.end_values import EndValues, end_values
from stdfit.validity.drawing.evidence import DrawnPart
from stdfit.validity.drawing.line_values import grid, line_values

BELOW_NEXT_MODE = 0.95
"""Fields are computed up to this part of the onset of the next mode."""


def drawn_part(drawing: Drawing, part: PartEntry, to_hz: float, reference_ohm: float = 50.0) -> DrawnPart:
    """Return what a drawing says of a part.

    Parameters
    ----------
    drawing : Drawing
        For messages.
    part : PartEntry
    to_hz : float
        Top of the band; what lies above the onset of the next mode is left out of it.
    reference_ohm : float

    Raises
    ------
    BenchError
        The sections are a filter, or figures are such that fields cannot be computed.
    """
    try:
        return _drawn(drawing, part, to_hz, reference_ohm)
    except RequestError as fault:
        raise BenchError(fault.what, fault.mend, file=drawing.path, key=f"part[{part.name}]") from fault


def _drawn(drawing: Drawing, part: PartEntry, to_hz: float, reference_ohm: float) -> DrawnPart:
    onset = _next_mode_hz(part)
    notes = list[str]()
    top = min(to_hz, BELOW_NEXT_MODE * onset)
    if top < to_hz:
        notes.append(
            f"the next mode begins at {onset / 1e9:.3g} GHz; fields are computed up to {top / 1e9:.3g} GHz only"
        )
    end = end_values(part, top)
    line, told = line_values(
        part, _reflection(part, end, top, reference_ohm), top, reference_ohm, drawing.path
    )
    order = [parameter.name for parameter in PARAMETERS[part.kind]]
    values = tuple(sorted((*line, *end.values), key=lambda one: order.index(one.name)))
    for one in values:
        if not (np.isfinite(one.value) and np.isfinite(one.u)):
            raise BenchError(
                f"its {one.name} cannot be computed",
                "check the dimensions and their unit",
                file=drawing.path,
                key=f"part[{part.name}]",
            )
    return DrawnPart(
        name=part.name,
        kind=part.kind,
        form=part.end.form if part.end is not None else "",
        values=values,
        held=end.held,
        next_mode_hz=onset,
        to_hz=top,
        notes=(*notes, *told, *end.notes),
    )


def _next_mode_hz(part: PartEntry) -> float:
    """Return where TE11 begins, in the lines or in the pipe beyond the pin."""
    onsets = [
        line_te11_hz(one.inner_m.value, one.outer_m.value, one.permittivity.value)
        for one in part.sections
        if one.inner_m is not None and one.outer_m is not None
    ]
    if part.end is not None and part.end.beyond is not None and part.sections[-1].outer_m is not None:
        onsets.append(pipe_te11_hz(part.sections[-1].outer_m.value, part.end.beyond.value))
    return min(onsets, default=inf)


def _reflection(part: PartEntry, end: EndValues, to_hz: float, reference_ohm: float) -> ComplexArray:
    """Return the reflection of the end, as far as it is drawn, at the frequencies at which lines are compared."""
    f = grid(to_hz)
    values = {one.name: one.value for one in end.values}
    if part.kind == "open":
        capacitance = np.array([values.get("c0", 0.0) * 1e-15, 0.0, values.get("c2", 0.0) * 1e-36, 0.0])
        return open_end(f, capacitance, reference_ohm)[0]
    gamma = complex(IDEAL[part.kind])
    if part.kind == "load" and "resistance_ohm" in values:
        gamma = complex(
            (values["resistance_ohm"] - reference_ohm) / (values["resistance_ohm"] + reference_ohm)
        )
    return np.full(f.size, gamma)
