"""Touchstone text to a sweep of one reflection coefficient."""

import re
from collections.abc import Callable

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.data.immittance import gamma_from_admittance, gamma_from_impedance
from stdfit.data.plain_text import plain_text
from stdfit.data.rows import Block, line_of_row, parse_rows
from stdfit.data.soundness import HIGHEST_MAGNITUDE, check_sweep
from stdfit.data.touchstone_header import Header, another_option_line, parse_header

_SUFFIX = re.compile(r"\.s([0-9]+)p\Z", re.IGNORECASE)
_LINE_END = re.compile(rb"[\r\n]")
_NEXT_KEYWORD = re.compile(rb"[\r\n][ \t]*\[")
_NOISE_COLUMNS = 5
_TAKEN_PORTS = "export the one port (or two ports) with the standard"


def parse_touchstone(
    raw: bytes, name: str, port: int = 1, *, highest_magnitude: float = HIGHEST_MAGNITUDE
) -> Sweep:
    """Return the reflection at one port of a one-port or two-port Touchstone file, version 1.x or 2.x.

    Parameters
    ----------
    raw : bytes
        The content of the file.
    name : str
        The file's name, for messages; its suffix also tells the number of ports.
    port : int
        1 takes S11, 2 takes S22.
    highest_magnitude : float
        Largest |Γ| that is let through.

    Returns
    -------
    Sweep
        With the file's own reference resistance.

    Raises
    ------
    ReadingError
        The file is not sound; the message names the line.
    RequestError
        `port` is neither 1 nor 2.

    Notes
    -----
    Touchstone File Format Specification 1.1 (2002) and 2.0 (2009), IBIS Open Forum. Impedance and admittance
    data are normalised in version 1 and in ohms or siemens in version 2.
    """
    if port not in (1, 2):
        raise RequestError(f"port {port} was asked for", "take port 1 or 2")
    suffix = _SUFFIX.search(name)
    named_ports = int(suffix[1][:9]) if suffix else None
    if named_ports is not None and named_ports > 2:
        raise ReadingError(f"a file of {named_ports} ports by its name", _TAKEN_PORTS, file=name)
    text = plain_text(raw, name)
    header = parse_header(text, name)
    block = _block(header, text)
    ports = 1 if block.columns == 3 else 2
    if port > ports:
        raise ReadingError("the file holds one port, and port 2 was asked for", "take port 1", file=name)
    rows = parse_rows(block)
    if header.points is not None and header.points != len(rows.values):
        raise ReadingError(
            f"[Number of Frequencies] is {header.points}, but there are {len(rows.values)} rows",
            "the file may be cut short; export it again",
            file=name,
        )
    notes = []
    if named_ports is not None and named_ports != ports:
        notes.append(f"the name says {named_ports} port(s), the rows hold {ports}")
    if rows.noise_left_out:
        notes.append("noise parameters were left out")
    if another_option_line(header, text):
        notes.append("a later option line says otherwise; the first one counts, as the format wants it")
    if header.parameter != "S":
        notes.append(f"reflection computed from {header.parameter} parameters")

    def line_of(row: int) -> int | None:
        return line_of_row(block, row)

    sweep = Sweep(
        frequency_hz=rows.values[:, 0] * header.unit,
        gamma=_reflection(header, rows.values, ports, port, line_of),
        reference_ohm=header.reference_ohm[port - 1 if len(header.reference_ohm) > 1 else 0],
        name=name,
        notes=tuple(notes),
    )
    check_sweep(sweep, line_of=line_of, highest_magnitude=highest_magnitude)
    return sweep


def _block(header: Header, text: bytes) -> Block:
    """Cut out the numbers, and find how many stand in a row."""
    if header.version == 2:
        end = _NEXT_KEYWORD.search(text, header.start - 1)
        text = text[: end.start()] if end else text
    columns = _columns(header, text)
    return Block(
        text=text,
        start=header.start,
        name=header.name,
        first_line=header.first_line,
        columns=columns,
        noise_columns=_NOISE_COLUMNS if columns == 9 and header.version == 1 else None,
        expected=(
            "a one-port row holds a frequency and two numbers on one line"
            if columns == 3
            else "a two-port row stands on one line; for three or more ports, " + _TAKEN_PORTS
        ),
    )


