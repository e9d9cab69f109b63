"""A bench on which nothing has been measured yet, with the readings that one would expect."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import BenchError
from stdfit.base.records import Sweep
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.data.bench import Bench, StandardEntry
from stdfit.fitting.observed import Observed
from stdfit.pipeline.drawn import with_drawings
from stdfit.pipeline.path import kit_of
from stdfit.pipeline.plan import with_connections
from stdfit.pipeline.prepare import Prepared, prepare
from stdfit.pipeline.settle import choose_all, settle
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN, bumps
from stdfit.uncertainty.sources import SmoothSource

USUAL: dict[str, dict[str, float]] = {
    "open": {"offset_delay_ps": 20.0, "offset_loss_gohm_per_s": 1.0, "c0": 40.0},
    "short": {"offset_delay_ps": 20.0, "offset_loss_gohm_per_s": 1.0},
    "load": {"resistance_ohm": 50.0},
}
"""What a standard is taken to be where the bench does not say (common practice, no source)."""

DRAWS_PER_LENGTH = 3
"""Analysers that are imagined for each correlation length; of all, the one with the middle limit is taken."""

SEED = 1
"""The same analysers are imagined every time, so that a plan can be made again."""


def imagine(bench: Bench) -> Prepared:
    """Return a bench without readings as it is expected to be, with as many connections as are planned.

    Standards follow their models, but no analyser reads them so: what its residuals do to the readings passes
    for misfit in part, and costs as much of the band as the residuals' own bound. So analysers are drawn with
    errors of the stated size and any correlation length, and the readings of the one whose kit has the middle
    limit are taken.

    Raises
    ------
    BenchError
        The bench has no [plan] that tells the sweep.
    """
    bench = with_drawings(bench, imagined_sweeps(bench))
    prepared = prepare(bench, imagined_sweeps(bench), imagined=True)
    resistance, shift, _ = prepared.family.repeatability
    told = [
        f"nothing is measured yet: connections are taken to scatter by {1e3 * resistance:.0f} mΩ and {shift:g} ps "
        "(one standard deviation; common practice, no source)"
    ]
    if bench.residual is None:
        told.append("no analyser residuals are stated: those of a modest calibration are assumed")
    connections = bench.plan.connections if bench.plan is not None else 1
    expected = replace(with_connections(prepared, connections), warnings=tuple(told))
    rng = np.random.default_rng(SEED)
    common = sum(isinstance(source, SmoothSource) and source.common for source in expected.sources)
    # Each residual has each length equally often, in an order of its own.
    lengths = [rng.permutation(np.tile(LENGTHS_PER_SPAN, DRAWS_PER_LENGTH)) for _ in range(common)]
    drawn = [as_read(expected, own, rng) for own in zip(*lengths, strict=True)]
    limits = [kit_of(one, settle(one, choose_all(one))).limit.limit_hz for one in drawn]
    low, high = np.quantile(limits, [0.25, 0.75]) / 1e9
    told.append(
        f"of {len(limits)} analysers drawn with the stated residuals the middle half give limits of {low:.3g} … "
        f"{high:.3g} GHz; the middle one is shown"
    )
    return replace(drawn[int(np.argsort(limits)[len(limits) // 2])], warnings=tuple(told))


def as_read(prepared: Prepared, lengths_per_span: Sequence[float], rng: np.random.Generator) -> Prepared:
    """Return the bench as an analyser reads it whose residuals are drawn.

    Parameters
    ----------
    prepared : Prepared
    lengths_per_span : sequence of float
        Correlation length of each common source, in units of the span of the readings.
    rng : numpy Generator
    """
    low = min(float(one.frequency_hz[0]) for one in prepared.observed)
    high = max(float(one.frequency_hz[-1]) for one in prepared.observed)
    gammas = [one.gamma for one in prepared.observed]
    common = [source for source in prepared.sources if isinstance(source, SmoothSource) and source.common]
    for source, length in zip(common, lengths_per_span, strict=True):
        bases = [bumps(one.frequency_hz, low, high, length * (high - low)) for one in prepared.observed]
        heights = rng.standard_normal((bases[0].shape[1], 2)) @ np.array([1.0, 1j])
        gammas = [
            gamma + (basis @ heights) * profile
            for gamma, basis, profile in zip(gammas, bases, source.profiles, strict=True)
        ]
    observed = tuple(
        Observed(one.name, one.kind, one.frequency_hz, gamma, one.deviations)
        for one, gamma in zip(prepared.observed, gammas, strict=True)
    )
    return replace(prepared, observed=observed)


def imagined_sweeps(bench: Bench) -> Mapping[str, list[Sweep]]:
    """Return one sweep of each standard, exactly as the usual one would read.

    Raises
    ------
    BenchError
        The bench has no readings and no [plan] that tells the sweep.
    """
    if bench.plan is None:
        raise BenchError(
            "standards without readings, and no [plan] that tells the sweep",
            "add [plan] with from_hz, to_hz, points and connections, or name the readings",
            file=bench.path,
            key="plan",
        )
    grid = np.linspace(bench.plan.from_hz, bench.plan.to_hz, bench.plan.points)
    return {
        entry.name: [
            Sweep(
                grid,
                _expected(entry, grid, bench.reference_ohm),
                bench.reference_ohm,
                f"planned {entry.name}",
            )
        ]
        for entry in bench.standards
    }


def _expected(entry: StandardEntry, grid: np.ndarray, reference_ohm: float) -> ComplexArray:
    """Return the reflection of the usual standard, with the given values where there are any."""
    usual = {"offset_z0_ohm": reference_ohm, **USUAL[entry.kind]}
    if entry.kind == "load":
        usual["resistance_ohm"] = reference_ohm
    values = [
        entry.given[one.name].value if one.name in entry.given else usual.get(one.name, 0.0)
        for one in PARAMETERS[entry.kind]
    ]
    return reflection(entry.kind, values, grid, reference_ohm)[0]
