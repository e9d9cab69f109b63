"""Where the files of an export may stand, and what they may overwrite."""

from collections.abc import Iterable
from pathlib import Path

from stdfit.base.errors import RequestError
from stdfit.base.shown import shown
from stdfit.data.exported import FIRST_LINE
from stdfit.data.mistaken import KINDS, MOST, kind_of_text
from stdfit.data.ordinary import beginning
from stdfit.writing.export import JOINT_COLUMNS, STANDARD_COLUMNS

READINGS = (".s1p", ".s2p", ".ts")
"""Suffixes of files that pass for readings where an export did not write them."""


def is_export(path: Path) -> bool:
    """Return whether a file begins like one of this module."""
    firsts = {FIRST_LINE, ",".join(STANDARD_COLUMNS), ",".join(JOINT_COLUMNS)}
    line = beginning(path, 1 + max(map(len, firsts)) + 1).decode("utf-8", "replace").split("\n")[0]
    return line.rstrip("\r") in firsts


def check_folder(folder: Path, names: Iterable[str]) -> None:
    """Refuse a folder in which the files cannot stand: only files of earlier exports are overwritten.

    Nor do they stand beside readings: definitions have names like theirs, and would be taken for them.

    Raises
    ------
    RequestError
        With the first file that stands in the way.
    """
    if folder.exists() and not folder.is_dir():
        raise RequestError("a file stands where the folder should be", "name a folder", file=folder)
    for path in (folder / name for name in names):
        if path.is_dir():
            raise RequestError("a folder stands where the file should go", "name another folder", file=path)
        if (path.exists() or path.is_symlink()) and not is_export(path):
            raise RequestError(
                "exists and was not written by this command",
                "name another folder, or move it away",
                file=path,
            )
    for path in sorted(folder.iterdir()) if folder.is_dir() else ():
        if _is_of_a_bench(path):
            raise RequestError(
                f"holds readings or a bench file ('{shown(path.name)}'), "
                "and definitions beside them would pass for readings",
                f"name a folder of its own, such as {shown(folder / 'standards')}",
                file=folder,
            )


def _is_of_a_bench(path: Path) -> bool:
    """Return whether a file is a reading by its name, or a bench file by what it says of itself."""
    suffix = path.suffix.lower()
    if suffix in READINGS:
        return path.is_file() and not is_export(path)
    head = beginning(path, MOST).decode("utf-8", "replace") if suffix == ".toml" else ""
    return kind_of_text(head) == KINDS["bench"]


def make_folder(folder: Path) -> None:
    """Make a folder, and those above it, where it is not there.

    Raises
    ------
    RequestError
        It cannot be made.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        raise RequestError(
            f"cannot be made: {fault.strerror or fault}", "choose another place", file=folder
        ) from fault


def left_from_before(folder: Path, names: Iterable[str]) -> list[str]:
    """Return the Touchstone files of earlier exports that stand in a folder besides the named ones."""
    kept = set(names)
    return sorted(path.name for path in folder.glob("*.s1p") if path.name not in kept and is_export(path))
