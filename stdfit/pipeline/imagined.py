"""A bench on which nothing has been measured yet, with the readings that one would expect."""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import BenchError
from stdfit.base.records import Sweep
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.data.bench import Bench, StandardEntry
from stdfit.pipeline.plan import with_connections
from stdfit.pipeline.prepare import Prepared, prepare

USUAL: dict[str, dict[str, float]] = {
    "open": {"offset_delay_ps": 20.0, "offset_loss_gohm_per_s": 1.0, "c0": 40.0},
    "short": {"offset_delay_ps": 20.0, "offset_loss_gohm_per_s": 1.0},
    "load": {"resistance_ohm": 50.0},
}
"""What a standard is taken to be where the bench does not say (common practice, no source)."""


def imagine(bench: Bench) -> Prepared:
    """Return a bench without readings as it is expected to be, with as many connections as are planned.

    Raises
    ------
    BenchError
        The bench has no [plan] that tells the sweep.
    """
    prepared = prepare(bench, imagined_sweeps(bench))
    resistance, shift, _ = prepared.family.repeatability
    told = [
        f"nothing is measured yet: connections are taken to scatter by {1e3 * resistance:.0f} mΩ and {shift:g} ps "
        "(one standard deviation; common practice, no source)"
    ]
    if bench.residual is None:
        told.append("no analyser residuals are stated: those of a modest calibration are assumed")
    connections = bench.plan.connections if bench.plan is not None else 1
    return replace(with_connections(prepared, connections), warnings=tuple(told))


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
