"""A kit in words and aligned columns, for a terminal."""

from collections.abc import Sequence

from stdfit.circuits.units import said_unit
from stdfit.validity.kit import Combination, Definition, Kit
from stdfit.validity.limit import Limit
from stdfit.validity.next_steps import can_be_planned, next_steps
from stdfit.writing.adapter_words import thru_lines
from stdfit.writing.aligned import aligned
from stdfit.writing.analyser_text import residuals_said
from stdfit.writing.device_text import as_a_kit
from stdfit.writing.numbers import (
    decimals,
    frequency,
    good_to,
    half_width,
    label_of,
    plus_minus,
    rounded,
    second_digit,
)

STEPS_HEAD = "What would push it further, at least about so far without another fit"
PLANNED = " ('stdfit plan BENCH' fits again, and often finds more)"

ORDERS_NOTE = (
    "other orders are told as estimated over their own best range; of nearly equal ones the simplest is taken"
)

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
                    good_to(one.limit.limit_hz),
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
    if any(len(one.tried) > 1 for one in kit.definitions):
        lines.append(f"  ({ORDERS_NOTE})")
    lines += ["", *ladder_lines(kit)]
    whole = as_a_kit(kit)
    if whole:
        lines += ["", *whole]
    lines += step_lines(kit)
    notes = notes_of(kit)
    if notes:
        lines += ["", "Notes", *(f"  {', '.join(names)}: {note}" for note, names in notes.items())]
    if kit.analyser is not None:
        lines += ["", f"Analyser residuals, {kit.analyser.residuals}: {residuals_said(kit.analyser)}"]
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
        half = half_width(parameter)
        shown = plus_minus(parameter.value, half, digits)
        if parameter.role == "held":
            shown = rounded(parameter.value, digits)
        rows.append([label, shown, said_unit(parameter.unit), parameter.role])
    for one in definition.combinations:
        rows.append(
            [
                one.label,
                sum_said(one),
                one.unit,
                "the sum that the readings fix",
            ]
        )
    return rows


def sum_said(one: Combination) -> str:
    """Return the value of a combination with its 95 % uncertainty."""
    half = one.high - one.value
    return plus_minus(one.value, half, max(3, second_digit(half)))


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
    others = [f"{order} {good_to(hertz)}" for order, hertz in definition.tried if order != definition.shape]
    own = f"    order {definition.shape}, good to {good_to(definition.limit.limit_hz)}; others:"
    useful = definition.limit.limit_hz > 0.0 or any(hertz > 0.0 for _, hertz in definition.tried)
    tried = [f"{own} {', '.join(others)}"] if others and useful else []
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
    return ["", STEPS_HEAD + (PLANNED if can_be_planned(kit) else ""), *aligned(rows)]


def ladder_lines(kit: Kit) -> list[str]:
    """Return the ladder over tolerances."""
    names = [definition.name for definition in kit.definitions]
    rows = [["within", "kit", *names]]
    rows += [
        [
            f"{rung.within:g}",
            *(good_to(one) for one in (rung.kit_hz, *rung.standards_hz)),
        ]
        for rung in kit.ladder
    ]
    return ["How far at which tolerance on |error of Γ|", *aligned(rows)]


def limit_lines(kit: Kit, found: Sequence[tuple[Limit, Sequence[Limit]]]) -> str:
    """Return limits and reasons for each tolerance."""
    rows = [["within", "what", "good to", "ends because"]]
    for whole, each in found:
        rows.append([f"{whole.within:g}", "kit", good_to(whole.limit_hz), whole.reason])
        rows += [
            ["", definition.name, good_to(one.limit_hz), one.reason]
            for definition, one in zip(kit.definitions, each, strict=True)
        ]
    return "\n".join(aligned(rows, indent="")) + "\n"
