"""Repeatability files: which readings were taken under which calibration and connection."""

import os
from dataclasses import dataclass
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.bench_files import matching_files
from stdfit.data.bench_standards import GIVEN_NAMES, decode_port
from stdfit.data.bench_table import Table
from stdfit.data.mistaken import refuse_mistaken
from stdfit.data.toml_text import parse_toml
from stdfit.data.whole_text import whole_text
from stdfit.data.words import quoted

FORMAT = "stdfit-repeatability/1"
FILE_NAME = "repeatability.toml"
LARGEST_BYTES = 4 * 2**20
_MEND = "describe the readings in [[repeatability]] tables"
_KEYS = ("standard", "kind", "calibration", "connections", "port")


@dataclass(frozen=True, slots=True)
class RepeatEntry:
    """Readings of one standard under one calibration.

    Attributes
    ----------
    standard, kind : str
    calibration : str
    connections : tuple of tuples of paths
        For each connection its readings, between which nothing was touched.
    port : int
    """

    standard: str
    kind: str
    calibration: str
    connections: tuple[tuple[Path, ...], ...]
    port: int = 1


@dataclass(frozen=True, slots=True)
class RepeatFile:
    """A repeatability file.

    Attributes
    ----------
    path : path
    name, connector : str
    reference_ohm : float
    entries : tuple of RepeatEntry
    """

    path: Path
    name: str
    connector: str
    reference_ohm: float
    entries: tuple[RepeatEntry, ...]

    @property
    def standards(self) -> dict[str, str]:
        """Kind of each standard, in the order of the file."""
        return {entry.standard: entry.kind for entry in self.entries}


def read_repeat_file(path: Path | str) -> RepeatFile:
    """Return what a repeatability file, or a folder with a repeatability.toml, describes.

    Raises
    ------
    BenchError
        The file cannot be read, is no TOML, or says something that cannot be.
    """
    path = Path(path)
    path = path / FILE_NAME if path.is_dir() else path
    text = whole_text(path, "repeatability file", LARGEST_BYTES, BenchError, "check the path, or write one")
    return parse_repeat_file(text, path)


def parse_repeat_file(text: str, path: Path) -> RepeatFile:
    """Return what a TOML text describes.

    Raises
    ------
    BenchError
        The message names the key.
    """
    refuse_mistaken(text, path, "repeatability file", BenchError)
    values = parse_toml(text, path)
    if values.get("format") != FORMAT:
        raise BenchError(
            "not a repeatability file", f'it begins with format = "{FORMAT}"', file=path, key="format"
        )
    whole = Table(
        values, path, "", ("format", "name", "connector", "reference_impedance_ohm", "repeatability")
    )
    tables = whole.list_of("repeatability", _MEND)
    entries = tuple(_entry(item, path, place) for place, item in enumerate(tables, start=1))
    _check_together(entries, path)
    return RepeatFile(
        path=path,
        name=whole.text("name"),
        connector=whole.text("connector"),
        reference_ohm=whole.number("reference_impedance_ohm", 50.0, above=0.0),
        entries=entries,
    )


def _entry(item: object, path: Path, place: int) -> RepeatEntry:
    table = Table(item, path, f"repeatability[#{place}]", _KEYS, _MEND)
    listed = table.list_of(
        "connections", 'write connections = ["open-1-*.s1p", "open-2-*.s1p"], one a connection'
    )
    connections = []
    for number, entry in enumerate(listed, start=1):
        patterns = entry if isinstance(entry, list) else [entry]
        if not patterns or not all(isinstance(one, str) and one and one.isprintable() for one in patterns):
            raise table.fault(
                "connections",
                f"connection {number} is neither a file name nor a list of them",
                "put each file name in quotes",
            )
        connections.append(
            matching_files([str(one) for one in patterns], path, f"{table.prefix}.connections")
        )
    return RepeatEntry(
        standard=table.text("standard"),
        kind=table.choice("kind", tuple(GIVEN_NAMES)),
        calibration=table.text("calibration"),
        connections=tuple(connections),
        port=decode_port(table),
    )


def _check_together(entries: tuple[RepeatEntry, ...], path: Path) -> None:
    """Refuse a standard of two kinds, and a reading that belongs to two connections."""
    kinds: dict[str, str] = {}
    seen: set[tuple[str, int]] = set()
    for place, entry in enumerate(entries, start=1):
        key = f"repeatability[#{place}]"
        if kinds.setdefault(entry.standard, entry.kind) != entry.kind:
            raise BenchError(
                f"{quoted(entry.standard)} has another kind in an earlier table",
                "give one standard one kind",
                file=path,
                key=f"{key}.kind",
            )
        for file in (file for own in entry.connections for file in own):
            whole = (os.path.realpath(file), entry.port)
            if whole in seen:
                raise BenchError(
                    f"{quoted(file.name)} belongs to two connections",
                    "name each reading once; let patterns end so that 1 does not match 10",
                    file=path,
                    key=f"{key}.connections",
                )
            seen.add(whole)
