"""When readings through unknown error terms contradict what was said of a set, in words."""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.fitting.problem import Problem

LEVEL = 0.01
"""Probability of a warning where every given value is as sure as it was said to be."""

TOLD = 0.25
"""Part of the tolerance from which errors of the models are told; the bounds hold them in any case."""


def contradicted(problem: Problem, values: FloatArray, errors: FloatArray, within: float) -> tuple[str, ...]:
    """Return a sentence for given values that are pulled too far, and for standards that do not fit together.

    A value that is wrong is pulled by less than it is wrong by, and pulls others along: so all of them are judged
    together, Σ((value − given)/u)² against χ² with one degree of freedom for each.

    Parameters
    ----------
    problem : Problem
    values : array
        What the fit found, in trade units.
    errors : array
        Size of the models' errors within the fit range (`model_error`).
    within : float
        Tolerance.
    """
    said = []
    pulls = {
        f"{one.standard}, {one.parameter.label}": (value - one.value) / one.evidence_u
        for one, value in zip(problem.quantities, values, strict=True)
        if one.role == "given" and one.evidence_u is not None
    }
    if pulls and sum(pull**2 for pull in pulls.values()) > _bar(len(pulls)):
        most = sorted(pulls, key=lambda name: -abs(pulls[name]))[:3]
        told = "; ".join(f"{name} by {pulls[name]:+.1f}" for name in most)
        said.append(
            f"the given values cannot all be as sure as stated: in standard uncertainties the readings pull {told}. "
            "Check lengths (one way?), units, and which file is whose"
        )
    size = float(np.sqrt(np.mean(errors**2)))
    if size > TOLD * within:
        said.append(
            f"the standards contradict each other by about {min(size, 2.0):.2g}, more than connections and noise "
            "explain: a length (in ps, one way?) or a file may be wrong, or a standard does not follow its model. The "
            "bounds hold the last, not a wrong length"
        )
    return tuple(said)


def _bar(count: int) -> float:
    """Return the quantile of χ² that only `LEVEL` exceeds."""
    from scipy.special import gammaincinv

    return float(2.0 * gammaincinv(count / 2.0, 1.0 - LEVEL))
