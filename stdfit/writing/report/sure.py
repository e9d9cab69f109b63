"""How sure a kit is: bounds over frequency, of single values and of sums, the ladder, and what it does to devices."""

import numpy as np

from stdfit.validity.kit import Kit, curve
from stdfit.writing.device_text import (
    TABLE_GHZ,
    device_rows,
    ideal_line,
    round_frequencies,
    term_rows,
    whole_kit,
)
from stdfit.writing.numbers import figure, frequency, good_to, label_of
from stdfit.writing.report.records import Table
from stdfit.writing.report.words import unit
from stdfit.writing.summary import sum_said

ROWS = 8
"""Frequencies at which bounds are told."""

FEWEST_ROWS = 4
"""Where a band holds fewer round frequencies, so many even steps are told instead."""

ROLES = ("free", "given", "assumed", "held", "at its bound")
"""As kit files name them, in the order of the columns."""

ROLES_NOTE = (
    "What is free is told by the readings. What is given was stated, and weighed with them. Of what is assumed they "
    "say so little that a weak assumption stands in for them. What is held is not fitted. A loss is at its bound, 0, "
    "where the readings ask for less."
)


def bound_tables(kit: Kit) -> tuple[Table, ...]:
    """Return the ladder, bounds on Γ, bounds on single values, and the sums that readings fix."""
    tables = (ladder_table(kit), _bounds_on_curves(kit), *_value_tables(kit))
    return tuple(one for one in tables if one.rows)


def ladder_table(kit: Kit) -> Table:
    """Return the ladder over tolerances."""
    rows = [
        (f"{rung.within:g}", *(good_to(one) for one in (rung.kit_hz, *rung.standards_hz)))
        for rung in kit.ladder
    ]
    return Table(
        "How far at which tolerance on the error of Γ",
        ("within", "kit", *(one.name for one in kit.definitions)),
        tuple(rows),
    )


def _bounds_on_curves(kit: Kit) -> Table:
    """Return the 95 % bound on the error of Γ at round frequencies."""
    low = min(one.read_low_hz for one in kit.definitions)
    top = max(one.read_top_hz for one in kit.definitions)
    grid = round_frequencies(low, top, ROWS, TABLE_GHZ)
    if grid.size < FEWEST_ROWS:  # a narrow band, or one with few round frequencies in it
        grid = np.linspace(low, top, FEWEST_ROWS)
    columns = []
    for one in kit.definitions:
        read = (grid >= one.read_low_hz) & (grid <= one.read_top_hz)
        column = np.full(grid.size, np.nan)
        column[read] = curve(kit, one, grid[read])[1]
        columns.append([figure(value) if np.isfinite(value) else "not read" for value in column])
    rows = [(frequency(float(f)), *row) for f, row in zip(grid, zip(*columns, strict=True), strict=True)]
    return Table(
        "Bound on the error of Γ (95 %, misfit included)",
        ("frequency", *(one.name for one in kit.definitions)),
        tuple(rows),
    )


def _value_tables(kit: Kit) -> tuple[Table, Table]:
    """Return where the single values come from, and the sums that trade-offs leave known."""
    kinds: list[tuple[str, ...]] = []
    sums: list[tuple[str, ...]] = []
    roles = [role for role in ROLES if any(p.role == role for one in kit.definitions for p in one.parameters)]
    for one in kit.definitions:
        if all(parameter.role in ("held", "unused") for parameter in one.parameters):
            continue  # a definition whose values carry no uncertainty of their own
        named = [
            ", ".join(label_of(one.kind, p.name) for p in one.parameters if p.role == role) or "–"
            for role in roles
        ]
        kinds.append((one.name, *named))
        sums += [
            (f"{one.name}: {c.label}", f"{sum_said(c)} {unit(c.unit)}", f"{c.correlation:.3f}")
            for c in one.combinations
        ]
    return (
        Table("Where the values come from", ("standard", *roles), tuple(kinds), ROLES_NOTE, flows=True),
        Table(
            "Sums that the readings fix better than their parts (± 95 %)",
            ("sum", "value", "correlation of the parts"),
            tuple(sums),
            flows=True,
        ),
    )


def device_tables(kit: Kit) -> tuple[tuple[Table, ...], str]:
    """Return what the kit does to devices, and what ideal standards would cost; nothing without three standards."""
    whole = whole_kit(kit)
    if whole is None:
        return (), ""
    head, *rows = term_rows(device_rows(whole.errors, ())[1])
    used = ", ".join(one.name for one in whole.errors.definitions)
    terms = Table(
        f"What is left in an analyser that is corrected with {used} (95 %)",
        tuple(head),
        tuple(tuple(row) for row in rows),
    )
    asked = Table(
        "Up to where a device is shown right",
        ("device", "good to", "ends because"),
        tuple((one.question.label, good_to(one.limit_hz), one.reason) for one in whole.answers),
        flows=True,
    )
    return (terms, asked), ideal_line(whole.errors)
