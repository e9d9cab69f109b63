"""Names and texts that every file system and every reader takes."""

import re
import unicodedata

from stdfit.validity.kit import Kit

LONGEST_NAME = 60
"""Characters of a standard's name that go into the name of its file."""

TAKEN_BY_SYSTEMS = re.compile(r"(con|prn|aux|nul|com\d|lpt\d)(\.|\Z)", re.IGNORECASE)
"""Names that some file systems keep for devices."""

ASCII = str.maketrans({"Ω": "ohm", "\N{OHM SIGN}": "ohm", "Γ": "Gamma", "µ": "u", "μ": "u", "·": "*"})
ASCII |= str.maketrans({"−": "-", "–": "-", "—": "-", "±": "+/-", "“": '"', "”": '"', "’": "'", "ß": "ss"})


def file_names(kit: Kit) -> list[str]:
    """Return a safe name of a file for each standard, all different even where capitals do not count."""
    names: list[str] = []
    for definition in kit.definitions:
        stem = _stem(definition.name) or _stem(definition.kind)
        taken, name, count = {one.lower() for one in names}, f"{stem}.s1p", 1
        while name.lower() in taken:
            count += 1
            name = f"{stem}-{count}.s1p"
        names.append(name)
    return names


def _stem(name: str) -> str:
    """Return letters and digits of a name, dashes for everything else; empty where nothing is left."""
    plain = unicodedata.normalize("NFKD", name.translate(ASCII)).encode("ascii", "ignore").decode()
    stem = re.sub(r"[^A-Za-z0-9._]+", "-", plain)[:LONGEST_NAME].strip("-.")
    return f"standard-{stem}" if TAKEN_BY_SYSTEMS.match(stem) else stem


def as_ascii(text: str) -> str:
    """Return a text on one line and in ASCII: accents go, and a question mark stands for what has no likeness.

    Examples
    --------
    >>> as_ascii("50 Ω, Größe 2 ± 1 ✓")
    '50 ohm, Grosse 2 +/- 1 ?'
    """
    letters = unicodedata.normalize("NFKD", " ".join(text.translate(ASCII).split()))
    kept = (letter for letter in letters if not unicodedata.combining(letter))
    return "".join(letter if letter.isascii() and letter.isprintable() else "?" for letter in kept)
