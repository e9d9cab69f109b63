"""A whole connection that does not belong with the others: found by what all the others say."""

from collections.abc import Sequence

import numpy as np

from stdfit.fitting.observed import Observed
from stdfit.uncertainty.connections import Repeatability, pooled_repeatability, responses

LEVEL = 0.002
"""Probability of leaving out a connection of a bench on which nothing is wrong."""

FEWEST = 3
"""Connections that a standard must have before one of them can be told to be the odd one."""


def outlying_connection(
    observed: Sequence[Observed], reference_ohm: float, assumed_sd: Sequence[float]
) -> tuple[int, int] | None:
    """Return (standard, connection) of the connection that least belongs with the others, or None.

    The power of a connection's distance from the mean of the standard's other connections is compared with
    what the scatter of all readings without it lets expect: an externally studentised deviation (R. D. Cook,
    S. Weisberg, *Residuals and Influence in Regression*, 1982, sec. 2.2; from memory), judged by Student's t
    with the degrees of freedom of the part that contributes most, at a level shared among all connections (C. E.
    Bonferroni).

    Parameters
    ----------
    observed : sequence of Observed
    reference_ohm : float
    assumed_sd : sequence of three floats
        Scatter of the lumped parts that is assumed where the readings show none.
    """
    tests = sum(one.connections for one in observed if one.connections >= FEWEST)
    worst, place = 1.0, None
    for s, one in enumerate(observed):
        if one.connections < FEWEST:
            continue
        # Only the connection furthest from the others can be the odd one.
        distances = np.mean(np.abs(one.deviations) ** 2, axis=1)
        k = int(np.argmax(distances))
        rest = [*observed[:s], one.without(k), *observed[s + 1 :]]
        scatter = pooled_repeatability(rest, reference_ohm, assumed_sd)
        expected, freedom = _expected_power(rest[s], scatter, s, reference_ohm)
        others = one.connections - 1
        # Its distance from the mean of the others is K/(K−1) times that from the mean of all.
        power = float(distances[k]) * (one.connections / others) ** 2
        ratio = power / (expected * (1.0 + 1.0 / others)) / _bar(freedom, LEVEL / tests) ** 2
        if ratio > worst:
            worst, place = ratio, (s, k)
    return place


def _expected_power(
    one: Observed, scatter: Repeatability, index: int, reference_ohm: float
) -> tuple[float, float]:
    """Return the mean power of one connection's scatter, and the degrees of freedom of its largest part."""
    each = np.mean(np.abs(responses(one.gamma, one.frequency_hz, reference_ohm)) ** 2, axis=0) * scatter.sd**2
    smooth = 2.0 * float(np.mean(scatter.leftover[index] ** 2))
    return float(each.sum()) + smooth + 2.0 * scatter.noise**2, float(scatter.freedom[int(np.argmax(each))])


def _bar(freedom: float, level: float) -> float:
    """Return the two-sided quantile of Student's t."""
    from scipy.special import stdtrit

    return float(stdtrit(max(freedom, 1.0), 1.0 - 0.5 * level))


def without_outlying(
    observed: Sequence[Observed], reference_ohm: float, assumed_sd: Sequence[float]
) -> tuple[list[Observed], list[tuple[int, int, float]]]:
    """Leave out connections until none stands out; return what is left and what was left out.

    Returns
    -------
    observed : list of Observed
    left_out : list of (standard, connection, distance)
        Connections counted from 0 in the order of the original readings, with the root mean square distance
        |ΔΓ| from the mean of the others.
    """
    kept = list(observed)
    numbers = [list(range(one.connections)) for one in observed]
    left_out = []
    while (found := outlying_connection(kept, reference_ohm, assumed_sd)) is not None:
        s, k = found
        # As in the test: from the mean of the others, not from a mean that it is part of.
        apart = kept[s].connections / (kept[s].connections - 1)
        distance = apart * float(np.sqrt(np.mean(np.abs(kept[s].deviations[k]) ** 2)))
        left_out.append((s, numbers[s].pop(k), distance))
        kept[s] = kept[s].without(k)
    return kept, left_out
