"""The real fit on a simulated bench, scored against its known truth."""

from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.records import Sweep
from stdfit.data.bench_records import Bench, Given, StandardEntry, StatedResidual
from stdfit.fitting.problem import Problem
from stdfit.fitting.solve import inverse_of_normal
from stdfit.pipeline import Prepared, choose_all, kit_of, prepare, settle
from stdfit.trials.bench import SimulatedBench
from stdfit.uncertainty.budget import Share, radius
from stdfit.validity.define import Settled
from stdfit.validity.kit import Definition, Kit, curve

POINTS = 60
"""Points of each curve that are scored."""

LIMIT_POINTS = 200
"""Points below a limit at which the error must keep within the tolerance."""


class Truth(Protocol):
    """A bench whose standards are known: what a score asks of it."""

    @property
    def frequency_hz(self) -> FloatArray:
        """Frequencies of the readings, shape (n,)."""

    def truth_at(self, name: str, frequency_hz: npt.ArrayLike) -> ComplexArray:
        """Return the true reflection of one of its standards."""


@dataclass(frozen=True, slots=True, eq=False)
class Score:
    """How one standard of one bench fared.

    Attributes
    ----------
    standard : str
    error, bound, alone : arrays of shape (m,)
        |fitted − true|, its bound, and the bound that the fit's own covariance alone would claim, over the fit
        range or up to the limit, whichever is more.
    quantities : tuple of bool
        For each determined quantity (resistance, and the combination that the readings fix) whether its 95 % interval
        covers the truth.
    limit : float
        The validity limit as part of the last reading's frequency.
    limit_true : bool
        Whether the error keeps within the tolerance all the way up to the limit.
    """

    standard: str
    error: FloatArray
    bound: FloatArray
    alone: FloatArray
    quantities: tuple[bool, ...]
    limit: float
    limit_true: bool

    @property
    def inside(self) -> float:
        """Part of the points at which the bound covers the truth."""
        return float(np.mean(self.error <= self.bound))

    @property
    def inside_alone(self) -> float:
        """Part of the points at which the fit's own covariance would have covered it."""
        return float(np.mean(self.error <= self.alone))


def bench_of(
    simulated: SimulatedBench, within: float = 0.02, *, stated: bool = True
) -> tuple[Bench, dict[str, list[Sweep]]]:
    """Return the bench and the sweeps that a user with these readings would have.

    Parameters
    ----------
    simulated : SimulatedBench
    within : float
        Tolerance.
    stated : bool
        Whether the user states the analyser's residuals.
    """
    f = simulated.frequency_hz
    told = simulated.residual
    residual = StatedResidual(
        told.frequency_hz,
        10 ** (-told.directivity_db / 20),
        10 ** (-told.source_match_db / 20),
        10 ** (told.reflection_tracking_db / 20) - 1,
    )
    entries = tuple(
        StandardEntry(
            name,
            kind,
            (),
            {
                key: Given(evidence.value, evidence.u)
                for key, evidence in simulated.given.get(name, {}).items()
            },
            simulated.same_offset_as.get(name),
        )
        for name, kind in simulated.kinds.items()
    )
    reference = simulated.scenario.reference_ohm
    sweeps = {
        name: [Sweep(f, reading, reference, f"{name}-{k + 1}") for k, reading in enumerate(readings)]
        for name, readings in simulated.readings.items()
    }
    bench = Bench(
        path=Path("bench.toml"),
        name="Simulated bench",
        connector=simulated.scenario.connector,
        reference_ohm=reference,
        within=within,
        highest_hz=None,
        state="corrected",
        residual=residual if stated else None,
        standards=entries,
    )
    return bench, sweeps


def score(simulated: SimulatedBench, within: float = 0.02, *, stated: bool = True) -> tuple[Kit, list[Score]]:
    """Characterise a simulated bench and compare each standard with its truth."""
    return scored(prepare(*bench_of(simulated, within, stated=stated)), simulated, within)


def scored(prepared: Prepared, simulated: SimulatedBench, within: float = 0.02) -> tuple[Kit, list[Score]]:
    """Characterise what is prepared and compare each standard with its truth."""
    settled = settle(prepared, choose_all(prepared))
    kit = kit_of(prepared, settled, created="2000-01-01")
    return kit, scores_of(kit, settled.problem, settled.values, fit_alone(settled), simulated, within)


