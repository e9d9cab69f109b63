"""Named kinds of bench, each varied at random, and the bench of the demo."""

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.trials.analyser import StatedDecibels
from stdfit.trials.scenario import KINDS, Scenario

Family = Callable[[np.random.Generator], Scenario]


def sweep(start_hz: float, stop_hz: float, points: int) -> FloatArray:
    """Return an even sweep, rounded to whole hertz as an analyser would set it."""
    return frozen_float(np.round(np.linspace(start_hz, stop_hz, points)))


def economy_residual() -> StatedDecibels:
    """Residuals of an economy calibration of a low-cost analyser to 6 GHz, invented but of a common size."""
    return StatedDecibels(
        frequency_hz=frozen_float([50e6, 3e9, 6e9]),
        directivity_db=frozen_float([46, 44, 40]),
        source_match_db=frozen_float([46, 39, 34]),
        reflection_tracking_db=frozen_float([0.01, 0.09, 0.18]),
    )


def draw_residual_table(top_hz: float, rng: np.random.Generator) -> StatedDecibels:
    """Draw stated residuals that vary about the economy ones, stretched over the sweep."""
    better = rng.uniform(-3, 5)
    return StatedDecibels(
        frequency_hz=frozen_float(np.array([50e6 / 6e9, 0.5, 1.0]) * top_hz),
        directivity_db=frozen_float(np.array([46, 44, 40]) + better),
        source_match_db=frozen_float(np.array([46, 39, 34]) + better),
        reflection_tracking_db=frozen_float(np.array([0.02, 0.09, 0.18]) * 10 ** (-better / 20)),
    )


def draw_plain(rng: np.random.Generator, *, top_hz: float = 6e9, points: int = 0, **fixed: Any) -> Scenario:
    """Draw an ordinary bench; `fixed` overrides what would be drawn.

    Half of the benches have a DC reading of the load, a third a ruler's reading of the offsets, a quarter one
    body for all standards.
    """
    start_hz = float(rng.choice([1e6, 10e6, 50e6]))
    count = points or int(rng.choice([201, 301, 401]))
    ohm_u = float(rng.choice([0.01, 0.02, 0.05]))
    ps_u = float(rng.choice([0.3, 0.5, 1.0]))
    drawn: dict[str, Any] = {
        "frequency_hz": sweep(start_hz, top_hz, count),
        "residual": draw_residual_table(top_hz, rng),
        "connections": int(rng.integers(3, 7)),
        "scatter_ps": rng.uniform(0.05, 0.25),
        "scatter_ohm": rng.uniform(0.005, 0.025),
        "scatter_ff": rng.uniform(0.3, 1.5),
        "noise": 10 ** rng.uniform(-4.3, -3.3),
        "trace_noise": 10 ** rng.uniform(-4.3, -3.5),
        "open_kind": "radiating" if rng.random() < 0.5 else "shielded",
        "body": "shared" if rng.random() < 0.25 else "own",
        "reading_order": "blocks" if rng.random() < 0.5 else "rounds",
        "given_resistance_u_ohm": ohm_u if rng.random() < 0.5 else None,
        "given_delay_u_ps": ps_u if rng.random() < 0.33 else None,
    }
    return Scenario(**{**drawn, **fixed})


def draw_impedance_steps(rng: np.random.Generator) -> Scenario:
    """Draw three sections a standard, with steps of an ohm or two."""
    return draw_plain(rng, sections=3, z0_scatter_ohm=rng.uniform(1.0, 2.0))


def draw_skin_effect(rng: np.random.Generator) -> Scenario:
    """Draw poor plating: two or three times the loss of good brass."""
    return draw_plain(rng, loss_gohm_per_s=rng.uniform(2.5, 5.0))


def draw_resonance(rng: np.random.Generator) -> Scenario:
    """Draw one standard with a parasitic resonance between 3 and 7 GHz, inside the sweep."""
    top_hz = float(rng.choice([6e9, 8e9]))
    return draw_plain(rng, top_hz=top_hz, resonance_hz=rng.uniform(3e9, min(7e9, 0.97 * top_hz)))


def draw_glitches(rng: np.random.Generator) -> Scenario:
    """Draw one to six band edges with single points off."""
    return draw_plain(rng, glitches=int(rng.integers(1, 7)))


def draw_drift(rng: np.random.Generator) -> Scenario:
    """Draw a cable that walks by a fraction of a degree up to a degree."""
    return draw_plain(rng, drift_deg=rng.uniform(0.2, 1.0))


def draw_bad_connection(rng: np.random.Generator) -> Scenario:
    """Draw five connections, one of one standard bad."""
    return draw_plain(rng, connections=5, bad_connection=KINDS[int(rng.integers(3))])


def draw_high_top(rng: np.random.Generator) -> Scenario:
    """Draw a better connector to 20 GHz, with smaller parasitics and scatter, and a shielded open."""
    return draw_plain(
        rng,
        top_hz=20e9,
        points=401,
        connector="3.5 mm",
        open_kind="shielded",
        scatter_ps=rng.uniform(0.02, 0.08),
        scatter_ohm=rng.uniform(0.003, 0.01),
        scatter_ff=rng.uniform(0.1, 0.4),
    )


def families() -> dict[str, Family]:
    """Return the families of benches by name; each takes a Generator and gives a Scenario."""
    return {
        "plain": draw_plain,
        "impedance steps": draw_impedance_steps,
        "radiating open": partial(draw_plain, open_kind="radiating", radiation_drop=(0.01, 0.02)),
        "skin effect": draw_skin_effect,
        "chip load": partial(draw_plain, load_reflection=(0.04, 0.08)),
        "good load": partial(draw_plain, load_reflection=(0.005, 0.02)),
        "good load, multimeter": partial(
            draw_plain, load_reflection=(0.005, 0.02), given_resistance_u_ohm=0.02, body="own"
        ),
        "long offsets": partial(draw_plain, offset_delay_ps=(80.0, 300.0)),
        "resonance": draw_resonance,
        "glitches": draw_glitches,
        "drift": draw_drift,
        "bad connection": draw_bad_connection,
        "long residuals": partial(draw_plain, correlation="long"),
        "short residuals": partial(draw_plain, correlation="short"),
        "one connection": partial(draw_plain, connections=1),
        "two connections": partial(draw_plain, connections=2),
        "three connections": partial(draw_plain, connections=3),
        "sixteen connections": partial(draw_plain, connections=16),
        "few points": partial(draw_plain, points=101),
        "many points": partial(draw_plain, points=1601),
        "low top": partial(draw_plain, top_hz=1e9),
        "high top": draw_high_top,
        "seventy-five ohm": partial(draw_plain, connector="N 75", reference_ohm=75.0, top_hz=4e9),
        "with evidence": partial(draw_plain, given_resistance_u_ohm=0.02, given_delay_u_ps=0.5),
        "without evidence": partial(draw_plain, given_resistance_u_ohm=None, given_delay_u_ps=None),
        "shared body": partial(draw_plain, body="shared"),
    }


def demo_scenario() -> Scenario:
    """Return the demo's bench: SMA parts of a home workshop, an economy-calibrated analyser, all invented."""
    return Scenario(
        frequency_hz=sweep(50e6, 6e9, 239),
        residual=economy_residual(),
        connections={"open": 4, "short": 4, "load": 5},
        noise=2e-4,
        trace_noise=1e-4,
        open_kind="radiating",
        offset_delay_ps=(12.0, 30.0),
        sections=2,
        given_resistance_u_ohm=0.02,
    )
