"""Wear as text and as data."""

import math
from typing import Any

from stdfit.validity.change.cause import Cause
from stdfit.validity.change.wear import CHANGED, CLEARLY, UNSURE, StandardWear, Wear
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import figure, frequency, good_to

COLUMNS = ("standard", "frequency_hz", "difference", "bound", "normalised", "explained")

SHARPER = 1.1
"""From so much on it is told by how much a shared correction makes the comparison sharper."""

SMALL_OHM = 0.995
"""Resistances below this are told in mΩ."""

NEVER = 1e-3
"""The smallest probability that is told."""


def wear_text(found: Wear) -> str:
    """Return verdict, causes, and what the old definition is still good for."""
    old, new = (f"{kit.name} ({kit.measured or kit.created})" for kit in (found.old, found.new))
    lines = [f"{old} against {new}", ""]
    rows = [["standard", "verdict", "by chance", "largest Eₙ", "change known within"]]
    for one in found.standards:
        ratio, at_hz = one.difference.largest_ratio
        rows.append(
            [
                one.pair.label,
                one.verdict,
                _chance(one.chance),
                f"{figure(ratio)} at {frequency(at_hz)}",
                f"{figure(one.unsure)} up to {frequency(one.judged_hz)}",
            ]
        )
    lines += [*aligned(rows, ""), ""]
    for one in found.standards:
        lines += _told(one, found)
    lines += ["", f"The old definition on the standards as they are now, within {found.old.within:g}"]
    table = [["standard", "old definition good to", "new definition good to"]]
    table += [
        [one.pair.label, good_to(one.old_limit_hz), good_to(one.new_limit_hz)] for one in found.standards
    ]
    table.append(["kit", good_to(found.old_limit_hz), good_to(found.new_limit_hz)])
    lines += [*aligned(table), ""]
    lines += [f"note: {note}" for note in _notes(found)]
    return "\n".join([*lines, wear_verdict(found)]) + "\n"


def wear_verdict(found: Wear) -> str:
    """Return the last line: what has changed, and whether to type the definition anew."""
    changed = [one.pair.label for one in found.standards if one.verdict == CHANGED]
    if changed:
        return f"changed: {', '.join(changed)}; {_advice(found)}"
    if found.verdict == UNSURE:
        names = ", ".join(one.pair.label for one in found.standards if one.verdict == UNSURE)
        return f"too uncertain to tell: a change of {names} by more than {found.old.within:g} would not have been seen"
    return "not changed: no need to type anything anew"


def _advice(found: Wear) -> str:
    """Return what to do about a change."""
    if found.retype:
        return "mend what can be mended and read it again, or type the new definition"
    if found.old_limit_hz <= 0.0:
        return f"neither definition is good at any frequency within {found.old.within:g}"
    return f"the old definition still serves to {frequency(found.old_limit_hz)}: typing anew gains little"


def wear_rows(found: Wear) -> list[list[Any]]:
    """Return the rows of `COLUMNS`."""
    rows: list[list[Any]] = []
    for one in found.standards:
        d = one.difference
        rows += [
            [one.pair.label, *(float(value) for value in row)]
            for row in zip(d.frequency_hz, d.difference, d.bound, d.ratio, one.explained_size, strict=True)
        ]
    return rows


def wear_data(found: Wear) -> dict[str, Any]:
    """Return the same as data."""
    return {
        "old": found.old.name,
        "new": found.new.name,
        "verdict": found.verdict,
        "shared_correction": found.shared or None,
        "within": found.old.within,
        "old_limit_hz": found.old_limit_hz,
        "new_limit_hz": found.new_limit_hz,
        "type_anew": found.retype,
        "standards": [_standard_data(one) for one in found.standards],
        "notes": _notes(found),
    }


def _standard_data(one: StandardWear) -> dict[str, Any]:
    ratio, at_hz = one.difference.largest_ratio
    sets = [] if one.explained is None else [one.explained.causes, *one.explained.instead]
    return {
        "name": one.pair.label,
        "verdict": one.verdict,
        "compared_by": one.by,
        "statistic": one.tested.statistic,
        "directions": one.tested.rank,
        "chance": one.chance,
        "chance_of_parts": one.tested.chance,
        "chance_of_rest": one.rest.chance,
        "rest": one.rest.size,
        "rest_at_hz": one.rest.at_hz,
        "largest_normalised": ratio if math.isfinite(ratio) else None,
        "largest_normalised_at_hz": at_hz,
        "unsure": one.unsure,
        "unsure_at_hz": one.unsure_at_hz,
        "judged_to_hz": one.judged_hz,
        "sharper_by_sharing": one.sharper,
        "explained_by": [[_cause_data(cause) for cause in causes] for causes in sets],
        "could_be_seen": [_cause_data(cause) for cause in one.visible],
        "old_limit_hz": one.old_limit_hz,
        "new_limit_hz": one.new_limit_hz,
    }


