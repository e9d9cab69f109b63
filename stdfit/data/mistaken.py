"""One kind of file given where another is wanted: said in plain words, before its text is taken for nonsense."""

import re
from pathlib import Path

from stdfit.base.errors import InputError

KINDS = {
    "bench": "bench file",
    "kit": "kit file",
    "adapter": "adapter file",
    "repeatability": "repeatability file",
    "drawing": "drawing",
    "sheet": "entry sheet",
}
"""What files call themselves in their format, and what they are called in a sentence."""

READINGS = "file of readings"

_FORMAT = re.compile(r"""^[ \t{]*"?format"?[ \t]*[=:][ \t]*["']stdfit-([a-z]+)/""", re.MULTILINE)
_OPTION_LINE = re.compile(r"#\s*(?:[kmg]?hz\b|[syzgh]\s+(?:ri|ma|db)\b)", re.IGNORECASE)

_MEND = {
    ("bench file", "kit file"): "name the bench file that it was made from; 'stdfit show' takes a kit file",
    (
        "bench file",
        READINGS,
    ): "name a bench file: 'stdfit new FOLDER' drafts one for the readings of a folder",
    ("kit file", "bench file"): "'stdfit fit BENCH' makes its kit: name the kit file",
    (
        "kit file",
        READINGS,
    ): "'stdfit new FOLDER' drafts a bench file for readings, 'stdfit fit' makes the kit of it",
}

MOST = 20_000
"""So many characters are looked at: what a file is stands at its beginning."""


def refuse_mistaken(text: str, path: Path | str, wanted: str, error: type[InputError]) -> None:
    """Refuse a text that is clearly another kind of file than the wanted one.

    Parameters
    ----------
    text : str
    path : path
        The file, for the message.
    wanted : str
        A value of `KINDS`.
    error : type
        Error to raise.

    Raises
    ------
    InputError
        Of the given type.
    """
    found = kind_of_text(text)
    if found is None or found == wanted:
        return
    this, other = (f"{'an' if kind[0] in 'aeiou' else 'a'} {kind}" for kind in (found, wanted))
    raise error(f"{this}, where {other} is wanted", _MEND.get((wanted, found), f"name {other}"), file=path)


def kind_of_text(text: str) -> str | None:
    r"""Return what kind of file a text is of, or None where it could be anything.

    Examples
    --------
    >>> kind_of_text('format = "stdfit-kit/1"'), kind_of_text("! a reading\n# Hz S RI R 50"), kind_of_text("?")
    ('kit file', 'file of readings', None)
    """
    head = text[:MOST]
    stated = _FORMAT.search(head)
    if stated is not None:
        return KINDS.get(stated[1])
    lines = [line for line in head.splitlines() if line.strip()][:2]
    if lines and (lines[0].startswith("!") or _OPTION_LINE.match(lines[0])):
        return READINGS
    # A table: numbers in every line, or below one line of names.
    return READINGS if lines and _numbers(lines[-1]) else None


def _numbers(line: str) -> bool:
    """Return whether a line is three numbers or more."""
    words = re.split(r"[,;\s]+", line.strip())
    try:
        return len([float(word) for word in words]) >= 3
    except ValueError:
        return False
