"""Adapter files: a determined adapter as TOML, so that reading one back and writing it again gives the same bytes."""

from pathlib import Path

import numpy as np
import tomlkit

from stdfit.data.ordinary import beginning
from stdfit.validity.adapter import S_NAMES, Adapter
from stdfit.validity.thru import LINE_TERMS, LineTerm
from stdfit.writing.toml_tables import rows_below_each_other, table_of, tables_of

FORMAT = "stdfit-adapter/1"

HEAD = """An adapter: a reciprocal two-port that was determined from known standards behind it, with 95 % bounds.
Written by stdfit; the format is described in docs/files.md of the program."""

TERM_NAMES = ("term_0", "term_1", "term_2")
"""The error on a standard behind it is term_0 + term_1·Γ + term_2·Γ²."""


def adapter_text(adapter: Adapter) -> str:
    """Return the text of an adapter file."""
    document = tomlkit.document()
    for line in HEAD.splitlines():
        document.add(tomlkit.comment(line))
    document.add("format", tomlkit.item(FORMAT))
    document.add(
        "adapter",
        table_of(
            name=adapter.name,
            reference_impedance_ohm=adapter.reference_ohm,
            created=adapter.created,
            program_version=adapter.version,
            degrees_of_freedom=adapter.freedom,
            warnings=list(adapter.warnings),
        ),
    )
    document.add("line", line_table(adapter.line))
    parts = {"frequency_hz": adapter.frequency_hz.tolist()}
    for k, name in enumerate(S_NAMES):
        parts[f"{name}_re"] = adapter.s[:, k].real.tolist()
        parts[f"{name}_im"] = adapter.s[:, k].imag.tolist()
    document.add("s_parameters", table_of(**parts))
    bounds = zip(
        (*S_NAMES, *TERM_NAMES), np.hstack([adapter.s_bounds, adapter.term_bounds]).T.tolist(), strict=True
    )
    document.add("bound", table_of(frequency_hz=adapter.known_hz.tolist(), **dict(bounds)))
    low = np.tril_indices(6)
    document.add(
        "covariance",
        table_of(lower_triangles=rows_below_each_other(one[low].tolist() for one in adapter.covariance)),
    )
    document.add(
        "file",
        tables_of(table_of(standard=one.standard, name=one.file, sha256=one.sha256) for one in adapter.files),
    )
    document.add(
        "ancestor",
        tables_of(
            table_of(name=one.name, created=one.created, sha256=one.sha256, of=one.of)
            for one in adapter.ancestors
        ),
    )
    return tomlkit.dumps(document)


def line_table(line: tuple[LineTerm, LineTerm, LineTerm], **more: str) -> tomlkit.items.Table:
    """Return delay, loss and impedance as tables in a table, below other keys."""
    table: tomlkit.items.Table = table_of(**more)
    for (name, _), one in zip(LINE_TERMS, line, strict=True):
        table.add(name, table_of(value=one.value, u=one.u, low_95=one.low, high_95=one.high))
    return table


def is_adapter_file(path: Path) -> bool:
    """Return whether a file says of itself, near its top, that it is an adapter file."""
    return b'format = "stdfit-adapter/' in beginning(path, 4096)
