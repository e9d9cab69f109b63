"""Commands that put a kit to use: export, compare."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_csv, print_json, print_text, say, tell, warn

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse

    from stdfit.base.arrays import FloatArray
    from stdfit.validity.kit import Kit


def export(asked: argparse.Namespace) -> int:
    """Write a kit as Touchstone files and tables of covariances."""
    from stdfit.writing.export import export_files
    from stdfit.writing.export_targets import check_folder, left_from_before, make_folder
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_names import file_names
    from stdfit.writing.safely import write_whole

    kit = read_kit(asked.kit)
    grid = _export_grid(asked, kit)
    files = export_files(kit, grid)
    check_folder(asked.folder, files)
    make_folder(asked.folder)
    for name, text in files.items():
        write_whole(asked.folder / name, text)
    warn(kit)
    for name in left_from_before(asked.folder, files):
        tell(f"{asked.folder / name} is of an earlier export, and was left as it is")
    standards = dict(zip(file_names(kit), (one.name for one in kit.definitions), strict=True))
    if asked.json:
        told = [{"file": str(asked.folder / name), "standard": standards.get(name)} for name in files]
        print_json({"name": kit.name, "frequencies_hz": grid.tolist(), "files": told})
        return DONE
    for name in files:
        say(f"{asked.folder / name}: {standards.get(name, 'all standards')}")
    say(f"next: stdfit limit {asked.kit}   (how far they can be trusted)")
    say(f"      stdfit compare {asked.kit} ideal   (what ideal standards would be wrong by)")
    return DONE


def _export_grid(asked: argparse.Namespace, kit: Kit) -> FloatArray:
    """Return the frequencies of an export, rising and each once."""
    import numpy as np

    from stdfit.base.errors import RequestError
    from stdfit.writing.export import POINTS, export_grid

    band = {
        "--from": asked.from_hz,
        "--to": asked.to_hz,
        "--points": asked.points,
        "--spacing": asked.spacing,
    }
    if asked.at is None:
        return export_grid(
            kit,
            low_hz=asked.from_hz,
            top_hz=asked.to_hz,
            points=POINTS if asked.points is None else asked.points,
            logarithmic=asked.spacing == "log",
        )
    for option, value in band.items():
        if value is not None:
            raise RequestError(f"--at and {option} are asked for at once", "leave one of them out")
    return np.unique(asked.at)


def compare(asked: argparse.Namespace) -> int:
    """Print where and by how much two kits differ."""
    from stdfit.base.errors import RequestError
    from stdfit.validity.device.compare import compare
    from stdfit.validity.device.pairing import ideal_like
    from stdfit.writing.compare_text import (
        COLUMNS,
        compare_data,
        compare_rows,
        compare_text,
        table_frequencies,
    )
    from stdfit.writing.kit_reading import read_kit

    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    one = read_kit(asked.kit)
    two = ideal_like(one) if asked.other == "ideal" else read_kit(asked.other)
    found = compare(one, two)
    at_hz = table_frequencies(found, asked.at)
    if asked.json:
        print_json(compare_data(found, at_hz))
    elif asked.csv:
        print_csv(COLUMNS, compare_rows(found, None if asked.at is None else at_hz))
    else:
        print_text(compare_text(found, at_hz))
    return DONE
