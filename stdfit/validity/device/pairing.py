"""Which standards of two kits are to be compared, and whether the kits can be compared at all."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.errors import RequestError
from stdfit.circuits.connectors import family_of
from stdfit.circuits.standard import PARAMETERS
from stdfit.validity.kit import Definition, Fitted, Kit
from stdfit.validity.limit import Limit

INDEPENDENT = ("connections", "noise")
"""Kinds of sources that two sets of readings never share."""


@dataclass(frozen=True, slots=True)
class Pair:
    """A standard and its counterpart in another kit, both of one kind.

    Attributes
    ----------
    one, two : Definition
    by : str
        What they were matched by, "name" or "kind".
    """

    one: Definition
    two: Definition
    by: str

    @property
    def label(self) -> str:
        """The name, or both where they differ."""
        return self.one.name if self.by == "name" else f"{self.one.name} / {self.two.name}"

    @property
    def low_hz(self) -> float:
        """Where the common band begins."""
        return max(self.one.read_low_hz, self.two.read_low_hz)

    @property
    def top_hz(self) -> float:
        """Where the common band ends."""
        return min(self.one.read_top_hz, self.two.read_top_hz)


@dataclass(frozen=True, slots=True)
class Pairing:
    """Counterparts in two kits, and what has none.

    Attributes
    ----------
    pairs : tuple of Pair
    apart : tuple of Pair
        Counterparts without a common band.
    alone_one, alone_two : tuple of str
        Standards of either kit that have no counterpart.
    """

    pairs: tuple[Pair, ...]
    apart: tuple[Pair, ...]
    alone_one: tuple[str, ...]
    alone_two: tuple[str, ...]


def pair_up(one: Kit, two: Kit) -> Pairing:
    """Return the counterparts: of the same name and kind, else the only ones of a kind that are left.

    Raises
    ------
    RequestError
        The kits have different reference impedances or connector families, no counterparts, or no common band.
    """
    _comparable(one, two)
    pairs = [
        Pair(own, other, "name")
        for own in one.definitions
        for other in two.definitions
        if (own.name, own.kind) == (other.name, other.kind)
    ]
    rest_one = _rest(one, [pair.one for pair in pairs])
    rest_two = _rest(two, [pair.two for pair in pairs])
    for kind in PARAMETERS:
        own, other = ([left for left in rest if left.kind == kind] for rest in (rest_one, rest_two))
        if len(own) == len(other) == 1:
            pairs.append(Pair(own[0], other[0], "kind"))
    if not pairs:
        raise RequestError(
            "no standard of one kit has a counterpart in the other",
            "counterparts have the same name and kind, or are the only ones of their kind",
        )
    pairs.sort(key=lambda pair: one.definitions.index(pair.one))
    common = tuple(pair for pair in pairs if pair.low_hz < pair.top_hz)
    if not common:
        raise RequestError(
            f"the readings of the two kits have no band in common: {_band(pairs[0].one)} and {_band(pairs[0].two)}",
            "compare kits that were read over the same frequencies",
        )
    return Pairing(
        common,
        tuple(pair for pair in pairs if pair not in common),
        tuple(left.name for left in _rest(one, [pair.one for pair in pairs])),
        tuple(left.name for left in _rest(two, [pair.two for pair in pairs])),
    )


def shared(one: Kit, two: Kit) -> tuple[str, ...]:
    """Say which errors the kits may have in common: these cancel in a difference, and the bounds are wide for it."""
    same = {file.sha256 for file in one.files} & {file.sha256 for file in two.files}
    if same:
        count = f"{len(same)} source files are" if len(same) > 1 else "a source file is"
        return (
            f"{count} in both kits: errors in common cancel in the difference, and the comparison is wide",
        )
    kinds = [
        {share.name.partition(" (")[0]: None for share in kit.shares if np.any(share.covariances)}
        for kit in (one, two)
    ]
    common = [kind for kind in kinds[0] if kind in kinds[1] and kind not in INDEPENDENT]
    if not common:
        return ()
    return (
        f"both kits carry {', '.join(common)}: as far as these are the same errors (one correction of the analyser, "
        "one ruler), they cancel in the difference, and the comparison is wide",
    )


def ideal_like(kit: Kit) -> Kit:
    """Return the kit of ideal standards that stands beside a kit: +1, −1 and 0, same names and bands, no bound."""
    return Kit(
        name="ideal standards",
        connector="",
        reference_ohm=kit.reference_ohm,
        within=kit.within,
        top_hz=math.inf,
        created=kit.created,
        version=kit.version,
        limit=Limit(kit.within, kit.limit.limit_hz, "ideal standards"),
        definitions=tuple(_ideal(one, kit) for one in kit.definitions),
        order=(),
        shares=(),
        ladder=(),
        files=(),
        warnings=(),
    )


def _ideal(one: Definition, kit: Kit) -> Definition:
    matched = {"offset_z0_ohm": kit.reference_ohm, "resistance_ohm": kit.reference_ohm}
    values = [(known, matched.get(known.name, 0.0)) for known in PARAMETERS[one.kind]]
    return Definition(
        name=one.name,
        kind=one.kind,
        shape="ideal",
        connections=1,
        read_low_hz=one.read_low_hz,
        read_top_hz=one.read_top_hz,
        fit_low_hz=one.read_low_hz,
        fit_top_hz=one.read_top_hz,
        parameters=tuple(
            Fitted(known.name, known.unit, value, 0.0, value, value, "held", "") for known, value in values
        ),
        combinations=(),
        misfit_hz=np.array([one.read_low_hz, one.read_top_hz]),
        misfit=np.zeros(2),
        limit=Limit(kit.within, one.read_top_hz, "ideal standards"),
        notes=(),
    )


def _comparable(one: Kit, two: Kit) -> None:
    if not math.isclose(one.reference_ohm, two.reference_ohm, rel_tol=1e-9):
        raise RequestError(
            f"the kits have different reference impedances, {one.reference_ohm:g} and {two.reference_ohm:g} Ω",
            "compare kits that were fitted with the same one",
        )
    families = family_of(one.connector).name, family_of(two.connector).name
    if all(families) and families[0] != families[1]:
        raise RequestError(
            f"the kits have different connectors, {families[0]} and {families[1]}",
            "compare kits of one connector family",
        )


def _rest(kit: Kit, taken: Sequence[Definition]) -> list[Definition]:
    return [one for one in kit.definitions if one not in taken]


def _band(one: Definition) -> str:
    return f"{one.read_low_hz:.4g} to {one.read_top_hz:.4g} Hz"
