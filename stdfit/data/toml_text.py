"""TOML text written by people: bench, drawing and repeatability files."""

import re
import tomllib
from pathlib import Path
from typing import Any

from stdfit.base.errors import BenchError
from stdfit.data.words import quoted

_SINGLE = re.compile(r"\s*\[\s*(standard|device|adapter|part|repeatability)\s*\]\s*(?:#.*)?")


def parse_toml(text: str, path: Path) -> dict[str, Any]:
    """Return what a TOML text says.

    Raises
    ------
    BenchError
        It is no TOML; the message names the line where that is known.
    """
    try:
        return tomllib.loads(text)
    except RecursionError as fault:
        raise BenchError("too deeply nested", "write plain tables and lists", file=path) from fault
    except ValueError as fault:  # TOMLDecodeError is one; so is an endless integer
        message = str(fault)
        place = re.search(r" \(at line ([0-9]+), column ([0-9]+)\)\Z", message)
        at_end = message.endswith("(at end of document)")
        what = re.sub(r" \(at [^()]*\)\Z", "", message).split(" (")[0].split(";")[0]
        line = int(place[1]) if place else len(text.splitlines()) if at_end else None
        single = _SINGLE.fullmatch(_line_of(text, line))
        if single is not None:
            raise BenchError(
                f"[{single[1]}] stands in single brackets, and there are several",
                f"write [[{single[1]}]], in two pairs of brackets, at each of them",
                file=path,
                line=line,
            ) from fault
        column = f", column {place[2]}" if place else ""
        raise BenchError(
            f"not valid TOML{column}: {quoted(what, 100)[1:-1]}",
            "mend the line; text needs quotes, and numbers a decimal point",
            file=path,
            line=line,
        ) from fault


def _line_of(text: str, line: int | None) -> str:
    lines = text.splitlines()
    return lines[line - 1] if line is not None and 0 < line <= len(lines) else ""
