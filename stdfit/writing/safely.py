"""Files appear whole or not at all."""

import os
import tempfile
from pathlib import Path

from stdfit.base.errors import RequestError


def write_whole(path: Path, text: str) -> None:
    """Write a text file so that at any instant the old or the new one is there, whole.

    The text goes to a temporary file beside the target, is flushed to disk and moved into place.

    Raises
    ------
    RequestError
        The folder does not exist, is not writable, the disk is full, or the target is a folder.
    """
    temporary = ""
    try:
        if path.is_dir():
            raise RequestError("a folder stands where the file should go", "name a file", file=path)
        descriptor, temporary = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=path.parent)
        with os.fdopen(descriptor, "w", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
        mode = path.stat().st_mode & 0o777 if path.exists() else 0o666 & ~_umask()
        Path(temporary).chmod(mode)
        Path(temporary).replace(path)
    except (OSError, ValueError) as fault:
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
