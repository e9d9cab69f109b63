"""Small turns of phrase of a report page."""

import re

_POWERS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_POWER_OF_TEN = re.compile(r"\b1e(-?\d+)\b")


def unit(text: str) -> str:
    """Return a unit as it is set: 1e-15 F becomes 10⁻¹⁵ F.

    Examples
    --------
    >>> unit("1e-36 F/Hz²"), unit("GΩ/s")
    ('10⁻³⁶ F/Hz²', 'GΩ/s')
    """
    return _POWER_OF_TEN.sub(lambda found: "10" + found[1].translate(_POWERS), text)


def counted(number: int, one: str) -> str:
    """Return a number with its noun.

    Examples
    --------
    >>> counted(1, "connection"), counted(3, "connection")
    ('1 connection', '3 connections')
    """
    return f"{number} {one if number == 1 else one + 's'}"


def sentence(text: str) -> str:
    """Return a text that begins with a capital and ends with a stop."""
    text = text.strip()
    text = text[:1].upper() + text[1:]
    return text if text.endswith((".", "!", "?")) else f"{text}."
