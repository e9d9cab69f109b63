"""From a repeatability file to components of scatter."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from stdfit.base.records import Sweep
from stdfit.circuits.connectors import family_of
from stdfit.data.readings import read_reading
from stdfit.data.repeat_file import RepeatEntry, RepeatFile, read_repeat_file
from stdfit.data.verify import verify_standards
from stdfit.validity.change.repeat_study import Repeats, repeats_of


def study_repeats(
    path: Path | str, at_hz: Sequence[float] | None = None
) -> tuple[RepeatFile, list[Repeats], tuple[str, ...]]:
    """Return the file, what it says of each standard, and warnings.

    Parameters
    ----------
    path : path
        A repeatability file or its folder.
    at_hz : sequence of float, optional
        Frequencies of |ΔΓ|; quarters of the sweep where they are not given.

    Raises
    ------
    InputError
    """
    described = read_repeat_file(path)
    nested: dict[str, dict[str, list[list[Sweep]]]] = {name: {} for name in described.standards}
    for entry in described.entries:
        nested[entry.standard].setdefault(entry.calibration, []).extend(_read(entry, described))
    flat = {
        standard: [sweep for own in by_calibration.values() for connection in own for sweep in connection]
        for standard, by_calibration in nested.items()
    }
    warnings = verify_standards(
        {standard: (kind, flat[standard]) for standard, kind in described.standards.items()}
    )
    found = []
    for standard, kind in described.standards.items():
        first = flat[standard][0]
        inside = first.frequency_hz > 0.0
        f = first.frequency_hz[inside]
        quarters = f[0] + (f[-1] - f[0]) * np.array([0.25, 0.5, 0.75, 1.0])
        found.append(
            repeats_of(
                standard,
                kind,
                f,
                np.array([sweep.gamma[inside] for sweep in flat[standard]]),
                [[len(connection) for connection in own] for own in nested[standard].values()],
                described.reference_ohm,
                quarters.tolist() if at_hz is None else at_hz,
                family_of(described.connector).repeatability,
            )
        )
    return described, found, warnings


def _read(entry: RepeatEntry, described: RepeatFile) -> list[list[Sweep]]:
    return [
        [read_reading(file, port=entry.port, reference_ohm=described.reference_ohm) for file in connection]
        for connection in entry.connections
    ]
