"""Files appear whole or not at all."""

import os
import tempfile
from pathlib import Path

from stdfit.base.errors import RequestError


def write_whole(path: Path, text: str) -> None:
    """Write a text file so that at any instant the old or the new one is there, whole.

    The text goes to a temporary file beside the target, is flushed to disk and moved into place. A link is
    followed and stays: who links a kit file into several folders wants the file that all of them show to
    change. Permissions of an old file are kept.

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
        descriptor, temporary = tempfile.mkstemp(prefix=f".{target.name}.", suffix=".part", dir=target.parent)
        with os.fdopen(descriptor, "w", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
        mode = target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~_umask()
        Path(temporary).chmod(mode)
        Path(temporary).replace(target)
    except (OSError, ValueError, RuntimeError) as fault:  # links in a ring: RuntimeError before Python 3.13
        raise RequestError(
            f"cannot be written: {getattr(fault, 'strerror', None) or fault}",
            "choose another place",
            file=path,
        ) from fault
    finally:
        if temporary:
            Path(temporary).unlink(missing_ok=True)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
