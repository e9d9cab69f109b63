"""CSV text with named columns to a sweep."""

import re
from dataclasses import dataclass

import numpy as np

from stdfit.base.errors import ReadingError
from stdfit.base.records import Sweep
from stdfit.data.plain_text import plain_text
from stdfit.data.rows import Block, line_of_row, parse_rows
from stdfit.data.soundness import HIGHEST_MAGNITUDE, check_sweep
from stdfit.data.touchstone import pairs_to_complex
from stdfit.data.words import quoted, suggestion

_FREQUENCY = {"frequency_hz": 1.0, "frequency_khz": 1e3, "frequency_mhz": 1e6, "frequency_ghz": 1e9}
_PAIRS = {
    ("gamma_re", "gamma_im"): "RI",
    ("s11_re", "s11_im"): "RI",
    ("magnitude", "phase_deg"): "MA",
    ("magnitude_db", "phase_deg"): "DB",
}
_VALUES = list(dict.fromkeys(column for pair in _PAIRS for column in pair))
_EXPECTED = (
    "name a frequency column (frequency_hz, _khz, _mhz or _ghz) and a pair: gamma_re,gamma_im or "
    "s11_re,s11_im or magnitude,phase_deg or magnitude_db,phase_deg"
)


@dataclass(frozen=True, slots=True, eq=False)
class _Names:
    """What the header line says."""

    columns: int
    frequency: int
    unit: float
    first: int
    second: int
    number_format: str


def parse_columns(raw: bytes, name: str, *, highest_magnitude: float = HIGHEST_MAGNITUDE) -> Sweep:
    """Return the reflection that a CSV file with named columns holds, in 50 Ω.

    Parameters
    ----------
    raw : bytes
        The content of the file: columns parted by commas, semicolons or tabs, decimal points, one header line
        of names, and lines that begin with '#' as comments.
    name : str
        The file's name, for messages.
    highest_magnitude : float
        Largest |Γ| that is let through.

    Raises
    ------
    ReadingError
        The file is not sound; the message names the line.
    """
    text = plain_text(raw, name)
    header, number, start = _header_line(text, name)
    separator = next((mark for mark in (b";", b"\t") if mark in header), b",")
    names = _read_names(header.split(separator), name, number)
    keep = (names.frequency, names.first, names.second)
    block = Block(
        text=text,
        start=start,
        name=name,
        first_line=number + 1,
        columns=names.columns,
        separator=separator,
        comment=b"#",
        keep=keep,
        expected="give every row one field for each name of the header; use decimal points",
    )
    rows = parse_rows(block).values
    place = {column: i for i, column in enumerate(sorted(keep))}
    first, second = rows[:, place[names.first]], rows[:, place[names.second]]

    def line_of(row: int) -> int | None:
        return line_of_row(block, row)

    if names.number_format == "MA" and (first < 0).any():
        row = int(np.argmax(first < 0))
        raise ReadingError(
            f"the magnitude {first[row]:g} is below zero",
            "if these are decibels, name the column magnitude_db",
            file=name,
            line=line_of(row),
        )
    sweep = Sweep(
        frequency_hz=rows[:, place[names.frequency]] * names.unit,
        gamma=pairs_to_complex(first, second, names.number_format),
        name=name,
    )
    check_sweep(sweep, line_of=line_of, highest_magnitude=highest_magnitude)
    return sweep


def _header_line(text: bytes, name: str) -> tuple[bytes, int, int]:
    """Return the line of names, its number, and where the next line begins."""
    for number, match in enumerate(re.finditer(rb"([^\r\n]*)(\r\n|\r|\n|\Z)", text), start=1):
        line = match[1].strip(b" ")
        if line.strip() and not line.startswith(b"#"):
            return line, number, match.end()
    raise ReadingError("the file holds no header line", _EXPECTED, file=name)


def _read_names(fields: list[bytes], name: str, number: int) -> _Names:
    """Find the frequency column and one pair of value columns."""
    written = [field.decode("ascii").strip().strip('"').strip() for field in fields]
    plain = [_plain(word) for word in written]
    known = [*_FREQUENCY, *_VALUES]
    for word in known:
        if plain.count(word) > 1:
            raise ReadingError(f"the column {quoted(word)} comes twice", "leave one", file=name, line=number)
    frequencies = [word for word in plain if word in _FREQUENCY]
    pairs = [pair for pair in _PAIRS if pair[0] in plain and pair[1] in plain]
    if len(frequencies) == 1 and pairs:
        first, second = pairs[0]
        return _Names(
            columns=len(fields),
            frequency=plain.index(frequencies[0]),
            unit=_FREQUENCY[frequencies[0]],
            first=plain.index(first),
            second=plain.index(second),
            number_format=_PAIRS[pairs[0]],
        )
    if len(frequencies) > 1:
        raise ReadingError(
            "the header names more than one frequency column", "leave one", file=name, line=number
        )
    strange = [word for word, key in zip(written, plain, strict=True) if key not in known]
    if strange:
        what = f"the header has the unknown column {quoted(strange[0])}"
        hint = suggestion(_plain(strange[0]), known)
        mend = f"{hint} {_EXPECTED}" if hint.startswith("did you") else _EXPECTED
    else:
        what, mend = "the header lacks a frequency column or a pair of value columns", _EXPECTED
    raise ReadingError(what, mend, file=name, line=number)


def _plain(word: str) -> str:
    """A column name in lower case, words joined by '_': "Frequency (MHz)" becomes frequency_mhz."""
    return "_".join(re.findall(r"[a-z0-9]+", word.lower()))