def scores_of(
    kit: Kit, problem: Problem, values: FloatArray, alone: Share, simulated: Truth, within: float
) -> list[Score]:
    """Compare each standard of a kit with its truth.

    Parameters
    ----------
    kit : Kit
    problem : Problem
        That was fitted; it may hold more standards than the kit.
    values : array
        What the fit found, in trade units.
    alone : Share
        What a plain least-squares covariance would claim.
    simulated : Truth
    within : float
        Tolerance.
    """
    place = {one.name: k for k, one in enumerate(problem.observed)}
    scores = []
    for definition in kit.definitions:
        top = min(max(definition.fit_top_hz, definition.limit.limit_hz), definition.read_top_hz)
        grid = np.linspace(definition.fit_low_hz, top, POINTS)
        gamma, bound = curve(kit, definition, grid)
        _, design = problem.model(place[definition.name], values, grid)
        scores.append(
            Score(
                standard=definition.name,
                error=np.abs(gamma - simulated.truth_at(definition.name, grid)),
                bound=bound,
                alone=radius(design, [alone]),
                quantities=quantities_inside(kit, definition, simulated),
                limit=definition.limit.limit_hz / definition.read_top_hz,
                limit_true=limit_is_true(kit, definition, simulated, within),
            )
        )
    return scores


def fit_alone(settled: Settled) -> Share:
    """Return what a plain least-squares covariance would claim: s²·(JᵀJ)⁻¹."""
    problem = settled.problem
    scaled = settled.values[problem.fitted] / problem.scales
    covariance = inverse_of_normal(problem.jacobian(scaled)) * settled.solution.residual_variance
    return Share("fit alone", np.inf, covariance[None])


def limit_is_true(kit: Kit, definition: Definition, simulated: Truth, within: float) -> bool:
    """Tell whether the error keeps within the tolerance up to the standard's limit."""
    limit_hz = definition.limit.limit_hz
    if limit_hz <= 0.0:
        return True
    below = np.linspace(definition.read_low_hz, max(limit_hz, definition.read_low_hz), LIMIT_POINTS)
    fitted, _ = curve(kit, definition, below)
    return bool(np.all(np.abs(fitted - simulated.truth_at(definition.name, below)) <= within))


def quantities_inside(kit: Kit, definition: Definition, simulated: Truth) -> tuple[bool, ...]:
    """Tell, for each determined quantity, whether its interval covers the truth."""
    inside = []
    if definition.kind == "load":
        resistance = next(one for one in definition.parameters if one.name == "resistance_ohm")
        inside.append(resistance.low <= true_resistance(simulated, definition.name, kit) <= resistance.high)
        # Behind a line of its own a load's L and C are no longer those that show at low frequency.
        behind_line = definition.values[0] != 0.0
        for one in () if behind_line else definition.combinations:
            inside.append(one.low <= true_imbalance_ph(simulated, definition.name, kit) <= one.high)
    elif definition.combinations:
        (one,) = definition.combinations
        true = true_equivalent_delay(simulated, definition.name, definition.kind)
        inside.append(one.low <= true <= one.high)
    return tuple(inside)


def true_resistance(simulated: Truth, name: str, kit: Kit) -> float:
    """Return the true DC resistance in Ω."""
    gamma = complex(simulated.truth_at(name, [0.0])[0])
    return float(kit.reference_ohm * ((1.0 + gamma) / (1.0 - gamma)).real)


def true_equivalent_delay(simulated: Truth, name: str, kind: str) -> float:
    """Return the true delay of a full reflection in ps: the part of its phase that grows as f.

    Over the lowest tenth of the sweep the phase is −4πfτ − k√f; the second term is the skin effect's, which
    the fit gives to the loss.
    """
    f = low_grid(simulated)
    gamma = simulated.truth_at(name, f)
    phase = np.unwrap(np.angle(gamma if kind == "open" else -gamma))
    return -1e12 * slope_beside_skin(f, phase) / (4.0 * np.pi)


def true_imbalance_ph(simulated: Truth, name: str, kit: Kit) -> float:
    """Return the true L − C·Z0² of a load in pH: the part of its reactance that grows as f."""
    f = low_grid(simulated)
    gamma = simulated.truth_at(name, f)
    reactance = kit.reference_ohm * ((1.0 + gamma) / (1.0 - gamma)).imag
    return 1e12 * slope_beside_skin(f, reactance) / (2.0 * np.pi)


def low_grid(simulated: Truth) -> FloatArray:
    """Return frequencies in the lowest tenth of the sweep."""
    top = float(simulated.frequency_hz[-1]) / 10.0
    return np.linspace(top / 50.0, top, 50)


def slope_beside_skin(frequency_hz: FloatArray, values: FloatArray) -> float:
    """Return the slope of what grows as f, beside what the skin effect makes grow as √f."""
    terms = np.stack([frequency_hz, np.sqrt(frequency_hz)], axis=1)
    (slope, _), *_ = np.linalg.lstsq(terms / terms[-1], values, rcond=None)
    return float(slope / terms[-1, 0])
