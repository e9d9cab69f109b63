"""Which kits of a folder tell of the same standards, in which order, and what they are plotted against."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date, datetime

from stdfit.circuits.connectors import family_of
from stdfit.validity.kit import Definition, Kit

DAYS_A_MONTH = 365.25 / 12.0

MONTH, MATING = "month", "mating"


@dataclass(frozen=True, slots=True, eq=False)
class Dated:
    """A kit of a folder.

    Attributes
    ----------
    file : str
    sha256 : str
        Of its file.
    kit : Kit
    """

    file: str
    sha256: str
    kit: Kit


def day_of(kit: Kit) -> date | None:
    """Return when a kit was read, else when it was fitted; None where neither is a date."""
    return as_day(kit.measured) or as_day(kit.created)


def as_day(text: str) -> date | None:
    """Return the day that a text names, or None."""
    try:
        return datetime.fromisoformat(text).date()
    except ValueError:
        return None


def comparable(found: Sequence[Dated]) -> tuple[list[Dated], list[tuple[str, str]]]:
    """Return the kits in order, and what cannot be set beside the newest one."""
    aside = [(one.file, "neither measured nor created is a date") for one in found if day_of(one.kit) is None]
    kits = sorted((one for one in found if day_of(one.kit) is not None), key=_age)
    kept: list[Dated] = []
    for one in reversed(kits):
        why = _why_not(one, kept)
        if why:
            aside.append((one.file, why))
        else:
            kept.append(one)
    return kept[::-1], aside


def _age(one: Dated) -> tuple[date, int, str]:
    """Return what sorts kits: the day, on one day the counts of matings."""
    counted = [own.matings for own in one.kit.definitions if own.matings is not None]
    return day_of(one.kit) or date.min, max(counted, default=0), one.file


def _why_not(one: Dated, kept: Sequence[Dated]) -> str:
    """Say why a kit cannot be set beside newer ones; nothing where it can."""
    if not one.kit.shares:
        return "states no sources of error (a kit as typed)"
    if not kept:
        return ""
    newest = kept[0].kit
    if not math.isclose(one.kit.reference_ohm, newest.reference_ohm, rel_tol=1e-9):
        return f"reference impedance {one.kit.reference_ohm:g} Ω instead of {newest.reference_ohm:g} Ω"
    families = [family_of(kit.connector).name for kit in (one.kit, newest)]
    if all(families) and families[0] != families[1]:
        return f"connector {families[0]} instead of {families[1]}"
    readings = {file.sha256 for file in one.kit.files if file.holds_readings}
    for other in kept:
        if other.sha256 == one.sha256:
            return f"the same as {other.file}"
        if readings & {file.sha256 for file in other.kit.files}:
            return f"made from readings that are in {other.file} too"
    names = {(own.name, own.kind) for own in newest.definitions}
    if not names & {(own.name, own.kind) for own in one.kit.definitions}:
        return f"other standards than {kept[0].file}: {', '.join(own.name for own in one.kit.definitions)}"
    return ""


def axis_of(rows: Sequence[tuple[Dated, Definition]]) -> tuple[str, list[float]]:
    """Return matings where every kit counts them and they never fall, else months since the first kit."""
    counted = [own.matings for _, own in rows if own.matings is not None]
    if len(counted) == len(rows) and counted == sorted(counted) and counted[0] < counted[-1]:
        return MATING, [float(count) for count in counted]
    days = [(day_of(dated.kit) or date.min).toordinal() for dated, _ in rows]
    return MONTH, [(day - min(days)) / DAYS_A_MONTH for day in days]
