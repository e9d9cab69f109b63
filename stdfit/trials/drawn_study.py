"""What drawings are worth on simulated benches, and how often their evidence and their contradictions are true.

Run ``python -m stdfit.trials.drawn_study --benches 200``.
"""

import argparse
import sys
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.records import Sweep
from stdfit.data.bench_records import Bench
from stdfit.pipeline import Prepared, choose_all, kit_of, prepare, settle
from stdfit.pipeline.drawn import drawn_contradictions, with_drawn
from stdfit.trials.drawn_parts import DrawnBench, draw_drawn_bench
from stdfit.trials.score import Score, bench_of, fit_alone, scored, scores_of
from stdfit.validity.drawing.part import drawn_part
from stdfit.validity.kit import Definition, Kit

MISTAKE_MM = 0.5


@dataclass(frozen=True, slots=True, eq=False)
class DrawnTrial:
    """How one bench fared.

    Attributes
    ----------
    scores, scores_alone : tuple of Score
        With the drawing, and without it.
    u_c0, u_c0_alone : float
        Standard uncertainty of the open's C0 with the drawing and without, in fF.
    inside : dict of bool
        Whether the 95 % interval of C0 and of each offset delay holds the truth.
    told : bool
        Whether readings and drawing were said to disagree.
    """

    scores: tuple[Score, ...]
    scores_alone: tuple[Score, ...]
    u_c0: float
    u_c0_alone: float
    inside: dict[str, bool]
    told: bool


def drawn_bench_of(made: DrawnBench, within: float) -> tuple[Bench, dict[str, list[Sweep]]]:
    """Return the bench, with what the drawing tells, and the sweeps."""
    bench, sweeps = bench_of(made.simulated, within)
    top, zr = float(made.simulated.frequency_hz[-1]), bench.reference_ohm
    by_name = {part.name: part for part in made.drawing.parts}
    standards = tuple(
        with_drawn(entry, drawn_part(made.drawing, by_name[entry.name], top, zr)) for entry in bench.standards
    )
    return replace(bench, standards=standards), sweeps


def prepared_drawn(made: DrawnBench, within: float) -> Prepared:
    """Return the bench with what the drawing tells, ready to be fitted."""
    return prepare(*drawn_bench_of(made, within))


def drawn_trial(seed: int, number: int, within: float = 0.02, longer_mm: float = 0.0) -> DrawnTrial:
    """Draw one bench, fit it with its drawing and without, and compare with the truth."""
    rng = np.random.default_rng([seed, number])
    made = draw_drawn_bench(rng, longer_mm=longer_mm)
    prepared = prepared_drawn(made, within)
    settled = settle(prepared, choose_all(prepared))
    kit = kit_of(prepared, settled, created="2000-01-01")
    scores = scores_of(kit, settled.problem, settled.values, fit_alone(settled), made.simulated, within)
    alone, scores_alone = scored(prepare(*bench_of(made.simulated, within)), made.simulated, within)
    inside = {
        f"{name}, delay": _holds(kit, name, "offset_delay_ps", ps) for name, ps in made.delays_ps.items()
    }
    return DrawnTrial(
        tuple(scores),
        tuple(scores_alone),
        _u(kit.definition("open"), "c0"),
        _u(alone.definition("open"), "c0"),
        {"open, C0": _holds(kit, "open", "c0", made.open_ff), **inside},
        bool(drawn_contradictions(prepared, settled)),
    )


def _u(definition: Definition, name: str) -> float:
    return next(one.u for one in definition.parameters if one.name == name)


def _holds(kit: Kit, standard: str, name: str, true: float) -> bool:
    one = next(one for one in kit.definition(standard).parameters if one.name == name)
    return one.low <= true <= one.high


def _pair(alone: Sequence[Score], drawn: Sequence[Score], name: str, how: str) -> str:
    return ", ".join(
        format(float(np.mean([np.mean(getattr(one, name)) for one in each])), how) for each in (alone, drawn)
    )


def study_lines(benches: int, seed: int = 1) -> list[str]:
    """Return the figures as a Markdown table."""
    right = [drawn_trial(seed, number) for number in range(benches)]
    wrong = [drawn_trial(seed, number, longer_mm=MISTAKE_MM) for number in range(max(1, benches // 4))]
    gains = [one.u_c0_alone / one.u_c0 for one in right]
    each = [one for trial in right for one in trial.scores]
    each_alone = [one for trial in right for one in trial.scores_alone]
    rows = [
        ("u(C0) without the drawing, median", f"{np.median([one.u_c0_alone for one in right]):.2g} fF"),
        ("u(C0) with the drawing, median", f"{np.median([one.u_c0 for one in right]):.2g} fF"),
        ("smaller by a factor of, lowest … highest", f"{min(gains):.3g} … {max(gains):.3g}"),
        ("mean limit ÷ sweep within 0.02, without and with it", _pair(each_alone, each, "limit", ".2f")),
        ("mean bound on Γ, without and with it", _pair(each_alone, each, "bound", ".4f")),
        ("bound covers Γ", f"{100 * np.mean([one.inside for one in each]):.1f} %"),
    ]
    for name in right[0].inside:
        rows.append((f"interval holds {name}", f"{100 * np.mean([one.inside[name] for one in right]):.1f} %"))
    rows += [
        (
            "readings said to contradict a right drawing",
            f"{100 * np.mean([one.told for one in right]):.1f} %",
        ),
        (
            f"the same of {len(wrong)} whose open is {MISTAKE_MM:g} mm longer than it may be",
            f"{100 * np.mean([one.told for one in wrong]):.1f} %",
        ),
    ]
    return [f"| {benches} benches | |", "|---|---|", *(f"| {what} | {figure} |" for what, figure in rows)]


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the study and print its table."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("--benches", type=int, default=200)
    asked.add_argument("--seed", type=int, default=1)
    given = asked.parse_args(arguments)
    print("\n".join(study_lines(given.benches, given.seed)))
    return 0


if __name__ == "__main__":
    sys.exit(main())
