"""The demonstration: a simulated bench, characterised, and the fit beside the truth."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.trials.bench import SimulatedBench, draw_bench
from stdfit.trials.families import demo_scenario
from stdfit.trials.files import write_bench
from stdfit.validity.kit import Kit, curve

SEED = 20
NAME = "Boathouse loft SMA set (simulated, invented data)"
LOW_POINTS = 12
"""Points at the low end from which the true equivalent delay is taken."""


@dataclass(frozen=True, slots=True)
class Row:
    """One line of fitted against true.

    Attributes
    ----------
    standard, what, unit : str
    fitted, true, bound : float
    """

    standard: str
    what: str
    unit: str
    fitted: float
    true: float
    bound: float

    @property
    def inside(self) -> bool:
        """Whether the truth lies within the bound."""
        return abs(self.fitted - self.true) <= self.bound


def write_demo(folder: Path, seed: int = SEED) -> tuple[SimulatedBench, Path]:
    """Draw the demonstration's bench and write its readings; return it and the bench file."""
    simulated = draw_bench(demo_scenario(), np.random.default_rng(seed))
    return simulated, write_bench(simulated, folder, NAME)


def compare(kit: Kit, simulated: SimulatedBench) -> list[Row]:
    """Return what was fitted beside the truth: the sums that readings fix, and |Γ error| up the band."""
    rows = []
    for definition in kit.definitions:
        low = simulated.frequency_hz[:LOW_POINTS]
        true = simulated.truth_at(definition.name, low)
        for one in definition.combinations:
            if definition.kind == "load":
                continue
            phase = np.unwrap(np.angle(true if definition.kind == "open" else -true))
            delay = float(-1e12 * (phase @ low) / (low @ low) / (4.0 * np.pi))
            rows.append(Row(definition.name, one.label, one.unit, one.value, delay, one.high - one.value))
        if definition.kind == "load":
            resistance = next(p for p in definition.parameters if p.name == "resistance_ohm")
            gamma = complex(simulated.truth_at(definition.name, [0.0])[0])
            ohm = kit.reference_ohm * ((1 + gamma) / (1 - gamma)).real
            rows.append(
                Row(
                    definition.name,
                    "resistance",
                    "Ω",
                    resistance.value,
                    ohm,
                    resistance.high - resistance.value,
                )
            )
    return rows


def compare_curves(
    kit: Kit, simulated: SimulatedBench, at_hz: Sequence[float]
) -> list[tuple[str, float, float, float]]:
    """Return (standard, frequency, |fitted − true|, bound) over the fit range."""
    rows = []
    for definition in kit.definitions:
        grid = np.array([f for f in at_hz if f <= definition.fit_top_hz])
        gamma, bound = curve(kit, definition, grid)
        error = np.abs(gamma - simulated.truth_at(definition.name, grid))
        rows += [
            (definition.name, float(f), float(e), float(b))
            for f, e, b in zip(grid, error, bound, strict=True)
        ]
    return rows
