"""Words of messages: quoting what a file says, and the nearest word to one that is not known."""

from collections.abc import Iterable
from difflib import get_close_matches

LONGEST_QUOTE = 40


def quoted(text: str | bytes, longest: int = LONGEST_QUOTE) -> str:
    """Return `text` in quotes for a message, on one line and cut after `longest` characters."""
    plain = text.decode("latin-1") if isinstance(text, bytes) else text
    cut = plain[:longest] + ("…" if len(plain) > longest else "")
    return "'" + "".join(letter if letter.isprintable() else "�" for letter in cut) + "'"


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the word of `known` that is most like `word`, or None when none comes near."""
    by_lower = {candidate.lower(): candidate for candidate in known}
    found = get_close_matches(word[:200].lower(), by_lower, n=1, cutoff=0.5)
    return by_lower[found[0]] if found else None


def suggestion(word: str, known: Iterable[str]) -> str:
    """Return "did you mean 'x'?" when a known word is near, else a list of the known words."""
    choices = list(known)
    best = nearest(word, choices)
    if best is not None:
        return f"did you mean {quoted(best)}?"
    return "use one of: " + ", ".join(choices) if choices else ""
