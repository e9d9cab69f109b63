"""The [[standard]] tables of a bench file."""

from collections.abc import Sequence
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.bench_files import matching_files
from stdfit.data.bench_records import Given, StandardEntry
from stdfit.data.bench_table import Table
from stdfit.data.drawing_records import DrawnFrom
from stdfit.data.words import quoted, suggestion

_OFFSET = ("offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm")
GIVEN_NAMES = {
    "open": (*_OFFSET, "c0", "c1", "c2", "c3"),
    "short": (*_OFFSET, "l0", "l1", "l2", "l3"),
    "load": (*_OFFSET, "resistance_ohm", "inductance_ph", "capacitance_ff"),
}
POLYNOMIALS = ("chosen", "constant", "even", "full")
_MEND_STANDARD = "describe each standard in a [[standard]] table"
_POSITIVE = ("offset_z0_ohm", "resistance_ohm")
_KEYS = (
    "name",
    "kind",
    "readings",
    "given",
    "same_offset_as",
    "port",
    "polynomial",
    "from_kit",
    "standard",
    "set",
    "behind",
    "matings",
)
MOST_MATINGS = 10**9
SENSELESS = 1e9
"""No parameter of a part, and no uncertainty of one, is so many of the trade's units."""


def decode_standards(whole: Table, state: str, *, planned: bool) -> tuple[StandardEntry, ...]:
    """Return the standards of a bench.

    Parameters
    ----------
    whole : Table
        The whole bench file.
    state : str
        "corrected" or "raw".
    planned : bool
        Whether the bench tells how it is going to be read, so that standards may have no readings yet.

    Raises
    ------
    BenchError
        No standard, a fault in one of them, or two that contradict each other.
    """
    listed = whole.list_of("standard", _MEND_STANDARD)
    standards = tuple(
        _decode(item, whole.file, place, state, planned) for place, item in enumerate(listed, start=1)
    )
    by_name: dict[str, StandardEntry] = {}
    for entry in standards:
        if entry.name in by_name:
            raise _fault(whole.file, entry, "name", "two standards have this name", "give each its own name")
        by_name[entry.name] = entry
    for entry in standards:
        _check_shared(entry, by_name, whole.file)
    return standards


def _decode(item: object, file: Path, place: int, state: str, planned: bool) -> StandardEntry:
    """Return one standard; until its name is known, messages call it by its place, counted from 1."""
    name = item.get("name") if isinstance(item, dict) else None
    shown = quoted(name)[1:-1] if isinstance(name, str) and name.strip() else f"#{place}"
    table = Table(item, file, f"standard[{shown}]", _KEYS, _MEND_STANDARD)
    kind = table.choice("kind", tuple(GIVEN_NAMES)) if "kind" in table else None
    if kind is None:
        raise table.fault("kind", "missing", 'write kind = "open", "short" or "load"')
    polynomial = table.choice("polynomial", POLYNOMIALS, "chosen")
    if kind == "load" and "polynomial" in table:
        raise table.fault("polynomial", "a load has no polynomial", "leave the key out")
    port = decode_port(table)
    from_kit, standard = _known_standard(table, state)
    patterns: Sequence[object] = ()
    if not planned or table.values.get("readings"):
        patterns = table.list_of("readings", 'write readings = ["file.s1p", …], one file per connection')
    for pattern in patterns:
        if not isinstance(pattern, str) or not pattern or not pattern.isprintable():
            raise table.fault("readings", "an entry is not a file name", "put each file name in quotes")
    return StandardEntry(
        name=table.text("name"),
        kind=kind,
        files=matching_files([str(p) for p in patterns], file, f"{table.prefix}.readings"),
        given=decode_given(table, kind, drawings=True),
        from_drawing=_from_drawing(table),
        same_offset_as=table.text("same_offset_as") if "same_offset_as" in table else None,
        port=port,
        polynomial=polynomial,
        from_kit=from_kit,
        standard=standard,
        reading_set=table.text("set") if "set" in table else None,
        behind=table.text("behind") if "behind" in table else None,
        matings=_matings(table),
    )


def _matings(table: Table) -> int | None:
    """Return how often a standard had been connected, where that is told."""
    if "matings" not in table:
        return None
    value = table.values["matings"]
    if isinstance(value, bool) or not isinstance(value, int) or not 0 <= value <= MOST_MATINGS:
        raise table.fault("matings", "must be a whole number from 0 on", "count each connection as one")
    return value


