"""A small joint problem: an open and a short behind one line, and a load, with sources of every kind."""

from dataclasses import dataclass

import numpy as np
import pytest

from stdfit.circuits.standard import reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem
from stdfit.fitting.roles import Wish, build_problem, places_of
from stdfit.uncertainty.budget import shares_of
from stdfit.uncertainty.push import push, weighted
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, WhiteSource

COUNT = 41
FREQUENCY = np.linspace(50e6, 6e9, COUNT)
SPAN = (50e6, 6e9)
TRUTH = {
    "open": [25.0, 1.0, 50.0, 45.0, 0.0, -30.0, 0.0],
    "short": [25.0, 1.0, 50.0, 3.0, 0.0, 0.0, 0.0],
    "load": [0.0, 0.0, 50.0, 50.3, 20.0, 0.0],
}


@dataclass(frozen=True)
class Bench:
    """The problem, its sources, and its design at the truth."""

    problem: Problem
    sources: list
    scaled: np.ndarray

    def pushed(self, sources=None, cuts=(COUNT,), residual=None):
        """Return each standard's sums, over the readings up to each cut."""
        values = self.problem.expand(self.scaled)
        rest = residual if residual is not None else [np.zeros(COUNT, dtype=complex)] * 3
        return [
            push(
                self.problem.model(i, values)[1],
                weighted(self.problem.model(i, values)[1], self.problem.weights[i]),
                rest[i],
                FREQUENCY,
                SPAN,
                self.sources if sources is None else sources,
                i,
                cuts,
            )
            for i in range(3)
        ]

    def shares(self, sources=None, cuts=(COUNT,)):
        """Return M⁻¹ and the shares."""
        used = self.sources if sources is None else sources
        _, precision = self.problem.evidence()
        return shares_of(self.pushed(used, cuts), used, precision, places_of(self.problem))


@pytest.fixture(scope="session")
def bench():
    rng = np.random.default_rng(41)
    observed = [
        Observed.from_readings(kind, kind, FREQUENCY, [reflection(kind, values, FREQUENCY, 50.0)[0]])
        for kind, values in TRUTH.items()
    ]
    weights = [1e5 * (1.0 + 0.5 * np.sin(np.arange(COUNT) + i)) for i in range(3)]
    wishes = [Wish({"offset_delay_ps": (25.0, 0.5)}), Wish({}, "open"), Wish({})]
    starts = {"load.resistance_ohm": 50.3, "load.inductance_ph": 20.0}
    problem = build_problem(observed, wishes, ["even", "constant", "R+L"], weights, starts, 50.0)
    profiles = [
        tuple(
            0.01 * (rng.standard_normal() + 1j * rng.standard_normal()) * one.gamma**power for one in observed
        )
        for power in (0, 2)
    ]
    vectors = tuple(0.02 * (1j * FREQUENCY / 6e9 + rng.standard_normal()) * one.gamma for one in observed)
    sources = [
        SmoothSource("common", profiles[0], common=True),
        SmoothSource("of each", profiles[1], common=False, freedom=6.0),
        LumpedSource("lumped", vectors, 5.0),
        WhiteSource("white", (1e-6, 2e-6, 3e-6)),
    ]
    return Bench(problem, sources, problem.evidence()[0])
