"""From the bytes of a file to plain ASCII bytes that a fast parser can take."""

import codecs

from stdfit.base.errors import ReadingError

_MEND_BINARY = "export the readings as a Touchstone or CSV text file"


def plain_text(raw: bytes, name: str) -> bytes:
    """Return the text of a file of readings as ASCII bytes, with the line ends left as they are.

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
        The file is empty or is not text.
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
    if not text or text.isspace():
        raise ReadingError("the file is empty", "export the readings again", file=name)
    return text


def _from_utf16(raw: bytes, name: str) -> bytes:
    """Decode UTF-16 with a byte-order mark."""
    try:
        return raw.decode("utf-16").encode("ascii", errors="replace")
    except UnicodeDecodeError as fault:
        raise ReadingError(
            "the file begins as UTF-16 text but cannot be decoded", _MEND_BINARY, file=name
        ) from fault
