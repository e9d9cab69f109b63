"""Commands that take a kit file: show, curve, limit."""

from __future__ import annotations

import sys

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_json

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def show(asked: argparse.Namespace) -> int:
    """Show a kit."""
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import kit_data
    from stdfit.writing.summary import summary

    kit = read_kit(asked.kit)
    if asked.json:
        print_json(kit_data(kit))
    else:
        print(summary(kit), end="")
    return DONE


def curve(asked: argparse.Namespace) -> int:
    """Print reflection and bound over frequency."""
    import csv

    import numpy as np

    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import COLUMNS, curve_rows

    kit = read_kit(asked.kit)
    names = asked.standard or [definition.name for definition in kit.definitions]
    rows = curve_rows(kit, names, asked.points, None if asked.at is None else np.array(asked.at))
    if asked.json:
        print_json({"curve": [dict(zip(COLUMNS, row, strict=True)) for row in rows]})
        return DONE
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(COLUMNS)
    writer.writerows([name, *(repr(value) for value in values)] for name, *values in rows)
    return DONE


def limit(asked: argparse.Namespace) -> int:
    """Print limits and reasons."""
    from stdfit.validity.limits import limits
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import limit_data
    from stdfit.writing.summary import limit_lines

    kit = read_kit(asked.kit)
    found = limits(kit, asked.within or [kit.within])
    if asked.json:
        print_json(limit_data(kit, found))
    else:
        print(limit_lines(kit, found), end="")
    return DONE
