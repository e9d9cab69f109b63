"""An entry sheet in words and aligned columns, for a terminal or a printer."""

from stdfit.validity.entry.sheet import Entry, Sheet
from stdfit.validity.entry.terms import default_of
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency, good_to
from stdfit.writing.sheet_data import told_cost


def sheet_text(sheet: Sheet) -> str:
    """Return what to type for each standard, what it costs, and the verdict as the last line."""
    kit = sheet.kit
    lines = [f"{kit.name} ({kit.connector or 'connector not named'}, {kit.reference_ohm:g} Ω)", ""]
    cost = told_cost(sheet)
    if cost:
        lines += ["Nothing to type: the standards pass for ideal ones, open +1, short −1, load 0"]
    else:
        lines += ["What to type; take all values of a standard together, since they were rounded together"]
        for entry in sheet.entries:
            lines += _to_type(entry, kit.reference_ohm)
    lines += ["", f"What it costs, up to where each standard is good within {sheet.within:g}", *_costs(sheet)]
    notes: dict[str, list[str]] = {}
    for entry in sheet.entries:
        for note in entry.notes:
            notes.setdefault(note, []).append(entry.definition.name)
    if notes:
        lines += ["", "Notes", *(f"  {', '.join(names)}: {note}" for note, names in notes.items())]
    lines += [""]
    if cost:
        told = ", ".join(f"{error:.2g} at {frequency(hertz)} ({name})" for hertz, error, name in cost)
        lines += [f"ideal standards would cost an extra error of {told}; {_left(sheet)}"]
    lines += [verdict(sheet)]
    return "\n".join(lines) + "\n"


def verdict(sheet: Sheet) -> str:
    """Return the answer in one line."""
    before, left = sheet.before.limit_hz, sheet.left.limit_hz
    if before <= 0.0:
        return f"within {sheet.within:g} the kit cannot be trusted at any frequency: {sheet.before.reason}"
    if left <= 0.0:
        return (
            f"within {sheet.within:g} the kit as typed cannot be trusted at any frequency, instead of to "
            f"{frequency(before)}: {sheet.left.reason}"
        )
    instead = "as before" if frequency(left) == frequency(before) else f"instead of {frequency(before)}"
    return f"within {sheet.within:g} the kit as typed is good to {frequency(left)}, {instead}: {sheet.left.reason}"


def _left(sheet: Sheet) -> str:
    if sheet.left.limit_hz <= 0.0:
        return f"nothing would be left within {sheet.within:g}"
    return f"left would be {frequency(sheet.left.limit_hz)} within {sheet.within:g}"


def _to_type(entry: Entry, reference_ohm: float) -> list[str]:
    """Return the numbers of one standard; zeros and the terms left out share a line."""
    said = [one for one in entry.typed if one.text != "0"]
    zeros = [one.parameter.label for one in entry.typed if one.text == "0"]
    rows = aligned([[one.parameter.label, one.text, one.unit] for one in said], indent="    ")
    out = [
        one.label if default_of(one, 1.0) == 0.0 else f"{one.label} ({reference_ohm:g} Ω)"
        for one in entry.left_out
    ]
    return [
        f"  {entry.definition.name}",
        *rows,
        *([f"    0: {', '.join(zeros)}"] if zeros else []),
        *([f"    not accepted: {', '.join(out)}"] if out else []),
    ]


def _costs(sheet: Sheet) -> list[str]:
    """Return extra errors and limits."""
    rows = [["standard", "extra error", "from", "to", "good to before", "as typed", "ends because"]]
    for entry in sheet.entries:
        rows.append(
            [
                entry.definition.name,
                f"≤ {entry.extra:.2g}" if entry.extra else "0",
                frequency(entry.low_hz),
                frequency(entry.top_hz),
                good_to(entry.before.limit_hz),
                good_to(entry.left.limit_hz),
                entry.left.reason,
            ]
        )
    rows.append(
        [
            "kit",
            "",
            "",
            "",
            good_to(sheet.before.limit_hz),
            good_to(sheet.left.limit_hz),
            sheet.left.reason,
        ]
    )
    return aligned(rows)
