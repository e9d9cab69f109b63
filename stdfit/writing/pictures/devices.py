"""What a kit does to devices, and how far apart its standards lie."""

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.circuits.residual_map import PAIRS
from stdfit.validity.evidence.whole import KitEvidence
from stdfit.writing.pictures.frame import DASHED, DOTTED, frequency_axis, mark_limit, ruled
from stdfit.writing.pictures.labels import at_the_end, drawable, width_of
from stdfit.writing.pictures.palette import LINES, PALETTE

LOOKS: tuple[tuple[str, object], ...] = (
    ("series-3", (0, (1, 1.2))),
    ("series-2", (0, (3, 1.2))),
    ("series-1", (0, (6, 1.5))),
    ("ink", "solid"),
)
"""Colour and dashes of each magnitude, the smallest first."""

SMALLEST = 1e-9

LARGEST = 10.0
"""Bounds beyond these ends of the axis say no more than that nothing, or everything, is known."""


def draw_devices(axes: Axes, one: KitEvidence) -> list[Artist]:
    """Draw the bound on devices over frequency on a logarithmic axis, a line for each magnitude, named at its end."""
    size = frequency_axis(axes, one.frequency_hz)
    x, top_hz = one.frequency_hz / size, float(one.frequency_hz[-1])
    head = "bound on a device, worst phase (95 %)"
    bounds = np.where(np.isfinite(one.bounds) & (one.bounds > SMALLEST), one.bounds, np.nan)
    if not np.isfinite(bounds).any():
        ruled(axes, head, (0.0, 1.0), top_hz, ())
        return [axes.text(0.5, 0.5, "no bound is known", transform=axes.transAxes, ha="center")]
    low, top = 0.8 * float(np.nanmin(bounds)), min(1.25 * float(np.nanmax(bounds)), LARGEST)
    low = min(low, 0.5 * top)
    axes.set_yscale("log")
    ruled(axes, head, (low, top), top_hz, _decades(low, top))
    artists: list[Artist] = []
    ends = []
    for (colour, dashes), bound in zip(LOOKS, bounds.T, strict=True):
        artists += axes.plot(x, bound, color=PALETTE[colour], linestyle=dashes, linewidth=1.3)
        told = np.flatnonzero(np.isfinite(bound))
        value = float(bound[told[-1]]) if told.size else low
        ends.append(float(np.log(value / low) / np.log(top / low)))
    mark_limit(axes, one.limit_hz, size)
    names = [f"|Γ| = {magnitude:g}" for magnitude in one.magnitudes]
    return [*artists, *at_the_end(axes, ends, names, [colour for colour, _ in LOOKS])]


def _decades(low: float, top: float) -> list[float]:
    """Return round values of a logarithmic axis, fewer in each decade the more decades there are."""
    decades = range(int(np.floor(np.log10(low))), int(np.ceil(np.log10(top))) + 1)
    parts = (
        (1.0,)
        if top / low > 300.0
        else (1.0, 2.0, 5.0)
        if top / low > 4.0
        else (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 7.0)
    )
    return [
        float(f"{part * 10.0**ten:.3g}")
        for ten in decades
        for part in parts
        if low <= part * 10.0**ten <= top
    ]


def draw_separation(axes: Axes, one: KitEvidence) -> list[Artist]:
    """Draw |Γi − Γj| of the three pairs of standards, named at the ends of their lines."""
    size = frequency_axis(axes, one.frequency_hz)
    top = max(2.1, 1.05 * float(one.separation.max()))
    ruled(axes, "distance of two standards, |Γ1 − Γ2|", (0.0, top), float(one.frequency_hz[-1]))
    artists: list[Artist] = []
    for colour, style, apart in zip(LINES, ("solid", DASHED, DOTTED), one.separation.T, strict=True):
        artists += axes.plot(
            one.frequency_hz / size, apart, color=PALETTE[colour], linestyle=style, linewidth=1.4
        )
    mark_limit(axes, one.limit_hz, size)
    labels = [f"{first} –\n{second}" for first, second in (pair_labels(one, k) for k in range(len(PAIRS)))]
    return [
        *artists,
        *at_the_end(axes, [float(apart[-1]) / top for apart in one.separation.T], labels, LINES),
    ]


def labels_of(one: KitEvidence) -> tuple[str, ...]:
    """Return the three names as they can be drawn."""
    return tuple(
        drawable(name, f"{kind} ({place})")
        for place, (name, kind) in enumerate(zip(one.names, one.kinds, strict=True), start=1)
    )


def pair_labels(one: KitEvidence, place: int) -> tuple[str, str]:
    """Return the names of a pair as they can be drawn."""
    names = labels_of(one)
    first, second = PAIRS[place]
    return names[first], names[second]


def longest_label(one: KitEvidence) -> float:
    """Return the width in inches of the longest name as it is drawn, with the dash behind it."""
    return max(width_of(f"{label} –") for label in labels_of(one)) / 72.0 + 0.05
