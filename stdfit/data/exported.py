"""Files that an export wrote: definitions of standards, which must not pass for readings of them."""

import re
from pathlib import Path

from stdfit.base.errors import ReadingError

FIRST_LINE = "! Written by stdfit export: one standard of a calibration kit"
"""The mark: a line of its own among the comments before the numbers."""

MOST = 4096
"""Bytes that are looked at: the mark is the first line, and what a user adds above it is short."""

_COMMENTS = re.compile(rb"\A(?:[ \t]*(?:![^\r\n]*)?(?:\r\n|\r|\n))*")


def is_exported(raw: bytes) -> bool:
    r"""Return whether the comments before the numbers say that an export wrote the file.

    Parameters
    ----------
    raw : bytes
        The file, or its beginning.

    Examples
    --------
    >>> is_exported(FIRST_LINE.encode() + b"\n# Hz S RI R 50\n"), is_exported(b"! short, again\n# Hz S RI R 50\n")
    (True, False)
    """
    head = raw[:MOST].removeprefix(b"\xef\xbb\xbf")
    if head[:2] in (b"\xff\xfe", b"\xfe\xff"):
        head = head[2:].replace(b"\0", b"")
    found = _COMMENTS.match(head + b"\n")
    return found is not None and FIRST_LINE.encode() in (line.strip() for line in found[0].splitlines())


def refuse_exported(raw: bytes, path: Path | str) -> None:
    """Refuse a file that an export wrote, where readings are wanted.

    Raises
    ------
    ReadingError
        The file says that it is an exported definition.
    """
    if is_exported(raw):
        raise ReadingError(
            "a definition that 'stdfit export' wrote, and no reading",
            "name readings alone: fitted to itself, a definition would only confirm itself",
            file=path,
        )
