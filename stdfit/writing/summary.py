"""A kit in words and aligned columns, for a terminal."""

from collections.abc import Sequence

from stdfit.circuits.units import said_unit
from stdfit.validity.kit import Definition, Kit
from stdfit.validity.limit import Limit
from stdfit.validity.next_steps import next_steps
from stdfit.writing.adapter_words import thru_lines
from stdfit.writing.aligned import aligned
from stdfit.writing.device_text import as_a_kit
from stdfit.writing.numbers import decimals, frequency, label_of, plus_minus, rounded

STEPS = 2
"""So many steps that would push the limit further are told in a few lines."""

TOLD_FROM = 0.1
"""Where the readings begin is told when it is above this part of the limit."""


def verdict(kit: Kit) -> str:
    """Return the answer in one line."""
    if kit.limit.limit_hz <= 0.0:
        return f"within {kit.within:g} the kit cannot be trusted at any frequency: {kit.limit.reason}"
    low = max(one.read_low_hz for one in kit.definitions)
    start = f"from {frequency(low)} " if low > TOLD_FROM * kit.limit.limit_hz else ""
    return (
        f"within {kit.within:g} the kit is good {start}to {frequency(kit.limit.limit_hz)}: {kit.limit.reason}"
    )


def summary(kit: Kit, *, warnings: bool = True) -> str:
    """Return the whole of what a user must see, the verdict first."""
    lines = [
        f"{kit.name} ({kit.connector or 'connector not named'}, {kit.reference_ohm:g} Ω)",
        verdict(kit),
        "",
    ]
    lines += aligned(
        [
            ["standard", "good to", "fitted to", "order", "ends because"],
            *(
                [
                    one.name,
                    frequency(one.limit.limit_hz),
                    frequency(one.fit_top_hz),
                    one.shape,
                    one.limit.reason,
                ]
                for one in kit.definitions
            ),
        ]
    )
    lines += [
        "",
        "What to type in (± 95 %); take all values of a standard together, since single ones trade off",
    ]
    for definition in kit.definitions:
        lines += _definition(kit, definition)
    lines += ["", *ladder_lines(kit)]
    whole = as_a_kit(kit)
    if whole:
        lines += ["", *whole]
    lines += step_lines(kit)
    notes = notes_of(kit)
    if notes:
        lines += ["", "Notes", *(f"  {', '.join(names)}: {note}" for note, names in notes.items())]
    if kit.thru is not None:
        lines += ["", *thru_lines(kit.thru)]
    if kit.ancestors:
        lines += ["", "Its references, and theirs", *(f"  {line}" for line in ancestor_lines(kit))]
    if kit.checks:
        lines += ["", "Checked", *(f"  {check}" for check in kit.checks)]
    if warnings and kit.warnings:
        lines += ["", "Warnings", *(f"  {warning}" for warning in kit.warnings)]
    return "\n".join(lines) + "\n"


def parameter_rows(kit: Kit, definition: Definition) -> list[list[str]]:
    """Return label, value with its 95 % uncertainty, unit and role of what a standard uses, sums at the end."""
    rows = []
    for parameter, digits in zip(definition.parameters, decimals(kit, definition), strict=True):
        if parameter.role == "unused":
            continue
        label = label_of(definition.kind, parameter.name)
        half = max(parameter.high - parameter.value, parameter.value - parameter.low)
        role = "" if parameter.role == "free" else parameter.role
        if parameter.role == "held":
            rows.append([label, rounded(parameter.value, digits), said_unit(parameter.unit), role])
        else:
            rows.append([label, plus_minus(parameter.value, half, digits), said_unit(parameter.unit), role])
    for one in definition.combinations:
        rows.append(
            [
                one.label,
                plus_minus(one.value, one.high - one.value, 3),
                one.unit,
                "the sum that the readings fix",
            ]
        )
    return rows


def notes_of(kit: Kit) -> dict[str, list[str]]:
    """Return each note once, with the names of the standards that it is of."""
    notes: dict[str, list[str]] = {}
    for one in kit.definitions:
        for note in one.notes:
            notes.setdefault(note, []).append(one.name)
    return notes


def _definition(kit: Kit, definition: Definition) -> list[str]:
    """Return the parameters of one standard."""
    rows = parameter_rows(kit, definition)
    others = [
        f"{order} {frequency(limit_hz)}" for order, limit_hz in definition.tried if order != definition.shape
    ]
    tried = [f"    order {definition.shape}; others would be good to: {', '.join(others)}"] if others else []
    unused = any(parameter.role == "unused" for parameter in definition.parameters)
    zero = ["    all others: 0"] if unused else []
    return [f"  {definition.name}", *aligned(rows, indent="    "), *zero, *tried]


def ancestor_lines(kit: Kit) -> list[str]:
    """Return the kits that a kit's uncertainty comes from, each indented below the one that it was a reference of."""
    depth = {"": 0}
    lines = []
    for one in kit.ancestors:
        depth[one.sha256] = depth[one.of] + 1
        lines.append(f"{'  ' * depth[one.of]}{one.name}, {one.created} (SHA-256 {one.sha256[:8]}…)")
    return lines


def step_lines(kit: Kit) -> list[str]:
    """Return what would push the limit furthest, none where nothing is known to."""
    rows = [[frequency(step.limit_hz), step.action] for step in next_steps(kit)[:STEPS]]
    if not rows:
        return []
    return ["", "What would push it further (estimated without a new fit)", *aligned(rows)]


def ladder_lines(kit: Kit) -> list[str]:
    """Return the ladder over tolerances."""
    names = [definition.name for definition in kit.definitions]
    rows = [["within", "kit", *names]]
    rows += [
        [
            f"{rung.within:g}",
            *(frequency(one) if one > 0.0 else "none" for one in (rung.kit_hz, *rung.standards_hz)),
        ]
        for rung in kit.ladder
    ]
    return ["How far at which tolerance on |error of Γ|", *aligned(rows)]


def limit_lines(kit: Kit, found: Sequence[tuple[Limit, Sequence[Limit]]]) -> str:
    """Return limits and reasons for each tolerance."""
    rows = [["within", "what", "good to", "ends because"]]
    for whole, each in found:
        rows.append([f"{whole.within:g}", "kit", frequency(whole.limit_hz), whole.reason])
        rows += [
            ["", definition.name, frequency(one.limit_hz), one.reason]
            for definition, one in zip(kit.definitions, each, strict=True)
        ]
    return "\n".join(aligned(rows, indent="")) + "\n"