def _columns(header: Header, text: bytes) -> int:
    """How many numbers a row must have: told by the header, or by the first row."""
    if header.ports == 1:
        return 3
    if header.ports == 2:
        return 9 if header.matrix == "FULL" else 7
    end = _LINE_END.search(text, header.start)
    first = text[header.start : end.start() if end else None].partition(b"!")[0].split()
    if len(first) not in (3, 9) and any(token.endswith(b",") or token.count(b",") > 1 for token in first):
        raise header.refuse(
            header.first_line, "the numbers are parted by commas", "part them by spaces, or write a CSV file"
        )
    if len(first) not in (3, 9):
        raise header.refuse(
            header.first_line,
            f"the first row has {len(first)} columns",
            "a one-port row has 3 and a two-port row 9; for three or more ports, " + _TAKEN_PORTS,
        )
    return len(first)


def _reflection(
    header: Header, rows: FloatArray, ports: int, port: int, line_of: Callable[[int], int | None]
) -> ComplexArray:
    """Return Γ at the asked port from rows of shape (n, columns)."""
    if header.number_format == "MA":
        _check_magnitudes(header, rows, ports, port, line_of)
    if header.parameter == "S":
        column = 1 if port == 1 else rows.shape[1] - 2
        return pairs_to_complex(rows[:, column], rows[:, column + 1], header.number_format)
    values = [
        pairs_to_complex(rows[:, c], rows[:, c + 1], header.number_format) for c in range(1, rows.shape[1], 2)
    ]
    if len(values) == 3:  # a triangle: the two transfer terms are equal
        values.insert(1, values[1])
    matrix = np.stack(values, axis=-1).reshape(-1, ports, ports)
    if header.version == 2:
        resistance = np.resize(np.array(header.reference_ohm), ports)
        root = np.sqrt(np.outer(resistance, resistance))
        matrix = matrix / root if header.parameter == "Z" else matrix * root
    if port == 2:
        matrix = matrix[:, ::-1, ::-1]
    return gamma_from_impedance(matrix) if header.parameter == "Z" else gamma_from_admittance(matrix)


def pairs_to_complex(first: FloatArray, second: FloatArray, number_format: str) -> ComplexArray:
    """Return complex values from pairs.

    RI: x + jy.  MA: x e^{jy}, y in degrees.  DB: 10^{x/20} e^{jy}, y in degrees.

    Parameters
    ----------
    first, second : arrays of shape (n,)
        Real and imaginary part, magnitude and degrees, or decibels and degrees.
    number_format : str
        "RI", "MA" or "DB".

    Returns
    -------
    complex array of shape (n,)
    """
    result = np.empty(len(first), dtype=np.complex128)
    if number_format == "RI":
        result.real, result.imag = first, second
        return result
    with np.errstate(over="ignore", invalid="ignore"):
        magnitude = 10.0 ** (first / 20.0) if number_format == "DB" else first
        angle = np.deg2rad(second)
        result.real, result.imag = magnitude * np.cos(angle), magnitude * np.sin(angle)
    return result


def _check_magnitudes(
    header: Header, rows: FloatArray, ports: int, port: int, line_of: Callable[[int], int | None]
) -> None:
    """Refuse a magnitude below zero: such a column holds decibels or real parts."""
    column = 1 if port == 1 else rows.shape[1] - 2
    negative = rows[:, column] < 0
    if negative.any():
        row = int(np.argmax(negative))
        raise ReadingError(
            f"the magnitude {rows[row, column]:g} is below zero",
            "the option line says MA; check whether the numbers are DB or RI",
            file=header.name,
            line=line_of(row),
        )
