"""How a report page begins, so that only such pages are overwritten."""

from pathlib import Path

BEGINNING = """\
<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="generator" content="stdfit report">
"""


def is_report(path: Path) -> bool:
    """Return whether a file begins as the pages of this program do."""
    own = BEGINNING.encode()
    try:
        if not path.is_file():  # to open a pipe would wait for ever
            return False
        with path.open("rb") as stream:
            return stream.read(2 * len(own)).replace(b"\r\n", b"\n").startswith(own)
    except OSError:
        return False
