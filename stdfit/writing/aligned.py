"""Columns that stand below each other."""

from collections.abc import Sequence


def aligned(rows: Sequence[Sequence[str]], indent: str = "  ") -> list[str]:
    """Return rows as lines whose columns stand below each other."""
    if not rows:
        return []
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    return [
        indent + "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in rows
    ]
