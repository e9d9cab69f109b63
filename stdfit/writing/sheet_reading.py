"""The JSON of an entry sheet read back: decoded strictly, into the kit as it is typed."""

import json
import re
from dataclasses import replace
from pathlib import Path
from typing import Annotated, Any

import msgspec
import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import KitError
from stdfit.circuits.standard import PARAMETERS
from stdfit.data.words import quoted, suggestion
from stdfit.validity.entry.kept import ORDER, held
from stdfit.validity.entry.terms import default_of, terms_of
from stdfit.validity.entry.units import CHOICES, Units, typing_of
from stdfit.validity.kit import Definition, Kit
from stdfit.validity.limit import Limit
from stdfit.validity.limits import ladder
from stdfit.writing.decoding import MEND, decoder_fault
from stdfit.writing.kit_checks import checked, refuse_control_characters

FORMAT = "stdfit-sheet/1"

NUMBER = re.compile(r"-?\d{1,20}(\.\d{1,20})?([eE][+-]?\d{1,3})?", re.ASCII)
"""A number that people type."""

LONGEST_PS = 1e6
"""No standard is a microsecond long."""

Size = Annotated[float, msgspec.Meta(ge=0.0)]
Above = Annotated[float, msgspec.Meta(gt=0.0)]
Count = Annotated[int, msgspec.Meta(ge=1)]


class _Strict(msgspec.Struct, forbid_unknown_fields=True):
    """A table in which unknown keys are faults."""


class _Limit(_Strict):
    limit_hz: Size
    reason: str


class _Typed(_Strict):
    term: str
    number: str | float
    unit: str


class _Extra(_Strict):
    largest: Size
    at_hz: Size
    from_hz: Size
    to_hz: Size


class _Curve(_Strict):
    frequency_hz: list[float]
    value: list[Size]


class _Standard(_Strict):
    name: str
    kind: str
    connections: Count
    read_from_hz: Size
    read_to_hz: Size
    fit_from_hz: Size
    fit_to_hz: Size
    typed: list[_Typed]
    left_out: list[str]
    extra: _Extra
    limit_before: _Limit
    limit_left: _Limit
    notes: list[str]
    bound_and_extra: _Curve


class _Ideal(_Strict):
    frequency_hz: Size
    extra: Size
    standard: str


class _Whole(_Strict):
    format: str
    name: str
    connector: str
    reference_impedance_ohm: Above
    connector_top_hz: Above | None
    created: str
    program_version: str
    within: Annotated[float, msgspec.Meta(gt=0.0, lt=1.0)]
    limit_before: _Limit
    limit_left: _Limit
    units: dict[str, str]
    velocity_factor: Annotated[float, msgspec.Meta(gt=0.0, le=1.0)]
    standards: list[_Standard]
    ideal_standards: list[_Ideal]
    warnings: list[str]


_TABLES: dict[str, type[_Strict]] = {
    "standards": _Standard,
    "typed": _Typed,
    "extra": _Extra,
    "bound_and_extra": _Curve,
    "limit_before": _Limit,
    "limit_left": _Limit,
    "ideal_standards": _Ideal,
}

_KEYS = (
    (r"^standard\b", "standards"),
    (r"^kit\.", ""),
    (r"\bparameter\b", "typed"),
    (r"\bmisfit\b", "bound_and_extra"),
    (r"\blimit_hz$", "limit_left.limit_hz"),
)
"""Keys of a kit file, as patterns, and what is called so in a sheet."""


def looks_like_a_sheet(text: str) -> bool:
    """Return whether a text can only be JSON: no kit file begins with a brace."""
    return text.lstrip()[:1] == "{"


def parse_sheet(text: str, path: Path | str) -> Kit:
    """Return the kit that the JSON of an entry sheet describes: as it is typed.

    Its values are those of the typed numbers, exactly; its bound is the stated one, extra error included.

    Raises
    ------
    KitError
        With the key at which it fails.
    """
    try:
        values = msgspec.json.decode(text)
    except (msgspec.DecodeError, RecursionError) as fault:
        what = quoted(str(fault), 100)[1:-1]
        raise KitError(f"not JSON: {what[:1].lower()}{what[1:]}", MEND, file=path) from fault
    if not isinstance(values, dict) or values.get("format") != FORMAT:
        raise KitError(
            f"no entry sheet of this version (format = {FORMAT!r})",
            "name a kit file, or a file of 'stdfit sheet KIT --json'",
            file=path,
            key="format",
        )
    _refuse_keys_twice(text, path)
    _refuse_strange_keys(values, path)
    try:
        whole = msgspec.convert(values, _Whole)
    except msgspec.ValidationError as fault:
        raise decoder_fault(str(fault), path, _TABLES, _Whole) from fault
    refuse_control_characters(values, path)
    kit = _kit(whole, path)
    try:
        checked(kit, path)
    except KitError as fault:
        raise KitError(fault.what, fault.mend, file=path, key=_own_key(fault.key)) from fault
    return replace(kit, ladder=ladder(kit))


