"""The kit files of a folder."""

from pathlib import Path

from stdfit.base.errors import KitError, RequestError
from stdfit.base.shown import shown
from stdfit.data.ordinary import digest
from stdfit.validity.change.history_kits import Dated
from stdfit.writing.kit_file import is_kit_file
from stdfit.writing.kit_reading import read_kit

MOST = 1000
"""Kit files that a folder may hold."""


def find_kits(folder: Path) -> tuple[list[Dated], list[tuple[str, str]]]:
    """Return the kits of a folder and of the folders in it, and what was left out there, with the reason.

    Files in inner folders that do not call themselves kit files are passed over: these are benches with their readings.

    Raises
    ------
    RequestError
        No such folder, or far too many kit files.
    """
    try:
        if not folder.is_dir():
            raise RequestError("no such folder", "name a folder with kit files", file=folder)
        own = sorted(path for path in folder.iterdir() if not path.is_dir() and not path.name.startswith("."))
        inner = sorted(path for path in folder.glob("*/*.toml") if is_kit_file(path))
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or "not a possible name"
        raise RequestError(f"cannot be read: {why}", "check the path", file=folder) from fault
    found: list[Dated] = []
    left_out: list[tuple[str, str]] = []
    for path in [*own, *inner]:
        name = shown(path.relative_to(folder).as_posix())
        if not is_kit_file(path):
            left_out.append((name, "no kit file"))
            continue
        if len(found) == MOST:
            raise RequestError(
                f"more than {MOST} kit files", "name a folder with those of one set", file=folder
            )
        try:
            kit = read_kit(path)
            found.append(Dated(name, digest(path), kit))
        except KitError as fault:
            left_out.append((name, f"{fault.key}: {fault.what}" if fault.key else fault.what))
    return found, left_out
