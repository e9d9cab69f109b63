"""From a path to a sound sweep in the reference impedance of the bench."""

import errno
import os
import re
import stat
from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import ReadingError
from stdfit.base.records import Sweep
from stdfit.data.columns import parse_columns
from stdfit.data.exported import refuse_exported
from stdfit.data.ordinary import LARGEST_BYTES
from stdfit.data.soundness import HIGHEST_MAGNITUDE
from stdfit.data.touchstone import parse_touchstone
from stdfit.data.words import nearest, quoted

_TOUCHSTONE_SUFFIX = re.compile(r"\.(s[0-9]+p|ts)\Z", re.IGNORECASE)
_TOUCHSTONE_START = re.compile(
    rb"\A(?:\s|![^\r\n]*(?:[\r\n]|\Z))*(\[|#[ \t]*([kmg]?hz|[syzgh]|ri|ma|db|r)\b)", re.IGNORECASE
)
_NUMBERS_START = re.compile(rb"\A(?:\s|![^\r\n]*(?:[\r\n]|\Z))*[-+.0-9]")


def read_reading(
    path: Path | str,
    *,
    port: int = 1,
    reference_ohm: float = 50.0,
    highest_magnitude: float = HIGHEST_MAGNITUDE,
    exported: bool = False,
) -> Sweep:
    """Return the readings of a Touchstone or CSV file, with respect to `reference_ohm`.

    Parameters
    ----------
    path : path
        The file; its name becomes the sweep's name.
    port : int
        1 takes S11, 2 takes S22 of a two-port file.
    reference_ohm : float
        Reference impedance that is wanted, in ohms.
    highest_magnitude : float
        Largest |Γ| that is let through; raw readings may ask for more than the default.
    exported : bool
        Let definitions through that an export wrote; they are no readings.

    Raises
    ------
    ReadingError
        The file cannot be read, is not sound, or is an exported definition.
    RequestError
        `port` is neither 1 nor 2.
    """
    path = Path(path)
    raw = _read_bytes(path)
    name = str(path)
    if not exported:
        refuse_exported(raw, path)
    if _is_touchstone(raw, name):
        sweep = parse_touchstone(raw, name, port, highest_magnitude=highest_magnitude)
    elif port != 1:
        raise ReadingError(
            f"a CSV file holds one port, and port {port} was asked for", "take port 1", file=name
        )
    else:
        sweep = parse_columns(raw, name, highest_magnitude=highest_magnitude)
    if sweep.reference_ohm == reference_ohm:
        return sweep
    note = f"changed from {sweep.reference_ohm.real:g} Ω to {reference_ohm:g} Ω"
    gamma = renormalise(sweep.gamma, sweep.reference_ohm, reference_ohm)
    return replace(sweep, gamma=gamma, reference_ohm=complex(reference_ohm), notes=(*sweep.notes, note))


def renormalise(gamma: ComplexArray, from_ohm: complex, to_ohm: complex) -> ComplexArray:
    """Return a reflection coefficient with respect to another reference impedance.

    Γ = (Z − Zr)/(Z + Zr) (travelling waves; power waves would have the conjugate Zr* above).
    So Γ' = [Za(1+Γ) − Zb(1−Γ)] / [Za(1+Γ) + Zb(1−Γ)], which also holds for an ideal open.

    Parameters
    ----------
    gamma : complex array of shape (n,)
        Γ with respect to `from_ohm`.
    from_ohm, to_ohm : complex
        Za and Zb in ohms.

    Returns
    -------
    complex array of shape (n,)

    Notes
    -----
    R. B. Marks, D. F. Williams, J. Res. NIST 97(5), 1992, 533–562 (pseudo-waves; from memory).

    Examples
    --------
    >>> import numpy as np
    >>> complex(renormalise(np.array([0.0 + 0.0j]), 75.0, 50.0)[0])
    (0.2+0j)
    """
    with np.errstate(all="ignore"):
        above, below = from_ohm * (1 + gamma), to_ohm * (1 - gamma)
        result: ComplexArray = (above - below) / (above + below)
    return result


def _is_touchstone(raw: bytes, name: str) -> bool:
    """Tell the format by the suffix, else by the way the content begins."""
    if _TOUCHSTONE_SUFFIX.search(name):
        return True
    head = raw[:65536].removeprefix(b"\xef\xbb\xbf")
    if head[:2] in (b"\xff\xfe", b"\xfe\xff"):
        head = head[2:].replace(b"\0", b"")
    if _TOUCHSTONE_START.match(head):
        return True
    # Numbers without any header: the Touchstone reader has the fitting message.
    return bool(_NUMBERS_START.match(head)) and not name.lower().endswith((".csv", ".tsv"))


def _read_bytes(path: Path) -> bytes:
    """Return the content of an ordinary file, without ever waiting on a pipe or a device."""
    try:
        _check_ordinary(path, path.stat())
        handle = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
        with os.fdopen(handle, "rb") as file:
            status = os.fstat(file.fileno())
            _check_ordinary(path, status)
            raw = file.read(min(status.st_size, LARGEST_BYTES) + 1)
        if raw is None:  # it would have to wait
            raise ReadingError("not an ordinary file", "copy the readings to an ordinary file", file=path)
        return raw
    except FileNotFoundError as fault:
        raise _missing(path) from fault
    except (OSError, ValueError) as fault:
        raise _unreadable(path, fault) from fault


def _check_ordinary(path: Path, status: os.stat_result) -> None:
    """Refuse folders, pipes, devices and giants."""
    if stat.S_ISDIR(status.st_mode):
        raise ReadingError("a folder, not a file of readings", "name the files in it", file=path)
    if not stat.S_ISREG(status.st_mode):
        raise ReadingError("not an ordinary file", "copy the readings to an ordinary file", file=path)
    if status.st_size > LARGEST_BYTES:
        raise ReadingError(
            f"larger than {LARGEST_BYTES // 2**20} MB",
            "give a file with the readings of one standard",
            file=path,
        )


def _unreadable(path: Path, fault: Exception) -> ReadingError:
    """Say why the system would not open a file."""
    if isinstance(fault, PermissionError):
        return ReadingError("may not be read", "change the file's permissions", file=path)
    if isinstance(fault, OSError) and fault.errno == errno.ELOOP:
        return ReadingError("a link that leads back to itself", "mend the link", file=path)
    reason = fault.strerror if isinstance(fault, OSError) and fault.strerror else "not a possible file name"
    return ReadingError(
        f"cannot be read: {reason}", "check the path and the disk", file=repr(str(path))[1:-1]
    )


def _missing(path: Path) -> ReadingError:
    """Say that a file is not there, and name the most similar one beside it."""
    if path.is_symlink():
        return ReadingError("a link to a file that does not exist", "mend the link", file=path)
    try:
        beside = [entry.name for entry in path.parent.iterdir() if entry.is_file()]
    except OSError:
        return ReadingError("no such file, nor its folder", "check the path", file=path)
    best = nearest(path.name, beside)
    return ReadingError(
        "no such file", f"did you mean {quoted(best)}?" if best else "check the path", file=path
    )
