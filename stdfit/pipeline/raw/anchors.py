"""Raw readings gathered, and where to start: the standards whose reflection is roughly known fix the error terms."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_float
from stdfit.base.errors import BenchError, ReadingError
from stdfit.base.records import Sweep
from stdfit.circuits.connectors import Family
from stdfit.circuits.error_box import corrected
from stdfit.data.bench import Bench
from stdfit.data.verify import verify_standards
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem
from stdfit.fitting.roles import Wish, build_problem, starting_values
from stdfit.fitting.screen import screen_points
from stdfit.fitting.unknown_box import apart, fitted_box
from stdfit.pipeline.ceiling import family_on
from stdfit.pipeline.prepare import single_points
from stdfit.pipeline.raw.known_standards import known_cautions
from stdfit.pipeline.raw.references import Reference, looked_up
from stdfit.validity.ancestry import Origin

FEWEST_STANDARDS = 4
"""Three standards only fix the three error terms: nothing is left to tell their definitions by."""

FEWEST_POINTS = 8

FLAT_SHORT_PH = 2.5
"""Standard uncertainty of the inductance of a short whose length is given: a flat end has its skin impedance
only, below 1 pH at 1 GHz, and more than about 5 pH would be length in disguise (derived)."""

LINE_SCATTER = 0.01
"""Standard uncertainty of a line's impedance, as part of the reference impedance (common practice, no source)."""

STARTABLE = 0.01
"""How well the standards of roughly known reflection must be told from each other to begin with; two loads are not."""

SHAPES = {"open": "even", "short": "constant", "load": "R+L+delay"}
"""Orders of the ends; each standard has a line of its own impedance besides."""


@dataclass(frozen=True, slots=True, eq=False)
class Gathered:
    """Raw readings of a bench, screened.

    Attributes
    ----------
    bench : Bench
    frequency_hz : array of shape (n,)
    stacks : tuple of complex arrays of shape (k, n)
        One row for each connection.
    files : tuple of tuple of str
        Where each connection was read from.
    wishes : tuple of Wish
        A known standard has all its parameters held.
    known : mapping of int to Reference
        By place among the standards.
    family : Family
    warnings : tuple of str
    """

    bench: Bench
    frequency_hz: FloatArray
    stacks: tuple[ComplexArray, ...]
    files: tuple[tuple[str, ...], ...]
    wishes: tuple[Wish, ...]
    known: Mapping[int, Reference]
    family: Family
    warnings: tuple[str, ...]


def gather(
    bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], origins: Mapping[Path, Origin] | None = None
) -> Gathered:
    """Verify and screen raw readings, and look up what is known.

    Parameters
    ----------
    bench : Bench
    sweeps : mapping
        For each standard, one raw sweep for each connection; all on one grid.
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.

    Raises
    ------
    InputError
        Too few standards or points, grids that differ, or a known standard that its kit does not hold.
    """
    _refuse(bench)
    warnings = list(
        verify_standards({one.name: (one.kind, sweeps[one.name]) for one in bench.standards}, state="raw")
    )
    places = [k for k, one in enumerate(bench.standards) if one.from_kit is not None]
    known = dict(zip(places, looked_up(bench, origins), strict=True))
    warnings += known_cautions(tuple(known.values()))
    grid = sweeps[bench.standards[0].name][0].frequency_hz
    top = min([bench.highest_hz or np.inf, *(one.definition.read_top_hz for one in known.values())])
    inside = (grid > 0.0) & (grid <= top)
    if np.count_nonzero(inside) < FEWEST_POINTS:
        raise ReadingError(
            f"fewer than {FEWEST_POINTS} readings lie in the band that is asked for and that known standards cover",
            "raise goal.highest_hz or take more points",
            file=sweeps[bench.standards[0].name][0].name,
        )
    stacks = []
    for one in bench.standards:
        readings = np.array([sweep.gamma[inside] for sweep in sweeps[one.name]])
        screened = screen_points(grid[inside], readings)
        for sweep, row in zip(sweeps[one.name], screened.replaced, strict=True):
            if row.any():
                warnings.append(single_points(sweep.name, grid[inside][row]))
        stacks.append(screened.readings)
    return Gathered(
        bench,
        frozen_float(grid[inside]),
        tuple(stacks),
        tuple(tuple(sweep.name for sweep in sweeps[one.name]) for one in bench.standards),
        tuple(_wish(bench, k, known) for k in range(len(bench.standards))),
        known,
        family_on(bench),
        tuple(warnings),
    )


