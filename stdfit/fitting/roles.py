"""Who may move: each parameter of each standard is free, given, assumed, held or unused."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.standard import PARAMETERS, Parameter
from stdfit.fitting.observed import Observed, phase_slope
from stdfit.fitting.problem import Problem, Quantity

LINE = ("offset_delay_ps", "offset_loss_gohm_per_s")

SHAPES: dict[str, dict[str, tuple[str, ...]]] = {
    "open": {
        "constant": (*LINE, "c0"),
        "even": (*LINE, "c0", "c2"),
        "full": (*LINE, "c0", "c1", "c2", "c3"),
        "even+Z0": (*LINE, "offset_z0_ohm", "c0", "c2"),
        "full+Z0": (*LINE, "offset_z0_ohm", "c0", "c1", "c2", "c3"),
        "constant+Z0": (*LINE, "offset_z0_ohm", "c0"),
    },
    "short": {
        "constant": (*LINE, "l0"),
        "even": (*LINE, "l0", "l2"),
        "full": (*LINE, "l0", "l1", "l2", "l3"),
        "even+Z0": (*LINE, "offset_z0_ohm", "l0", "l2"),
        "full+Z0": (*LINE, "offset_z0_ohm", "l0", "l1", "l2", "l3"),
        "constant+Z0": (*LINE, "offset_z0_ohm", "l0"),
    },
    "load": {
        "R": ("resistance_ohm",),
        "R+L": ("resistance_ohm", "inductance_ph"),
        "R+L+C": ("resistance_ohm", "inductance_ph", "capacitance_ff"),
        "R+L+delay": ("offset_delay_ps", "resistance_ohm", "inductance_ph"),
        "R+L+delay+Z0": ("offset_delay_ps", "offset_z0_ohm", "resistance_ohm", "inductance_ph"),
    },
}
"""The orders of each kind, simplest first: which parameters are used."""

NOT_CHOSEN = ("constant+Z0",)
"""Orders that are no choice for corrected readings: a line of its own impedance with nothing else of its own."""

ASSUMED: dict[str, tuple[float, float]] = {
    "offset_loss_gohm_per_s": (1.0, 3.0),
    "c0": (40.0, 40.0),
    "c1": (0.0, 40.0),
    "c2": (0.0, 40.0),
    "c3": (0.0, 40.0),
    "l0": (0.0, 20.0),
    "l1": (0.0, 100.0),
    "l2": (0.0, 100.0),
    "l3": (0.0, 100.0),
    "inductance_ph": (0.0, 500.0),
    "capacitance_ff": (40.0, 40.0),
    "load delay": (30.0, 30.0),
}
"""Weak evidence, value and standard uncertainty, on what readings tell poorly (common practice, no source).

