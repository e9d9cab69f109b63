"""A block of numbers, parsed in one fast pass; when that fails a slow pass finds the line at fault."""

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass
from io import BytesIO

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import ReadingError
from stdfit.data.words import quoted

_NUMBER = re.compile(rb"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[EeDd][+-]?[0-9]+)?\Z")
_NOT_FINITE = re.compile(rb"[+-]?(?:nan|inf|infinity|nan\(ind\)|1\.#\w+)\Z", re.IGNORECASE)
_DECIMAL_COMMA = re.compile(rb"[+-]?[0-9]+,[0-9]+(?:[EeDd][+-]?[0-9]+)?\Z")
_LINE_END = re.compile(rb"\r\n|\r|\n|\Z")
_COMMENTS = {b"!": re.compile(rb"![^\r\n]*"), b"#": re.compile(rb"(?<![^\r\n])[ \t]*#[^\r\n]*")}


@dataclass(frozen=True, slots=True, eq=False)
class Block:
    """The part of a file that holds the numbers.

    Attributes
    ----------
    text : bytes
        The file as plain ASCII.
    start : int
        Where in `text` the numbers begin; they go on to its end.
    name : str
        The file's name, for messages.
    first_line : int
        The line of the file on which `start` lies, counted from 1.
    columns : int
        How many numbers a row must have.
    separator : bytes or None
        What stands between numbers; None for white space.
    comment : bytes
        What begins a comment: "!" anywhere in a line, "#" at the beginning of one.
    keep : tuple of int or None
        The columns that are wanted; None for all.
    noise_columns : int or None
        Rows of so many numbers whose frequency does not rise end the block (noise parameters).
    expected : str
        What a row should hold, for messages.
    """

    text: bytes
    start: int
    name: str
    first_line: int
    columns: int
    separator: bytes | None = None
    comment: bytes = b"!"
    keep: tuple[int, ...] | None = None
    noise_columns: int | None = None
    expected: str = ""


@dataclass(frozen=True, slots=True, eq=False)
class Rows:
    """Numbers of shape (rows, columns), and whether noise rows were left out after them."""

    values: FloatArray
    noise_left_out: bool = False


def parse_rows(block: Block) -> Rows:
    """Return the numbers of a block.

    Raises
    ------
    ReadingError
        A row with another number of columns, or something that is not a finite number.
    """
    values = _fast(block)
    return Rows(values) if values is not None else _slow(block)


def line_of_row(block: Block, row: int) -> int | None:
    """Return the line of the file on which a row (counted from 0) of a block stands."""
    for count, (line, _) in enumerate(_fields(block)):
        if count == row:
            return line
    return None


def _fast(block: Block) -> FloatArray | None:
    """Parse with pandas' C engine; None when anything is out of the ordinary."""
    import pandas as pd

    # The text is handed over as it is where possible: copying megabytes costs a tenth of the parse.
    text, start = block.text, block.start
    if text.find(block.comment, start) >= 0:
        text, start = _COMMENTS[block.comment].sub(b"", text[start:]), 0
    first = next(_fields(block), None)
    # A column of the words True or False would pass for numbers, so the first row is looked at here.
    if first is None or len(first[1]) != block.columns:
        return None
    if not all(_NUMBER.match(first[1][i]) for i in _kept(block)):
        return None
    # The parser is faster by a third on single spaces than on any white space; it fails on a mixture.
    beginning = text[start : start + 4096]
    if block.separator is not None:
        marks = [block.separator.decode("ascii")]
    elif b"  " in beginning or b"\t" in beginning:
        marks = [r"\s+"]
    else:
        marks = [" ", r"\s+"]
    kept = _kept(block)
    whole = len(kept) == block.columns
    for mark in marks:
        source = BytesIO(text)
        source.seek(start)
        try:
            # All columns are read, also those that nobody wants: with `usecols` the parser would cut long rows off,
            # and a decimal comma makes a row longer.
            frame = pd.read_csv(
                source,
                sep=mark,
                header=None,
                engine="c",
                dtype=np.float64
                if whole
                else {k: np.float64 if k in kept else object for k in range(block.columns)},
                na_filter=False,
                quoting=csv.QUOTE_NONE,
            )
        except (ValueError, OverflowError):  # ParserError and EmptyDataError are ValueErrors
            continue
        if frame.shape[1] != block.columns:
            continue
        values: FloatArray = frame.to_numpy() if whole else frame[kept].to_numpy(dtype=np.float64)
        if np.isfinite(values).all() and not _short_rows(block, text, start, len(values)):
            return values
        return None
    return None


