"""Many simulated benches, characterised and scored, family by family."""

import os
import zlib
from collections.abc import Callable, Iterable, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import asdict, dataclass
from typing import Any

import numpy as np

from stdfit.base.errors import RequestError, StdfitError
from stdfit.data.words import nearest, quoted
from stdfit.trials.bench import draw_bench
from stdfit.trials.devices import devices_inside
from stdfit.trials.drawn_parts import draw_drawn_bench
from stdfit.trials.drawn_study import prepared_drawn
from stdfit.trials.families import Family, demo_scenario, families
from stdfit.trials.five_parts import Workshop, draw_five_parts, score_five_parts
from stdfit.trials.raw_session import draw_raw_session
from stdfit.trials.scenario import Scenario
from stdfit.trials.score import Score, score, scored

NOT_STATED = {"nothing stated": "plain", "nothing stated, one connection": "one connection"}
"""Families in which the user states no residuals, and the families whose benches they are."""

WITHOUT_REFERENCE = {"no reference": None, "no reference, one known": "open"}
"""Families of raw readings of five parts, and the kind of a known sixth."""

AGAINST_A_KIT: dict[str, tuple[str, tuple[str, ...]]] = {
    "raw, one set": ("plain", ("",)),
    "raw, two sets": ("drift", ("before", "after")),
}
"""Families of raw readings against the standards of a kit: whose standards they are, and the sets of references."""

DRAWN = "drawn parts"
"""The family of parts that are made to a drawing, which the fit takes as evidence."""

DEMO = "demo"
LIKE = "like the bench"
ALL = "all"


@dataclass(frozen=True, slots=True, eq=False)
class Trial:
    """How one bench fared.

    Attributes
    ----------
    scores : tuple of Score
        One for each standard.
    devices : float
        Part of random devices, corrected with the kit, whose error keeps within the device bound.
    """

    scores: tuple[Score, ...]
    devices: float


@dataclass(frozen=True, slots=True)
class Row:
    """Figures of one family, or of all.

    Attributes
    ----------
    family : str
    benches : int
    coverage : float
        Part of the curves' points at which the bound covers the truth.
    coverage_alone : float
        The same for the fit's own covariance.
    quantities : float
        Part of the determined quantities whose 95 % interval covers the truth.
    devices : float
        Part of random devices, corrected with the kit, whose error keeps within the device bound.
    limits_true : float
        Part of the benches all of whose limits hold; limits of 0 say nothing and do not count.
    limit : float
        Mean limit as part of the sweep.
    sharpness : float
        Mean bound ÷ 95 % quantile of the true error.
    failed : int
        Benches on which no kit came out.
    """

    family: str
    benches: int
    coverage: float
    coverage_alone: float
    quantities: float
    devices: float
    limits_true: float
    limit: float
    sharpness: float
    failed: int


def family_names() -> list[str]:
    """Return the names of all families."""
    return [*family_table(), *WITHOUT_REFERENCE, *AGAINST_A_KIT, DRAWN]


def family_table() -> dict[str, Family]:
    """Return the families of corrected readings by name."""
    plain = families()
    unstated = {name: plain[like] for name, like in NOT_STATED.items()}
    return {**plain, DEMO: lambda rng: demo_scenario(), **unstated}


def trial(family: str, seed: int, number: int, within: float, like: Scenario | None = None) -> Trial | None:
    """Draw one bench of a family and score it; None where no kit came out of it.

    Each bench has a generator of its own, so that any of them can be drawn again alone.
    """
    rng = np.random.default_rng([zlib.crc32(family.encode()), seed, number])
    if like is None and family in WITHOUT_REFERENCE:
        return _without_reference(WITHOUT_REFERENCE[family], within, rng)
    if like is None and family in AGAINST_A_KIT:
        return _against_a_kit(*AGAINST_A_KIT[family], within, rng)
    if like is None and family == DRAWN:
        return _to_a_drawing(within, rng)
    simulated = draw_bench(like if like is not None else family_table()[family](rng), rng)
    try:
        kit, scores = score(simulated, within, stated=family not in NOT_STATED)
    except StdfitError:
        return None
    return Trial(tuple(scores), devices_inside(kit, simulated, rng))


def _to_a_drawing(within: float, rng: np.random.Generator) -> Trial | None:
    """Draw parts that are made to a drawing, and score the fit that takes it as evidence."""
    made = draw_drawn_bench(rng)
    try:
        kit, scores = scored(prepared_drawn(made, within), made.simulated, within)
    except StdfitError:
        return None
    return Trial(tuple(scores), devices_inside(kit, made.simulated, rng))


def _against_a_kit(family: str, sets: Sequence[str], within: float, rng: np.random.Generator) -> Trial | None:
    """Draw a kit, and raw readings of its standards and of new ones, and score these."""
    try:
        session = draw_raw_session(families()[family](rng), rng, sets)
        kit, scores = scored(session.prepared(within), session.simulated, within)
    except StdfitError:
        return None
    return Trial(tuple(scores), devices_inside(kit, session.simulated, rng))


