"""From a kit file and a bench with devices to a check of the kit."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import BenchError, RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.connectors import family_of
from stdfit.data.bench import Bench, read_bench
from stdfit.data.bench_records import DeviceEntry
from stdfit.data.readings import read_reading
from stdfit.fitting.screen import screen_points
from stdfit.pipeline.adapters.brought import refuse_adapters
from stdfit.pipeline.check_readings import (
    FEWEST,
    check_sweeps,
    digest_of,
    file_notes,
    read_connections,
    standards_of,
    usable_frequencies,
)
from stdfit.validity.device.bound import device_map
from stdfit.validity.device.check import Check, Finding, Mask, by_physics, compared
from stdfit.validity.device.check_day import Day, Stack, correct_day, device_uncertainty
from stdfit.validity.device.check_value import Value, given_value, value_from_file, value_from_kit
from stdfit.validity.device.pairing import shared
from stdfit.validity.kit import Kit
from stdfit.writing.kit_file import kit_file_of
from stdfit.writing.kit_reading import read_kit

UNSURE = 2.0
"""A value whose bound is wider than so many of the kit's tells little of the kit."""


def check_kit(
    kit_file: Path | str, bench_file: Path | str, *, names: Sequence[str] = (), to_hz: float | None = None
) -> Check:
    """Read a kit and a bench with devices, correct the devices with the kit, and see whether they agree.

    Parameters
    ----------
    kit_file, bench_file : path
    names : sequence of str
        The three standards of the correction; one of each kind of those that were read where none are named.
    to_hz : float, optional
        Give the verdict up to here instead of the kit's limit.

    Raises
    ------
    InputError
        Something in the kit, the bench or the readings is wrong.
    """
    kit_file = kit_file_of(kit_file)
    kit, bench = read_kit(kit_file), read_bench(bench_file, devices_alone=True)
    _check_request(kit, bench)
    entries, three = standards_of(kit, kit_file, bench, names)
    own_sweeps = [[sweep for entry in own for sweep in read_connections(entry, bench)] for own in entries]
    device_sweeps = [read_connections(entry, bench) for entry in bench.devices]
    notes = file_notes(kit, bench, [entry for own in entries for entry in own])
    check_sweeps(three, own_sweeps, bench, device_sweeps)
    grid = device_sweeps[0][0].frequency_hz
    inside = usable_frequencies(kit, bench, three, grid)
    notes += _cut_note(grid, inside)
    errors = device_map(kit, three, grid[inside])
    stacks = [
        _stack(one.name, one.kind, sweeps, inside, notes)
        for one, sweeps in zip(three, own_sweeps, strict=bool(own_sweeps))
        if own_sweeps
    ]
    device_stacks = [
        _stack(entry.name, "device", sweeps, inside, notes)
        for entry, sweeps in zip(bench.devices, device_sweeps, strict=True)
    ]
    day = correct_day(errors, stacks, device_stacks, kit.reference_ohm, family_of(kit.connector))
    notes += [
        f"connection {k + 1} of '{name}' lies {distance:.2g} from the others, far beyond their scatter: left out"
        for name, k, distance in day.left_out
    ]
    if not day.scatter.measured:
        notes.append(
            "nothing was connected twice: the connector family's repeatability is assumed (common practice)"
        )
    top = kit.limit.limit_hz if to_hz is None else to_hz
    judged = errors.frequency_hz <= top
    if np.count_nonzero(judged) < FEWEST:
        raise RequestError(
            f"only {np.count_nonzero(judged)} frequencies lie within {top / 1e9:.4g} GHz, too few for a verdict",
            "read more points there, or ask for a verdict further up with --to",
        )
    findings = [
        finding
        for place, entry in enumerate(bench.devices)
        for finding in _findings(kit, kit_file, entry, day, place, judged, notes)
    ]
    return Check(
        kit=kit.name,
        standards=tuple(one.name for one in three),
        corrected_before=not own_sweeps,
        low_hz=float(errors.frequency_hz[0]),
        top_hz=float(errors.frequency_hz[judged][-1]),
        read_top_hz=float(errors.frequency_hz[-1]),
        findings=tuple(findings),
        notes=tuple(dict.fromkeys(notes)),
    )


