"""The [[device]] tables of a bench file: devices that a kit is checked with."""

from itertools import pairwise
from pathlib import Path

from stdfit.base.arrays import frozen_float
from stdfit.data.bench_files import matching_files
from stdfit.data.bench_records import DeviceEntry, StatedBound
from stdfit.data.bench_standards import GIVEN_NAMES, decode_given, decode_port
from stdfit.data.bench_table import Table
from stdfit.data.words import quoted

EXPECTED = ("line", "passive")
_MEND = "describe each device in a [[device]] table"
_KEYS = (
    "name",
    "readings",
    "port",
    "kind",
    "given",
    "from_kit",
    "standard",
    "value_file",
    "value_u95",
    "expect",
)
_VALUES = {"kind": ("given",), "from_kit": ("standard",), "value_file": ("value_u95",)}
"""Ways to state a value, and the key that each needs beside it."""

NEEDED = {"open": "offset_delay_ps", "short": "offset_delay_ps", "load": "resistance_ohm"}
"""Without this the given parameters of a kind are no value at all."""

LARGEST_BOUND = 2.0
"""Reflections of passive parts do not differ by more."""

_TOO_LARGE = (
    f"above {LARGEST_BOUND:g}, by which no two reflections differ",
    "check the figure: it is a bound on |ΔΓ|",
)


def decode_devices(whole: Table) -> tuple[DeviceEntry, ...]:
    """Return the devices of a bench; none where it has no such tables.

    Raises
    ------
    BenchError
        A fault in one of them, or two of one name.
    """
    if "device" not in whole:
        return ()
    listed = whole.list_of("device", _MEND)
    devices: dict[str, DeviceEntry] = {}
    for place, item in enumerate(listed, start=1):
        table = _table(item, whole.file, place)
        entry = _decode(table)
        if entry.name in devices:
            raise table.fault("name", "two devices have this name", "give each its own name")
        devices[entry.name] = entry
    return tuple(devices.values())


def _table(item: object, file: Path, place: int) -> Table:
    """Return the table of a device; until its name is known, messages call it by its place, counted from 1."""
    name = item.get("name") if isinstance(item, dict) else None
    shown = quoted(name)[1:-1] if isinstance(name, str) and name.strip() else f"#{place}"
    return Table(item, file, f"device[{shown}]", _KEYS, _MEND)


def _decode(table: Table) -> DeviceEntry:
    patterns = table.list_of("readings", 'write readings = ["file.s1p", …], one file per connection')
    for pattern in patterns:
        if not isinstance(pattern, str) or not pattern or not pattern.isprintable():
            raise table.fault("readings", "an entry is not a file name", "put each file name in quotes")
    _check_one_value(table)
    kind = table.choice("kind", tuple(GIVEN_NAMES)) if "kind" in table else None
    given = decode_given(table, kind) if kind is not None else {}
    if kind is not None and NEEDED[kind] not in given:
        raise table.fault(
            "given", f"says nothing of {NEEDED[kind]}", f"write given.{NEEDED[kind]} = {{ value = …, u = … }}"
        )
    return DeviceEntry(
        name=table.text("name"),
        files=matching_files([str(p) for p in patterns], table.file, f"{table.prefix}.readings"),
        port=decode_port(table),
        kind=kind,
        given=given,
        from_kit=_file(table, "from_kit", "kit file") if "from_kit" in table else None,
        standard=table.text("standard") if "from_kit" in table else None,
        value_file=_file(table, "value_file", "file of values") if "value_file" in table else None,
        value_u95=_bound(table) if "value_file" in table else None,
        expect=table.choice("expect", EXPECTED) if "expect" in table else None,
    )


def _check_one_value(table: Table) -> None:
    """Refuse two values of one device, half a value, and a value beside what physics is to say."""
    stated = [key for key in _VALUES if key in table]
    if len(stated) > 1:
        raise table.fault(
            stated[1], f"stands beside {stated[0]}, which already tells it", "leave one of them out"
        )
    for key, needed in _VALUES.items():
        for other in needed:
            if other in table and key not in table:
                raise table.fault(other, f"stands without {key}", f"write {key} beside it")
            if key in table and other not in table:
                raise table.fault(key, f"stands without {other}", f"write {other} beside it")
    if stated and "expect" in table:
        raise table.fault(
            "expect", f"stands beside {stated[0]}: a device with a value is compared with it", "leave it out"
        )


def _file(table: Table, key: str, what: str) -> Path:
    """Return a file that must be there, relative to the bench file."""
    path = table.file.parent / table.text(key)
    try:
        exists = path.is_file()
    except (OSError, ValueError):
        exists = False
    if not exists:
        raise table.fault(key, f"no such {what}", "check the path; it is relative to the bench file")
    return path


def _bound(table: Table) -> StatedBound:
    """Return the 95 % bound of a stated value: one number, or a table over frequency."""
    values = table.values["value_u95"]
    if not isinstance(values, dict):
        one = table.number("value_u95", above=0.0)
        if one > LARGEST_BOUND:
            raise table.fault("value_u95", *_TOO_LARGE)
        return StatedBound(frozen_float([1.0]), frozen_float([one]))
    inner = Table(values, table.file, f"{table.prefix}.value_u95", ("frequency_hz", "bound"))
    frequency, bound = inner.numbers("frequency_hz", above=0.0), inner.numbers("bound", above=0.0)
    if any(low >= high for low, high in pairwise(frequency)):
        raise inner.fault(
            "frequency_hz", "the frequencies do not rise", "put them in rising order, each once"
        )
    if len(bound) != len(frequency):
        raise inner.fault(
            "bound", f"{len(bound)} values for {len(frequency)} frequencies", "give one value a frequency"
        )
    if max(bound) > LARGEST_BOUND:
        raise inner.fault("bound", *_TOO_LARGE)
    return StatedBound(frozen_float(frequency), frozen_float(bound))
