"""Small turns of phrase of a report page."""

import re

_POWERS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_POWER_OF_TEN = re.compile(r"\b1e(-?\d+)\b")


_MINUS = re.compile(r"(?<![\w.\-–])-(?=\d)")
_NUMBER_AND_UNIT = re.compile(r"(?<=\d) (?=(?:[GMk]?Hz|dB|ps|m?Ω|fF|pH|GΩ/s|10[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+|[%°])(?:\W|$))")
_PLUS_MINUS = re.compile(r"(?<=[\dB]) ± | ± (?=\d)|(?<=±) (?=\d)")
_MAGNITUDE = re.compile(r"\|(?=[ΓZ])|(?<=[ΓZ\d])\|")
_EQUALS = re.compile(r"(?<=\|) ([=≤]) (?=\d)")


def unbroken(text: str) -> str:
    r"""Return a text whose numbers keep to their units, and whose bars keep to what they enclose; one sign for minus.

    Examples
    --------
    >>> unbroken("-3 dB, 62 % of the bound").replace("\u00a0", "~")
    '−3~dB, 62~% of the bound'
    >>> unbroken("for |Γ| = 1").replace("\u00a0", "~").replace("\u2060", "^")
    'for |^Γ^|^~=~1'
    """
    text = _MINUS.sub("−", text)
    text = _NUMBER_AND_UNIT.sub("\u00a0", text)
    text = _PLUS_MINUS.sub(lambda found: found[0].replace(" ", "\u00a0"), text)
    text = _EQUALS.sub("\u2060\u00a0\\1\u00a0", text)
    return _MAGNITUDE.sub(
        lambda found: "|\u2060" if text[found.end() : found.end() + 1] in "ΓZ" else "\u2060|", text
    )


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