def _check_request(kit: Kit, bench: Bench) -> None:
    """Refuse a bench without devices, and one of another reference impedance."""
    refuse_adapters(bench)
    if not bench.devices:
        raise BenchError(
            "the bench names no device to check the kit with",
            "describe each in a [[device]] table: name, readings, and its value if it is known",
            file=bench.path,
            key="device",
        )
    if not np.isclose(bench.reference_ohm, kit.reference_ohm, rtol=1e-9):
        raise BenchError(
            f"the kit was made for {kit.reference_ohm:g} Ω, not {bench.reference_ohm:g} Ω",
            "state the kit's own reference impedance",
            file=bench.path,
            key="kit.reference_impedance_ohm",
        )


def _cut_note(grid: FloatArray, inside: Mask) -> list[str]:
    cut = np.count_nonzero(~inside)
    return (
        [f"{cut} of {grid.size} frequencies lie where the kit is not known, and are left out"] if cut else []
    )


def _stack(name: str, kind: str, sweeps: Sequence[Sweep], inside: Mask, notes: list[str]) -> Stack:
    """Return the connections of a part without single points that stand out in one of them."""
    grid = sweeps[0].frequency_hz[inside]
    screened = screen_points(grid, np.array([sweep.gamma[inside] for sweep in sweeps]))
    count = int(screened.replaced.sum())
    if count:
        notes.append(
            f"'{name}': {count} single point{'s' if count > 1 else ''} left out, off in one connection alone"
        )
    return Stack(name, kind, screened.readings)


def _findings(
    kit: Kit,
    kit_file: Path,
    entry: DeviceEntry,
    day: Day,
    place: int,
    judged: Mask,
    notes: list[str],
) -> list[Finding]:
    """Return what one device says."""
    grid, gamma = day.errors.frequency_hz, day.devices[place].gamma
    bound = device_uncertainty(day, place, kit.reference_ohm)
    value = _value(kit, kit_file, entry, grid, notes)
    if value is not None:
        if value.assumed:
            notes.append(f"'{entry.name}': not given, and assumed (one sigma): {', '.join(value.assumed)}")
        known = np.isfinite(value.bound) & judged
        if known.any() and np.median(value.bound[known]) > UNSURE * np.median(bound[known]):
            notes.append(
                f"'{entry.name}': its value is less sure than the kit, so that it shows gross errors only"
            )
        return [compared(entry.name, grid, gamma, bound, value, judged)]
    return by_physics(entry.name, grid, gamma, bound, judged, kit.reference_ohm, entry.expect)


def _value(kit: Kit, kit_file: Path, entry: DeviceEntry, grid: FloatArray, notes: list[str]) -> Value | None:
    """Return what a device should be, if that is known."""
    if entry.kind is not None:
        return given_value(entry.kind, entry.given, grid, kit.reference_ohm)
    if entry.value_file is not None and entry.value_u95 is not None:
        sweep = read_reading(entry.value_file, reference_ohm=kit.reference_ohm, exported=True)
        return value_from_file(sweep, entry.value_u95, grid)
    if entry.from_kit is None or entry.standard is None:
        return None
    if digest_of(entry.from_kit) == digest_of(kit_file):
        raise BenchError(
            "this is the kit that is to be checked",
            "name another kit, or state the value otherwise",
            file=kit_file,
            key=f"device[{entry.name}].from_kit",
        )
    other = read_kit(entry.from_kit)
    if not np.isclose(other.reference_ohm, kit.reference_ohm, rtol=1e-9):
        raise BenchError(
            f"the kit of '{entry.name}' was made for {other.reference_ohm:g} Ω, not {kit.reference_ohm:g} Ω",
            "take a kit of the same reference impedance",
            file=entry.from_kit,
        )
    notes += [f"'{entry.name}': {note}" for note in shared(kit, other)]
    return value_from_kit(other, other.definition(entry.standard), grid)
