"""Known standards among others: their uncertainty as sources of error of their own readings, and what must be said."""

from collections.abc import Mapping, Sequence

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.pipeline.raw.references import Reference
from stdfit.pipeline.raw.sources import kit_sources
from stdfit.uncertainty.sources import Source
from stdfit.validity.ancestry import distinct, related


def known_sources(known: Mapping[int, Reference], frequency_hz: FloatArray, count: int) -> list[Source]:
    """Return the uncertainty of known standards, correlated as their kits say, and their misfit.

    A known standard whose definition is wrong by ε is to the fit a reading that is wrong by ε.

    Parameters
    ----------
    known : mapping of int to Reference
        By place among the standards.
    frequency_hz : array of shape (n,)
    count : int
        Of all standards.

    Raises
    ------
    RequestError
        A kit has more correlation lengths than this version.
    """
    shown = np.zeros((count, frequency_hz.size, len(known)), dtype=complex)
    for column, place in enumerate(known):
        shown[place, :, column] = 1.0
    return kit_sources(list(known.values()), list(shown), frequency_hz)


def known_cautions(known: Sequence[Reference]) -> list[str]:
    """Say what the kits of known standards warn of, and when they may have errors in common."""
    origins = distinct([one.origin for one in known])
    cautions = [f"reference {one.kit.name}: {warning}" for one in origins for warning in one.kit.warnings]
    for group in related(origins):
        if len(group) > 1:
            cautions.append(
                f"the kits {', '.join(one.kit.name for one in group)} have an ancestor or readings in common, and how "
                "their errors go together is not known: they are counted so that any way is covered"
            )
    return cautions
