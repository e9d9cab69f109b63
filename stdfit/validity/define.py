"""From a finished fit to the definitions of its standards, in trade units and in words."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.circuits.standard import PARAMETERS
from stdfit.circuits.units import said_unit
from stdfit.fitting.problem import Problem, Quantity
from stdfit.fitting.solve import Solution
from stdfit.uncertainty.budget import Share, expanded
from stdfit.validity.choose import Choice
from stdfit.validity.kit import Combination, Definition, Fitted, total_covariance
from stdfit.validity.limit import Limit

SMALLEST_DELAY_PS = 0.05
"""Negative delays below this are nothing to explain: 0.015 mm of air."""

DISAGREES = 3.0
"""Standard uncertainties beyond which evidence and readings are said to disagree."""

TRADED = 0.9
"""Correlation above which two parts are said to trade off."""


@dataclass(frozen=True, slots=True, eq=False)
class Settled:
    """A finished joint fit.

    Attributes
    ----------
    problem : Problem
    values : array
        All quantities in trade units.
    bounded : tuple of int
        Quantities that ran into a bound.
    solution : Solution
    shares : tuple of Share
        Covariances of the scaled fitted quantities.
    misfit_share : Share
        What a model error as large as the misfit would do to the quantities. It widens the intervals of
        parameters; a curve's bound takes the misfit as it is.
    choices : tuple of Choice
    misfits : tuple of (frequency, misfit)
    """

    problem: Problem
    values: FloatArray
    bounded: tuple[int, ...]
    solution: Solution
    shares: tuple[Share, ...]
    misfit_share: Share
    choices: tuple[Choice, ...]
    misfits: tuple[tuple[FloatArray, FloatArray], ...]


def define(settled: Settled) -> tuple[tuple[Definition, ...], tuple[str, ...], tuple[Share, ...]]:
    """Return definitions, the order of the joint covariance, and its shares in trade units."""
    problem = settled.problem
    scale = problem.scales
    names = problem.names()
    order = tuple(names[i] for i in problem.fitted)
    to_trade = np.outer(scale, scale)
    shares = tuple(replace(share, covariances=share.covariances * to_trade) for share in settled.shares)
    wrong = replace(settled.misfit_share, covariances=settled.misfit_share.covariances * to_trade)
    place = {i: k for k, i in enumerate(problem.fitted)}
    u, u95 = expanded(np.eye(len(order)), [*shares, wrong]) if order else (np.zeros(0), np.zeros(0))
    definitions = []
    for s, one in enumerate(problem.observed):
        parameters = []
        for i in problem.columns[s]:
            quantity = problem.quantities[i]
            value = float(settled.values[i])
            own_u, own_95 = (float(u[place[i]]), float(u95[place[i]])) if i in place else (0.0, 0.0)
            parameters.append(
                Fitted(
                    name=quantity.parameter.name,
                    unit=quantity.parameter.unit,
                    value=value,
                    u=own_u,
                    low=value - own_95,
                    high=value + own_95,
                    role="at its bound" if i in settled.bounded else quantity.role,
                    of=names[i] if i in place else "",
                    given=None
                    if quantity.role != "given" or quantity.evidence_u is None
                    else (quantity.value, quantity.evidence_u),
                )
            )
        top_hz = float(one.frequency_hz[-1])
        combinations = _combinations(
            one.kind, parameters, order, [*shares, wrong], problem.reference_ohm, top_hz
        )
        said = [contradiction(problem.quantities[i], settled.values[i], one.name) for i in problem.columns[s]]
        contradictions = [line for line in said if line]
        misfit_hz, misfit = settled.misfits[s]
        definitions.append(
            Definition(
                name=one.name,
                kind=one.kind,
                shape=settled.choices[s].shape,
                connections=one.connections,
                read_low_hz=float(one.frequency_hz[0]),
                read_top_hz=float(one.frequency_hz[-1]),
                fit_low_hz=float(one.frequency_hz[0]),
                fit_top_hz=settled.choices[s].top_hz,
                parameters=tuple(parameters),
                combinations=combinations,
                misfit_hz=misfit_hz,
                misfit=misfit,
                limit=Limit(0.0, 0.0, ""),
                notes=_notes(one.kind, parameters, combinations, settled.solution, contradictions),
                tried=settled.choices[s].tried,
            )
        )
    return tuple(definitions), order, shares


def given_contradictions(settled: Settled) -> tuple[str, ...]:
    """Return a line for each value that the user gave and the readings contradict."""
    return tuple(
        f"{quantity.standard}: {line}"
        for quantity, value in zip(settled.problem.quantities, settled.values, strict=True)
        if quantity.role == "given" and (line := contradiction(quantity, float(value), quantity.standard))
    )


def contradiction(quantity: Quantity, value: float, standard: str) -> str:
    """Say that readings and evidence on a quantity disagree, or nothing; once, at the standard that owns it."""
    if quantity.evidence_u is None or quantity.standard != standard:
        return ""
    off = abs(value - quantity.value) / quantity.evidence_u
    if off <= DISAGREES:
        return ""
    parameter = quantity.parameter
    who = "given was" if quantity.role == "given" else "assumed was"
    stated = f"{quantity.value:g} ± {quantity.evidence_u:.2g} {said_unit(parameter.unit)}"
    return (
        f"{parameter.label}: {who} {stated}, and the readings "
        f"pull it to {value:.4g}, {off:.0f} standard uncertainties away: check the value, its unit (one way?), the file"
    )


def _combinations(
    kind: str,
    parameters: Sequence[Fitted],
    order: Sequence[str],
    shares: Sequence[Share],
    reference_ohm: float,
    top_hz: float,
) -> tuple[Combination, ...]:
    """Return the combination that the readings fix, where both of its parts were fitted.

    To first order an open's C0 is a delay of C0·Z0, a short's L0 a delay of L0/Z0, and of a load only
    L − C·Z0² shows. A fitted Z0 of the line counts too.
    """
    by_name = {parameter.name: parameter for parameter in parameters}
    delay, z0 = by_name["offset_delay_ps"].value, by_name["offset_z0_ohm"].value
    if kind != "load" and 4.0 * np.pi * top_hz * abs(delay) * 1e-12 > 2.0 * np.pi:
        # Over more than half a turn of phase no one sum stands for the parts.
        return ()
    zr = reference_ohm
    # Of a whole at low frequency: Zr·(τ/Z0 + C0) for an open, (τ·Z0 + L0)/Zr for a short.
    label, unit, weights = {
        "open": (
            "offset delay + Z0·C0" if z0 == zr else "Zr·(offset delay/Z0 + C0)",
            "ps",
            {"offset_delay_ps": zr / z0, "c0": 1e-3 * zr, "offset_z0_ohm": -zr * delay / z0**2},
        ),
        "short": (
            "offset delay + L0/Z0" if z0 == zr else "(offset delay·Z0 + L0)/Zr",
            "ps",
            {"offset_delay_ps": z0 / zr, "l0": 1.0 / zr, "offset_z0_ohm": delay / zr},
        ),
        "load": ("L − C·Z0²", "pH", {"inductance_ph": 1.0, "capacitance_ff": -1e-3 * zr**2}),
    }[kind]
    first, second, *_ = weights
    one, other = by_name[first], by_name[second]
    if not one.of or not other.of:
        return ()
    direction = np.zeros((1, len(order)))
    for name, weight in weights.items():
        if by_name[name].of:
            direction[0, order.index(by_name[name].of)] += weight
    u, u95 = expanded(direction, shares)
    covariance = total_covariance(shares)
    i, j = order.index(one.of), order.index(other.of)
    correlation = covariance[i, j] / np.sqrt(covariance[i, i] * covariance[j, j])
    value = weights[first] * one.value + weights[second] * other.value
    return (
        Combination(
            label, unit, value, float(u[0]), value - float(u95[0]), value + float(u95[0]), float(correlation)
        ),
    )


def _notes(
    kind: str,
    parameters: Sequence[Fitted],
    combinations: Sequence[Combination],
    solution: Solution,
    contradictions: Sequence[str],
) -> tuple[str, ...]:
    """Say in words what a user must know of this fit."""
    notes = []
    by_name = {parameter.name: parameter for parameter in parameters}
    if not solution.converged:
        notes.append(f"the fit did not converge: {solution.message}")
    delay = by_name["offset_delay_ps"]
    if delay.value < -SMALLEST_DELAY_PS:
        notes.append(
            "the delay is negative: the reference plane of the readings lies behind this standard's own, which is "
            "real where other standards, whose planes lie further out, have set it"
        )
    if by_name["offset_loss_gohm_per_s"].role == "at its bound":
        notes.append(
            "the readings ask for a negative loss; it is held at 0 with the uncertainty of the free fit"
        )
    for combination in combinations:
        if abs(combination.correlation) > TRADED:
            parts = {"open": "delay and C0", "short": "delay and L0", "load": "L and C"}[kind]
            notes.append(
                f"{parts} trade off (correlation {combination.correlation:+.3f}): the readings fix "
                f"{combination.label}, hardly the parts; a ruler or a drawing tells them apart"
            )
    notes += contradictions
    roles = {parameter.name: parameter.role for parameter in parameters}
    assumed = [one.label for one in PARAMETERS[kind] if roles[one.name] == "assumed"]
    if assumed:
        notes.append(f"rests on weak assumed evidence (common practice): {', '.join(assumed)}")
    return tuple(notes)
