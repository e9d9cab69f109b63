"""From the bytes of a file to plain ASCII bytes that a fast parser can take."""

import codecs

from stdfit.base.errors import ReadingError

MOST_LINES = 400_000
"""A reading of 100 001 points has a quarter of them; this bounds the time that a file can take."""
LONGEST_LINE = 1_000_000
"""Characters of a line that are let through; some above twice as many never are."""

_MEND_BINARY = "export the readings as a Touchstone or CSV text file"
_MEND_LARGE = "give a file that holds the readings of one standard and little else"


def plain_text(raw: bytes, name: str) -> bytes:
    """Return the text of a file of readings as ASCII bytes, its lines ended by LF or CR LF.

    A byte-order mark is taken off; UTF-16 with a mark is decoded; any other byte above 127 (Latin-1 or UTF-8
    in comments) becomes '?', because nothing that matters in such a file lies outside ASCII. The end mark of
    old systems (0x1A) is taken off the end.

    Parameters
    ----------
    raw : bytes
        The content of the file.
    name : str
        The file's name, for messages.

    Raises
    ------
    ReadingError
        The file is empty, is not text, or has far too many lines or a line that is far too long.
    """
    text = raw
    if raw.startswith(codecs.BOM_UTF8):
        text = raw[len(codecs.BOM_UTF8) :]
    elif raw.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        text = _from_utf16(raw, name)
    if b"\0" in text:
        raise ReadingError("not a text file (it holds zero bytes)", _MEND_BINARY, file=name)
    if not text.isascii():
        text = text.decode("latin-1").encode("ascii", errors="replace")
    text = text.rstrip(b"\x1a")
    # After a blank line that ends in \r the fast parser drops a row's first field where that is empty.
    if b"\r" in text and text.count(b"\r") > text.count(b"\r\n"):
        text = text.replace(b"\r\n", b"\n").replace(b"\r", b"\n")
    if not text or text.isspace():
        raise ReadingError("the file is empty", "export the readings again", file=name)
    _check_lines(text, name)
    return text


def _check_lines(text: bytes, name: str) -> None:
    """Refuse a text whose lines would keep a reader busy for minutes."""
    if max(text.count(b"\n"), text.count(b"\r")) > MOST_LINES:
        raise ReadingError(f"more than {MOST_LINES} lines", _MEND_LARGE, file=name)
    # A line that fills a whole block is longer than a block; so looking at each block once is enough.
    for start in range(0, len(text) - LONGEST_LINE, LONGEST_LINE):
        end = start + LONGEST_LINE
        if text.find(b"\n", start, end) < 0 and text.find(b"\r", start, end) < 0:
            line = len(text[:start].splitlines()) + text[:start].endswith((b"\n", b"\r")) or 1
            raise ReadingError(f"longer than {LONGEST_LINE} characters", _MEND_LARGE, file=name, line=line)


def _from_utf16(raw: bytes, name: str) -> bytes:
    """Decode UTF-16 with a byte-order mark."""
    try:
        return raw.decode("utf-16").encode("ascii", errors="replace")
    except UnicodeDecodeError as fault:
        raise ReadingError(
            "the file begins as UTF-16 text but cannot be decoded", _MEND_BINARY, file=name
        ) from fault