def _cause_data(cause: Cause) -> dict[str, Any]:
    data: dict[str, Any] = {"cause": cause.name, "value": cause.value, "u95": cause.u95, "unit": cause.unit}
    if cause.length_um is not None:
        data["length_um"], data["length_u95_um"] = cause.length_um
    return data


def _told(one: StandardWear, found: Wear) -> list[str]:
    """Return what is said of one standard below the table."""
    name = one.pair.label
    lines = []
    if one.explained is not None:
        lines.append(f"{name}: {_causes(one.explained.causes)}")
        lines += [f"  or as well: {_causes(causes)}" for causes in one.explained.instead]
    if one.verdict == CHANGED and one.explained is None:
        lines.append(f"{name}: nothing that a connector does explains the change")
    if one.other_cause:
        lines.append(
            f"{name}: |ΔΓ| of {figure(one.rest.size)} about {frequency(one.rest.at_hz)} has another cause: look at "
            "the part itself"
        )
    if one.verdict != CHANGED:
        seen = ", ".join(f"{_size(cause.name, cause.unit, cause.u95)}" for cause in one.visible)
        lines.append(f"{name}: known within {seen} (95 %, each alone)")
    if one.sharper >= SHARPER:
        lines.append(
            f"  sharper by a factor {one.sharper:.1f}, since both share one {found.shared or 'evidence'}"
        )
    return lines


def _causes(causes: tuple[Cause, ...]) -> str:
    return " and ".join(_cause(cause) for cause in causes)


def _cause(cause: Cause) -> str:
    """Return a cause with its figures in one sentence.

    Examples
    --------
    >>> _cause(Cause("plane shift", "ps", 0.512, 0.21))
    'plane shift +0.51 ± 0.21 ps (+153 ± 63 µm in air): reflects later'
    """
    value, u95, unit = cause.value, cause.u95, cause.unit
    if unit == "Ω" and max(abs(value), u95) < SMALL_OHM:
        value, u95, unit = 1e3 * value, 1e3 * u95, "mΩ"
    told = f"{cause.name} {_with_u95(value, u95)} {unit}"
    if cause.length_um is None:
        return told
    length, wide = cause.length_um
    later = "later" if cause.value > 0.0 else "earlier"
    return f"{told} ({_with_u95(length, wide)} µm in air): reflects {later}"


def _with_u95(value: float, u95: float) -> str:
    """Return value ± uncertainty with two digits of the uncertainty, and the sign of the value."""
    if u95 <= 0.0 or not math.isfinite(u95):
        return f"{value:+.3g} ± {u95:.2g}"
    decimals = max(0, 1 - math.floor(math.log10(u95)))
    return f"{value:+.{decimals}f} ± {u95:.{decimals}f}"


def _size(name: str, unit: str, u95: float) -> str:
    if unit == "Ω" and u95 < SMALL_OHM:
        u95, unit = 1e3 * u95, "mΩ"
    return f"{u95:.2g} {unit} of {name}" if u95 < 99.5 else f"{u95:.0f} {unit} of {name}"


def _chance(chance: float) -> str:
    if chance <= NEVER:
        return f"less than {100 * NEVER:g} %"
    return f"{100 * chance:.2g} %" if chance < 0.1 else f"{100 * chance:.0f} %"


def _notes(found: Wear) -> list[str]:
    """Return what was matched how, what was left out, and what the comparison rests on."""
    pairing = found.pairing
    notes = [
        f"{pair.label}: matched by their kind, {pair.one.kind}" for pair in pairing.pairs if pair.by == "kind"
    ]
    notes += [f"{pair.label}: left out, no band in common" for pair in pairing.apart]
    for kit, alone in ((found.old, pairing.alone_one), (found.new, pairing.alone_two)):
        if alone:
            notes.append(f"without a counterpart in the other kit: {', '.join(alone)} of {kit.name}")
    if found.shared:
        notes.append(f"what both share is taken out of the comparison: one {found.shared}")
    else:
        notes.append(
            "the two share no correction that is known of: where one calibration served both, name it in both bench "
            "files, or say --same-calibration"
        )
    lower = [
        one.pair.label
        for one in found.standards
        if one.verdict != CHANGED and one.old_limit_hz < CLEARLY * one.new_limit_hz
    ]
    if lower:
        notes.append(
            f"{', '.join(lower)}: no change was found, and the old definition is good to less far all the same, since "
            "a change as large as the comparison's uncertainty may hide in it and is allowed for"
        )
    if found.verdict == CHANGED and not found.retype:
        notes.append(
            f"typing anew pays where the old definition is good to less than {CLEARLY:g} of the new limit"
        )
    return [*notes, *found.notes]