For polynomial coefficients beyond the first it is the size of the term at the top of the readings, in fF or
pH. It keeps single coefficients where physics is; the curve hardly feels it, and its share stands in the
budget.
"""

UNIT_SIZE = {"resistance_ohm": 0.1, "inductance_ph": 10.0}
"""Size of a change that the fit works in, in trade units, where it is not one."""


@dataclass(frozen=True, slots=True)
class Wish:
    """What the user says of one standard.

    Attributes
    ----------
    given : mapping of str to (float, float or None)
        Value and standard uncertainty in trade units; without uncertainty the value is held.
    same_offset_as : str or None
        The standard whose offset line this one shares.
    """

    given: Mapping[str, tuple[float, float | None]]
    same_offset_as: str | None = None


def build_problem(
    observed: Sequence[Observed],
    wishes: Sequence[Wish],
    shapes: Sequence[str],
    weights: Sequence[FloatArray],
    starts: Mapping[str, float],
    reference_ohm: float,
    assumed: Mapping[str, tuple[float, float]] | None = None,
) -> Problem:
    """Lay out the joint problem of all standards.

    Parameters
    ----------
    observed, wishes, shapes, weights : sequences, one entry for each standard
    starts : mapping
        Starting values of free quantities as "standard.parameter", in trade units.
    reference_ohm : float
    assumed : mapping, optional
        Weak evidence as "standard.parameter", value and standard uncertainty in trade units, instead of `ASSUMED`.
    """
    known = assumed or {}
    quantities: list[Quantity] = []
    places: dict[tuple[str, str], int] = {}
    by_name = {one.name: wish for one, wish in zip(observed, wishes, strict=True)}
    columns = []
    tops = {one.name: float(one.frequency_hz[-1]) for one in observed}
    lent = {wish.same_offset_as for wish in wishes}
    kinds = {one.name: (one.kind, shape) for one, shape in zip(observed, shapes, strict=True)}
    for one in observed:
        own = []
        for parameter in PARAMETERS[one.kind]:
            owner = one.name
            if parameter.name.startswith("offset_"):
                while by_name[owner].same_offset_as is not None:
                    owner = str(by_name[owner].same_offset_as)
            if (owner, parameter.name) not in places:
                kind, shape = kinds[owner]
                places[owner, parameter.name] = len(quantities)
                quantities.append(
                    _quantity(
                        owner,
                        kind,
                        shape,
                        parameter,
                        by_name[owner],
                        starts,
                        tops[owner],
                        reference_ohm,
                        owner in lent,
                        known.get(f"{owner}.{parameter.name}"),
                    )
                )
            own.append(places[owner, parameter.name])
        columns.append(tuple(own))
    return Problem(tuple(observed), tuple(quantities), tuple(columns), tuple(weights), reference_ohm)


def _quantity(
    owner: str,
    kind: str,
    shape: str,
    parameter: Parameter,
    wish: Wish,
    starts: Mapping[str, float],
    top_hz: float,
    reference_ohm: float,
    shared: bool,
    known: tuple[float, float] | None,
) -> Quantity:
    """Decide on the role of one parameter."""
    name = parameter.name
    scale = size_at(parameter, top_hz) * UNIT_SIZE.get(name, 1.0)
    if name in wish.given:
        value, u = wish.given[name]
        return Quantity(owner, parameter, "held" if u is None else "given", value, u, scale)
    used = name in SHAPES[kind][shape] or (shared and name in LINE)
    if used and known is not None:
        return Quantity(owner, parameter, "assumed", *known, scale)
    if name == "offset_z0_ohm":
        if not used:
            return Quantity(owner, parameter, "held", reference_ohm)
        return Quantity(owner, parameter, "assumed", reference_ohm, 0.02 * reference_ohm, scale)
    if not used:
        return Quantity(owner, parameter, "unused", 0.0)
    if kind == "load" and name == "offset_delay_ps":
        # Of a good load the readings show next to nothing of its length.
        return Quantity(owner, parameter, "assumed", *ASSUMED["load delay"], scale)
    if name in ASSUMED:
        value, u = ASSUMED[name]
        return Quantity(owner, parameter, "assumed", value, u * size_at(parameter, top_hz), scale)
    return Quantity(owner, parameter, "free", starts[f"{owner}.{name}"], None, scale)


def size_at(parameter: Parameter, top_hz: float) -> float:
    """Return how many trade units of a coefficient make 1 fF or 1 pH at `top_hz`; 1 for other parameters."""
    if parameter.power == 0:
        return 1.0
    base = 1e-15 if parameter.name.startswith("c") else 1e-12
    return float(base / (parameter.si * top_hz**parameter.power))


def starting_values(observed: Sequence[Observed], reference_ohm: float) -> dict[str, float]:
    """Return starting values of what is free, from the readings alone.

    The delay comes from the mean phase step between points, less that of the assumed C0 or L0; the
    resistance from the lowest tenth of a load's readings.
    """
    starts = {}
    for one in observed:
        f, gamma = one.frequency_hz, one.gamma
        if one.kind == "load":
            low = max(3, f.size // 10)
            reading = complex(gamma[:low].mean())
            starts[f"{one.name}.resistance_ohm"] = reference_ohm * (1.0 + reading.real) / (1.0 - reading.real)
            starts[f"{one.name}.inductance_ph"] = 0.0
            starts[f"{one.name}.offset_delay_ps"] = 0.0
            continue
        delay = equivalent_delay(f, gamma) * 1e12
        starts[f"{one.name}.offset_delay_ps"] = delay - (
            1e-3 * reference_ohm * ASSUMED["c0"][0] if one.kind == "open" else 0.0
        )
    return starts


def equivalent_delay(frequency_hz: FloatArray, gamma: ComplexArray) -> float:
    """Return the one-way delay in s that fits the phase of a full reflection best: −φ'/4π."""
    return -phase_slope(frequency_hz, gamma) / (4.0 * np.pi)


def places_of(problem: Problem) -> list[tuple[str, list[int]]]:
    """Return the places, among the fitted quantities, of the evidence of each role."""
    roles = [problem.quantities[i].role for i in problem.fitted]
    return [
        ("given values", [k for k, role in enumerate(roles) if role == "given"]),
        ("assumed values", [k for k, role in enumerate(roles) if role == "assumed"]),
    ]
