"""What a word of the command line may be; argparse tells what is said of one that may not."""

from __future__ import annotations

import argparse

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from pathlib import Path

FEWEST_DRAWS = 100
"""Fewer draws say nothing of a 95 % bound."""


def magnitude(text: str) -> float:
    """Return |Γ| of a passive device."""
    value = number(text)
    if not 0.0 <= value <= 1.0:
        raise argparse.ArgumentTypeError(f"{text!r} is not |Γ| of a passive device, from 0 to 1")
    return value


def a_path(text: str) -> Path:
    """Return a path that can be one."""
    from pathlib import Path

    if "\0" in text:
        raise argparse.ArgumentTypeError(f"{text!r} is not a possible name")
    return Path(text)


def a_kit(text: str) -> Path:
    """Return a kit file: a folder stands for the kit.toml in it."""
    path = a_path(text)
    inside = path / "kit.toml"
    try:
        return inside if inside.is_file() else path
    except OSError:  # no possible name: who reads it says so
        return path


def kit_or_ideal(text: str) -> Path | str:
    """Return a kit file, or the word 'ideal'."""
    return text if text == "ideal" else a_kit(text)


def tolerance(text: str) -> float:
    """Return a tolerance on |error of Γ|."""
    value = number(text)
    if not 0.0 < value < 1.0:
        raise argparse.ArgumentTypeError(f"{text!r} does not lie between 0 and 1")
    return value


def count(text: str) -> int:
    """Return a whole number of things."""
    value = number(text)
    if not 1 <= value <= 100_000 or value != int(value):
        raise argparse.ArgumentTypeError(f"{text!r} is no whole number between 1 and 100000")
    return int(value)


def number(text: str) -> float:
    """Return a number."""
    try:
        return float(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is not a number: write it like 0.02 or 1e9") from None


def seed(text: str) -> int:
    """Return a seed."""
    if not (text.isascii() and text.isdecimal() and len(text) < 19):
        raise argparse.ArgumentTypeError(f"{text!r} is no whole number from 0 on")
    return int(text)


def draws(text: str) -> int:
    """Return a number of draws that says something."""
    value = count(text)
    if value < FEWEST_DRAWS:
        raise argparse.ArgumentTypeError(
            f"'{text}' draws say too little: take {FEWEST_DRAWS} or more, better some thousand"
        )
    return value
