"""The entry sheet: what to type where only part of a definition is accepted, what it costs, and the limit left."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.circuits.standard import Parameter
from stdfit.validity.entry.choice import Choice, choose
from stdfit.validity.entry.error import distance, stated
from stdfit.validity.entry.terms import accepted_places, digits_of
from stdfit.validity.entry.units import Units, text_of, typing_of, units_from
from stdfit.validity.kit import Definition, Kit, curve
from stdfit.validity.limit import Limit
from stdfit.validity.limits import GRID_POINTS, limit_grid, limits

BELOW_POINTS = 33
"""Points of the stated curve between a thousandth of the first reading and the first reading."""


@dataclass(frozen=True, slots=True)
class Wanted:
    """What is accepted, and how it is typed.

    Attributes
    ----------
    accepts : tuple of str or None
        Terms, in words; None for everything.
    units : Units
    digits : tuple of str
        Numbers of significant digits, in words.
    within : float or None
        Tolerance on the error of Γ; the kit's own where it is None.
    no_negative : bool
        No number may be negative.
    """

    accepts: tuple[str, ...] | None = None
    units: Units = field(default_factory=lambda: units_from((), None))
    digits: tuple[str, ...] = ()
    within: float | None = None
    no_negative: bool = False


@dataclass(frozen=True, slots=True)
class Typed:
    """One number to type: the parameter it belongs to, the number as text, and its unit."""

    parameter: Parameter
    text: str
    unit: str


@dataclass(frozen=True, slots=True, eq=False)
class Entry:
    """What to type for one standard.

    Attributes
    ----------
    definition : Definition
        The full one.
    typed : tuple of Typed
    left_out : tuple of Parameter
        What is not accepted.
    values : array of shape (p,)
        What the typed numbers mean, in trade units, with what stands for the terms left out.
    low_hz, top_hz : float
        The range over which the typed definition was fitted and its extra error is stated.
    extra, extra_hz : float
        Largest |Γ_typed − Γ_full| in that range, rounded up, and where it is.
    before, left : Limit
        Of the full and of the typed definition.
    frequency_hz, bound_and_extra : arrays of shape (m,)
        Bound of the full definition plus extra error, up to the last reading.
    notes : tuple of str
    """

    definition: Definition
    typed: tuple[Typed, ...]
    left_out: tuple[Parameter, ...]
    values: FloatArray
    low_hz: float
    top_hz: float
    extra: float
    extra_hz: float
    before: Limit
    left: Limit
    frequency_hz: FloatArray
    bound_and_extra: FloatArray
    notes: tuple[str, ...]

    def __post_init__(self) -> None:
        for name in ("values", "frequency_hz", "bound_and_extra"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


@dataclass(frozen=True, slots=True, eq=False)
class Sheet:
    """What to type for a kit.

    Attributes
    ----------
    kit : Kit
    wanted : Wanted
    within : float
    entries : tuple of Entry
        One for each standard of the kit.
    before, left : Limit
        Of the kit, as it is and as it is typed.
    """

    kit: Kit
    wanted: Wanted
    within: float
    entries: tuple[Entry, ...]
    before: Limit
    left: Limit


def entry_sheet(kit: Kit, wanted: Wanted) -> Sheet:
    """Return what to type for a kit.

    Raises
    ------
    RequestError
        A word of `wanted` has no sense for this kit, or the kit holds values beyond all sense.
    """
    with np.errstate(all="ignore"):  # what comes of wild values is looked at by `choose`
        return _sheet(kit, wanted)


def _sheet(kit: Kit, wanted: Wanted) -> Sheet:
    within = kit.within if wanted.within is None else wanted.within
    places, digits = accepted_places(wanted.accepts, kit), digits_of(wanted.digits, kit)
    ((before, each),) = limits(kit, [within])
    found = {}
    for definition, limit in zip(kit.definitions, each, strict=True):
        typing = typing_of(definition.kind, wanted.units, digits[definition.name])
        found[definition.name] = choose(
            kit, definition, limit, typing, places[definition.name], wanted.no_negative
        )

    def extra(definition: Definition, grid: FloatArray) -> FloatArray:
        return _extra(kit, definition, found[definition.name].values, grid)

    ((left, each_left),) = limits(kit, [within], extra)
    entries = tuple(
        _entry(kit, found[definition.name], limit, limit_left)
        for definition, limit, limit_left in zip(kit.definitions, each, each_left, strict=True)
    )
    return Sheet(kit, wanted, within, entries, before, left)


def _extra(kit: Kit, definition: Definition, values: FloatArray, grid: FloatArray) -> FloatArray:
    return distance(definition.kind, definition.values, values, grid, kit.reference_ohm)


def _entry(kit: Kit, choice: Choice, before: Limit, left: Limit) -> Entry:
    """Gather what is said of one standard."""
    definition, typing = choice.definition, choice.typing
    typed = tuple(
        Typed(
            typing.parameters[place],
            text_of(float(choice.numbers[place]), typing.digits[place]),
            typing.units[place].label,
        )
        for place in choice.places
    )
    negative = [one.parameter.label for one in typed if one.text.startswith("-")]
    notes = list(choice.notes)
    if negative:
        notes.append(f"negative, which some programs refuse: {', '.join(negative)}")
    grid = stated_grid(kit, definition)
    _, bound = curve(kit, definition, grid)
    return Entry(
        definition=definition,
        typed=typed,
        left_out=tuple(one for k, one in enumerate(typing.parameters) if k not in choice.places),
        values=choice.values,
        low_hz=choice.range_hz[0],
        top_hz=choice.range_hz[1],
        extra=stated(choice.extra),
        extra_hz=choice.extra_hz,
        before=before,
        left=left,
        frequency_hz=grid,
        bound_and_extra=bound + _extra(kit, definition, choice.values, grid),
        notes=tuple(notes),
    )


def stated_grid(kit: Kit, definition: Definition) -> FloatArray:
    """Return the frequencies of the stated curve: those at which limits are looked for, and some on either side."""
    low, top = definition.read_low_hz, definition.read_top_hz
    grid = limit_grid(kit, definition)
    below = np.geomspace(1e-3 * low, low, BELOW_POINTS)[:-1]
    above = np.linspace(grid[-1], top, GRID_POINTS) if grid[-1] < top else np.zeros(0)
    return np.unique(np.concatenate([below, grid, above]))


def ideal_cost(sheet: Sheet, frequencies_hz: Sequence[float]) -> list[tuple[float, float, str]]:
    """Return, for each frequency that some readings reach, the largest extra error and the standard that has it."""
    rows = []
    for hertz in frequencies_hz:
        found = [
            (float(_extra(sheet.kit, one.definition, one.values, np.array([hertz]))[0]), one.definition.name)
            for one in sheet.entries
            if one.definition.read_low_hz <= hertz <= one.definition.read_top_hz
        ]
        if found:
            error, name = max(found)
            rows.append((hertz, error, name))
    return rows
