"""Everything that can go wrong, as one tree.

StdfitError                 what, where, what to do
├── InputError              the input is wrong: exit code 2
│   ├── ReadingError        a file of readings
│   ├── BenchError          a bench file
│   ├── KitError            a kit file
│   ├── PhysicsError        readings that cannot be what they are called
│   └── RequestError        an option or argument that makes no sense here
└── FitError                sound input, but no fit came out of it: exit code 1
"""

from pathlib import Path

from stdfit.base.shown import shown

MOST_WORDS = 2000
"""Characters of each half of a message; the longest lists of known words are shorter."""


class StdfitError(Exception):
    """Root of all errors that are meant for a user's eyes.

    Parameters
    ----------
    what : str
        What is wrong, one clause, without a full stop.
    mend : str
        What to do about it, one clause.
    file : path, optional
        The file in which it was found.
    line : int, optional
        The line of that file, counted from 1.
    key : str, optional
        The key of a TOML file, dotted.
    """

    def __init__(
        self,
        what: str,
        mend: str = "",
        *,
        file: Path | str | None = None,
        line: int | None = None,
        key: str | None = None,
    ) -> None:
        super().__init__(what)
        self.what = what
        self.mend = mend
        self.file = file
        self.line = line
        self.key = key

    @property
    def where(self) -> str:
        """File, line and key, as far as they are known."""
        parts = [shown(self.file)] if self.file is not None else []
        if self.line is not None:
            parts.append(f"line {self.line}")
        if self.key is not None:
            parts.append(f"key '{shown(self.key)}'")
        return ", ".join(parts)

    def __str__(self) -> str:
        """One line of what and where, and one of the mend, whatever names are in them."""
        what, mend = shown(self.what, MOST_WORDS), shown(self.mend, MOST_WORDS)
        head = f"{self.where}: {what}" if self.where else what
        return f"{head}\n{mend}" if mend else head


class InputError(StdfitError):
    """The input is wrong; the user can mend it."""


class ReadingError(InputError):
    """A file of readings cannot be used."""


class BenchError(InputError):
    """A bench file cannot be used."""


class KitError(InputError):
    """A kit file cannot be used."""


class PhysicsError(InputError):
    """Readings that cannot be what they are called."""


class RequestError(InputError):
    """An option or argument that makes no sense with this input."""


class FitError(StdfitError):
    """The input is sound, but no usable fit came out of it."""
