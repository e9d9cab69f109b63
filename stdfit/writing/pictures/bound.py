"""The bound on one standard, its sources upon each other, against the tolerance."""

from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.base.arrays import FloatArray
from stdfit.validity.evidence.sharing import MISFIT, STATED
from stdfit.validity.evidence.standard import StandardEvidence
from stdfit.writing.pictures.frame import DOTTED, frequency_axis, mark_limit, ruled
from stdfit.writing.pictures.palette import AREAS, MISFIT_COLOUR, PALETTE

OTHERS = "other sources"

SEEN = 0.01
"""A kind that is nowhere more than this part of the bound is one of the others."""

TOLD = 0.01
"""An area that is nowhere higher than this part of the axis has no entry in the key."""

HIGHEST = 4.0
"""The axis ends at this multiple of the tolerance, or of the smallest bound, if that is less than the largest bound."""


def colours_of(evidence: Sequence[StandardEvidence]) -> dict[str, str]:
    """Return the colour of each kind of source, the same in all pictures of a kit: the largest kinds have their own."""
    sizes: dict[str, float] = {}
    for one in evidence:
        for kind, part in zip(one.kinds, one.parts, strict=True):
            sizes[kind] = max(sizes.get(kind, 0.0), float((part / np.maximum(one.bound, 1e-300)).mean()))
    order = sorted((kind for kind in sizes if kind not in (MISFIT, STATED)), key=lambda kind: -sizes[kind])
    own = order if len(order) <= len(AREAS) else order[: len(AREAS) - 1]
    return {**dict(zip(own, AREAS, strict=False)), MISFIT: MISFIT_COLOUR, STATED: "rest"}


def stacked(one: StandardEvidence, colours: Mapping[str, str]) -> list[tuple[str, str, FloatArray]]:
    """Return label, colour and part of each area from the lowest up; small kinds are joined."""
    known = dict(zip(one.kinds, one.parts, strict=True))
    seen = {kind for kind, part in known.items() if (part > SEEN * one.bound).any()}
    areas = [(kind, colours[kind], known[kind]) for kind in colours if kind in seen and kind != MISFIT]
    rest = [part for kind, part in known.items() if kind != MISFIT and not (kind in colours and kind in seen)]
    if rest:
        areas.append((OTHERS, "rest", np.sum(rest, axis=0)))
    if MISFIT in known:
        areas.append((MISFIT, colours[MISFIT], known[MISFIT]))
    return [area for area in areas if area[2].any()]


def draw_bound(
    axes: Axes, one: StandardEvidence, colours: Mapping[str, str]
) -> tuple[list[Artist], list[str]]:
    """Draw the parts of the bound upon each other, the bound, the tolerance and the limit; return the key too."""
    size = frequency_axis(axes, one.frequency_hz)
    x = one.frequency_hz / size
    areas = stacked(one, colours)
    ruled(axes, "bound on |error of Γ| (95 %)", (0.0, highest(one)), float(one.frequency_hz[-1]))
    handles: list[Artist] = []
    names: list[str] = []
    base = np.zeros(x.size)
    for label, colour, part in areas:
        area = axes.fill_between(
            x, base, base + part, facecolor=PALETTE[colour], edgecolor=PALETTE["paper"], linewidth=0.4
        )
        if (part > TOLD * highest(one)).any():  # else it is drawn too thin to be seen
            handles.append(area)
            names.append(label)
        base = base + part
    handles += axes.plot(x, one.bound, color=PALETTE["ink"], linewidth=1.3)
    axes.axhline(one.within, color=PALETTE["paper"], linewidth=2.6)  # so that the dots show on areas
    within = axes.axhline(one.within, color=PALETTE["ink"], linewidth=1.1, linestyle=DOTTED)
    mark_limit(axes, one.limit_hz, size)
    return [*handles, within], [*names, "bound", f"tolerance {one.within:g}"]


def highest(one: StandardEvidence) -> float:
    """Return where the axis of the bound ends, so that what happens near the tolerance can be seen."""
    most = max(1.05 * float(one.bound.max()), 1.25 * one.within)
    return min(most, HIGHEST * max(one.within, float(one.bound.min())))
