"""Which files the patterns of a standard stand for."""

import os
import re
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.words import nearest, quoted

MOST_FILES = 1000


def matching_files(patterns: list[str], file: Path, key: str) -> tuple[Path, ...]:
    """Return the files for a list of patterns, in the order of the list and naturally sorted inside each.

    Parameters
    ----------
    patterns : list of str
        File names or patterns with * and ?, relative to the folder of the bench file, or absolute.
    file : path
        The bench file.
    key : str
        The key of the patterns, for messages.

    Raises
    ------
    BenchError
        A pattern is not possible or matches no file, or there are more than 1000 files.
    """
    found: dict[str, Path] = {}
    for pattern in patterns:
        matched = _match(pattern, file, key)
        if not matched:
            raise BenchError(
                f"no file matches {quoted(pattern)}", _hint(file.parent / pattern), file=file, key=key
            )
        for path in matched:
            # The same file by two patterns, or through a link, is still one connection.
            found.setdefault(os.path.realpath(path), path)
        if len(found) > MOST_FILES:
            raise BenchError(f"more than {MOST_FILES} files match", "narrow the pattern", file=file, key=key)
    return tuple(found.values())


def natural_key(path: Path) -> list[tuple[int, int, str]]:
    """Sort key that puts open-2 before open-10."""
    parts = re.split(r"([0-9]+)", path.as_posix().casefold())
    return [(1, int(part[:4000]), "") if part.isdecimal() else (0, 0, part) for part in parts]


def _match(pattern: str, file: Path, key: str) -> list[Path]:
    """Return what one pattern matches; links to folders are not followed by '**', so loops end."""
    try:
        if any("**" in part and part != "**" for part in Path(pattern).parts):
            raise ValueError("'**' must stand alone between slashes")
        plain = file.parent / pattern
        # A name with brackets in it is taken as it stands when there is such a file.
        if plain.exists() and not plain.is_dir():
            return [plain]
        root = Path(plain.anchor) if Path(pattern).is_absolute() else file.parent
        inner = str(plain.relative_to(root)) if Path(pattern).is_absolute() else pattern
        matched = [path for path in root.glob(inner) if not path.is_dir()]
        return sorted(matched, key=lambda path: (natural_key(path), str(path)))
    except (ValueError, OSError, NotImplementedError, RecursionError, IndexError, re.error) as fault:
        raise BenchError(
            f"{quoted(pattern)} is not a possible file pattern",
            "use file names with * and ?, such as open-*.s1p",
            file=file,
            key=key,
        ) from fault


def _hint(wanted: Path) -> str:
    """Name the most similar file beside the one that was wanted."""
    try:
        beside = [entry.name for entry in wanted.parent.iterdir() if entry.is_file()]
    except (OSError, ValueError):
        return "its folder does not exist; check the path"
    best = nearest(wanted.name, beside)
    return f"the folder holds {quoted(best)}" if best else "check the folder and the spelling"
