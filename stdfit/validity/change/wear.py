"""Wear: has a standard changed since it was characterised, in what, and what is its old definition still good for."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.change.cause import Cause, Explained, explain, visible
from stdfit.validity.change.difference import same_correction
from stdfit.validity.change.pairs import changes, weak_points
from stdfit.validity.change.refusals import refuse, refuse_other_plane
from stdfit.validity.change.serving import limits_of_old_and_new, limits_unless_hidden
from stdfit.validity.change.statistic import (
    Projected,
    Rest,
    Tested,
    has_moved,
    pointwise_bound,
    project,
    share_of,
    unexplained,
)
from stdfit.validity.device.difference import Difference, ratio_of
from stdfit.validity.device.pairing import Pair, Pairing, pair_up
from stdfit.validity.kit import Kit

CHANGED, SAME, UNSURE = "changed", "not changed", "too uncertain to tell"

LEVEL = 0.05
"""Probability that the whole command calls anything changed where nothing has."""

PARTS_SHARE = 0.8
"""Part of it that the test of the connector's parts may use up; the rest is for what these do not explain."""

CLEARLY = 0.9
"""To type anew is worth it where the old definition is good to less than this part of the new one's limit."""


@dataclass(frozen=True, slots=True, eq=False)
class StandardWear:
    """How one standard fared.

    Attributes
    ----------
    pair : Pair
    by : str
        "readings" or "definitions".
    verdict : str
        `CHANGED`, `SAME` or `UNSURE`.
    chance : float
        Bound on the probability that any standard of the kit shows so much where nothing has changed.
    tested : Tested
    rest : Rest
    explained : Explained or None
        Of a standard that has changed in its connector's parts.
    visible : tuple of Cause
        Each cause alone; its uncertainty is about what could have been seen.
    difference : Difference
        |d| and its 95 % radius over frequency; the ratio is Eₙ.
    explained_size : array of shape (n,)
        |ΔΓ| that the connector's parts explain.
    unsure : float
        Largest 95 % radius of the change, up to where the old definition is good.
    unsure_at_hz : float
    judged_hz : float
        Up to where that is.
    sharper : float
        By how much larger the radius would be there if nothing were common to both; 1 where nothing is.
    old_limit_hz, new_limit_hz : float
        Up to where the old definition serves the standard as it is now, and the new one.
    other_cause : bool
        Whether something has changed that the connector's parts do not explain.
    """

    pair: Pair
    by: str
    verdict: str
    chance: float
    tested: Tested
    rest: Rest
    explained: Explained | None
    visible: tuple[Cause, ...]
    difference: Difference
    explained_size: FloatArray
    unsure: float
    unsure_at_hz: float
    judged_hz: float
    sharper: float
    old_limit_hz: float
    new_limit_hz: float
    other_cause: bool


@dataclass(frozen=True, slots=True, eq=False)
class Wear:
    """A kit as it was, and as it is.

    Attributes
    ----------
    old, new : Kit
    pairing : Pairing
    shared : str
        What correction both sets of readings share; empty for none.
    standards : tuple of StandardWear
    old_limit_hz, new_limit_hz : float
        Of the kit: up to where the old definitions serve now, and the new ones.
    notes : tuple of str
    """

    old: Kit
    new: Kit
    pairing: Pairing
    shared: str
    standards: tuple[StandardWear, ...]
    old_limit_hz: float
    new_limit_hz: float
    notes: tuple[str, ...]

    @property
    def verdict(self) -> str:
        """Of the kit: changed where a standard is, too uncertain to tell where one is and none has changed."""
        found = [one.verdict for one in self.standards]
        return next((verdict for verdict in (CHANGED, UNSURE) if verdict in found), SAME)

    @property
    def retype(self) -> bool:
        """Whether something has changed, and the old definition serves clearly less far than the new one."""
        return self.verdict == CHANGED and self.old_limit_hz < CLEARLY * self.new_limit_hz


