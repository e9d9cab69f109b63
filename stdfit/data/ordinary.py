"""Bytes of ordinary files; a pipe or a device is never waited for."""

import hashlib
import os
import stat
from pathlib import Path

from stdfit.base.errors import InputError

LARGEST_BYTES = 64 * 2**20
"""Of any file that the program reads."""


def ordinary_bytes(path: Path, most: int) -> bytes | None:
    """Return at most so many bytes from the beginning of an ordinary file, or None where it is none.

    What was an ordinary file a moment ago may be a pipe by now, and some systems show devices as ordinary files: so
    the file is opened without waiting, and looked at again when it is open.

    Raises
    ------
    OSError
        It cannot be read.
    ValueError
        The name is not possible.
    """
    if not stat.S_ISREG(path.stat().st_mode):
        return None
    handle = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
    with os.fdopen(handle, "rb") as stream:
        if not stat.S_ISREG(os.fstat(handle).st_mode):
            return None
        return stream.read(most)  # None where it would have to wait


def beginning(path: Path, most: int) -> bytes:
    """Return at most so many bytes from the beginning of an ordinary file, and none of anything else."""
    try:
        return ordinary_bytes(path, most) or b""
    except (OSError, ValueError):
        return b""


def digest(path: Path) -> str:
    """Return the SHA-256 of a file that was read, or is going to be.

    Raises
    ------
    InputError
        It is not an ordinary file, or larger than any that is read.
    OSError
        It cannot be read.
    """
    raw = ordinary_bytes(path, LARGEST_BYTES + 1)
    if raw is None:
        raise InputError("not an ordinary file", "name an ordinary file", file=path)
    if len(raw) > LARGEST_BYTES:
        raise InputError(
            f"larger than {LARGEST_BYTES // 2**20} MB", "name the file that was written", file=path
        )
    return hashlib.sha256(raw).hexdigest()
