"""Along a chain of kits uncertainty only grows: no standard is surer than its references make it."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.pipeline.finished import with_limits
from stdfit.pipeline.prepare import Prepared
from stdfit.uncertainty.budget import radius_of_planes
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.sources import SharedSource, SmoothSource
from stdfit.validity.kit import Kit, curve

OF_KITS = "reference kit ("
"""How the names of sources begin that are the covariances of the references' kits."""

OF_MODELS = "reference misfit ("
"""How the names begin of those that are the misfits of the references."""


TOLD = 0.1
"""Where a bound is lifted by more than this part of it, a note says so."""

LIFTED = (
    "the misfit holds, besides the model's own error, what the references could be wrong by and the fit does not "
    "follow: no bound is below theirs"
)


def never_surer(kit: Kit, prepared: Prepared) -> Kit:
    """Return a kit whose bounds are nowhere below what the references' kits alone put into the corrected readings.

    A fit averages errors that its model cannot follow, and so may come out surer than the references. That takes
    the model for right where nobody could see whether it is: what a bound lacks is added to the misfit.

    Parameters
    ----------
    kit : Kit
        Of `prepared`, its standards in the same order.
    prepared : Prepared
        Of corrected readings nothing changes.
    """
    known = [
        one for one in prepared.sources if isinstance(one, SharedSource) and one.name.startswith(OF_KITS)
    ]
    wrong = [
        one for one in prepared.sources if isinstance(one, SmoothSource) and one.name.startswith(OF_MODELS)
    ]
    if not known and not wrong:
        return kit
    definitions = []
    for s, (definition, observed) in enumerate(zip(kit.definitions, prepared.observed, strict=True)):
        least = np.interp(definition.misfit_hz, observed.frequency_hz, inherited_bound(known, wrong, s))
        _, bound = curve(kit, definition, definition.misfit_hz)
        lacking = np.maximum(least - bound, 0.0)
        notes = (*definition.notes, LIFTED) if (lacking > TOLD * bound).any() else definition.notes
        definitions.append(replace(definition, misfit=definition.misfit + lacking, notes=notes))
    return with_limits(replace(kit, definitions=tuple(definitions)))


def inherited_bound(known: Sequence[SharedSource], wrong: Sequence[SmoothSource], index: int) -> FloatArray:
    """Return what the references' kits put into the readings of one standard, shape (n,).

    As for a device that is measured with a kit: the 95 % radius of the covariances, plus the root sum of squares of the
    misfits.
    """
    power: FloatArray | float = 0.0
    for one in wrong:
        power = power + np.abs(CIRCULAR * one.profiles[index]) ** 2
    if not known:
        return np.asarray(np.sqrt(power))
    planes = [
        np.stack(
            [
                np.stack(
                    [
                        (own[index].real ** 2).sum(axis=1),
                        (own[index].imag ** 2).sum(axis=1),
                        (own[index].real * own[index].imag).sum(axis=1),
                    ],
                    axis=-1,
                )
                for own in source.vectors
            ]
        )
        for source in known
    ]
    return radius_of_planes(planes, [source.freedom for source in known]) + np.sqrt(power)
