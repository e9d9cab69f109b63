"""What the uncertainty of each figure of a drawing does to what is computed from it."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from math import inf
from typing import Any

from stdfit.data.drawing_records import Measure, PartEntry

_LEAST = {"permittivity": 1.0, "beyond": 1.0, "pipe_m": 1e-6}
"""What a figure cannot lie below: vacuum, and a wall that does not touch."""

Moved = Callable[[float], PartEntry]


def measures_of(part: PartEntry) -> Iterator[tuple[str, Measure, Moved, float]]:
    """Yield every uncertain figure of a part: its name, the figure, the part with another value, and the least one."""
    for place, section in enumerate(part.sections):
        figures = (
            ("length_mm", "length_m", section.length_m),
            ("inner_mm", "inner_m", section.inner_m),
            ("outer_mm", "outer_m", section.outer_m),
            ("dielectric", "permittivity", section.permittivity),
        )
        for key, field, measure in figures:
            if measure is not None and measure.u > 0.0:
                yield (
                    f"{key} of section {place + 1}",
                    measure,
                    _in_section(part, place, field),
                    _LEAST.get(field, -inf),
                )
    if part.end is None:
        return
    end_figures = (
        ("pin_mm", "pin_m", part.end.pin_m),
        ("pipe_mm", "pipe_m", part.end.pipe_m),
        ("beyond", "beyond", part.end.beyond),
        ("resistance_ohm", "resistance_ohm", part.end.resistance_ohm),
    )
    for key, field, measure in end_figures:
        if measure is not None and measure.u > 0.0:
            yield key, measure, _in_end(part, field), _LEAST.get(field, -inf)


def _in_section(part: PartEntry, place: int, field: str) -> Moved:
    def moved(value: float) -> PartEntry:
        section = replace(part.sections[place], **{field: Measure(value)})
        return replace(part, sections=(*part.sections[:place], section, *part.sections[place + 1 :]))

    return moved


def _in_end(part: PartEntry, field: str) -> Moved:
    def moved(value: float) -> PartEntry:
        assert part.end is not None  # measures_of looked
        changed: dict[str, Any] = {field: Measure(value)}
        return replace(part, end=replace(part.end, **changed))

    return moved


def spread(
    part: PartEntry,
    computed: Callable[[PartEntry], Mapping[str, float]],
    matters: Callable[[str], bool] = lambda label: True,
) -> dict[str, dict[str, float]]:
    """Return, for each computed value, what one standard uncertainty of each figure moves it by.

    Δ = (g(x + u) − g(x − u))/2, from one side only where x − u cannot be, so that u²(g) = Σ Δ² to first order for
    independent figures (JCGM 100:2008, 5.1.3, note 2).

    Parameters
    ----------
    part : PartEntry
    computed : callable
        From a part to values by name.
    matters : callable, optional
        Tells by the name of a figure whether it can move anything at all.

    Returns
    -------
    dict of dict of float
        Value's name -> figure's name -> signed Δ; zeros are left out.
    """
    found: dict[str, dict[str, float]] = {}
    for label, measure, moved, least in measures_of(part):
        if not matters(label):
            continue
        low = max(measure.value - measure.u, least)
        above, below = computed(moved(measure.value + measure.u)), computed(moved(low))
        for name in above.keys() & below.keys():
            delta = (above[name] - below[name]) * measure.u / (measure.value + measure.u - low)
            if delta != 0.0:
                found.setdefault(name, {})[label] = delta
    return found
