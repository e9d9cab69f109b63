"""TOML tables as they are written to files, so that reading one back and writing it again gives the same bytes."""

from collections.abc import Iterable, Sequence
from typing import Any

import tomlkit
from tomlkit.items import Item, Trivia


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


class _Numbers(Item):
    """Numbers in their final form: a library that looks at each of them takes longer than the fit."""

    def __init__(self, text: str) -> None:
        super().__init__(Trivia())
        self._text = text

    @property
    def discriminant(self) -> int:
        """What tomlkit tells lists by."""
        return 8

    @property
    def value(self) -> str:
        """The text."""
        return self._text

    def unwrap(self) -> str:
        """Return the text."""
        return self._text

    def as_string(self) -> str:
        """Return the text."""
        return self._text

    def _getstate(self, protocol: int = 3) -> tuple[str]:
        return (self._text,)


def numbers_of(values: Sequence[float]) -> Any:
    """Return a list of numbers with all their digits."""
    return _Numbers(_listed(values))


def _listed(values: Sequence[float]) -> str:
    return f"[{', '.join(map(repr, values))}]"


def tables_of(items: Any) -> Any:
    """Return a list of tables."""
    tables = tomlkit.aot()
    for item in items:
        tables.append(item)
    return tables


def rows_below_each_other(rows: Iterable[Sequence[float]]) -> Any:
    """Return a list of lists of numbers, each on a line of its own."""
    lines = [f"    {_listed(row)}," for row in rows]
    return _Numbers("\n".join(["[", *lines, "]"]))
