"""The element behind the offset line over frequency, with its band."""

from collections.abc import Sequence

from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.validity.evidence.standard import StandardEvidence
from stdfit.writing.pictures.frame import frequency_axis, mark_limit, ruled
from stdfit.writing.pictures.palette import PALETTE

NARROWER = 0.9
"""The band with the delay known is drawn where it is less than this part of the whole one."""

WORDS = {"C": "capacitance", "L": "inductance", "Re Z": "real part of Z", "Im Z": "imaginary part of Z"}


def draw_element(panels: Sequence[Axes], one: StandardEvidence) -> tuple[list[Artist], list[str]]:
    """Draw each component of the element in a panel of its own; return the key too."""
    element = one.element
    handles: list[Artist] = []
    labels: list[str] = []
    for row, axes in enumerate(panels):
        size = frequency_axis(axes, one.frequency_hz)
        x, value, half = one.frequency_hz / size, element.values[row], element.u95[row]
        low, high = float((value - half).min()), float((value + half).max())
        room = max(0.06 * (high - low), 1e-3 * abs(high), 1e-3)
        last = row == len(panels) - 1
        ruled(
            *(axes, f"{WORDS[element.symbols[row]]} ({element.units[row]})", (low - room, high + room)),
            float(one.frequency_hz[-1]) if last else None,
        )
        own: list[Artist] = []
        names: list[str] = []
        if half.any():
            own.append(
                axes.fill_between(
                    *(x, value - half, value + half), facecolor=PALETTE["series-1"], alpha=0.20, linewidth=0.0
                )
            )
            names.append("95 % bound")
        if shows_rest(one, row) and element.u95_of_rest is not None:
            rest = element.u95_of_rest[row]
            own.append(
                axes.fill_between(
                    *(x, value - rest, value + rest), facecolor=PALETTE["series-3"], alpha=0.45, linewidth=0.0
                )
            )
            names.append("95 % bound if the delay were known")
        (line,) = axes.plot(x, value, color=PALETTE["series-1"], linewidth=1.3, zorder=2.5)
        if len(names) >= len(labels):
            handles, labels = [line, *own], ["definition", *names]
        mark_limit(axes, one.limit_hz, size, told=row == 0)
    return handles, labels


def shows_rest(one: StandardEvidence, row: int) -> bool:
    """Return whether a component would be clearly surer with the delay known."""
    rest = one.element.u95_of_rest
    return rest is not None and bool(rest[row].mean() < NARROWER * one.element.u95[row].mean())
