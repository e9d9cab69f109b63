"""Simulated histories from readings on: each kit is fitted from a session of its own."""

from dataclasses import replace

import numpy as np

from stdfit.base.arrays import frozen_complex
from stdfit.pipeline import characterise
from stdfit.trials.analyser import draw_residuals, imperfect_correction
from stdfit.trials.bench import SimulatedBench, draw_bench
from stdfit.trials.families import demo_scenario
from stdfit.trials.score import bench_of
from stdfit.trials.session import connect, draw_connections, draw_noise
from stdfit.validity.change.history_kits import Dated


def draw_fitted_kits(
    count: int, drift_ps: float, rng: np.random.Generator, *, same_calibration: bool, step: bool = False
) -> list[Dated]:
    """Draw standards, read them in so many sessions, 20 matings apart, and fit each session.

    Parameters
    ----------
    count : int
    drift_ps : float
        By which the open's plane moves from the first session to the last; at once before the middle one for a step.
    rng : numpy Generator
    same_calibration : bool
        Whether one set of analyser residuals acts on all sessions.
    step : bool
    """
    first = draw_bench(demo_scenario(), rng)
    kits = []
    for k in range(count):
        moved = drift_ps * (float(k >= count // 2) if step else k / max(count - 1, 1))
        session = _session(first, moved, same_calibration, rng)
        bench, sweeps = bench_of(session)
        bench = replace(
            bench, standards=tuple(replace(entry, matings=20 * (k + 1)) for entry in bench.standards)
        )
        kit = characterise(bench, sweeps, created="2000-01-01")
        kits.append(Dated(f"kit-{k + 1}.toml", str(k), kit))
    return kits


def _session(
    first: SimulatedBench, moved_ps: float, same_calibration: bool, rng: np.random.Generator
) -> SimulatedBench:
    """Return the same standards, read once more."""
    f, scenario = first.frequency_hz, first.scenario
    residuals = first.drawn.residuals if same_calibration else draw_residuals(first.residual, f, rng)
    readings = {}
    for name, gamma in first.truth.items():
        turn = np.exp(-4e-12j * np.pi * f * (moved_ps if name == "open" else 0.0))
        seen = connect(gamma * turn, f, draw_connections(scenario, name, rng), scenario.reference_ohm)
        shown = imperfect_correction(seen, residuals)
        readings[name] = frozen_complex(shown + draw_noise(shown, scenario, rng))
    return replace(first, readings=readings)
