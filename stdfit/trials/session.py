"""Connections, drift, glitches and noise: what changes from one reading to the next."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.trials.scenario import KINDS, Scenario


@dataclass(frozen=True, slots=True, eq=False)
class Connections:
    """Lumped parts at the connector's plane, one of each for every connection of one standard.

    Attributes
    ----------
    shift_s : array of shape (K,)
        One-way shift of the plane, in seconds.
    series_ohm : array of shape (K,)
        Series resistance against the usual one, in ohms.
    shunt_f : array of shape (K,)
        Shunt capacitance against the usual one, in farads.
    bad : int or None
        Index of a bad connection.
    """

    shift_s: FloatArray
    series_ohm: FloatArray
    shunt_f: FloatArray
    bad: int | None = None


def draw_connections(scenario: Scenario, name: str, rng: np.random.Generator) -> Connections:
    """Draw the connections of one standard; a bad one is off by 3 … 10 standard deviations."""
    count = scenario.counts()[name]
    sizes = np.array([scenario.scatter_ps * 1e-12, scenario.scatter_ohm, scenario.scatter_ff * 1e-15])
    parts = sizes[:, None] * rng.standard_normal((3, count))
    bad = None
    if scenario.bad_connection == name:
        bad = int(rng.integers(count))
        # Dirt and a loose nut add resistance; plane and capacitance may go either way.
        signs = np.array([rng.choice([-1.0, 1.0]), 1.0, rng.choice([-1.0, 1.0])])
        parts[:, bad] = sizes * signs * rng.uniform(3.0, 10.0, 3)
    return Connections(parts[0], parts[1], parts[2], bad)


def connect(
    gamma: ComplexArray, frequency_hz: FloatArray, connections: Connections, reference_ohm: float
) -> ComplexArray:
    """Return Γ as seen through each connection: a shift of the plane, shunt capacitance, series resistance.

    Parameters
    ----------
    gamma : complex array of shape (n,)
        The truth.
    frequency_hz : array of shape (n,)
        In hertz.
    connections : Connections
        K of them.
    reference_ohm : float
        Reference impedance, in ohms.

    Returns
    -------
    complex array of shape (K, n)
    """
    omega = 2 * np.pi * frequency_hz
    seen = gamma * np.exp(-2j * np.outer(connections.shift_s, omega))
    half_y = 0.5j * reference_ohm * np.outer(connections.shunt_f, omega)
    seen = (seen - half_y * (1 + seen)) / (1 + half_y * (1 + seen))
    half_r = (0.5 / reference_ohm * connections.series_ohm)[:, None]
    out: ComplexArray = (seen + half_r * (1 - seen)) / (1 + half_r * (1 - seen))
    return out


def draw_drift(scenario: Scenario, rng: np.random.Generator) -> dict[str, ComplexArray]:
    """Draw the cable's state at every reading: a factor exp(a·f/top), with a a random walk.

    The imaginary part of a (phase) has a standard deviation of `drift_deg` at the last reading, the real part
    (loss) a tenth of it.

    Returns
    -------
    dict of complex array of shape (K, n)
    """
    counts = scenario.counts()
    if scenario.reading_order == "blocks":
        order = [(name, k) for name in KINDS for k in range(counts[name])]
    else:
        order = [(name, k) for k in range(max(counts.values())) for name in KINDS if k < counts[name]]
    step = np.radians(scenario.drift_deg) / np.sqrt(len(order))
    walk = np.cumsum(step * (rng.standard_normal((len(order), 2)) @ np.array([0.1, 1j])))
    state = {name: np.zeros(counts[name], dtype=np.complex128) for name in KINDS}
    for (name, k), value in zip(order, walk, strict=True):
        state[name][k] = value
    ratio = scenario.frequency_hz / scenario.frequency_hz[-1]
    return {name: np.exp(np.outer(state[name], ratio)) for name in KINDS}


def draw_noise(gamma: ComplexArray, scenario: Scenario, rng: np.random.Generator) -> ComplexArray:
    """Draw receiver noise (white) and trace noise (in proportion to |Γ|) for readings of any shape."""
    white = rng.standard_normal((2, *gamma.shape))
    trace = rng.standard_normal((2, *gamma.shape))
    flat = scenario.noise * (white[0] + 1j * white[1])
    noise: ComplexArray = flat + scenario.trace_noise * gamma * (trace[0] + 1j * trace[1])
    return noise


def draw_band_edges(scenario: Scenario, rng: np.random.Generator) -> tuple[int, ...]:
    """Draw the indices of the points next to the analyser's band edges; they are the same in all readings."""
    count = min(scenario.glitches, scenario.frequency_hz.size)
    return tuple(sorted(int(i) for i in rng.choice(scenario.frequency_hz.size, count, replace=False)))


def draw_glitches(readings: ComplexArray, edges: tuple[int, ...], rng: np.random.Generator) -> ComplexArray:
    """Draw single points that are off by 0.01 … 0.1 at band edges, in about two readings of three."""
    out = np.zeros_like(readings)
    if edges:
        size = (readings.shape[0], len(edges))
        jump = np.exp(rng.uniform(np.log(0.01), np.log(0.1), size) + 2j * np.pi * rng.random(size))
        out[:, list(edges)] = jump * (rng.random(size) < 0.67)
    return out