def _refuse(bench: Bench) -> None:
    """Refuse a bench whose definitions cannot be told from the analyser's own errors."""
    if len(bench.standards) < FEWEST_STANDARDS:
        raise BenchError(
            f"raw readings of {len(bench.standards)} standards, fewer than three of them known, cannot be told from "
            "the analyser's own errors",
            "add two offset shorts of known length and the load's DC resistance, or three standards from a kit",
            file=bench.path,
            key="standard",
        )
    for one in bench.standards:
        if one.reading_set is not None:
            raise BenchError(
                "sets tell the drift only where each holds three or more known standards",
                "leave out set, or read three known standards in each",
                file=bench.path,
                key=f"standard[{one.name}].set",
            )


def _wish(bench: Bench, place: int, known: Mapping[int, Reference]) -> Wish:
    """Return what is said of a standard."""
    if place in known:
        return Wish({one.name: (one.value, None) for one in known[place].definition.parameters})
    entry = bench.standards[place]
    return Wish({name: (given.value, given.u) for name, given in entry.given.items()}, entry.same_offset_as)


def starting_problem(gathered: Gathered, weight: float) -> Problem:
    """Return the problem with starting values, all readings of one weight.

    Loads, standards of given length and known standards fix the error terms well enough to see the others.

    Raises
    ------
    BenchError
        Fewer than three standards are roughly known, or these reflect alike.
    """
    bench, f = gathered.bench, gathered.frequency_hz
    blank = [_seen(gathered, k, np.zeros(f.size, dtype=complex)) for k in range(len(gathered.stacks))]
    weights = [np.full(f.size, weight) for _ in blank]
    shapes, assumed = shapes_of(gathered), assumed_of(gathered)
    lengths = {k for k, wish in enumerate(gathered.wishes) if _length_of(gathered, wish)}
    anchored = sorted(
        lengths
        | {k for k, entry in enumerate(bench.standards) if entry.kind == "load" or k in gathered.known}
    )
    if len(anchored) < 3 or not lengths | set(gathered.known):
        raise BenchError(
            "too little is known to begin with: three standards must be loads, known, or of given length, and at least "
            "one length must be given, else the plane could lie anywhere",
            "measure lengths with a ruler and write given.offset_delay_ps = { value = …, u = … }",
            file=bench.path,
            key="standard",
        )
    nothing = {f"{entry.name}.offset_delay_ps": 0.0 for entry in bench.standards}
    ohms = {
        f"{entry.name}.resistance_ohm": bench.reference_ohm
        for entry in bench.standards
        if entry.kind == "load"
    }
    first = build_problem(
        blank, gathered.wishes, shapes, weights, {**nothing, **ohms}, bench.reference_ohm, assumed
    )
    values = first.values
    raw = np.stack([stack.mean(axis=0) for stack in gathered.stacks], axis=1)
    gamma = np.stack([first.model(k, values)[0] for k in anchored], axis=1)
    if np.median(apart(gamma)) < STARTABLE:
        names = ", ".join(bench.standards[k].name for k in anchored)
        raise BenchError(
            f"those standards of which enough is known to begin with reflect alike: {names}",
            "give the length of one more open or short, as given.offset_delay_ps = { value = …, u = … }",
            file=bench.path,
            key="standard",
        )
    box = fitted_box(gamma, raw[:, anchored], np.full(gamma.shape, weight))
    seen = [_seen(gathered, k, corrected(box, raw[:, k])) for k in range(len(blank))]
    starts = {**starting_values(seen, bench.reference_ohm), **ohms}
    return build_problem(seen, gathered.wishes, shapes, weights, starts, bench.reference_ohm, assumed)


def _length_of(gathered: Gathered, wish: Wish) -> bool:
    """Tell whether a standard's length is given, by itself or by the standard whose line it shares."""
    names = [entry.name for entry in gathered.bench.standards]
    while wish.same_offset_as is not None:
        wish = gathered.wishes[names.index(wish.same_offset_as)]
    return "offset_delay_ps" in wish.given


def _seen(gathered: Gathered, place: int, gamma: ComplexArray) -> Observed:
    entry = gathered.bench.standards[place]
    return Observed(
        entry.name, entry.kind, gathered.frequency_hz, gamma, np.zeros((1, gamma.size), dtype=complex)
    )


def shapes_of(gathered: Gathered) -> list[str]:
    """Return the order of each standard."""
    return [
        (entry.polynomial if entry.polynomial != "chosen" else SHAPES[entry.kind]) + "+Z0"
        for entry in gathered.bench.standards
    ]


def assumed_of(gathered: Gathered) -> dict[str, tuple[float, float]]:
    """Return the weak evidence that raw readings rest on, "standard.parameter", where it is tighter than usual."""
    reference = gathered.bench.reference_ohm
    assumed = {}
    for entry, wish in zip(gathered.bench.standards, gathered.wishes, strict=True):
        assumed[f"{entry.name}.offset_z0_ohm"] = (reference, LINE_SCATTER * reference)
        if entry.kind == "short" and _length_of(gathered, wish):
            assumed[f"{entry.name}.l0"] = (0.0, FLAT_SHORT_PH)
    return assumed