def _refuse_keys_twice(text: str, path: Path | str) -> None:
    """Refuse a key that stands twice in one object: the decoder would take the last one and say nothing."""

    def once(pairs: list[tuple[str, Any]]) -> None:
        seen: set[str] = set()
        for key, _ in pairs:
            if key in seen:
                raise KitError(
                    "the key stands twice", "leave one of the two", file=path, key=quoted(key)[1:-1]
                )
            seen.add(key)

    try:
        json.loads(text, object_pairs_hook=once)
    except (ValueError, RecursionError) as fault:  # numbers without an end, lists in lists without one
        raise KitError(f"not JSON: {quoted(str(fault), 100)[1:-1]}", MEND, file=path) from fault


def _refuse_strange_keys(values: dict[str, Any], path: Path | str) -> None:
    """Refuse units of what has none; their keys are words, and stand in messages."""
    units = values.get("units")
    for key in units if isinstance(units, dict) else ():
        if key not in CHOICES:
            shown = quoted(str(key))[1:-1]
            raise KitError("unknown key", suggestion(str(key), CHOICES), file=path, key=f"units.{shown}")


def _own_key(key: str | None) -> str | None:
    """Return the key of a sheet for one of a kit file."""
    for theirs, ours in _KEYS:
        key = re.sub(theirs, ours, key) if key is not None else None
    return key


def _kit(whole: _Whole, path: Path | str) -> Kit:
    for quantity, choices in CHOICES.items():
        unit = whole.units.get(quantity)
        if unit not in choices:
            what = f"no unit {quoted(unit)} of {quantity}" if unit is not None else "no unit is named"
            raise KitError(what, suggestion(unit or "", choices), file=path, key=f"units.{quantity}")
    units = Units(whole.units, whole.velocity_factor)
    return Kit(
        name=whole.name,
        connector=whole.connector,
        reference_ohm=whole.reference_impedance_ohm,
        within=whole.within,
        top_hz=np.inf if whole.connector_top_hz is None else whole.connector_top_hz,
        created=whole.created,
        version=whole.program_version,
        limit=Limit(whole.within, whole.limit_left.limit_hz, whole.limit_left.reason),
        definitions=tuple(_definition(k, one, whole, units, path) for k, one in enumerate(whole.standards)),
        order=(),
        shares=(),
        ladder=(),
        files=(),
        warnings=tuple(whole.warnings),
    )


def _definition(k: int, one: _Standard, whole: _Whole, units: Units, path: Path | str) -> Definition:
    key = f"standards[{k}]"
    if one.kind not in PARAMETERS:
        raise KitError(
            f"no kind of standard; there are {', '.join(PARAMETERS)}", MEND, file=path, key=f"{key}.kind"
        )
    return Definition(
        name=one.name,
        kind=one.kind,
        shape=ORDER,
        connections=one.connections,
        read_low_hz=one.read_from_hz,
        read_top_hz=one.read_to_hz,
        fit_low_hz=one.fit_from_hz,
        fit_top_hz=one.fit_to_hz,
        parameters=held(one.kind, _values(one, key, whole, units, path)),
        combinations=(),
        misfit_hz=np.array(one.bound_and_extra.frequency_hz),
        misfit=np.array(one.bound_and_extra.value),
        limit=Limit(whole.within, one.limit_left.limit_hz, one.limit_left.reason),
        notes=tuple(one.notes),
    )


def _values(one: _Standard, key: str, whole: _Whole, units: Units, path: Path | str) -> FloatArray:
    """Return the values that the typed numbers mean, in trade units; what is not typed has its default."""
    typing, terms = typing_of(one.kind, units), terms_of(one.kind)
    typed: dict[int, float] = {}
    for t, given in enumerate(one.typed):
        own = f"{key}.typed[{t}]"
        if given.term not in terms:
            raise KitError(
                f"no term {quoted(given.term)} of this kind",
                suggestion(given.term, terms),
                file=path,
                key=f"{own}.term",
            )
        place = terms.index(given.term)
        if place in typed:
            raise KitError(f"{given.term} is typed twice", MEND, file=path, key=own)
        if given.unit != typing.units[place].label:
            wanted = f"'units' says {typing.units[place].label!r}"
            raise KitError(f"the unit is not the stated one: {wanted}", MEND, file=path, key=f"{own}.unit")
        typed[place] = _number(given.number, f"{own}.number", path)
    default = np.array([default_of(p, whole.reference_impedance_ohm) for p in typing.parameters])
    numbers = np.zeros(default.size)
    numbers[list(typed)] = list(typed.values())
    with np.errstate(all="ignore"):  # what is not finite is refused later
        values = typing.meant(numbers, list(typed), default)
    for t, place in enumerate(typed):
        fault = _no_line(typing.parameters[place].name, float(values[place]))
        if fault:
            raise KitError(fault, MEND, file=path, key=f"{key}.typed[{t}].number")
    return values


def _no_line(name: str, value: float) -> str:
    """Return why no offset line has this value, nothing where one may."""
    if name == "offset_z0_ohm" and value <= 0.0:
        return f"an offset Z0 of {value:g} Ω; it must be above 0"
    if name == "offset_delay_ps" and LONGEST_PS <= abs(value) < np.inf:
        return f"an offset delay of {value:g} ps; it must be below {LONGEST_PS:g} ps"
    return ""


def _number(given: str | float, key: str, path: Path | str) -> float:
    if isinstance(given, str) and NUMBER.fullmatch(given) is None:
        raise KitError(f"{quoted(given)} is not a number", MEND, file=path, key=key)
    return float(given)
