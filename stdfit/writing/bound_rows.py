"""What makes up a bound, row by row, so that the rows add up to it."""

from collections.abc import Sequence

from stdfit.writing.numbers import adding_up

SMALL = 0.005
"""Sources with a smaller part of the bound share a line."""


def bound_rows(sources: Sequence[tuple[str, float]], misfit: float) -> list[list[str]]:
    """Return name, size and percentage of each source of a bound, largest first, then of the misfit and of the bound.

    Parameters
    ----------
    sources : sequence of (name, size)
        What each takes of the 95 % radius; they add up to it.
    misfit : float
    """
    bound = sum(size for _, size in sources) + misfit
    ordered = sorted(sources, key=lambda one: -one[1])
    told = [one for one in ordered if one[1] >= SMALL * bound]
    rest = [one for one in ordered if one[1] < SMALL * bound]
    if rest:
        name = f"{len(rest)} smaller sources" if len(rest) > 1 else rest[0][0]
        told.append((name, sum(size for _, size in rest)))
    if misfit > 0.0:
        told.append(("misfit", misfit))
    sizes = adding_up([size for _, size in told], 4)
    rows = [
        [name, shown, _percent(size, bound)]
        for (name, size), shown in zip(told, sizes, strict=True)
        if float(shown) > 0.0
    ]
    return [*rows, ["bound", f"{bound:.4f}", _percent(bound, bound)]]


def _percent(size: float, bound: float) -> str:
    part = size / bound if bound > 0.0 else 0.0
    return f"{100.0 * part:.0f} %" if part >= SMALL or part <= 0.0 else "< 0.5 %"
