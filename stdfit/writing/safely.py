"""Files appear whole or not at all."""

import contextlib
import os
import re
import tempfile
import time
from pathlib import Path

from stdfit.base.errors import RequestError

LEFT_BEHIND_S = 3600.0
"""A temporary file older than this belongs to a run that was killed: writing one takes a second at most."""

_LONGEST_START = 40
"""Characters of the target's name in that of its temporary file: with all of them it could be too long a name."""


def write_whole(path: Path, text: str) -> None:
    """Write a text file so that at any instant the old or the new one is there, whole.

    The text goes to a temporary file beside the target, is flushed to disk and moved into place. A link is
    followed and stays: who links a kit file into several folders wants the file that all of them show to
    change. Permissions of an old file are kept. A run that is killed leaves its temporary file behind,
    `.NAME.xxxxxxxx.part`; the next one that writes the same target an hour or more later clears it away.

    Raises
    ------
    RequestError
        The folder does not exist, is not writable, the disk is full, or the target is a folder.
    """
    temporary = ""
    try:
        if path.is_dir():
            raise RequestError("a folder stands where the file should go", "name a file", file=path)
        target = path.resolve()
        start = f".{target.name[:_LONGEST_START]}."
        descriptor, temporary = tempfile.mkstemp(prefix=start, suffix=".part", dir=target.parent)
        with os.fdopen(descriptor, "w", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
        mode = target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~_umask()
        Path(temporary).chmod(mode)
        Path(temporary).replace(target)
        _clear_left_behind(target.parent, start)
    except (OSError, ValueError, RuntimeError) as fault:  # links in a ring: RuntimeError before Python 3.13
        raise RequestError(
            f"cannot be written: {getattr(fault, 'strerror', None) or fault}",
            "choose another place",
            file=path,
        ) from fault
    finally:
        if temporary:
            Path(temporary).unlink(missing_ok=True)


def _clear_left_behind(folder: Path, start: str) -> None:
    """Remove the temporary files of runs that were killed long ago; no fault if that is not possible."""
    name = re.compile(re.escape(start) + r"[a-z0-9_]{8}\.part")
    with contextlib.suppress(OSError), os.scandir(folder) as inside:
        for entry in inside:
            if name.fullmatch(entry.name) and entry.is_file(follow_symlinks=False):
                with contextlib.suppress(OSError):
                    if time.time() - entry.stat(follow_symlinks=False).st_mtime > LEFT_BEHIND_S:
                        Path(entry.path).unlink()


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
