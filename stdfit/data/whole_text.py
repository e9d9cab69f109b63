"""Text files that are read whole: bench, kit and other TOML files."""

import re
from pathlib import Path

from stdfit.base.errors import InputError
from stdfit.data.ordinary import ordinary_bytes

MOST_DOTS = 60
"""Parts of a dotted key; the parser takes a time that grows with their square, and files need three."""

_PART = r"""(?:[\w-]+|"[^"\n]*"|'[^'\n]*')"""
_DOTTED = re.compile(rf"(?<![\w-])(?:{_PART}[ \t]*\.[ \t]*){{{MOST_DOTS}}}", re.ASCII)


def whole_text(path: Path, what: str, largest: int, error: type[InputError], missing: str) -> str:
    """Return the text of an ordinary UTF-8 file, a byte-order mark taken off.

    Parameters
    ----------
    path : path
    what : str
        What the file should be, for messages: "bench file".
    largest : int
        Most bytes.
    error : type
        Error to raise.
    missing : str
        What to do when there is no such file.

    Raises
    ------
    InputError
        Of the given type: no such file, no ordinary file, too large, not readable, or not UTF-8.
    """
    article = "an" if what[0] in "aeiou" else "a"
    try:
        raw = ordinary_bytes(path, largest + 1)
        if raw is None:
            raise error("not an ordinary file", f"name {article} {what}", file=path)
        if len(raw) > largest:
            raise error(f"larger than {largest // 2**20} MB", f"name {article} {what}", file=path)
        text = raw.decode("utf-8-sig")
    except FileNotFoundError as fault:
        raise error(f"no such {what}", missing, file=path) from fault
    except UnicodeDecodeError as fault:
        line = fault.object.count(b"\n", 0, fault.start) + 1
        raise error("not UTF-8 text", f"save the {what} as UTF-8", file=path, line=line) from fault
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or "not a possible file name"
        raise error(f"cannot be read: {why}", "check the path", file=repr(str(path))[1:-1]) from fault
    dotted = _DOTTED.search(text)
    if dotted is not None:
        line = text.count("\n", 0, dotted.start()) + 1
        raise error(
            f"more than {MOST_DOTS} words in a row joined by points",
            f"name {article} {what}",
            file=path,
            line=line,
        )
    return text
