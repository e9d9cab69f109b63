"""The evidence of each standard: what to type, orders, budget, notes, pictures."""

from collections.abc import Mapping, Sequence

from stdfit.validity.kit import Definition, Kit
from stdfit.writing.numbers import decimals, frequency, label_of, rounded
from stdfit.writing.report.budget import budget_table
from stdfit.writing.report.records import Figure, StandardPart, Table, Term, Typing
from stdfit.writing.report.sure import good_to
from stdfit.writing.report.words import unit


def typing_of(kit: Kit, definition: Definition) -> Typing:
    """Return the numbers of one standard, with as many digits as its curve needs."""
    terms = [
        Term(
            label_of(definition.kind, one.name),
            "0" if one.role == "unused" and one.value == 0.0 else rounded(one.value, digits),
            unit(one.unit),
            one.role in ("unused", "held") and one.value == 0.0,
        )
        for one, digits in zip(definition.parameters, decimals(kit, definition), strict=True)
    ]
    return Typing(definition.name, definition.kind, tuple(terms))


def standard_parts(kit: Kit, figures: Mapping[str, Sequence[Figure]]) -> tuple[StandardPart, ...]:
    """Return the evidence of each standard.

    Parameters
    ----------
    kit : Kit
    figures : mapping
        The pictures of each standard by its name.
    """
    return tuple(
        StandardPart(
            name=one.name,
            anchor=f"standard-{place}",
            facts=_facts(one),
            figures=tuple(figures.get(one.name, ())),
            budget=budget_table(kit, one),
            orders=_orders(one),
            notes=one.notes,
        )
        for place, one in enumerate(kit.definitions, 1)
    )


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
    rows = [(order, good_to(hertz), "chosen" if order == one.shape else "") for order, hertz in one.tried]
    return Table(f"Orders that were tried for {one.name}", ("order", "good to", ""), tuple(rows))
