"""Readings brought to the planes of their standards, and benches on which that cannot be."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.errors import ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, StandardEntry
from stdfit.fitting.observed import Observed
from stdfit.pipeline.adapters.known import Known
from stdfit.pipeline.adapters.planes import Passage, Planes

FEWEST_POINTS = 8
"""Readings that must lie in the band that is asked for."""

SURE = 0.05
"""Only where adapters put full reflections off by less are readings asked whether they can be what they are called."""


def refuse_behind(bench: Bench) -> None:
    """Refuse raw readings behind an adapter where the error terms are eliminated: unknown ones hold the adapter too.

    Raises
    ------
    RequestError
    """
    for entry in bench.standards:
        if entry.behind is not None:
            raise RequestError(
                "raw readings behind an adapter need three known standards that are read without it",
                "add them with from_kit, or leave behind out",
                file=bench.path,
                key=f"standard[{entry.name}].behind",
            )


def refuse_adapters(bench: Bench) -> None:
    """Refuse a bench with adapters where readings are taken as they stand.

    Raises
    ------
    RequestError
    """
    if bench.adapters:
        raise RequestError(
            "a check takes readings without adapters",
            "read the standards and devices without, and leave the [[adapter]] tables out",
            file=bench.path,
            key="adapter",
        )


def brought(bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], planes: Planes) -> dict[str, list[Sweep]]:
    """Return readings brought to the planes of their standards, each connection by itself.

    Parameters
    ----------
    bench : Bench
    sweeps : mapping
        For each standard, one sweep for each connection.
    planes : Planes

    Raises
    ------
    ReadingError
        A reading that is asked for lies outside the band of an adapter.
    """
    return {
        entry.name: [_brought(bench, entry, one, planes) for one in sweeps[entry.name]]
        for entry in bench.standards
    }


def _brought(bench: Bench, entry: StandardEntry, sweep: Sweep, planes: Planes) -> Sweep:
    if not planes.way(entry.name):
        return sweep
    inside = (sweep.frequency_hz > 0.0) & (sweep.frequency_hz <= (bench.highest_hz or np.inf))
    f = sweep.frequency_hz[inside]
    if f.size < FEWEST_POINTS:
        raise ReadingError(
            f"fewer than {FEWEST_POINTS} readings of '{entry.name}' lie in the band that is asked for",
            "raise goal.highest_hz or take more points",
            file=sweep.name,
        )
    try:
        passage = planes.passage(entry.name, f)
    except RequestError as fault:
        raise ReadingError(fault.what, fault.mend, file=sweep.name) from fault
    return replace(sweep, frequency_hz=f, gamma=passage.on(sweep.gamma[inside]))


def in_own_planes(observed: Sequence[Observed], passages: Sequence[Passage]) -> list[Observed]:
    """Return corrected readings brought to the planes of their standards, each connection by itself."""
    return [
        Observed.from_readings(one.name, one.kind, one.frequency_hz, own.on(one.gamma + one.deviations))
        if own.steps
        else one
        for one, own in zip(observed, passages, strict=True)
    ]


def to_verify(
    bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], planes: Planes
) -> dict[str, tuple[str, list[Sweep]]]:
    """Return kind and readings of each standard, where adapters are sure enough to ask whether readings can be.

    Parameters
    ----------
    bench, planes
    sweeps : mapping
        In the planes of the standards.
    """
    asked = {}
    for entry in bench.standards:
        own = [_where_sure(one, planes.way(entry.name)) for one in sweeps[entry.name]]
        if all(one.frequency_hz.size >= FEWEST_POINTS for one in own):
            asked[entry.name] = (entry.kind, own)
    return asked


def _where_sure(sweep: Sweep, way: Sequence[tuple[Known, bool]]) -> Sweep:
    if not way:
        return sweep
    sure = sum(known.unsure(np.asarray(sweep.frequency_hz)) for known, _ in way) <= SURE
    return replace(sweep, frequency_hz=sweep.frequency_hz[sure], gamma=sweep.gamma[sure])
