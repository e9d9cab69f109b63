"""Drawing files: the text tells dimensions and materials of parts; out comes a `Drawing`."""

from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.bench_table import Table
from stdfit.data.drawing_parts import decode_part
from stdfit.data.drawing_records import Drawing, PartEntry
from stdfit.data.toml_text import parse_toml
from stdfit.data.whole_text import whole_text
from stdfit.data.words import quoted, suggestion

FORMAT = "stdfit-drawing/1"
LARGEST_BYTES = 2**20
MOST_PARTS = 100
_MEND = "describe each part in a [[part]] table"


def read_drawing(path: Path | str) -> Drawing:
    """Return what a drawing file says.

    Raises
    ------
    BenchError
        The file cannot be read, is no TOML, or says something that cannot be.
    """
    path = Path(path)
    return parse_drawing(whole_text(path, "drawing", LARGEST_BYTES, BenchError, "check the path"), path)


def parse_drawing(text: str, path: Path) -> Drawing:
    """Return what a TOML text says.

    Raises
    ------
    BenchError
        The message names the key.
    """
    values = parse_toml(text, path)
    if values.get("format") != FORMAT:
        raise BenchError("not a drawing", f'it begins with format = "{FORMAT}"', file=path, key="format")
    whole = Table(values, path, "", ("format", "name", "connector", "part"))
    listed = whole.list_of("part", _MEND)
    if len(listed) > MOST_PARTS:
        raise whole.fault("part", f"more than {MOST_PARTS} parts", "split the drawing")
    parts = tuple(decode_part(item, path, place) for place, item in enumerate(listed, start=1))
    seen: set[str] = set()
    for one in parts:
        if one.name in seen:
            raise BenchError(
                "two parts have this name",
                "give each its own name",
                file=path,
                key=f"part[{quoted(one.name)[1:-1]}].name",
            )
        seen.add(one.name)
    return Drawing(
        path=path,
        name=whole.text("name") if "name" in whole else path.stem,
        connector=whole.text("connector") if "connector" in whole else "",
        parts=parts,
    )


def part_for(drawing: Drawing, standard: str, kind: str, part: str | None = None) -> PartEntry:
    """Return the part that is meant: the named one, that of the standard's name, or the only one of its kind.

    Parameters
    ----------
    drawing : Drawing
    standard, kind : str
        Name and kind of the standard on the bench.
    part : str, optional
        Its name in the drawing.

    Raises
    ------
    BenchError
        There is no such part, it is of another kind, or several could be meant.
    """
    by_name = {one.name: one for one in drawing.parts}
    if part is None and standard in by_name and by_name[standard].kind == kind:
        return by_name[standard]
    if part is None:
        own = [one for one in drawing.parts if one.kind == kind]
        if len(own) != 1:
            what = f"holds {len(own)} parts of kind '{kind}'" if own else f"holds no part of kind '{kind}'"
            raise BenchError(
                f"the drawing {what}",
                "name one of them: from_drawing = { file = …, part = … }"
                if own
                else "draw it, or leave it out",
                file=drawing.path,
                key="part",
            )
        return own[0]
    if part not in by_name:
        raise BenchError(
            f"there is no part {quoted(part)}", suggestion(part, by_name), file=drawing.path, key="part"
        )
    if by_name[part].kind != kind:
        raise BenchError(
            f"it is {'an' if by_name[part].kind == 'open' else 'a'} {by_name[part].kind}, and {quoted(standard)} "
            f"on the bench is {'an' if kind == 'open' else 'a'} {kind}",
            "name another part, or mend its kind",
            file=drawing.path,
            key=f"part[{quoted(part)[1:-1]}].kind",
        )
    return by_name[part]
