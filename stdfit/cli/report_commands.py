"""The command that writes the report page of a kit: report."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_json, say, warn

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse
    from pathlib import Path

    from stdfit.validity.kit import Kit


def report(asked: argparse.Namespace) -> int:
    """Write the report page of a kit."""
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.summary import verdict

    kit = read_kit(asked.kit)
    target = asked.output if asked.output is not None else asked.kit.with_suffix(".html")
    check_page(target, "-o")
    write_page(kit, target)
    warn(kit)
    if asked.json:
        print_json(
            {
                "name": kit.name,
                "within": kit.within,
                "limit_hz": kit.limit.limit_hz,
                "reason": kit.limit.reason,
                "report_file": str(target),
            }
        )
        return DONE
    say(f"report: {target}")
    say(verdict(kit))
    return DONE


def check_page(path: Path, option: str) -> None:
    """Refuse a place where no page can go, before the work is done: only pages of this program are overwritten."""
    from stdfit.base.errors import RequestError
    from stdfit.writing.report.own import is_report

    if path.suffix.lower() not in (".html", ".htm"):
        raise RequestError("a report is an HTML file", "let its name end in .html", file=path)
    if path.is_dir():
        raise RequestError(
            "a folder stands where the file should go", f"name a file with {option}", file=path
        )
    if not path.parent.is_dir():
        raise RequestError(
            "no such folder", f"make it, or name another place with {option}", file=path.parent
        )
    if (path.exists() or path.is_symlink()) and not is_report(path):
        raise RequestError(
            "exists and is no report of this program", f"name another file with {option}", file=path
        )


def write_page(kit: Kit, path: Path) -> None:
    """Write the page of a kit that was read from a file: what the file rounds is rounded on the page too."""
    from stdfit.writing.report.html import report_html
    from stdfit.writing.safely import write_whole

    write_whole(path, report_html(kit))
