"""Simulated nested readings: do the components of scatter hold what was put in?"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs, frozen_complex, frozen_float
from stdfit.circuits.connectors import family_of
from stdfit.trials.analyser import draw_residuals, imperfect_correction
from stdfit.trials.bench import draw_standards
from stdfit.trials.families import demo_scenario
from stdfit.trials.parts import reflection
from stdfit.trials.session import Connections, connect
from stdfit.uncertainty.connections import responses
from stdfit.validity.change.nested import Components, Design, components
from stdfit.validity.change.repeat_study import repeats_of, seen_parts

SHIFT_PS, OHM, FARAD_FF = 0.15, 0.015, 0.9
"""Standard deviations of a connection: plane shift, series resistance, shunt capacitance."""

NOISE = 1e-4
"""Standard deviation per component of one reading."""

POINTS = 101

RESIDUAL = demo_scenario().residual
EXPECTED = family_of("SMA").repeatability

LONG_RUN = 2000
"""Calibrations from which the true scatter is known."""

AT_HZ = (1e9, 3e9, 6e9)


def draw_values(
    design: Design, sd: Sequence[float], rng: np.random.Generator, *, circular: bool = False
) -> FloatArray | ComplexArray:
    """Draw y = a + b + e with the standard deviations of calibration, connection and repeat."""
    counts = (int(design.calibration.max()) + 1, int(design.connection.max()) + 1, design.connection.size)

    y: ComplexArray = np.zeros(design.connection.size, dtype=complex)
    places = (design.calibration, design.connection, np.arange(design.connection.size))
    for own, count, place in zip(sd, counts, places, strict=True):
        pair = rng.standard_normal((2, count))
        y += own * ((pair[0] + 1j * pair[1]) / np.sqrt(2.0) if circular else pair[0])[place]
    return y if circular else np.asarray(y.real, dtype=float)


def holds(found: Components, truth: Sequence[float]) -> list[bool | None]:
    """Tell for each level whether its interval holds the truth; None where the design does not tell it."""
    return [
        None if np.isnan(low) else bool(low <= true <= high)
        for low, high, true in zip(found.low, found.high, truth, strict=True)
    ]


def rates(told: Sequence[Sequence[bool | None]]) -> list[float | None]:
    """Return the part that holds, level by level; None where nothing was told."""
    columns = [[one for one in column if one is not None] for column in zip(*told, strict=True)]
    return [float(np.mean(column)) if column else None for column in columns]


def study_values(
    counts: Sequence[Sequence[int]], sd: Sequence[float], designs: int, seed: int, *, circular: bool = False
) -> list[float | None]:
    """Return how often the intervals of calibration, connection and repeat hold the truth."""
    design = Design.of(counts)
    # Without repeats a connection and its reading are one.
    truth = list(sd) if max(map(max, counts)) > 1 else [sd[0], float(np.hypot(sd[1], sd[2])), sd[2]]
    told = []
    for k in range(designs):
        values = draw_values(design, sd, np.random.default_rng([seed, k]), circular=circular)
        told.append(holds(components(design, values), truth))
    return rates(told)


@dataclass(frozen=True, slots=True, eq=False)
class Workbench:
    """A standard, and the true components of its readings.

    Attributes
    ----------
    kind : str
    frequency_hz : array of shape (f,)
    gamma : complex array of shape (f,)
    truth : array of shape (q, 3)
        Of the parts that are seen, then of |ΔΓ| at `AT_HZ`.
    """

    kind: str
    frequency_hz: FloatArray
    gamma: ComplexArray
    truth: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        object.__setattr__(self, "truth", frozen_float(self.truth))


def draw_workbench(kind: str, rng: np.random.Generator, long_run: int = LONG_RUN) -> Workbench:
    """Draw a standard, and find its true components from very many calibrations."""
    f = np.linspace(50e6, 6e9, POINTS)
    gamma = reflection(draw_standards(demo_scenario(), rng)[0][kind], f)
    places = [int(np.argmin(np.abs(f - hertz))) for hertz in AT_HZ]
    basis = responses(gamma, f, 50.0)
    seen = seen_parts(basis, NOISE, EXPECTED)
    pairs = as_pairs(basis[:, seen])
    inverse = np.linalg.pinv(pairs)
    # Two connections of each calibration, without noise: half of their difference squared is the connections' part.
    shown = np.array([_shown(gamma, f, 2, rng) for _ in range(long_run)])
    plain = np.array([imperfect_correction(gamma, draw_residuals(RESIDUAL, f, rng)) for _ in range(long_run)])
    apart, off = shown[:, 0] - shown[:, 1], plain - plain.mean(axis=0)
    noise = NOISE * np.linalg.norm(inverse, axis=1)
    of_calibration, of_connection = (
        np.sqrt(np.mean((as_pairs(own.T).T @ inverse.T) ** 2, axis=0)) for own in (off, apart / np.sqrt(2.0))
    )
    rows = np.stack([of_calibration, of_connection, noise], axis=1)
    at = [
        (
            np.sqrt(np.mean(np.abs(off[:, k]) ** 2)),
            np.sqrt(np.mean(np.abs(apart[:, k]) ** 2) / 2.0),
            NOISE * np.sqrt(2.0),
        )
        for k in places
    ]
    return Workbench(kind, f, gamma, np.concatenate([rows, np.array(at)]))


def draw_readings(
    bench: Workbench, counts: Sequence[Sequence[int]], rng: np.random.Generator
) -> ComplexArray:
    """Draw readings, calibration by calibration, shape (n, f)."""
    readings = []
    for own in counts:
        shown = _shown(bench.gamma, bench.frequency_hz, len(own), rng)
        for gamma, repeats in zip(shown, own, strict=True):
            noise = rng.standard_normal((2, repeats, gamma.size))
            readings.append(gamma + NOISE * (noise[0] + 1j * noise[1]))
    return np.concatenate(readings)


def study_sweeps(
    kind: str, counts: Sequence[Sequence[int]], designs: int, seed: int, long_run: int = LONG_RUN
) -> dict[str, list[float | None]]:
    """Return how often the intervals hold the truth, for each part and each frequency, on whole sweeps."""
    bench = draw_workbench(kind, np.random.default_rng([seed, 0]), long_run)
    told: dict[str, list[list[bool | None]]] = {}
    for k in range(designs):
        readings = draw_readings(bench, counts, np.random.default_rng([seed, 1, k]))
        found = repeats_of(kind, kind, bench.frequency_hz, readings, counts, 50.0, AT_HZ, EXPECTED)
        for row, truth in zip(found.rows, bench.truth, strict=True):
            name = row.what if row.at_hz is None else f"{row.what} at {row.at_hz / 1e9:.2g} GHz"
            told.setdefault(name, []).append(holds(row.found, truth.tolist()))
    return {name: rates(own) for name, own in told.items()}


def _shown(
    gamma: ComplexArray, frequency_hz: FloatArray, count: int, rng: np.random.Generator
) -> ComplexArray:
    """Return so many connections under one calibration, without noise, shape (count, f)."""
    sizes = np.array([[SHIFT_PS * 1e-12], [OHM], [FARAD_FF * 1e-15]])
    shift, series, shunt = sizes * rng.standard_normal((3, count))
    seen = connect(gamma, frequency_hz, Connections(shift, series, shunt), 50.0)
    return imperfect_correction(seen, draw_residuals(RESIDUAL, frequency_hz, rng))