def _known_standard(table: Table, state: str) -> tuple[Path | None, str | None]:
    """Return the kit file that knows this standard and its name there, or None twice."""
    if "from_kit" not in table:
        if "standard" in table:
            raise table.fault("standard", "stands without from_kit", "name the kit file with from_kit")
        if "set" in table:
            raise table.fault(
                "set",
                "stands without from_kit",
                "sets are of known standards; leave it out, or name the kit file with from_kit",
            )
        return None, None
    if state != "raw" and "behind" not in table:
        raise table.fault(
            "from_kit",
            "known standards belong to raw readings",
            'leave it out, or set analyser.state = "raw"',
        )
    if state == "raw" and "behind" in table:
        raise table.fault(
            "behind",
            "stands beside from_kit: references are read without an adapter",
            "leave one of them out",
        )
    if state != "raw" and "set" in table:
        raise table.fault("set", "belongs to raw readings", "leave it out")
    for key in ("given", "same_offset_as", "polynomial"):
        if key in table:
            raise table.fault(key, "stands beside from_kit, which already tells it", "leave one of them out")
    kit = table.file.parent / table.text("from_kit")
    try:
        exists = kit.is_file()
    except (OSError, ValueError):
        exists = False
    if not exists:
        raise table.fault("from_kit", "no such kit file", "check the path; it is relative to the bench file")
    return kit, table.text("standard")


def decode_port(table: Table) -> int:
    """Return which port of the files was read."""
    port = table.values.get("port", 1)
    if isinstance(port, bool) or port not in (1, 2) or not isinstance(port, int):
        raise table.fault("port", "the port must be 1 or 2", "write port = 1 for S11 or port = 2 for S22")
    return port


def _from_drawing(table: Table) -> DrawnFrom | None:
    """Return where the drawing of a standard is, or None."""
    given = table.values.get("given")
    if not isinstance(given, dict) or "from_drawing" not in given:
        return None
    values = given["from_drawing"]
    prefix = f"{table.prefix}.given"
    if isinstance(values, str):
        where, key, part = (
            Table({"from_drawing": values}, table.file, prefix, ("from_drawing",)),
            "from_drawing",
            None,
        )
    else:
        mend = 'write given.from_drawing = "part.drawing.toml", or { file = "…", part = "…" }'
        where, key = Table(values, table.file, f"{prefix}.from_drawing", ("file", "part"), mend), "file"
        part = where.text("part") if "part" in where else None
    drawing = table.file.parent / where.text(key)
    try:
        exists = drawing.is_file()
    except (OSError, ValueError):
        exists = False
    if not exists:
        raise where.fault(key, "no such drawing", "check the path; it is relative to the bench file")
    return DrawnFrom(drawing, part)


def decode_given(table: Table, kind: str, *, drawings: bool = False) -> dict[str, Given]:
    """Return the evidence on a standard's parameters; `drawings` lets a drawing stand among it."""
    if "given" not in table:
        return {}
    names = GIVEN_NAMES[kind]
    evidence = Table(
        table.values["given"],
        table.file,
        f"{table.prefix}.given",
        sorted({known for parameters in GIVEN_NAMES.values() for known in parameters})
        + (["from_drawing"] if drawings else []),
        "write for example given.offset_delay_ps = { value = 18.0, u = 0.5 }",
    )
    given = {}
    for name, entry in evidence.values.items():
        if name == "from_drawing":
            continue
        if name not in names:
            article = "an" if kind == "open" else "a"
            raise evidence.fault(name, f"{article} {kind} has no such parameter", suggestion("", names))
        above = 0.0 if name in _POSITIVE else None
        if isinstance(entry, dict):
            fields = Table(entry, table.file, f"{evidence.prefix}.{name}", ("value", "u"))
            value = fields.number("value", above=above)
            stated = Given(value, fields.number("u", above=0.0) if "u" in fields else None)
        else:
            stated = Given(evidence.as_number(name, entry, above=above))
        if max(abs(stated.value), stated.u or 0.0) > SENSELESS:
            raise evidence.fault(
                name, f"a figure above {SENSELESS:g}, which no part has", "check figure and unit"
            )
        given[name] = stated
    return given


def _check_shared(entry: StandardEntry, by_name: dict[str, StandardEntry], file: Path) -> None:
    """Follow same_offset_as to a standard that has an offset line of its own."""
    if entry.same_offset_as is None:
        return
    key = "same_offset_as"
    for parameter in _OFFSET:
        if parameter in entry.given:
            raise _fault(
                file,
                entry,
                f"given.{parameter}",
                f"stands beside same_offset_as = {quoted(entry.same_offset_as)}",
                "give it at that standard, or leave same_offset_as out",
            )
    seen = {entry.name}
    here = entry
    while here.same_offset_as is not None:
        target = here.same_offset_as
        if target not in by_name:
            raise _fault(
                file, here, key, f"there is no standard {quoted(target)}", suggestion(target, by_name)
            )
        if target in seen:
            what = (
                "the standard names itself"
                if target == here.name
                else "the standards name each other in a ring"
            )
            raise _fault(file, here, key, what, "let one of them have its own offset line")
        if by_name[target].from_kit is not None:
            raise _fault(
                file, here, key, f"{quoted(target)} comes from a kit", "name a standard of this bench"
            )
        seen.add(target)
        here = by_name[target]


def _fault(file: Path, entry: StandardEntry, key: str, what: str, mend: str) -> BenchError:
    """Return an error at a key of a standard."""
    return BenchError(what, mend, file=file, key=f"standard[{quoted(entry.name)[1:-1]}].{key}")
