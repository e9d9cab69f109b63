"""Commands that look at many readings or kits: history, repeat."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_csv, print_json, print_text, tell

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse
    from pathlib import Path


def history(asked: argparse.Namespace) -> int:
    """Say what has become of standards over the kits of a folder."""
    from stdfit.base.errors import RequestError
    from stdfit.pipeline.history_folder import find_kits
    from stdfit.validity.change.history import history, other_names
    from stdfit.writing.history_text import COLUMNS, history_data, history_rows, history_text

    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    if asked.plot is not None:
        _check_plot(asked.plot)
    found, left_out = find_kits(asked.folder)
    said = history(
        found,
        within=asked.within,
        to_hz=asked.to_hz,
        same_calibration=asked.same_calibration,
        left_out=left_out,
    )
    if asked.plot is not None:
        from stdfit.writing.plots_history import history_svg
        from stdfit.writing.safely import write_whole

        write_whole(asked.plot, history_svg(said))
        tell(f"plot: {asked.plot}")
    if asked.json:
        print_json(history_data(said))
    elif asked.csv:
        for note in other_names(said.kits):
            tell(f"warning: {note}")
        print_csv(COLUMNS, history_rows(said))
    else:
        print_text(history_text(said))
    return DONE


def repeat(asked: argparse.Namespace) -> int:
    """Say how readings scatter from repeat to repeat, connection to connection, calibration to calibration."""
    from stdfit.pipeline.repeating import study_repeats
    from stdfit.writing.repeat_text import repeat_data, repeat_text

    described, found, warnings = study_repeats(asked.file, asked.at)
    for warning in warnings:
        tell(f"warning: {warning}")
    if asked.json:
        print_json(repeat_data(described, found, warnings))
    else:
        print_text(repeat_text(described, found))
    return DONE


def _check_plot(path: Path) -> None:
    """Refuse a place where no picture can go: only pictures of this command are overwritten."""
    from stdfit.base.errors import RequestError
    from stdfit.writing.plots_history import is_history_svg

    if path.suffix.lower() != ".svg":
        raise RequestError("a plot is an SVG file", "let its name end in .svg", file=path)
    if not path.parent.is_dir():
        raise RequestError("no such folder", "make it, or name another place", file=path.parent)
    if (path.exists() or path.is_symlink()) and not is_history_svg(path):
        raise RequestError("exists and is no plot of a history", "name another file", file=path)