def _short_rows(block: Block, text: bytes, start: int, rows: int) -> bool:
    """Tell whether a row lacks fields: the parser fills them up, which shows only in the columns that are kept."""
    if block.separator is None:
        return False
    return text.count(block.separator, start) != (block.columns - 1) * rows


def _slow(block: Block) -> Rows:
    """Parse line by line in Python, for rare spellings and to name the faulty line."""
    rows: list[list[float]] = []
    noise = False
    for line, fields in _fields(block):
        if len(fields) != block.columns:
            if rows and len(fields) == block.noise_columns and _falls(fields[0], rows[-1][0]):
                noise = True
                break
            raise _wrong_columns(block, line, fields)
        rows.append([_number(block, line, fields[i]) for i in _kept(block)])
    if not rows:
        raise ReadingError("the file holds no numbers", "export the readings again", file=block.name)
    return Rows(np.array(rows, dtype=np.float64), noise)


def _kept(block: Block) -> list[int]:
    """The wanted columns in rising order."""
    return list(range(block.columns)) if block.keep is None else sorted(block.keep)


def _fields(block: Block) -> Iterator[tuple[int, list[bytes]]]:
    """Give the line number and the fields of each line that holds anything but comments."""
    start, line = block.start, block.first_line
    for match in _LINE_END.finditer(block.text, start):
        text = block.text[start : match.start()]
        start = match.end()
        if block.comment == b"!":
            text = text.partition(b"!")[0]
        blank = text.strip()
        # A later option line has no meaning (Touchstone 1.1): the first one counts.
        if blank and not blank.startswith(b"#"):
            fields = blank.split()
            if block.separator is not None:
                # Only spaces go from the ends of the line: tabs may stand there for empty fields.
                fields = [field.strip().strip(b'"') for field in text.strip(b" ").split(block.separator)]
            yield line, fields
        line += 1


def _falls(token: bytes, before: float) -> bool:
    """Tell whether a frequency does not rise above the one before."""
    return bool(_NUMBER.match(token)) and float(re.sub(rb"[Dd]", b"e", token)) <= before


def _number(block: Block, line: int, token: bytes) -> float:
    """Return one number, or raise an error that says what is wrong with it."""
    if _NUMBER.match(token):
        value = float(re.sub(rb"[Dd]", b"e", token))
        if np.isfinite(value):
            return value
    if _NUMBER.match(token) or _NOT_FINITE.match(token):
        what, mend = f"{quoted(token)} is not a finite number", "take the reading again, or delete the line"
    elif _DECIMAL_COMMA.match(token):
        what, mend = f"{quoted(token)} has a decimal comma", "export with decimal points"
    elif not token:
        what, mend = "a field is empty", "fill it, or delete the line"
    else:
        what, mend = f"{quoted(token)} is not a number", "delete the line, or make it a comment"
    raise ReadingError(what, mend, file=block.name, line=line)


def _wrong_columns(block: Block, line: int, fields: list[bytes]) -> ReadingError:
    """Say why a row has the wrong number of columns."""
    for token in fields[: block.columns]:
        if not _NUMBER.match(token):
            try:
                _number(block, line, token)
            except ReadingError as fault:
                return fault
    noun = "number" if len(fields) == 1 else "numbers"
    return ReadingError(
        f"the row has {len(fields)} {noun} where {block.columns} belong",
        block.expected or "give every row the same columns",
        file=block.name,
        line=line,
    )
