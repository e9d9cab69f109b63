"""Which files the patterns of a standard stand for."""

import os
import re
from collections.abc import Iterator, Sequence
from fnmatch import fnmatchcase
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.words import nearest, quoted

MOST_FILES = 1000
MOST_LOOKED_AT = 100_000
"""Entries of folders that one pattern may look at: '/**/x' would look at the whole disk."""

_WILD = re.compile(r"[*?[]")


class _TooManyError(Exception):
    """A pattern looks at too many files."""


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
        A pattern is not possible, matches no file or looks at too many, or there are more than 1000 files.
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
        absolute = Path(pattern).is_absolute()
        root = Path(plain.anchor) if absolute else file.parent
        parts = plain.parts[1:] if absolute else Path(pattern).parts
        # '**/**' is '**', but would be looked through many times.
        parts = tuple(one for k, one in enumerate(parts) if one != "**" or parts[k - 1 : k] != ("**",))
        if not parts:
            raise ValueError("no name in it")
        matched = [path for path in _walk(root, parts, _Budget()) if not _is_folder(path)]
        return sorted(matched, key=lambda path: (natural_key(path), str(path)))
    except _TooManyError as fault:
        raise BenchError(
            f"{quoted(pattern)} looks at more than {MOST_LOOKED_AT} files and folders",
            "begin the pattern with the folder that holds the readings",
            file=file,
            key=key,
        ) from fault
    except (ValueError, OSError, RecursionError, re.error) as fault:
        raise BenchError(
            f"{quoted(pattern)} is not a possible file pattern",
            "use file names with * and ?, such as open-*.s1p",
            file=file,
            key=key,
        ) from fault


class _Budget:
    """Counts the entries of folders that are looked at."""

    def __init__(self) -> None:
        self.left = MOST_LOOKED_AT

    def entries(self, folder: Path) -> list[os.DirEntry[str]]:
        """Return what a folder holds, as far as it may be read."""
        found = []
        try:
            with os.scandir(folder) as inside:
                for entry in inside:
                    self.left -= 1
                    if self.left < 0:
                        raise _TooManyError
                    found.append(entry)
        except OSError:
            return found
        return found


def _walk(root: Path, parts: Sequence[str], budget: _Budget) -> Iterator[Path]:
    """Give what the parts of a pattern stand for below a folder."""
    if not parts:
        yield root
        return
    part, rest = parts[0], parts[1:]
    if part == "**":
        yield from _walk(root, rest, budget)
        for entry in budget.entries(root):
            if not entry.is_symlink() and _is_folder(root / entry.name):
                yield from _walk(root / entry.name, parts, budget)
    elif _WILD.search(part):
        wanted = os.path.normcase(part)
        for entry in budget.entries(root):
            if fnmatchcase(os.path.normcase(entry.name), wanted) and (
                not rest or _is_folder(root / entry.name)
            ):
                yield from _walk(root / entry.name, rest, budget)
    elif _is_there(root / part):
        yield from _walk(root / part, rest, budget)


def _is_folder(path: Path) -> bool:
    """Tell whether a folder, or a link to one, is there; what cannot be looked at is none."""
    try:
        return path.is_dir()
    except OSError:
        return False


def _is_there(path: Path) -> bool:
    """Tell whether anything is there that can be looked at."""
    try:
        return path.exists()
    except OSError:
        return False


def _hint(wanted: Path) -> str:
    """Name the most similar file beside the one that was wanted."""
    try:
        beside = [entry.name for entry in wanted.parent.iterdir() if entry.is_file()]
    except (OSError, ValueError):
        return "its folder does not exist; check the path"
    best = nearest(wanted.name, beside)
    return f"the folder holds {quoted(best)}" if best else "check the folder and the spelling"
