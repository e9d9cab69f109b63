"""The real fit on a simulated bench, scored against its known truth."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.records import Sweep
from stdfit.data.bench_records import Bench, Given, StandardEntry, StatedResidual
from stdfit.pipeline import characterise
from stdfit.trials.bench import SimulatedBench
from stdfit.validity.kit import Kit, curve

POINTS = 60
"""Points of each curve that are scored."""


@dataclass(frozen=True, slots=True, eq=False)
class Score:
    """How one standard of one bench fared.

    Attributes
    ----------
    standard : str
    error, bound : arrays of shape (m,)
        |fitted − true| and its bound, over the fit range.
    limit_hz : float
    limit_true : bool
        Whether the error keeps within the tolerance all the way up to the limit.
    """

    standard: str
    error: FloatArray
    bound: FloatArray
    limit_hz: float
    limit_true: bool

    @property
    def inside(self) -> float:
        """Part of the points at which the bound covers the truth."""
        return float(np.mean(self.error <= self.bound))


def bench_of(simulated: SimulatedBench, within: float = 0.02) -> tuple[Bench, dict[str, list[Sweep]]]:
    """Return the bench and the sweeps that a user with these readings would have."""
    f = simulated.frequency_hz
    told = simulated.residual
    residual = StatedResidual(
        told.frequency_hz,
        10 ** (-told.directivity_db / 20),
        10 ** (-told.source_match_db / 20),
        10 ** (told.reflection_tracking_db / 20) - 1,
    )
    entries = tuple(
        StandardEntry(
            name,
            kind,
            (),
            {
                key: Given(evidence.value, evidence.u)
                for key, evidence in simulated.given.get(name, {}).items()
            },
            simulated.same_offset_as.get(name),
        )
        for name, kind in simulated.kinds.items()
    )
    reference = simulated.scenario.reference_ohm
    sweeps = {
        name: [Sweep(f, reading, reference, f"{name}-{k + 1}") for k, reading in enumerate(readings)]
        for name, readings in simulated.readings.items()
    }
    bench = Bench(
        path=Path("bench.toml"),
        name="Simulated bench",
        connector=simulated.scenario.connector,
        reference_ohm=reference,
        within=within,
        highest_hz=None,
        state="corrected",
        residual=residual,
        standards=entries,
    )
    return bench, sweeps


def score(simulated: SimulatedBench, within: float = 0.02) -> tuple[Kit, list[Score]]:
    """Characterise a simulated bench and compare each standard with its truth."""
    bench, sweeps = bench_of(simulated, within)
    kit = characterise(bench, sweeps, created="2000-01-01")
    scores = []
    for definition in kit.definitions:
        grid = np.linspace(definition.fit_low_hz, definition.fit_top_hz, POINTS)
        gamma, bound = curve(kit, definition, grid)
        error = np.abs(gamma - simulated.truth_at(definition.name, grid))
        limit_hz = definition.limit.limit_hz
        true = True
        if limit_hz > 0.0:
            below = np.linspace(definition.read_low_hz, max(limit_hz, definition.read_low_hz), 200)
            fitted, _ = curve(kit, definition, below)
            true = bool(np.all(np.abs(fitted - simulated.truth_at(definition.name, below)) <= within))
        scores.append(Score(definition.name, error, bound, limit_hz, true))
    return kit, scores
