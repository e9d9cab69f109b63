"""What can be followed through several kits, with the errors that these have in common."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.validity.change.common_errors import root_of
from stdfit.validity.change.followed import Followed, followed
from stdfit.validity.change.history_kits import Dated, axis_of
from stdfit.validity.change.trend import Series, series_of
from stdfit.validity.kit import Definition


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """One quantity of one standard, kit by kit, oldest first.

    Attributes
    ----------
    definition : Definition
        Of the newest kit.
    per : str
        `MONTH` or `MATING`.
    kits, definitions, values : tuples of n
    series : Series
    common : tuple of str
        Sources of error that all kits share.
    """

    definition: Definition
    per: str
    kits: tuple[Dated, ...]
    definitions: tuple[Definition, ...]
    values: tuple[Followed, ...]
    series: Series
    common: tuple[str, ...]


def lines_of(kits: Sequence[Dated], definition: Definition, same_calibration: bool) -> list[Line]:
    """Return what can be followed of one standard of the newest kit, oldest kit first."""
    rows = []
    for dated in kits:
        for own in dated.kit.definitions:
            if (own.name, own.kind) == (definition.name, definition.kind):
                rows.append((dated, own, {one.key: one for one in followed(dated.kit, own)}))
    if not rows or rows[-1][1] is not definition:
        return []
    lines = []
    for key in rows[-1][2]:
        kept = [(dated, own, values[key]) for dated, own, values in rows if key in values]
        per, x = axis_of([(dated, own) for dated, own, _ in kept])
        if len(set(x)) > 1:
            lines.append(_line(kept, x, per, same_calibration))
    return lines


def _line(
    rows: Sequence[tuple[Dated, Definition, Followed]], x: Sequence[float], per: str, same_calibration: bool
) -> Line:
    """Gather the errors of one quantity, and which of them the kits share."""
    newest = rows[-1][1]
    names = list(dict.fromkeys(name for _, _, value in rows for name in value.sources))
    sizes, freedoms = np.zeros((len(names), len(rows))), np.full((len(names), len(rows)), np.inf)
    groups: list[list[object]] = []
    for s, name in enumerate(names):
        keys: list[object] = []
        for k, (dated, own, value) in enumerate(rows):
            if name in value.sources:
                place = value.sources.index(name)
                sizes[s, k], freedoms[s, k] = value.sizes[place], value.freedoms[place]
            root = root_of(dated.kit, own, name, same_calibration=same_calibration)
            keys.append(k if root is None else (root, acts(own)))
        groups.append(keys)
    common = tuple(
        name
        for name, keys, own in zip(names, groups, sizes, strict=True)
        if len(set(keys)) == 1 and own.any()
    )
    values = tuple(value for _, _, value in rows)
    series = series_of(
        x, [value.value for value in values], sizes, groups, freedoms, [row[1].connections for row in rows]
    )
    kits, definitions = tuple(row[0] for row in rows), tuple(row[1] for row in rows)
    return Line(newest, per, kits, definitions, values, series, common)


def acts(definition: Definition) -> tuple[str, str]:
    """Return what decides how an error acts on a value: the order, and the fit range to two digits."""
    return definition.shape, f"{definition.fit_low_hz:.2g} to {definition.fit_top_hz:.2g} Hz"
