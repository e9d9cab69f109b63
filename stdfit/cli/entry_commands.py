"""The command that says what to type: sheet."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_csv, print_json, print_text, warn

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def sheet(asked: argparse.Namespace) -> int:
    """Print the entry sheet of a kit."""
    from stdfit.base.errors import RequestError
    from stdfit.validity.entry.sheet import Wanted, entry_sheet
    from stdfit.validity.entry.units import units_from
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.sheet_data import COLUMNS, sheet_data, sheet_rows
    from stdfit.writing.sheet_text import sheet_text

    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    wanted = Wanted(
        None if asked.accepts is None else tuple(asked.accepts),
        units_from(asked.units, asked.velocity_factor),
        tuple(asked.digits),
        asked.within,
        asked.no_negative,
    )
    found = entry_sheet(read_kit(asked.kit), wanted)
    warn(found.kit)
    if asked.json:
        print_json(sheet_data(found))
    elif asked.csv:
        print_csv(COLUMNS, sheet_rows(found))
    else:
        print_text(sheet_text(found))
    return DONE
