"""The [[adapter]] tables of a bench file, the keys that name them, and [thru]."""

from collections.abc import Iterable
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.bench_records import AdapterEntry, Given, StandardEntry
from stdfit.data.bench_table import Table
from stdfit.data.words import quoted, suggestion

_MEND = "describe each adapter in an [[adapter]] table"
_KEYS = ("name", "file", "delay_ps", "loss_db", "z0_ohm")
_ESTIMATES = ("delay_ps", "loss_db", "z0_ohm")

LOSS_U_PART = 0.5
"""Standard uncertainty of a loss that is given without one, as part of the loss."""


def decode_adapters(whole: Table) -> tuple[AdapterEntry, ...]:
    """Return the adapters of a bench; none where it has no such tables.

    Raises
    ------
    BenchError
        A fault in one of them, or two of one name.
    """
    if "adapter" not in whole:
        return ()
    adapters: dict[str, AdapterEntry] = {}
    for place, item in enumerate(whole.list_of("adapter", _MEND), start=1):
        name = item.get("name") if isinstance(item, dict) else None
        shown = quoted(name)[1:-1] if isinstance(name, str) and name.strip() else f"#{place}"
        table = Table(item, whole.file, f"adapter[{shown}]", _KEYS, _MEND)
        entry = _decode(table)
        if entry.name in adapters:
            raise table.fault("name", "two adapters have this name", "give each its own name")
        adapters[entry.name] = entry
    return tuple(adapters.values())


def _decode(table: Table) -> AdapterEntry:
    name = table.text("name")
    if "file" in table:
        for key in _ESTIMATES:
            if key in table:
                raise table.fault(key, "stands beside file, which already tells it", "leave one of them out")
        return AdapterEntry(name, file=_file(table))
    if "delay_ps" not in table:
        for key in ("loss_db", "z0_ohm"):
            if key in table:
                raise table.fault(
                    key, "stands without delay_ps", "write delay_ps = { value = …, u = … } beside it"
                )
        return AdapterEntry(name)
    delay, loss = _estimate(table, "delay_ps", 0.0), None
    if delay.u is None:
        raise table.fault("delay_ps", "stands without u", "write delay_ps = { value = …, u = … }")
    if "loss_db" in table:
        loss = _estimate(table, "loss_db", None)
        if loss.value < 0.0:
            raise table.fault("loss_db", f"{loss.value:g} is below 0", "write the loss as a number above 0")
        if loss.u is None and loss.value == 0.0:
            raise table.fault("loss_db", "0 stands without u", "write loss_db = { value = 0, u = … }")
        if loss.u is None:
            loss = Given(loss.value, LOSS_U_PART * loss.value)
    z0 = _estimate(table, "z0_ohm", 0.0) if "z0_ohm" in table else None
    if z0 is not None and z0.u is None:
        raise table.fault("z0_ohm", "stands without u", "write z0_ohm = { value = …, u = … }")
    return AdapterEntry(name, delay_ps=delay, loss_db=loss, z0_ohm=z0)


def _estimate(table: Table, key: str, above: float | None) -> Given:
    """Return a value with its standard uncertainty, where there is one."""
    entry = table.values[key]
    if not isinstance(entry, dict):
        return Given(table.as_number(key, entry, above=above))
    fields = Table(entry, table.file, f"{table.prefix}.{key}", ("value", "u"))
    u = fields.number("u", above=0.0) if "u" in fields else None
    return Given(fields.number("value", above=above), u)


def _file(table: Table) -> Path:
    """Return the adapter file, which must be there."""
    path = table.file.parent / table.text("file")
    try:
        exists = path.is_file()
    except (OSError, ValueError):
        exists = False
    if not exists:
        raise table.fault("file", "no such adapter file", "check the path; it is relative to the bench file")
    return path


def decode_thru(whole: Table) -> str | None:
    """Return the name of the adapter that is the kit's thru, or None.

    Raises
    ------
    BenchError
    """
    if "thru" not in whole:
        return None
    return Table(whole.values["thru"], whole.file, "thru", ("adapter",)).text("adapter")


def check_named(
    file: Path,
    adapters: Iterable[AdapterEntry],
    standards: Iterable[StandardEntry],
    calibrated_with: str | None,
    thru: str | None,
) -> None:
    """Refuse names of adapters that no table describes, and adapters that nothing names.

    Parameters
    ----------
    file : path
        The bench file, for messages.
    adapters, standards : iterables
    calibrated_with, thru : str or None
        As the bench names them.

    Raises
    ------
    BenchError
    """
    known = {one.name: one for one in adapters}
    named = [
        (f"standard[{quoted(one.name)[1:-1]}].behind", one.behind)
        for one in standards
        if one.behind is not None
    ]
    if calibrated_with is not None:
        for key, name in named:
            if name == calibrated_with:
                raise BenchError(
                    f"the analyser was calibrated with {quoted(name)} too: such readings need no adapter",
                    "leave out behind here and calibrated_with at the analyser, or name another adapter",
                    file=file,
                    key=key,
                )
        named.append(("analyser.calibrated_with", calibrated_with))
    if thru is not None:
        named.append(("thru.adapter", thru))
    for key, name in named:
        if name not in known:
            mend = suggestion(name, list(known)) if known else _MEND
            raise BenchError(f"there is no adapter {quoted(name)}", mend, file=file, key=key)
    for name in known:
        if name not in {used for _, used in named}:
            raise BenchError(
                "nothing on the bench names this adapter",
                f'write behind = "{name}" at a standard, or leave the table out',
                file=file,
                key=f"adapter[{quoted(name)[1:-1]}]",
            )
    if thru is not None and known[thru].file is None:
        raise BenchError(
            f"{quoted(thru)} is an estimate, and a thru must be determined",
            "determine it with 'stdfit adapter BENCH', and name its file in the [[adapter]] table",
            file=file,
            key="thru.adapter",
        )
