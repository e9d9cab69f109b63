"""Invented benches of any size, and files of readings."""

from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.trials.bench import SimulatedBench, draw_bench
from stdfit.trials.families import demo_scenario, sweep
from stdfit.trials.files import write_bench


def simulated(points: int, connections: int, seed: int = 1) -> SimulatedBench:
    """Return the demonstration's kind of bench with so many points and connections of each standard."""
    scenario = replace(demo_scenario(), frequency_hz=sweep(50e6, 6e9, points), connections=connections)
    return draw_bench(scenario, np.random.default_rng(seed))


def bench_in(folder: Path, points: int, connections: int, seed: int = 1) -> Path:
    """Write such a bench with its readings; return the bench file."""
    return write_bench(simulated(points, connections, seed), folder)


def rows(points: int, seed: int = 1) -> np.ndarray:
    """Return frequencies, real and imaginary parts, shape (points, 3)."""
    gamma = simulated(points, 1, seed)
    return np.column_stack(
        [gamma.frequency_hz, gamma.readings["open"][0].real, gamma.readings["open"][0].imag]
    )
