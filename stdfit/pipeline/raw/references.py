"""The references of a bench of raw readings: standards whose definition comes from a kit file."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import BenchError
from stdfit.data.bench import Bench, StandardEntry
from stdfit.data.ordinary import digest
from stdfit.data.words import quoted, suggestion
from stdfit.validity.ancestry import Origin
from stdfit.validity.kit import Definition, curve, model
from stdfit.writing.kit_file import is_kit_file
from stdfit.writing.kit_reading import read_kit

FEWEST = 3
"""References that fix the three error terms."""

SAME_OHM = 1e-9
"""Reference impedances that differ by less than this part are the same."""


@dataclass(frozen=True, slots=True, eq=False)
class Reference:
    """One known standard of a bench, read in one set.

    Attributes
    ----------
    entry : StandardEntry
    origin : Origin
        The kit that defines it.
    definition : Definition
    """

    entry: StandardEntry
    origin: Origin
    definition: Definition

    @property
    def part(self) -> tuple[str, str]:
        """What makes it the same physical standard as another: the kit file and its name there."""
        return self.origin.sha256, self.definition.name

    def gamma(self, frequency_hz: FloatArray) -> tuple[ComplexArray, FloatArray]:
        """Return its reflection and the 95 % bound of it, each of shape (n,)."""
        return curve(self.origin.kit, self.definition, frequency_hz)

    def design(self, frequency_hz: FloatArray) -> ComplexArray:
        """Return the derivatives by the quantities of its kit's joint covariance, shape (n, p)."""
        return model(self.origin.kit, self.definition, frequency_hz)[1]


def count_references(bench: Bench) -> int:
    """Return how many standards of a bench are known from a kit file."""
    return sum(entry.from_kit is not None for entry in bench.standards)


def references_of(bench: Bench, origins: Mapping[Path, Origin] | None = None) -> tuple[Reference, ...]:
    """Return the references of a bench, in the order of the file.

    Parameters
    ----------
    bench : Bench
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.

    Raises
    ------
    KitError
        A kit file cannot be used.
    BenchError
        A kit does not hold the standard or is of another reference impedance, kinds differ, the sets are not
        complete, or all standards are known.
    """
    references = looked_up(bench, origins)
    if len(references) == len(bench.standards):
        raise BenchError(
            "all standards are known ones: nothing is left to be characterised",
            "add the standards that are to be characterised, without from_kit",
            file=bench.path,
            key="standard",
        )
    _check_sets(bench, references)
    return references


def looked_up(bench: Bench, origins: Mapping[Path, Origin] | None = None) -> tuple[Reference, ...]:
    """Return the known standards of a bench as their kits define them, in the order of the file.

    Parameters
    ----------
    bench, origins
        As for `references_of`.

    Raises
    ------
    KitError
        A kit file cannot be used.
    BenchError
        A kit does not hold the standard or is of another reference impedance, or kinds differ.
    """
    known = dict(origins or {})
    references = []
    for entry in bench.standards:
        if entry.from_kit is None:
            continue
        if entry.from_kit not in known:
            known[entry.from_kit] = _read(entry.from_kit, bench, entry)
        references.append(_reference(bench, entry, known[entry.from_kit]))
    return tuple(references)


def sets_of(references: Sequence[Reference]) -> dict[str, list[int]]:
    """Return the places of the references of each set; without sets all are of one, named ''."""
    sets: dict[str, list[int]] = {}
    for place, one in enumerate(references):
        sets.setdefault(one.entry.reading_set or "", []).append(place)
    return sets


def _read(path: Path, bench: Bench, entry: StandardEntry) -> Origin:
    kit = read_kit(path)
    if not is_kit_file(path):
        raise _fault(
            bench,
            entry,
            "from_kit",
            "an entry sheet does not hold how the errors of its standards go together",
            "name the kit file that it was made from",
        )
    return Origin(kit, digest(path))


def _reference(bench: Bench, entry: StandardEntry, origin: Origin) -> Reference:
    kit = origin.kit
    if abs(kit.reference_ohm / bench.reference_ohm - 1.0) > SAME_OHM:
        raise _fault(
            bench,
            entry,
            "from_kit",
            f"the kit is of {kit.reference_ohm:g} Ω, and the bench of {bench.reference_ohm:g} Ω",
            "take a kit of the same reference impedance",
        )
    names = [one.name for one in kit.definitions]
    if entry.standard not in names:
        what = f"the kit holds no standard {quoted(str(entry.standard))}"
        raise _fault(bench, entry, "standard", what, suggestion(str(entry.standard), names))
    definition = kit.definition(str(entry.standard))
    if definition.kind != entry.kind:
        article = "an" if definition.kind == "open" else "a"
        raise _fault(
            bench,
            entry,
            "kind",
            f"{quoted(definition.name)} is {article} {definition.kind} in the kit",
            f'write kind = "{definition.kind}", or name another standard',
        )
    return Reference(entry, origin, definition)


def _check_sets(bench: Bench, references: Sequence[Reference]) -> None:
    """Refuse sets that cannot fix the error terms by themselves."""
    sets = sets_of(references)
    if len(sets) > 1 and "" in sets:
        entry = references[sets[""][0]].entry
        raise _fault(
            bench, entry, "set", "missing, while other known standards name their set", 'write set = "…"'
        )
    for name, places in sets.items():
        first = references[places[0]].entry
        if len(places) < FEWEST:
            raise _fault(
                bench,
                first,
                "set",
                f"the set {quoted(name)} holds {len(places)} of the {FEWEST} known standards that a set needs",
                "read three or more in each set, or give all of them the same set",
            )
        seen: dict[tuple[str, str], str] = {}
        for place in places:
            own = references[place]
            if own.part in seen:
                raise _fault(
                    bench,
                    own.entry,
                    "standard",
                    f"the same known standard as {quoted(seen[own.part])}, in the same set",
                    "list all its readings under one name, or give it another set",
                )
            seen[own.part] = own.entry.name


def stacked(references: Sequence[Reference], frequency_hz: FloatArray) -> tuple[ComplexArray, FloatArray]:
    """Return reflections and bounds of some references, each of shape (n, r)."""
    each = [one.gamma(frequency_hz) for one in references]
    return np.stack([gamma for gamma, _ in each], axis=1), np.stack([bound for _, bound in each], axis=1)


def _fault(bench: Bench, entry: StandardEntry, key: str, what: str, mend: str) -> BenchError:
    return BenchError(what, mend, file=bench.path, key=f"standard[{quoted(entry.name)[1:-1]}].{key}")
