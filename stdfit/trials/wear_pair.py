"""Two sessions with the same standards, one of which may have changed between them."""

from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex
from stdfit.trials.analyser import Residuals, draw_residuals, imperfect_correction
from stdfit.trials.bench import Drawn, SimulatedBench, draw_evidence, draw_standards
from stdfit.trials.parts import reflection
from stdfit.trials.scenario import KINDS, Scenario
from stdfit.trials.session import Connections, connect, draw_connections, draw_drift, draw_noise


@dataclass(frozen=True, slots=True)
class Worn:
    """What has changed: lumped parts at the plane of one standard.

    Attributes
    ----------
    standard : str
    cause : str
        How the comparison calls it.
    shift_ps, series_ohm, shunt_ff : float
    """

    standard: str
    cause: str
    shift_ps: float = 0.0
    series_ohm: float = 0.0
    shunt_ff: float = 0.0

    def on(self, gamma: ComplexArray, frequency_hz: FloatArray, reference_ohm: float) -> ComplexArray:
        """Return what has become of a reflection."""
        once = Connections(
            np.array([self.shift_ps * 1e-12]),
            np.array([self.series_ohm]),
            np.array([self.shunt_ff * 1e-15]),
        )
        return np.asarray(connect(gamma, frequency_hz, once, reference_ohm)[0])


def draw_pair(
    scenario: Scenario, rng: np.random.Generator, *, same_calibration: bool, worn: Worn | None = None
) -> tuple[SimulatedBench, SimulatedBench]:
    """Draw standards and two sessions with them.

    Parameters
    ----------
    scenario : Scenario
        Of both sessions.
    rng : numpy Generator
    same_calibration : bool
        Whether what the correction leaves is drawn once for both sessions, or anew.
    worn : Worn, optional
        What has changed before the second session.
    """
    f = scenario.frequency_hz
    parts, resonance = draw_standards(scenario, rng)
    truth = {name: frozen_complex(reflection(part, f)) for name, part in parts.items()}
    given = draw_evidence(scenario, parts, rng)
    before = _residuals(scenario, rng)
    after = before if same_calibration else _residuals(scenario, rng)
    first = SimulatedBench(
        frequency_hz=f,
        kinds={kind: kind for kind in KINDS},
        parts=parts,
        truth=truth,
        readings={},
        given=given,
        same_offset_as={"open": "short", "load": "short"} if scenario.body == "shared" else {},
        residual=scenario.residual,
        scenario=scenario,
        drawn=Drawn(before, {}, (), resonance),
    )
    now = dict(truth)
    if worn is not None:
        now[worn.standard] = frozen_complex(worn.on(truth[worn.standard], f, scenario.reference_ohm))
    second = replace(first, truth=now, drawn=replace(first.drawn, residuals=after))
    return _read(first, rng), _read(second, rng)


def _residuals(scenario: Scenario, rng: np.random.Generator) -> Residuals:
    return draw_residuals(
        scenario.residual,
        scenario.frequency_hz,
        rng,
        kind=scenario.residual_kind,
        correlation=scenario.correlation,
        scale=scenario.residual_scale,
    )


def _read(bench: SimulatedBench, rng: np.random.Generator) -> SimulatedBench:
    """Return a bench with the readings of one session."""
    scenario = bench.scenario
    drift = draw_drift(scenario, rng)
    connections = {name: draw_connections(scenario, name, rng) for name in KINDS}
    readings = {}
    for name in KINDS:
        seen = connect(bench.truth[name], bench.frequency_hz, connections[name], scenario.reference_ohm)
        shown = imperfect_correction(seen * drift[name], bench.drawn.residuals)
        readings[name] = frozen_complex(shown + draw_noise(shown, scenario, rng))
    return replace(bench, readings=readings, drawn=replace(bench.drawn, connections=connections))
