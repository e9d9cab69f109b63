"""The evidence of each standard: what to type, orders, budget, notes, pictures."""

from collections.abc import Mapping, Sequence

from stdfit.validity.kit import Definition, Kit
from stdfit.writing.numbers import decimals, frequency, good_to, half_said, half_width, label_of, rounded
from stdfit.writing.report.budget import budget_table
from stdfit.writing.report.records import Figure, StandardPart, Table, Term, Typing
from stdfit.writing.report.words import unit
from stdfit.writing.summary import ORDERS_NOTE, sum_said

ORDERS = (
    ("open", "of an open, constant is C0, even C0 and C2, full C0 to C3"),
    ("short", "of a short, constant is L0, even L0 and L2, full L0 to L3"),
    ("load", "of a load, R is the resistance, +L an inductance, +C a capacitance, +delay a length of line"),
)
"""What the names of orders mean, by kind."""


def typing_of(kit: Kit, definition: Definition) -> Typing:
    """Return the numbers of one standard, with as many digits as its curve needs."""
    terms = []
    for one, digits in zip(definition.parameters, decimals(kit, definition), strict=True):
        half = half_width(one)
        terms.append(
            Term(
                label_of(definition.kind, one.name),
                "0" if one.role == "unused" and one.value == 0.0 else rounded(one.value, digits),
                f"± {half_said(half, digits)}" if half > 0.0 else "",
                unit(one.unit),
                one.role in ("unused", "held") and one.value == 0.0,
            )
        )
    sums = tuple(f"{one.label} = {sum_said(one)} {one.unit}" for one in definition.combinations)
    return Typing(definition.name, definition.kind, tuple(terms), sums)


def standard_parts(kit: Kit, figures: Mapping[str, Sequence[Figure]]) -> tuple[StandardPart, ...]:
    """Return the evidence of each standard.

    Parameters
    ----------
    kit : Kit
    figures : mapping
        The pictures of each standard by its name.
    """
    parts = []
    for place, one in enumerate(kit.definitions, 1):
        drawn = tuple(figures.get(one.name, ()))
        odd = len(drawn) % 2 == 1
        parts.append(
            StandardPart(
                name=one.name,
                anchor=f"standard-{place}",
                facts=_facts(one),
                figures=drawn[:-1] if odd else drawn,
                last=drawn[-1] if odd else None,
                budget=budget_table(kit, one),
                orders=_orders(one),
                notes=one.notes,
            )
        )
    return tuple(parts)


def _facts(one: Definition) -> tuple[tuple[str, str], ...]:
    facts = [
        ("kind", one.kind),
        ("good to", f"{good_to(one.limit.limit_hz)}: {one.limit.reason}"),
        ("read", f"{frequency(one.read_low_hz)} to {frequency(one.read_top_hz)}"),
        ("fitted", f"{frequency(one.fit_low_hz)} to {frequency(one.fit_top_hz)}, order {one.shape}"),
        ("connections", f"{one.connections}"),
    ]
    if one.matings is not None:
        facts.append(("matings", f"{one.matings} when it was read"))
    return tuple(facts)


def _orders(one: Definition) -> Table | None:
    """Return how far each order would have been good, the chosen one told."""
    if not one.tried:
        return None
    rows = [
        (order, good_to(one.limit.limit_hz), "chosen") if order == one.shape else (order, good_to(hertz), "")
        for order, hertz in one.tried
    ]
    note = f"{ORDERS_NOTE[0].upper()}{ORDERS_NOTE[1:]}." if len(rows) > 1 else ""
    return Table(f"Orders that were tried for {one.name}", ("order", "good to", ""), tuple(rows), note)


def orders_note(kit: Kit) -> str:
    """Return what the names of the orders mean, of the kinds that the kit holds."""
    if not any(one.tried for one in kit.definitions):
        return ""
    kinds = {one.kind for one in kit.definitions}
    told = [text for kind, text in ORDERS if kind in kinds]
    return f"Orders: {'; '.join(dict.fromkeys(told))}; +Z0: the line's impedance too."