def wear(old: Kit, new: Kit, *, same_calibration: bool = False) -> Wear:
    """Return how the standards of a kit have changed.

    Parameters
    ----------
    old, new : Kit
    same_calibration : bool
        The user's word that both sets of readings were taken with one calibration of the analyser.

    Raises
    ------
    RequestError
        The kits cannot be compared: other connector, plane or reference impedance, no common band, the same readings,
        or a calibration that the kits contradict.
    """
    refuse(old, new, same_calibration=same_calibration)
    pairing = pair_up(old, new)
    found = changes(old, new, pairing.pairs, same_calibration=same_calibration)
    projected = [project(one) for one in found]
    refuse_other_plane(projected)
    both = limits_of_old_and_new(old, new, pairing.pairs)
    kept = limits_unless_hidden(old, projected)
    standards = tuple(
        _standard(old, one, len(found), *each, beside)
        for one, each, beside in zip(projected, both, kept, strict=True)
    )
    return Wear(
        old,
        new,
        pairing,
        same_correction(old, new, same_calibration),
        standards,
        min(one.old_limit_hz for one in standards),
        min(one.new_limit_hz for one in standards),
        (*drift_like(standards), *weak_points(found)),
    )


def _standard(
    old: Kit, projected: Projected, count: int, old_limit_hz: float, new_limit_hz: float, beside_hz: float
) -> StandardWear:
    """Return the verdict on one standard; the levels are shared out among all of them."""
    change = projected.change
    tested, rest = has_moved(projected), unexplained(projected)
    chances = count * tested.chance / PARTS_SHARE, count * rest.chance / (1.0 - PARTS_SHARE)
    moved, other_cause = (one <= LEVEL for one in chances)
    f = change.frequency_hz
    # Where the old definition never served, the whole band is judged.
    top = change.pair.one.limit.limit_hz
    judged = f <= top if np.count_nonzero(f <= top) >= 2 else np.ones(f.size, dtype=bool)
    unsure = projected.unsure()
    place = int(np.argmax(np.where(judged, unsure, -1.0)))
    verdict = SAME if unsure[place] <= old.within else UNSURE
    if moved or other_cause:
        verdict = CHANGED
    alone = [share_of(projected.projector, effect) for effect in change.common]
    wide = projected.unsure([*projected.shares, *alone])
    bound = pointwise_bound(change)
    size = np.abs(change.difference)
    return StandardWear(
        pair=change.pair,
        by=change.by,
        verdict=verdict,
        chance=min(1.0, *chances),
        tested=tested,
        rest=rest,
        explained=explain(projected, tested) if moved else None,
        visible=visible(projected),
        difference=Difference(change.pair.label, f, size, bound, ratio_of(size, bound)),
        explained_size=np.abs(projected.explained),
        unsure=float(unsure[place]),
        unsure_at_hz=float(f[place]),
        judged_hz=float(f[judged][-1]),
        sharper=float(wide[place] / unsure[place]) if unsure[place] > 0.0 else 1.0,
        # Both hold; the second leaves out what the lumped parts do not explain, and so serves only without a change.
        old_limit_hz=old_limit_hz if verdict == CHANGED else max(old_limit_hz, beside_hz),
        new_limit_hz=new_limit_hz,
        other_cause=other_cause,
    )


def drift_like(standards: Sequence[StandardWear]) -> tuple[str, ...]:
    """Say that all full reflections have moved by one shift: so a cable that drifts would make them."""
    moved = [one for one in standards if one.verdict == CHANGED and one.pair.one.kind != "load"]
    shifts = [next(cause for cause in one.visible if cause.unit == "ps") for one in moved]
    if len(shifts) < 2 or any(abs(one.value) <= one.u95 for one in shifts):
        return ()
    middle = sum(one.value for one in shifts) / len(shifts)
    if any(abs(one.value - middle) > one.u95 for one in shifts):
        return ()
    names = ", ".join(one.pair.label for one in moved)
    return (
        f"{names}: all have moved by about {middle:+.2g} ps, as the drift of a cable or analyser would make them: see "
        "whether a standard that nobody uses has moved as well",
    )
