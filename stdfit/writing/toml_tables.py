"""TOML tables as they are written to files, so that reading one back and writing it again gives the same bytes."""

from collections.abc import Sequence
from typing import Any

import tomlkit


def table_of(**values: Any) -> Any:
    """Return a table with these keys, in their order."""
    table = tomlkit.table()
    for key, value in values.items():
        table.add(key, printable(value))
    return table


def printable(value: Any) -> Any:
    """Return texts without characters that the reader refuses; a file of readings may have any name."""
    if isinstance(value, str):
        return "".join(letter if letter.isprintable() else "\N{REPLACEMENT CHARACTER}" for letter in value)
    if isinstance(value, list) and all(isinstance(item, str) for item in value):
        return [printable(item) for item in value]
    if isinstance(value, list) and all(isinstance(item, float) for item in value):
        return numbers_of(value)
    return value


def numbers_of(values: Sequence[float]) -> Any:
    """Return a list of numbers with all their digits; to add them one by one takes the square of their number."""
    return tomlkit.array(f"[{', '.join(map(repr, values))}]")


def tables_of(items: Any) -> Any:
    """Return a list of tables."""
    tables = tomlkit.aot()
    for item in items:
        tables.append(item)
    return tables


def rows_below_each_other(rows: Any) -> Any:
    """Return a list of lists, each on a line of its own."""
    listed = tomlkit.array()
    for row in rows:
        listed.append(numbers_of(row))
    listed.multiline(True)
    return listed
