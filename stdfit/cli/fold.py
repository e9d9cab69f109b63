"""Long lines, folded to the width of a terminal so that columns stay columns."""

from __future__ import annotations

HELD = "\N{NO-BREAK SPACE}"

ROOM = 24
"""The last column keeps at least so many characters; where it cannot, its text goes below the line's beginning."""


def fold(text: str, width: int) -> str:
    """Return text whose lines are no longer than a width, where words allow it.

    What is folded goes on below the beginning of the last column, or two characters further in than the line begins.

    Examples
    --------
    >>> print(fold("  open   4.22 GHz  analyser residuals, most of it tracking", 45))
      open   4.22 GHz  analyser residuals, most
                       of it tracking
    """
    return "\n".join(part for line in text.split("\n") for part in _folded(line, width))


def _folded(line: str, width: int) -> list[str]:
    if len(line) <= width or line.startswith("|"):  # a table in Markdown is for copying
        return [line]
    import re
    from textwrap import wrap

    # A number stays with its unit: what is wrapped does not break at these spaces.
    line = re.sub(r"(?<=[\d±]) (?=[±%Ω\d]|[kMG]Hz|dB|p[sH]|fF|mm)", HELD, line)
    hang = len(line) - len(line.lstrip()) + 2
    columns = [found.end() for found in re.finditer(r"(?<=\S)  +(?=\S)", line)]
    if columns and columns[-1] <= width - ROOM:
        hang = columns[-1]
    folded = wrap(
        line,
        max(width, 2 * ROOM),
        subsequent_indent=" " * hang,
        break_long_words=False,
        break_on_hyphens=False,
        replace_whitespace=False,
        expand_tabs=False,
    )
    return [part.replace(HELD, " ") for part in folded]