def _without_reference(known: str | None, within: float, rng: np.random.Generator) -> Trial | None:
    """Draw five parts, one more of them known where its kind is named, and score them."""
    simulated = draw_five_parts(Workshop(), rng, within, known=known)
    try:
        kit, scores = score_five_parts(simulated, within)
    except StdfitError:
        return None
    return Trial(tuple(scores), devices_inside(kit, simulated, rng))


def run(
    names: Sequence[str],
    benches: int,
    *,
    seed: int = 1,
    within: float = 0.02,
    like: Scenario | None = None,
    workers: int | None = None,
    tell: Callable[[int, int], None] | None = None,
) -> list[Row]:
    """Score a number of benches of each family; return a row for each, and one for all of several.

    Parameters
    ----------
    names : sequence of str
        Families; empty for all of them.
    benches : int
        Benches of each family.
    seed, within
        As for `trial`.
    like : Scenario, optional
        Draw all benches of this scenario instead of the families.
    workers : int, optional
        Processes; all cores by default, 1 for none but this one.
    tell : callable, optional
        Is told (done, total).

    Raises
    ------
    RequestError
        An unknown family.
    """
    every = family_names()
    if like is not None:
        every, names = [LIKE], [LIKE]
    for name in names:
        if name not in every:
            raise RequestError(
                f"no family {quoted(name)}",
                f"{_meant(name, every)}choose among: {', '.join(map(quoted, every))}",
            )
    chosen = list(names) or every
    jobs = [(name, seed, number, within, like) for name in chosen for number in range(benches)]
    workers = workers if workers is not None else (os.cpu_count() or 1)
    found: dict[str, list[Trial | None]] = {name: [] for name in chosen}

    def gather(results: Iterable[Trial | None]) -> None:
        for done, (job, one) in enumerate(zip(jobs, results, strict=True), start=1):
            found[job[0]].append(one)
            if tell:
                tell(done, len(jobs))

    if workers > 1:
        with ProcessPoolExecutor(workers) as pool:
            gather(pool.map(_trial_of, jobs, chunksize=2))
    else:
        gather(map(_trial_of, jobs))
    rows = [row_of(name, found[name]) for name in chosen]
    if len(rows) == 1:
        return rows
    return [*rows, row_of(ALL, [one for name in chosen for one in found[name]])]


def _trial_of(job: tuple[str, int, int, float, Scenario | None]) -> Trial | None:
    return trial(*job)


def _meant(name: str, every: Sequence[str]) -> str:
    best = nearest(name, every)
    return f"did you mean {quoted(best)}? " if best else ""


def row_of(family: str, benches: Sequence[Trial | None]) -> Row:
    """Return the figures of some benches."""
    sound = [bench for bench in benches if bench is not None]
    each = [one for bench in sound for one in bench.scores]
    if not each:
        none = float("nan")
        return Row(family, len(benches), none, none, none, none, none, none, none, failed=len(benches))
    limited = [bench.scores for bench in sound if any(one.limit > 0.0 for one in bench.scores)]
    quantities = [inside for one in each for inside in one.quantities]
    error = np.concatenate([one.error for one in each])
    return Row(
        family=family,
        benches=len(benches),
        coverage=float(np.mean([one.inside for one in each])),
        coverage_alone=float(np.mean([one.inside_alone for one in each])),
        quantities=float(np.mean(quantities)),
        devices=float(np.mean([bench.devices for bench in sound])),
        limits_true=_mean([all(one.limit_true for one in scores if one.limit > 0.0) for scores in limited]),
        limit=float(np.mean([one.limit for one in each])),
        sharpness=float(np.mean(np.concatenate([one.bound for one in each])) / np.quantile(error, 0.95)),
        failed=len(benches) - len(sound),
    )


def _mean(values: Sequence[bool]) -> float:
    """Return the mean, or NaN of nothing."""
    return float(np.mean(values)) if values else float("nan")


def study_table(rows: Sequence[Row]) -> str:
    """Return the figures as a Markdown table."""
    lines = [
        "| family | benches | bound covers Γ | fit's own covariance covers | quantities covered | device bound covers "
        "| limits true | mean limit ÷ sweep | sharpness |",
        "|---|---|---|---|---|---|---|---|---|",
    ]
    lines += [
        f"| {row.family} | {row.benches} | {100 * row.coverage:.1f} % | {100 * row.coverage_alone:.1f} % "
        f"| {100 * row.quantities:.1f} % | {100 * row.devices:.1f} % | {100 * row.limits_true:.1f} % "
        f"| {row.limit:.2f} | {row.sharpness:.2f} |"
        for row in rows
    ]
    failed = sum(row.failed for row in rows if row.family != ALL)
    if failed:
        lines += ["", f"{failed} of the benches gave no kit, and are left out of the figures."]
    return "\n".join(lines)


def study_data(rows: Sequence[Row]) -> dict[str, Any]:
    """Return the figures as data; None where no kit came out and there are none."""
    return {
        "families": [
            {
                key: None if isinstance(value, float) and np.isnan(value) else value
                for key, value in asdict(row).items()
            }
            for row in rows
        ]
    }
