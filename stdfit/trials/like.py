"""A scenario that resembles a real bench."""

from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.base.errors import RequestError
from stdfit.data.bench import read_bench
from stdfit.data.readings import read_reading
from stdfit.pipeline import prepare
from stdfit.trials.analyser import StatedDecibels
from stdfit.trials.scenario import KINDS, Scenario


def scenario_like(path: Path) -> Scenario:
    """Return a scenario with a bench's connector, sweep, connections, residuals, scatter, noise and evidence.

    Raises
    ------
    InputError
        The bench cannot be used, or does not hold one open, one short and one load.
    """
    bench = read_bench(path)
    if sorted(entry.kind for entry in bench.standards) != sorted(KINDS):
        raise RequestError(
            "benches are simulated with one open, one short and one load", "use a bench of these three"
        )
    sweeps = {
        entry.name: [
            read_reading(file, port=entry.port, reference_ohm=bench.reference_ohm) for file in entry.files
        ]
        for entry in bench.standards
    }
    prepared = prepare(replace(bench, state="corrected"), sweeps)
    told = prepared.residual
    resistance, shift, _ = prepared.scatter.sd
    given = {entry.kind: entry.given for entry in bench.standards}
    ohm = given["load"].get("resistance_ohm")
    ruler = next((table["offset_delay_ps"] for table in given.values() if "offset_delay_ps" in table), None)
    return Scenario(
        frequency_hz=prepared.observed[0].frequency_hz,
        residual=StatedDecibels(
            told.frequency_hz,
            -20.0 * np.log10(told.directivity),
            -20.0 * np.log10(told.source_match),
            20.0 * np.log10(1.0 + told.reflection_tracking),
        ),
        connector=bench.connector,
        reference_ohm=bench.reference_ohm,
        connections={one.kind: one.connections for one in prepared.observed},
        scatter_ps=float(shift),
        scatter_ohm=float(resistance),
        noise=max(prepared.scatter.noise, 1e-6),
        trace_noise=0.0,
        given_resistance_u_ohm=None if ohm is None else ohm.u,
        given_delay_u_ps=None if ruler is None else ruler.u,
        body="shared" if any(entry.same_offset_as for entry in bench.standards) else "own",
    )
