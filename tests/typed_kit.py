"""What a sheet says when it is read back, worked out from the sheet itself and not from its file."""

from dataclasses import replace

from stdfit.validity.entry.kept import ORDER, held
from stdfit.validity.entry.sheet import Entry, Sheet
from stdfit.validity.kit import Definition, Kit
from stdfit.validity.limits import ladder


def typed_kit(sheet: Sheet) -> Kit:
    """Return the kit as it is typed; its bound is that of the full kit plus the extra error."""
    kit = replace(
        sheet.kit,
        within=sheet.within,
        limit=sheet.left,
        definitions=tuple(_typed_definition(entry) for entry in sheet.entries),
        order=(),
        shares=(),
        files=(),
        checks=(),
        ancestors=(),
    )
    return replace(kit, ladder=ladder(kit))


def _typed_definition(entry: Entry) -> Definition:
    full = entry.definition
    return replace(
        full,
        shape=ORDER,
        parameters=held(full.kind, entry.values),
        combinations=(),
        misfit_hz=entry.frequency_hz,
        misfit=entry.bound_and_extra,
        limit=entry.left,
        notes=entry.notes,
        tried=(),
    )
