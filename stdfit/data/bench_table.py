"""One table of a bench file: known keys, typed values, and errors that name the key."""

from collections.abc import Sequence
from datetime import date, datetime, time
from math import isfinite
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.words import quoted, suggestion

LONGEST_NAME = 200
LARGEST, SMALLEST = 1e15, 1e-30
"""Sizes of numbers in the trade's units; beyond them nothing is measured, and arithmetic has no room left."""
_KINDS = {
    bool: "true or false",
    int: "a whole number",
    float: "a number",
    str: "text",
    list: "a list",
    dict: "a table",
}


class Table:
    """A TOML table of which every key must be known.

    Parameters
    ----------
    values : object
        What the TOML parser gave; anything but a table is an error.
    file : path
        The bench file, for messages.
    prefix : str
        Dotted name of the table, for messages; empty for the whole file.
    known : sequence of str
        The keys that are allowed.
    mend : str
        What to do when it is no table.

    Raises
    ------
    BenchError
        Not a table, or an unknown key.
    """

    def __init__(self, values: object, file: Path, prefix: str, known: Sequence[str], mend: str = "") -> None:
        self.file, self.prefix = file, prefix
        if not isinstance(values, dict):
            raise BenchError(
                f"{_what(values)} where a table belongs", mend or f"write [{prefix}]", file=file, key=prefix
            )
        self.values: dict[str, object] = values
        for key in values:
            if key not in known:
                raise self.fault(key, "unknown key", suggestion(key, known))

    def fault(self, key: str, what: str, mend: str) -> BenchError:
        """Return an error at a key of this table."""
        shown = quoted(key)[1:-1]
        return BenchError(what, mend, file=self.file, key=f"{self.prefix}.{shown}" if self.prefix else shown)

    def __contains__(self, key: str) -> bool:
        return key in self.values

    def text(self, key: str, default: str | None = None) -> str:
        """Return a text of 1 to 200 characters without control characters."""
        value = self.values.get(key, default)
        if value is None:
            raise self.fault(key, "missing", f'write {key} = "…"')
        if not isinstance(value, str):
            raise self.fault(key, f"{_what(value)} where text belongs", "put it in quotes")
        if not value.strip():
            raise self.fault(key, "empty", "give a text")
        if len(value) > LONGEST_NAME:
            raise self.fault(key, f"longer than {LONGEST_NAME} characters", "shorten it")
        if not value.isprintable():
            raise self.fault(key, "holds a control character", "use plain text on one line")
        return value

    def choice(self, key: str, choices: Sequence[str], default: str | None = None, *, mend: str = "") -> str:
        """Return one of the known words; `mend` says what to do where the nearest of them would mislead."""
        value = self.text(key, default)
        if value not in choices:
            raise self.fault(key, f"{quoted(value)} is not known", mend or suggestion(value, choices))
        return value

    def number(self, key: str, default: float | None = None, *, above: float | None = None) -> float:
        """Return a finite number, larger than `above` when that is given."""
        if key not in self.values and default is None:
            raise self.fault(key, "missing", f"write {key} = a number")
        return self.as_number(key, self.values.get(key, default), above=above)

    def as_number(self, key: str, value: object, *, above: float | None = None) -> float:
        """Return `value` when it is a finite number of a sensible size, larger than `above` when that is given."""
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            mend = "take it out of the quotes" if isinstance(value, str) else "write a number"
            raise self.fault(key, f"{_what(value)} where a number belongs", mend)
        try:
            number = float(value)
        except OverflowError:
            number = float("inf")
        if not isfinite(number):
            raise self.fault(key, "not a finite number", "write a number")
        if abs(number) > LARGEST or 0.0 < abs(number) < SMALLEST:
            how = "large" if abs(number) > LARGEST else "small"
            raise self.fault(key, f"{number:g} is too {how} to be meant", "check figure and unit")
        if above is not None and number <= above:
            raise self.fault(key, f"{number:g} is not above {above:g}", f"write a number above {above:g}")
        return number

    def numbers(self, key: str, *, above: float | None = None) -> list[float]:
        """Return a list of finite numbers, at least one."""
        value = self.values.get(key)
        if value is None:
            raise self.fault(key, "missing", f"write {key} = [ … ]")
        if not isinstance(value, list):
            raise self.fault(key, f"{_what(value)} where a list belongs", "write a list of numbers in [ ]")
        if not value:
            raise self.fault(key, "the list is empty", "give at least one number")
        return [self.as_number(key, item, above=above) for item in value]

    def list_of(self, key: str, mend: str) -> list[object]:
        """Return a list with at least one item."""
        value = self.values.get(key)
        if value is None:
            raise self.fault(key, "missing", mend)
        if not isinstance(value, list):
            raise self.fault(key, f"{_what(value)} where a list belongs", mend)
        if not value:
            raise self.fault(key, "the list is empty", mend)
        return list(value)

    def day(self, key: str) -> str | None:
        """Return a date as text, written as a TOML date or as text; None when absent."""
        value = self.values.get(key)
        if value is None or isinstance(value, str):
            return None if value is None else self.text(key)
        if isinstance(value, (date, datetime)):
            return value.isoformat()
        raise self.fault(key, f"{_what(value)} where a date belongs", "write for example 2024-05-01")


def _what(value: object) -> str:
    """Name the kind of a TOML value in words."""
    if isinstance(value, (date, time)):
        return "a date or time"
    return next((words for kind, words in _KINDS.items() if isinstance(value, kind)), "something else")
