"""Text files that are read whole: bench, kit and other TOML files."""

import stat
from pathlib import Path

from stdfit.base.errors import InputError


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
        status = path.stat()
        if not stat.S_ISREG(status.st_mode):
            raise error("not an ordinary file", f"name {article} {what}", file=path)
        if status.st_size > largest:
            raise error(f"larger than {largest // 2**20} MB", f"name {article} {what}", file=path)
        return path.read_bytes().decode("utf-8-sig")
    except FileNotFoundError as fault:
        raise error(f"no such {what}", missing, file=path) from fault
    except UnicodeDecodeError as fault:
        line = fault.object.count(b"\n", 0, fault.start) + 1
        raise error("not UTF-8 text", f"save the {what} as UTF-8", file=path, line=line) from fault
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or "not a possible file name"
        raise error(f"cannot be read: {why}", "check the path", file=repr(str(path))[1:-1]) from fault
