"""Up to where an old definition serves a standard as it is now: two limits, each of which holds."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.change.statistic import Projected
from stdfit.validity.device.pairing import Pair
from stdfit.validity.kit import Definition, Kit, model
from stdfit.validity.limits import limits


def limits_of_old_and_new(old: Kit, new: Kit, pairs: Sequence[Pair]) -> list[tuple[float, float]]:
    """Return up to where each old definition serves, |Γ_old − Γ_new| + bound ≤ tolerance, and each new one."""
    kept = replace(new, definitions=tuple(pair.two for pair in pairs))
    before = {pair.two.name: pair.one for pair in pairs}

    def moved(definition: Definition, frequency_hz: FloatArray) -> FloatArray:
        one = model(old, before[definition.name], frequency_hz)[0]
        return np.asarray(np.abs(one - model(new, definition, frequency_hz)[0]))

    ((_, with_old),) = limits(kept, [old.within], moved)
    ((_, with_new),) = limits(kept, [old.within])
    return [(one.limit_hz, two.limit_hz) for one, two in zip(with_old, with_new, strict=True)]


def limits_unless_hidden(old: Kit, projected: Sequence[Projected]) -> list[float]:
    """Return up to where bound_old + |change| + its 95 % radius ≤ tolerance: a change may hide within that radius.

    Below the first common frequency the change is taken as there; above the last one nothing is known of it.
    """
    by_name = {one.change.pair.one.name: one for one in projected}
    kept = replace(old, definitions=tuple(one.change.pair.one for one in projected))

    def hidden(definition: Definition, frequency_hz: FloatArray) -> FloatArray:
        one = by_name[definition.name]
        size = np.abs(one.explained) + one.unsure()
        return np.asarray(np.interp(frequency_hz, one.change.frequency_hz, size, right=np.inf))

    ((_, each),) = limits(kept, [old.within], hidden)
    return [one.limit_hz for one in each]
