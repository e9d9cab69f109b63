"""How often wear is told where nothing has changed, and how often a change is found and rightly named.

``python -m stdfit.trials.wear_study --pairs 500``
"""

import argparse
import sys
import zlib
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.pipeline import kit_of, prepare
from stdfit.pipeline.prepare import Prepared
from stdfit.pipeline.settle import settle
from stdfit.trials.bench import SimulatedBench
from stdfit.trials.families import demo_scenario, families
from stdfit.trials.scenario import Scenario
from stdfit.trials.score import bench_of
from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.validity.change.wear import CHANGED, SAME, Wear, wear
from stdfit.validity.choose import Choice
from stdfit.validity.kit import Kit

CHANGES = (
    Worn("open", "plane shift", shift_ps=0.5),
    Worn("short", "plane shift", shift_ps=0.5),
    Worn("load", "resistance of the load or of its contact", series_ohm=0.1),
    Worn("open", "contact resistance", series_ohm=0.06),
    Worn("short", "contact resistance", series_ohm=0.06),
    Worn("load", "resistance of the load or of its contact", series_ohm=0.06),
)
"""Changes that must be found with a shared calibration."""

SHAPES = {"open": "even", "short": "even", "load": "R+L+C"}
"""Readings are compared, so that the fit plays no part: one order over the whole sweep saves most of the time."""


@dataclass(frozen=True, slots=True)
class Outcome:
    """How one pair fared.

    Attributes
    ----------
    verdicts : tuple of str
        Of each standard.
    named, among : bool
        Whether the right cause is the first that is told, or among those that are told.
    covered : bool
        Whether the interval of that cause holds the change.
    sharper : float
        By how much the shared correction makes the test sharper, the least of the standards.
    """

    verdicts: tuple[str, ...]
    named: bool
    among: bool
    covered: bool
    sharper: float


def wear_scenario() -> Scenario:
    """Return the demo's bench with five connections, low noise and nothing measured by other means."""
    return replace(demo_scenario(), connections=5, noise=1e-4, given_resistance_u_ohm=None)


def quick_kit(simulated: SimulatedBench) -> Kit:
    """Return the kit of a simulated bench with fixed orders over the whole sweep."""
    prepared = prepare(*bench_of(simulated))
    return kit_of(prepared, settle(prepared, _fixed(prepared)), created="2000-01-01")


def _fixed(prepared: Prepared) -> list[Choice]:
    nothing = np.zeros(1)
    return [
        Choice(
            SHAPES[one.kind], float(one.frequency_hz[-1]), 0.0, {}, (), one.frequency_hz[:1], nothing, nothing
        )
        for one in prepared.observed
    ]


def one_pair(
    family: str, seed: int, number: int, *, same_calibration: bool, worn: Worn | None = None
) -> Outcome:
    """Draw one pair and compare it; each pair has a generator of its own."""
    rng = np.random.default_rng([zlib.crc32(family.encode()), seed, number])
    scenario = wear_scenario() if family == "demo" else families()[family](rng)
    pair = draw_pair(scenario, rng, same_calibration=same_calibration, worn=worn)
    found = wear(*(quick_kit(one) for one in pair), same_calibration=same_calibration)
    return outcome_of(found, worn)


def outcome_of(found: Wear, worn: Worn | None) -> Outcome:
    """Return how a comparison fared against what has really changed."""
    verdicts = tuple(one.verdict for one in found.standards)
    sharper = min(one.sharper for one in found.standards)
    if worn is None:
        return Outcome(verdicts, False, False, False, sharper)
    hit = next(one for one in found.standards if one.pair.one.name == worn.standard)
    told = [] if hit.explained is None else [hit.explained.causes, *hit.explained.instead]
    right = [one for causes in told for one in causes if len(causes) == 1 and one.name == worn.cause]
    true = worn.shift_ps if worn.cause == "plane shift" else worn.series_ohm
    return Outcome(
        (hit.verdict,),
        bool(told) and told[0] == tuple(right[:1]),
        bool(right),
        bool(right) and abs(right[0].value - true) <= right[0].u95,
        sharper,
    )


def study_lines(pairs: int, seed: int = 1, alarm_families: Sequence[str] = ("demo",)) -> list[str]:
    """Return the figures as two Markdown tables."""
    lines = [
        "| family | calibration | pairs | called changed | too uncertain to tell | sharper by |",
        "|---|---|---|---|---|---|",
    ]
    for family in alarm_families:
        for same in (True, False):
            found = [one_pair(family, seed, number, same_calibration=same) for number in range(pairs)]
            alarms = np.mean([CHANGED in one.verdicts for one in found])
            unsure = np.mean([CHANGED not in one.verdicts and {*one.verdicts} != {SAME} for one in found])
            sharper = float(np.median([one.sharper for one in found]))
            lines.append(
                f"| {family} | {'the same' if same else 'another'} | {pairs} | {100 * alarms:.1f} % "
                f"| {100 * unsure:.0f} % | {f'{sharper:.1f}' if same else ''} |"
            )
    lines += [
        "",
        "| change | found | cause named first | cause among those told | interval holds it |",
        "|---|---|---|---|---|",
    ]
    few = max(1, pairs // 3)
    for worn in CHANGES:
        found = [one_pair("demo", seed, number, same_calibration=True, worn=worn) for number in range(few)]
        hits = [one for one in found if one.verdicts == (CHANGED,)]
        size = f"{worn.shift_ps:g} ps" if worn.shift_ps else f"{worn.series_ohm:g} Ω"
        parts = [np.mean([getattr(one, name) for one in hits]) for name in ("named", "among", "covered")]
        lines.append(
            f"| {worn.standard}: {worn.cause}, {size} | {100 * len(hits) / few:.0f} % of {few} | "
            + " | ".join(f"{100 * part:.0f} %" for part in parts)
            + " |"
        )
    return lines


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the study and print its tables."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("--pairs", type=int, default=500)
    asked.add_argument("--seed", type=int, default=1)
    names = ["demo", *families()]
    asked.add_argument("--family", action="append", choices=names, help="may be repeated (demo)")
    given = asked.parse_args(arguments)
    print("\n".join(study_lines(given.pairs, given.seed, given.family or ("demo",))))
    return 0


if __name__ == "__main__":
    sys.exit(main())
