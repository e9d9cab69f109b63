"""One simulated bench: standards with a known truth, and the readings of one session."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex
from stdfit.trials.analyser import Residuals, StatedDecibels, draw_residuals, imperfect_correction
from stdfit.trials.parts import Part, draw_body, draw_part, reflection, with_resonance
from stdfit.trials.scenario import KINDS, Scenario
from stdfit.trials.session import (
    Connections,
    connect,
    draw_band_edges,
    draw_connections,
    draw_drift,
    draw_glitches,
    draw_noise,
)


@dataclass(frozen=True, slots=True)
class Evidence:
    """A value measured by other means, its standard uncertainty and the truth behind it, in one unit."""

    value: float
    u: float
    true: float


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """What the dice said, for reports.

    Attributes
    ----------
    residuals : Residuals
        δD, δT, δM on the sweep.
    connections : dict of Connections
        For each standard.
    band_edges : tuple of int
        Indices of points with glitches.
    resonance : tuple or None
        Standard, frequency in hertz, Q and peak |ΔΓ|.
    """

    residuals: Residuals
    connections: dict[str, Connections]
    band_edges: tuple[int, ...]
    resonance: tuple[str, float, float, float] | None


@dataclass(frozen=True, slots=True, eq=False)
class SimulatedBench:
    """Readings with the truth beside them.

    Attributes
    ----------
    frequency_hz : array of shape (n,)
        The sweep, in hertz.
    kinds : dict of str
        Standard's name -> "open", "short" or "load".
    parts : dict of Part
        The physical standards.
    truth : dict of complex array of shape (n,)
        True Γ on the sweep, at a usual connection.
    readings : dict of complex array of shape (K, n)
        What the analyser shows.
    given : dict of dict of Evidence
        Standard's name -> key of a bench file's `given` table -> evidence in that key's unit.
    same_offset_as : dict of str
        Standard's name -> the standard whose line it shares.
    residual : StatedDecibels
        What the user is told of the analyser.
    scenario : Scenario
        What was asked for.
    drawn : Drawn
        What the dice said.
    """

    frequency_hz: FloatArray
    kinds: dict[str, str]
    parts: dict[str, Part]
    truth: dict[str, ComplexArray]
    readings: dict[str, ComplexArray]
    given: dict[str, dict[str, Evidence]]
    same_offset_as: dict[str, str]
    residual: StatedDecibels
    scenario: Scenario
    drawn: Drawn

    def truth_at(self, name: str, frequency_hz: npt.ArrayLike) -> ComplexArray:
        """Return the true Γ of a standard at any frequencies, in hertz."""
        return reflection(self.parts[name], frequency_hz)


def draw_bench(scenario: Scenario, rng: np.random.Generator) -> SimulatedBench:
    """Draw standards, a session and its readings.

    Parameters
    ----------
    scenario : Scenario
        What is decided beforehand.
    rng : numpy Generator
        Source of all chance: the same state gives the same bench.

    Returns
    -------
    SimulatedBench
    """
    frequency = scenario.frequency_hz
    parts, resonance = draw_standards(scenario, rng)
    truth = {name: frozen_complex(reflection(part, frequency)) for name, part in parts.items()}
    given = draw_evidence(scenario, parts, rng)
    residuals = draw_residuals(
        scenario.residual,
        frequency,
        rng,
        kind=scenario.residual_kind,
        correlation=scenario.correlation,
        scale=scenario.residual_scale,
    )
    drift = draw_drift(scenario, rng)
    edges = draw_band_edges(scenario, rng)
    connections = {name: draw_connections(scenario, name, rng) for name in KINDS}
    readings = {}
    for name in KINDS:
        seen = connect(truth[name], frequency, connections[name], scenario.reference_ohm)
        shown = imperfect_correction(seen * drift[name], residuals)
        shown = shown + draw_noise(shown, scenario, rng) + draw_glitches(shown, edges, rng)
        readings[name] = frozen_complex(shown)
    shared = {"open": "short", "load": "short"} if scenario.body == "shared" else {}
    return SimulatedBench(
        frequency_hz=frequency,
        kinds={kind: kind for kind in KINDS},
        parts=parts,
        truth=truth,
        readings=readings,
        given=given,
        same_offset_as=shared,
        residual=scenario.residual,
        scenario=scenario,
        drawn=Drawn(residuals, connections, edges, resonance),
    )


def draw_standards(
    scenario: Scenario, rng: np.random.Generator
) -> tuple[dict[str, Part], tuple[str, float, float, float] | None]:
    """Draw the three standards, and the resonance of one of them if it is asked for."""
    body = draw_body(scenario, rng) if scenario.body == "shared" else None
    parts = {kind: draw_part(scenario, kind, rng, body=body) for kind in KINDS}
    if scenario.resonance_hz is None:
        return parts, None
    name = scenario.resonance_standard or KINDS[int(rng.integers(3))]
    quality, peak = rng.uniform(20, 80), rng.uniform(0.05, 0.3)
    quality = quality if scenario.resonance_quality is None else scenario.resonance_quality
    peak = peak if scenario.resonance_peak is None else scenario.resonance_peak
    parts[name] = with_resonance(parts[name], scenario.resonance_hz, quality, peak)
    return parts, (name, scenario.resonance_hz, quality, peak)


def read_out(true: float, u: float, rng: np.random.Generator) -> Evidence:
    """Draw a value around the truth, rounded as a display would, to a hundredth of u or finer."""
    digits = 2 - int(np.floor(np.log10(u))) if u > 0 else 12
    return Evidence(round(float(true + u * rng.standard_normal()), digits), u, true)


def draw_evidence(
    scenario: Scenario, parts: dict[str, Part], rng: np.random.Generator
) -> dict[str, dict[str, Evidence]]:
    """Draw a multimeter's and a ruler's readings around the truth.

    A shared line is measured once, at the standard that owns it.
    """
    given: dict[str, dict[str, Evidence]] = {name: {} for name in KINDS}
    if scenario.given_resistance_u_ohm is not None:
        gamma = reflection(parts["load"], [0.0])[0].real
        true = float(scenario.reference_ohm * (1 + gamma) / (1 - gamma))
        u = scenario.given_resistance_u_ohm
        given["load"]["resistance_ohm"] = read_out(true, u, rng)
    if scenario.given_delay_u_ps is not None:
        for name in ("short",) if scenario.body == "shared" else KINDS:
            true = parts[name].delay_s * 1e12
            u = scenario.given_delay_u_ps
            given[name]["offset_delay_ps"] = read_out(true, u, rng)
    return {name: table for name, table in given.items() if table}
