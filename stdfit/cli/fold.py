"""Long lines, folded to the width of a terminal so that columns stay columns."""

from __future__ import annotations

# typing alone takes as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Sequence

HELD = "\N{NO-BREAK SPACE}"

ROOM = 24
"""The last column keeps at least so many characters where it alone is folded; else all columns of a table are."""


def fold(text: str, width: int) -> str:
    r"""Return text whose lines are no longer than a width, where words allow it.

    What is folded goes on below the beginning of the last column, or two characters further in than the line begins.
    In a table whose last column has no room, each column is folded in itself.

    Examples
    --------
    >>> print(fold("  open   4.22 GHz  analyser residuals, most of it tracking", 48))
      open   4.22 GHz  analyser residuals, most of
                       it tracking
    >>> print(fold("standard  largest in bounds\nopen      49 at 3.99 GHz", 20))
    standard  largest in
              bounds
    open      49 at
              3.99 GHz
    """
    parts: list[str] = []
    block: list[str] = []
    for line in [*text.split("\n"), ""]:
        if line and "  " in line.strip() and not line.startswith("| "):
            block.append(line)
            continue
        parts += _folded_block(block, width)
        block = []
        parts += _folded(line, width)
    return "\n".join(parts[:-1])


def _folded_block(lines: Sequence[str], width: int) -> list[str]:
    """Fold lines that stand below each other, as a table if they are one."""
    if len(lines) > 1 and any(len(line) > width for line in lines):
        starts = _columns(lines)
        if len(starts) > 1 and starts[-1] > width - ROOM:
            table = _narrowed(lines, starts, width)
            if table:
                return table
    return [part for line in lines for part in _folded(line, width)]


def _columns(lines: Sequence[str]) -> list[int]:
    """Return where the columns of lines begin: after two blanks or more that stand in all of them."""
    longest = max(map(len, lines))
    filled = [False] * (longest + 1)
    for line in lines:
        for place, letter in enumerate(line):
            filled[place] = filled[place] or letter != " "
    return [place for place in range(longest) if filled[place] and not any(filled[max(0, place - 2) : place])]


def _narrowed(lines: Sequence[str], starts: Sequence[int], width: int) -> list[str]:
    """Return a table whose cells are folded each in its column; nothing where words do not allow it."""
    from textwrap import wrap

    ends = [*starts[1:], None]
    rows = [[_held(line[a:b].strip()) for a, b in zip(starts, ends, strict=True)] for line in lines]
    widths = [max(len(row[k]) for row in rows) for k in range(len(starts))]
    least = [max(len(word) for row in rows for word in [*row[k].split(" "), ""]) for k in range(len(starts))]
    room = width - starts[0] - 2 * (len(starts) - 1)
    if sum(least) > room:
        return []
    while sum(widths) > room:
        widest = max(range(len(widths)), key=lambda k: (widths[k] > least[k], widths[k]))
        widths[widest] -= 1
    folded = []
    for row in rows:
        cells = [
            wrap(cell, size, break_long_words=False, break_on_hyphens=False) or [""]
            for cell, size in zip(row, widths, strict=True)
        ]
        for k in range(max(map(len, cells))):
            each = [
                (cell[k] if k < len(cell) else "").ljust(size)
                for cell, size in zip(cells, widths, strict=True)
            ]
            folded.append((" " * starts[0] + "  ".join(each)).rstrip().replace(HELD, " "))
    return folded


def _held(line: str) -> str:
    """Return a line in which a number stays with its unit and |Γ| = 1 together: there it does not break."""
    import re

    line = re.sub(r"\| = (?=\d)", f"|{HELD}={HELD}", line)
    return re.sub(r"(?<=[\d±]) (?=[±%Ω\d]|[kMG]Hz|dB|p[sH]|fF|mm)", HELD, line)


def _folded(line: str, width: int) -> list[str]:
    if len(line) <= width or line.startswith("| "):  # a table in Markdown is for copying
        return [line]
    import re
    from textwrap import wrap

    line = _held(line)
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
