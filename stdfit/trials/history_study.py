"""Figures on histories and repeats, as the tables of docs/trials.md: `python -m stdfit.trials.history_study`."""

import argparse
from collections import Counter
from collections.abc import Iterator
from pathlib import Path

import numpy as np

from stdfit.trials.fitted_histories import draw_fitted_kits
from stdfit.trials.histories import Change, own_sd, study
from stdfit.trials.repeats import study_sweeps, study_values
from stdfit.validity.change.history import history
from stdfit.validity.change.trend import DRIFT, EITHER, SAME, STEP
from stdfit.writing.kit_reading import read_kit

VERDICTS = (DRIFT, STEP, EITHER, SAME)
DESIGNS = {
    "5 × 4 × 2": [[2] * 4] * 5,
    "3 × 5 × 1": [[1] * 5] * 3,
    "2 × 6 × 2": [[2] * 6] * 2,
    "uneven": [[2, 1, 3], [1, 2], [1, 1, 1, 1], [2, 2, 2], [3, 1]],
}
SIZES = ((1.0, 1.0, 0.2), (0.3, 1.0, 0.5), (0.0, 1.0, 0.3), (2.0, 1.0, 1.0))


def drawn_histories(kit_file: Path, count: int) -> Iterator[str]:
    """Yield the table of histories that are drawn from a kit's own covariances."""
    template = read_kit(kit_file)
    sd = own_sd(template, "open", "offset_delay_ps")
    yield (
        "| kits | change of the open | drift | step | not told apart | no change "
        "| interval holds | time left holds | tolerance kept |"
    )
    yield "|---|---|---|---|---|---|---|---|---|"
    for kits in (4, 6, 10):
        for size, kind in ((0, "none"), (4, "drift"), (8, "drift"), (4, "step"), (8, "step")):
            after = kits // 2 - 1 if kind == "step" else None
            change = Change("open", "offset_delay_ps", size * sd, after)
            told, held = study(template, kits, change, count, seed=1)
            names = ("step" if kind == "step" else "slope", "time left", "within tolerance at its low end")
            ends = [_percent(held.get(name)) for name in names]
            yield _row([str(kits), f"{kind} of {size} sd" if size else "none", *_rates(told), *ends])


def fitted_histories(count: int, kits: int) -> Iterator[str]:
    """Yield the table of histories whose kits are fitted from readings."""
    yield "| change of the open | calibration | drift | step | not told apart | no change | any other value changed |"
    yield "|---|---|---|---|---|---|---|"
    for moved, step in ((0.0, False), (0.6, False), (0.6, True)):
        for same in (True, False):
            told: Counter[str] = Counter()
            others = 0
            for k in range(count):
                rng = np.random.default_rng([3, k])
                dated = draw_fitted_kits(kits, moved, rng, same_calibration=same, step=step)
                found = history(dated, same_calibration=same).courses
                told.update(one.trend.verdict for one in found if one.standard == "open")
                others += any(one.trend.verdict != SAME for one in found if one.standard != "open")
            change = f"{'step' if step else 'drift'} of {moved:g} ps" if moved else "none"
            yield _row([change, "one" if same else "new", *_rates(told), _percent(others / count)])


def repeats(values: int, sweeps: int) -> Iterator[str]:
    """Yield the table of coverages of components."""
    yield "| readings | design | calibration | connection | repeat |"
    yield "|---|---|---|---|---|"
    for name, counts in DESIGNS.items():
        for circular in (False, True):
            rates = [study_values(counts, sd, values, 5, circular=circular) for sd in SIZES]
            kind = "complex values" if circular else "values"
            yield _row([kind, name, *(_span([one[level] for one in rates]) for level in range(3))])
    for name in ("5 × 4 × 2", "uneven"):
        for kind in ("open", "short", "load"):
            found = list(study_sweeps(kind, DESIGNS[name], sweeps, 11).values())
            yield _row(
                [f"sweeps of the {kind}", name, *(_span([one[level] for one in found]) for level in range(3))]
            )


def main() -> None:
    """Print the tables."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("kit", type=Path, help="kits/boathouse-loft-sma/kit.toml")
    asked.add_argument("--histories", type=int, default=300)
    asked.add_argument("--fitted", type=int, default=25)
    asked.add_argument("--designs", type=int, default=1000)
    asked.add_argument("--sweeps", type=int, default=500)
    given = asked.parse_args()
    for table in (
        repeats(given.designs, given.sweeps),
        drawn_histories(given.kit, given.histories),
        fitted_histories(given.fitted, 5),
    ):
        for line in table:
            print(line, flush=True)
        print(flush=True)


def _rates(told: Counter[str]) -> list[str]:
    total = max(sum(told.values()), 1)
    return [_percent(told[verdict] / total) for verdict in VERDICTS]


def _span(found: list[float | None]) -> str:
    known = [one for one in found if one is not None]
    if not known:
        return "—"
    low, high = min(known), max(known)
    return f"{100 * low:.1f} … {100 * high:.1f} %" if low < high else f"{100 * low:.1f} %"


def _percent(part: float | None) -> str:
    return "—" if part is None else f"{100 * part:.1f} %"


def _row(cells: list[str]) -> str:
    return f"| {' | '.join(cells)} |"


if __name__ == "__main__":
    main()
