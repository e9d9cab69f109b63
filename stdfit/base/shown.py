"""Texts that come from outside, as they may be shown: on one line, and without power over a terminal."""

from __future__ import annotations

# typing alone takes as long to import as `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Callable

LONGEST = 500
"""Characters of a message that come from outside: no name that helps anybody is longer."""


def shown(text: object, longest: int = LONGEST) -> str:
    r"""Return a text on one line, with escapes in place of characters that cannot be printed, cut in its middle.

    Escape sequences, line ends, marks that turn the direction of writing, and bytes that were no text have no
    place in a message: they would act on the terminal, or forge another line.

    Parameters
    ----------
    text : object
        A name of a file, for instance.
    longest : int
        Most characters.

    Examples
    --------
    >>> shown("a\x1b[31mb\n")
    'a\\x1b[31mb\\n'
    """
    plain = str(text)
    if len(plain) > longest:
        half = longest // 2
        plain = f"{plain[:half]}…{plain[-half:]}"
    return "\\n".join(printable(plain).split("\n"))


def _escaped(letter: str) -> str:
    return letter.encode("unicode_escape").decode("ascii")


def printable(text: str, escaped: Callable[[str], str] = _escaped) -> str:
    """Return a text with escapes in place of characters that cannot be printed, line ends apart.

    Parameters
    ----------
    text : str
    escaped : callable
        The escape of a character.
    """
    if all(line.isprintable() for line in text.split("\n")):
        return text
    return "".join(letter if letter.isprintable() or letter == "\n" else escaped(letter) for letter in text)
