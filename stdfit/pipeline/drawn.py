"""Drawings of a bench's standards, turned into given values before a fit and compared with the readings after it."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import hypot, inf
from pathlib import Path
from statistics import NormalDist

from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, Given, StandardEntry
from stdfit.data.drawing import part_for, read_drawing
from stdfit.data.drawing_records import Drawing
from stdfit.pipeline.prepare import Prepared
from stdfit.pipeline.settle import settle
from stdfit.validity.define import Settled, define
from stdfit.validity.drawing.evidence import DrawnPart
from stdfit.validity.drawing.part import drawn_part

OFFSET = ("offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm")

COMPARED = {"open": "offset_delay_ps", "short": "offset_delay_ps", "load": "resistance_ohm"}
"""What the readings of each kind fix by themselves, once the rest of the drawing is taken as it is: of an open the sum
of delay and Z0·C0, of a short that of delay and L0/Z0, both told as delay."""

TWO_SIDED = 1.959963984540054


@dataclass(frozen=True, slots=True)
class Compared:
    """A drawn value beside the same value without it.

    Attributes
    ----------
    standard, kind, name : str
    drawn, drawn_u95 : float
        As the drawing tells it, in trade units.
    read, read_u95 : float
        As the readings and all other evidence tell it.
    """

    standard: str
    kind: str
    name: str
    drawn: float
    drawn_u95: float
    read: float
    read_u95: float

    @property
    def off(self) -> float:
        """How much more the readings say."""
        return self.read - self.drawn

    @property
    def allowed(self) -> float:
        """95 % bound on the difference."""
        return hypot(self.drawn_u95, self.read_u95)


def with_drawings(bench: Bench, sweeps: Mapping[str, Sequence[Sweep]]) -> Bench:
    """Return the bench with what drawings tell among the given values.

    A value that the bench file gives goes before the drawing's. Odd orders that physics holds at zero are held there,
    unless the bench file asks for the full polynomial. A standard that shares another's offset line takes nothing of
    its own drawing's line.

    Parameters
    ----------
    bench : Bench
    sweeps : mapping
        For each standard, its readings: fields are computed up to the last of them.

    Raises
    ------
    BenchError
        A drawing cannot be used.
    """
    drawings: dict[Path, Drawing] = {}
    standards = []
    for entry in bench.standards:
        if entry.from_drawing is None:
            standards.append(entry)
            continue
        file = entry.from_drawing.file
        if file not in drawings:
            drawings[file] = read_drawing(file)
        part = part_for(drawings[file], entry.name, entry.kind, entry.from_drawing.part)
        top = min(float(sweeps[entry.name][0].frequency_hz[-1]), bench.highest_hz or inf)
        standards.append(with_drawn(entry, drawn_part(drawings[file], part, top, bench.reference_ohm)))
    return replace(bench, standards=tuple(standards))


def with_drawn(entry: StandardEntry, drawn: DrawnPart) -> StandardEntry:
    """Return a standard with the values of its drawing among those that are given."""
    told: dict[str, Given] = {
        one.name: Given(one.value, one.u if one.u > 0.0 else None) for one in drawn.values
    }
    if entry.polynomial != "full":
        told |= dict.fromkeys(drawn.held, Given(0.0))
    kept = {
        name: given
        for name, given in told.items()
        if name not in entry.given and not (entry.same_offset_as is not None and name in OFFSET)
    }
    return replace(
        entry,
        given={**entry.given, **kept},
        drawn=tuple(kept),
        drawn_notes=drawn.notes,
        next_mode_hz=drawn.next_mode_hz,
    )


def drawing_notes(bench: Bench) -> tuple[str, ...]:
    """Return what drawings say that a fit cannot take up."""
    return tuple(f"{entry.name}, as drawn: {note}" for entry in bench.standards for note in entry.drawn_notes)


def compare_with_drawings(prepared: Prepared, settled: Settled) -> list[Compared]:
    """Set drawn lengths and resistances beside those that come out when they are not told.

    The fit is done again with the same orders and ranges, and without these values; everything else that is drawn or
    given stays.

    Parameters
    ----------
    prepared : Prepared
    settled : Settled
        The fit with all that is drawn.
    """
    asked = {
        entry.name: COMPARED[entry.kind]
        for entry in prepared.bench.standards
        if COMPARED[entry.kind] in entry.drawn
    }
    if not asked:
        return []
    wishes = tuple(
        replace(wish, given={name: told for name, told in wish.given.items() if asked.get(one.name) != name})
        for one, wish in zip(prepared.observed, prepared.wishes, strict=True)
    )
    definitions, _, _ = define(settle(replace(prepared, wishes=wishes), settled.choices))
    given = {entry.name: entry.given for entry in prepared.bench.standards}
    found = []
    for one in definitions:
        if one.name not in asked:
            continue
        read = next(parameter for parameter in one.parameters if parameter.name == asked[one.name])
        drawn = given[one.name][asked[one.name]]
        drawn_u95 = TWO_SIDED * (drawn.u or 0.0)
        half = 0.5 * (read.high - read.low)
        found.append(Compared(one.name, one.kind, read.name, drawn.value, drawn_u95, read.value, half))
    return found


def drawn_contradictions(prepared: Prepared, settled: Settled) -> tuple[str, ...]:
    """Return a line for each drawn value that the readings contradict.

    Where all drawings are right, 5 % of the benches are told something: each of m values is allowed k times its 95 %
    bound, Φ(1.960·k) = (1 + 0.95^(1/m))/2 (Z. Šidák, J. Amer. Statist. Assoc. 62, 1967, 626–633; from memory).
    """
    compared = compare_with_drawings(prepared, settled)
    if not compared:
        return ()
    widened = NormalDist().inv_cdf(0.5 * (1.0 + 0.95 ** (1.0 / len(compared)))) / TWO_SIDED
    return tuple(
        _line(one, widened * one.allowed) for one in compared if abs(one.off) > widened * one.allowed
    )


def _line(one: Compared, allowed: float) -> str:
    if one.kind == "load":
        return (
            f"{one.standard}: the readings find {one.read:.4g} Ω where {one.drawn:.4g} Ω is drawn; the bounds of both "
            f"allow {allowed:.2g} Ω: check the chips' value and count, the solder, and the file"
        )
    longer = "longer" if one.off > 0.0 else "shorter"
    return (
        f"{one.standard}: by the readings it is {abs(one.off):.2g} ps ({0.2998 * abs(one.off):.2g} mm of air) {longer} "
        f"than drawn; the bounds of both allow {allowed:.2g} ps: check length_mm, from the connector's plane to the "
        "end, what fills the line, and the plane that the analyser was calibrated to"
    )
