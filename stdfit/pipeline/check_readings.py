"""What is read for a check: which entry of the bench is which standard, and whether the readings can serve."""

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import BenchError, PhysicsError, ReadingError
from stdfit.base.records import Sweep
from stdfit.circuits.residual_map import separation
from stdfit.data.bench import Bench
from stdfit.data.bench_records import DeviceEntry, StandardEntry
from stdfit.data.ordinary import digest
from stdfit.data.readings import read_reading
from stdfit.data.soundness import HIGHEST_MAGNITUDE
from stdfit.data.verify import verify_standards
from stdfit.validity.device.bound import common_top, device_map, three_of
from stdfit.validity.device.check import Mask
from stdfit.validity.kit import Definition, Kit

FEWEST = 8
"""Frequencies that a verdict needs."""

HIGHEST_RAW = 100.0
"""Largest raw |m| that is let through: only nonsense is above."""

APART = 1e-6
"""Standards that come closer than this cannot correct anything there."""

Three = tuple[Definition, Definition, Definition]


def standards_of(
    kit: Kit, kit_file: Path, bench: Bench, names: Sequence[str]
) -> tuple[list[list[StandardEntry]], Three]:
    """Return the kit's three standards, and the entries of the bench that read each; none for a corrected bench."""
    if not bench.standards:
        if bench.state != "corrected":
            raise BenchError(
                "raw readings of devices, and none of the kit's standards",
                "read the kit's three standards too, each in a [[standard]] table of its name",
                file=bench.path,
                key="standard",
            )
        return [], three_of(kit, names)
    read: dict[str, list[StandardEntry]] = {}
    for entry in bench.standards:
        own = _own(entry, kit, kit_file)
        if own is not None and entry.files:
            read.setdefault(own.name, []).append(entry)
    for name in names:
        kit.definition(name)
    missing = [one.name for one in kit.definitions if one.name not in read]
    if any(name in missing for name in names) or len(read) < 3:
        raise BenchError(
            f"no readings of the kit's {', '.join(repr(one) for one in missing)}",
            "read three standards of the kit; a [[standard]] stands for one by its name, or by from_kit and standard",
            file=bench.path,
            key="standard",
        )
    held = replace(kit, definitions=tuple(one for one in kit.definitions if one.name in read))
    three = three_of(held, names)
    for one in three:
        for entry in read[one.name]:
            if entry.kind != one.kind:
                raise BenchError(
                    f"called {entry.kind}, and the kit knows it as {one.kind}",
                    "give it the kind that the kit has, or another name",
                    file=bench.path,
                    key=f"standard[{entry.name}].kind",
                )
    return [read[one.name] for one in three], three


def _own(entry: StandardEntry, kit: Kit, kit_file: Path) -> Definition | None:
    """Return which standard of the kit an entry of the bench is, or None."""
    if entry.behind is not None:  # through an adapter it shows another reflection
        return None
    if entry.from_kit is not None and digest_of(entry.from_kit) != digest_of(kit_file):
        return None
    name = entry.standard if entry.from_kit is not None else entry.name
    return next((one for one in kit.definitions if one.name == name), None)


def digest_of(file: Path) -> str:
    """Return the SHA-256 of a file."""
    return digest(file)


def read_connections(entry: StandardEntry | DeviceEntry, bench: Bench) -> list[Sweep]:
    """Read all connections of a part; raw readings may be anything that is finite."""
    highest = HIGHEST_RAW if bench.standards else HIGHEST_MAGNITUDE
    return [
        read_reading(file, port=entry.port, reference_ohm=bench.reference_ohm, highest_magnitude=highest)
        for file in entry.files
    ]


def file_notes(kit: Kit, bench: Bench, standards: Sequence[StandardEntry]) -> list[str]:
    """Refuse a file that is read twice, or a device that the kit was made from; tell of standards that it was."""
    made_from = {one.sha256: one for one in kit.files}
    seen: dict[tuple[str, int], Path] = {}
    parts: list[StandardEntry | DeviceEntry] = [*standards, *bench.devices]
    notes = []
    for entry in parts:
        for file in entry.files:
            digest = digest_of(file)
            if (digest, entry.port) in seen:
                raise ReadingError(
                    f"the same readings as {seen[digest, entry.port].name}",
                    "give each connection its own file, and each file to one part",
                    file=file,
                )
            seen[digest, entry.port] = file
            if digest not in made_from:
                continue
            if isinstance(entry, DeviceEntry):
                raise PhysicsError(
                    f"the kit was made from these readings, as its '{made_from[digest].standard}'",
                    "check a kit with devices that it was not made from",
                    file=file,
                )
            notes.append(
                f"'{entry.name}': the kit was made from these readings, so that their scatter counts twice"
            )
    return notes


def check_sweeps(
    three: Three, standards: Sequence[Sequence[Sweep]], bench: Bench, devices: Sequence[Sequence[Sweep]]
) -> None:
    """Refuse readings on different frequencies, and standards that cannot be what they are called."""
    if standards:
        verify_standards(
            {one.name: (one.kind, own) for one, own in zip(three, standards, strict=True)}, state="raw"
        )
    first = standards[0][0] if standards else devices[0][0]
    step = float(np.diff(first.frequency_hz).min())
    for entry, sweeps in zip(bench.devices, devices, strict=True):
        for sweep in sweeps:
            same = sweep.frequency_hz.size == first.frequency_hz.size
            if not same or np.abs(sweep.frequency_hz - first.frequency_hz).max() > 1e-3 * step:
                raise ReadingError(
                    f"the frequencies of '{entry.name}' differ from those of {first.name}",
                    "read standards and devices with the same sweep",
                    file=sweep.name,
                )


def usable_frequencies(kit: Kit, bench: Bench, three: Three, grid: FloatArray) -> Mask:
    """Return where the kit is known and its standards differ, as a mask of shape (n,)."""
    low, top = max(one.read_low_hz for one in three), common_top(three)
    # Frequencies that were rounded when written out are still inside.
    inside = (grid > 0.0) & (grid >= low * (1.0 - 1e-9)) & (grid <= top)
    if bench.highest_hz is not None:
        inside &= grid <= bench.highest_hz
    if inside.any():
        near = separation(device_map(kit, three, grid[inside]).standards).min(axis=1) < APART
        inside[np.flatnonzero(inside)[near]] = False
    if np.count_nonzero(inside) < FEWEST:
        raise ReadingError(
            f"fewer than {FEWEST} frequencies lie where the kit is known",
            f"read standards and devices between {low / 1e9:.4g} and {top / 1e9:.4g} GHz",
            file=bench.path,
        )
    return inside
