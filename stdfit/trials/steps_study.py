"""What the estimates of the next steps are worth: each step is taken on a simulated bench, and the kit fitted again.

``python -m stdfit.trials.steps_study --benches 4``
"""

import argparse
import sys
import zlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import frozen_complex
from stdfit.pipeline import characterise
from stdfit.trials.analyser import StatedDecibels
from stdfit.trials.bench import SimulatedBench, draw_bench
from stdfit.trials.families import families
from stdfit.trials.scenario import Scenario
from stdfit.trials.score import bench_of
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.kit import Kit, curve
from stdfit.validity.next_steps import END_OF_READINGS, LONGER, next_steps

HALVED_DB = 20.0 * np.log10(2.0)

Draw = Callable[[Scenario], SimulatedBench]


def halved(stated: StatedDecibels) -> StatedDecibels:
    """Return statements of half the size."""
    tracking = 20.0 * np.log10(1.0 + 0.5 * (10.0 ** (stated.reflection_tracking_db / 20.0) - 1.0))
    return replace(
        stated,
        directivity_db=stated.directivity_db + HALVED_DB,
        source_match_db=stated.source_match_db + HALVED_DB,
        reflection_tracking_db=tracking,
    )


def _better_correction(bench: SimulatedBench, kit: Kit, draw: Draw) -> SimulatedBench:
    return draw(replace(bench.scenario, residual=halved(bench.residual)))


def _better_statement(bench: SimulatedBench, kit: Kit, draw: Draw) -> SimulatedBench:
    return replace(bench, residual=halved(bench.residual))


def _more_connections(bench: SimulatedBench, kit: Kit, draw: Draw) -> SimulatedBench:
    counts = {name: 4 * count for name, count in bench.scenario.counts().items()}
    return draw(replace(bench.scenario, connections=counts))


def _closer_to_the_model(bench: SimulatedBench, kit: Kit, draw: Draw) -> SimulatedBench:
    readings = {}
    for definition in kit.definitions:
        gamma, _ = curve(kit, definition, bench.frequency_hz)
        seen = bench.readings[definition.name]
        readings[definition.name] = frozen_complex(seen - 0.5 * (seen.mean(axis=0) - gamma))
    return replace(bench, readings=readings)


def _longer_sweep(bench: SimulatedBench, kit: Kit, draw: Draw) -> SimulatedBench:
    f = bench.frequency_hz
    more = np.arange(f[-1], LONGER * f[-1], f[-1] - f[-2])[1:]
    return draw(replace(bench.scenario, frequency_hz=np.concatenate([f, more])))


STEPS: Mapping[str, tuple[str, Callable[[SimulatedBench, Kit, Draw], SimulatedBench]]] = {
    "what the analyser leaves, in truth and as stated": ("analyser residuals", _better_correction),
    "what is stated of it, with the same readings": ("analyser residuals", _better_statement),
    "connections (four times as many)": ("connections", _more_connections),
    "misfit: what the model leaves of the readings": (MISFIT, _closer_to_the_model),
    "a sweep half as long again": (END_OF_READINGS, _longer_sweep),
}
"""What is done, the kind of step that it is, and the bench as it then is: the same standards, the same dice."""


def ratios(family: str, seed: int, number: int, within: float = 0.02) -> dict[str, float]:
    """Return, for each change that a kit's next steps name, the limit of a new fit as a multiple of the estimate."""
    dice = [zlib.crc32(family.encode()), seed, number]

    def draw(scenario: Scenario) -> SimulatedBench:
        return draw_bench(scenario, np.random.default_rng([*dice, 1]))

    bench = draw(families()[family](np.random.default_rng(dice)))
    kit = _kit(bench, within)
    estimates = {step.kind: step.limit_hz for step in next_steps(kit)}
    return {
        what: _kit(change(bench, kit, draw), within).limit.limit_hz / estimates[kind]
        for what, (kind, change) in STEPS.items()
        if kind in estimates
    }


def _kit(bench: SimulatedBench, within: float) -> Kit:
    return characterise(*bench_of(bench, within), created="2000-01-01")


def study_lines(benches: int, seed: int, names: Sequence[str], within: float) -> list[str]:
    """Return the figures as a Markdown table."""
    found = [ratios(name, seed, number, within) for name in names for number in range(benches)]
    lines = ["| what is done | cases | median | middle 80 % |", "|---|---|---|---|"]
    for what in STEPS:
        each = [one[what] for one in found if what in one]
        if each:
            low, middle, high = np.quantile(each, [0.1, 0.5, 0.9])
            lines.append(f"| {what} | {len(each)} | {middle:.2f} | {low:.2f} … {high:.2f} |")
    return lines


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the study and print its table."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("--benches", type=int, default=4, help="of each family")
    asked.add_argument("--seed", type=int, default=1)
    asked.add_argument("--within", type=float, default=0.02)
    names = list(families())
    asked.add_argument("--family", action="append", choices=names, help="may be repeated (all)")
    given = asked.parse_args(arguments)
    print("\n".join(study_lines(given.benches, given.seed, given.family or names, given.within)))
    return 0


if __name__ == "__main__":
    sys.exit(main())
