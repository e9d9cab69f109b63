"""The command that takes a drawing."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_json, print_text

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def drawing(asked: argparse.Namespace) -> int:
    """Say what dimensions tell of standards."""
    from math import isfinite

    from stdfit.base.errors import RequestError
    from stdfit.data.drawing import read_drawing
    from stdfit.data.words import suggestion
    from stdfit.validity.drawing.part import drawn_part
    from stdfit.writing.drawing_text import drawing_data, drawing_text

    if not (isfinite(asked.to_hz) and 1e6 <= asked.to_hz <= 1e12):
        raise RequestError(f"{asked.to_hz:g} Hz is no top of a band", "give 1e6 … 1e12 Hz, such as 6e9")
    drawn = read_drawing(asked.file)
    names = [part.name for part in drawn.parts]
    if asked.part is not None and asked.part not in names:
        raise RequestError(
            f"the drawing holds no part named '{asked.part}'", suggestion(asked.part, names), file=asked.file
        )
    found = [drawn_part(drawn, part, asked.to_hz) for part in drawn.parts if asked.part in (None, part.name)]
    if asked.json:
        print_json(drawing_data(drawn, found))
    else:
        print_text(drawing_text(drawn, found))
    return DONE
