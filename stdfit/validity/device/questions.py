"""Up to which frequency a kit answers a user's question about devices, and which standard holds it back."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex
from stdfit.base.errors import RequestError
from stdfit.circuits.residual_map import PAIRS, device_weights, separation
from stdfit.validity.device.bound import (
    DeviceMap,
    all_phases,
    common_top,
    device_bound,
    device_map,
    part_of,
    three_of,
)
from stdfit.validity.evidence.causes import cause
from stdfit.validity.kit import Kit
from stdfit.validity.limit import first_gap

GRID_POINTS = 150
"""Frequencies at which a bound is compared with what is allowed, besides those of the misfits."""

CLOSE = 0.5
"""Closeness of the standards is the reason when the bound would be below this part of itself without it."""


@dataclass(frozen=True, slots=True, eq=False)
class Question:
    """What a user wants to be sure of: certain devices within some error.

    Attributes
    ----------
    label : str
        In the user's words.
    devices : complex array of shape (k,)
        The devices; each of them must come out well.
    allowed : float
        The error of Γ that is just as large as allowed, in the worst direction.
    """

    label: str
    devices: ComplexArray
    allowed: float

    def __post_init__(self) -> None:
        object.__setattr__(self, "devices", frozen_complex(self.devices))


@dataclass(frozen=True, slots=True, eq=False)
class Answer:
    """Up to where the answer is yes.

    Attributes
    ----------
    question : Question
    limit_hz : float
        0 where it fails from the first reading on.
    holds_back : str
        The standard whose error ends it, or a pair, "a and b", that has drawn together; empty where the readings
        or the connector end.
    reason : str
    """

    question: Question
    limit_hz: float
    holds_back: str
    reason: str


def return_loss_within(loss_db: float, within_db: float) -> Question:
    """Return the question for a return loss within ± some dB: δ = |Γ|·(1 − 10^(−A/20)) raises it by A dB.

    Raises
    ------
    RequestError
        The loss is negative, which no passive device has, or the tolerance is not above zero.
    """
    if not (0.0 <= loss_db <= 200.0 and 0.0 < within_db <= 200.0):
        raise RequestError(
            f"a return loss of {loss_db:g} dB within {within_db:g} dB makes no question",
            "name a return loss from 0 to 200 dB and a tolerance above 0 dB",
        )
    magnitude = 10.0 ** (-loss_db / 20.0)
    allowed = magnitude * -np.expm1(-within_db / 20.0 * np.log(10.0))
    return Question(
        f"return loss of {loss_db:g} dB within {within_db:g} dB", magnitude * all_phases(), float(allowed)
    )


def impedance_within(impedance_ohm: float, within_percent: float, reference_ohm: float) -> Question:
    """Return the question for |Z| of a device near some resistance within ± some percent.

    With x = Z/Zr the real errors that reach (1 ± p/100)·Z end at (x(1 ± p/100) − 1)/(x(1 ± p/100) + 1); the smaller
    of their distances from Γ = (x − 1)/(x + 1) is allowed. No error of that size in another direction does more.

    Raises
    ------
    RequestError
        An impedance or a tolerance that is not above zero.
    """
    if not (0.0 < impedance_ohm < 1e9 and 0.0 < within_percent < 100.0):
        raise RequestError(
            f"|Z| of {impedance_ohm:g} Ω within {within_percent:g} % makes no question",
            "name an impedance above 0 Ω and a tolerance above 0 and below 100 %",
        )
    part = 0.01 * within_percent
    normal = impedance_ohm / reference_ohm
    gamma = (normal - 1.0) / (normal + 1.0)
    away = [abs((normal * k - 1.0) / (normal * k + 1.0) - gamma) for k in (1.0 - part, 1.0 + part)]
    return Question(
        f"|Z| near {impedance_ohm:g} Ω within {within_percent:g} %", np.array([complex(gamma)]), min(away)
    )


def phase_within(within_deg: float) -> Question:
    """Return the question for the phase of a full reflection within ± some degrees: δ = sin A.

    Raises
    ------
    RequestError
        The tolerance does not lie between 0 and 90°.
    """
    if not 0.0 < within_deg < 90.0:
        raise RequestError(
            f"a phase within {within_deg:g}° makes no question", "name a tolerance above 0° and below 90°"
        )
    return Question(
        f"phase of a full reflection within {within_deg:g}°",
        all_phases(),
        float(np.sin(np.radians(within_deg))),
    )


def answers(kit: Kit, questions: Sequence[Question], names: Sequence[str] = ()) -> list[Answer]:
    """Return up to which frequency each question can be answered with a kit, and why no further.

    Parameters
    ----------
    kit : Kit
    questions : sequence of Question
    names : sequence of str
        The three standards of the correction; one of each kind where none are named.

    Raises
    ------
    RequestError
        See `three_of`.
    """
    three = three_of(kit, names)
    low = max(one.read_low_hz for one in three)
    top = common_top(three)
    high = min(top, kit.top_hz)
    if high < low:
        why = "the readings of the three standards, or the connector's range, have no frequency in common"
        return [Answer(question, 0.0, "", why) for question in questions]
    points = np.concatenate([np.linspace(low, high, GRID_POINTS), *(one.misfit_hz for one in three)])
    grid = np.unique(points[(points >= low) & (points <= high)])
    errors = device_map(kit, three, grid)
    end = "the readings end here" if high == top else "the connector family ends here"
    return [_answer(kit, errors, question, end) for question in questions]


def _answer(kit: Kit, errors: DeviceMap, question: Question, end: str) -> Answer:
    worst = device_bound(errors, question.devices).max(axis=1)
    limit_hz, place = first_gap(errors.frequency_hz, worst, question.allowed)
    if place is None:
        return Answer(question, limit_hz, "", end)
    there = part_of(errors, slice(place, place + 1))
    close = _closeness(errors, there, question)
    if close:
        return Answer(question, limit_hz, *close)
    name, reason = _culprit(kit, there, question)
    return Answer(question, limit_hz, name, f"{name}: {reason}")


def _closeness(errors: DeviceMap, there: DeviceMap, question: Question) -> tuple[str, str] | None:
    """Return the pair that has drawn together, where this makes most of the bound.

    The same errors are put on the standards as they stand at the frequency at which the closest pair is
    farthest apart; whatever bound they give then is not due to closeness. A weight is one over the product of two
    distances, so that no bound doubles through closeness unless a distance has shrunk by √2; a device that lay near
    a good standard there, and lies near a bad one here, is none of it.
    """
    closest = separation(errors.standards).min(axis=1)
    own = separation(there.standards)[0]
    if own.min() > np.sqrt(CLOSE) * closest.max():
        return None
    apart = replace(there, standards=errors.standards[[int(np.argmax(closest))]])
    if device_bound(apart, question.devices).max() > CLOSE * device_bound(there, question.devices).max():
        return None
    pair = int(np.argmin(own))
    names = " and ".join(there.definitions[k].name for k in PAIRS[pair])
    hertz = float(there.frequency_hz[0])
    return names, (
        f"{names} come too close on the Smith chart, {own[pair]:.2g} apart at {hertz / 1e9:.3g} GHz"
    )


def _culprit(kit: Kit, there: DeviceMap, question: Question) -> tuple[str, str]:
    """Return the standard without whose error the bound would shrink most, and what its error comes from."""
    device = question.devices[[int(np.argmax(device_bound(there, question.devices)[0]))]]
    weights = device_weights(there.standards, device)
    without = [float(device_bound(_kept(there, [j != k for j in range(3)]), device)[0, 0]) for k in range(3)]
    worst = int(np.argmin(without))
    name = there.definitions[worst].name
    if not kit.shares:
        return name, "the stated bound reaches it here"
    own: ComplexArray = weights[0, 0, worst]
    misfit = float(np.abs(own) * there.misfits[0, worst])
    bound = float(device_bound(_kept(there, [k == worst for k in range(3)]), device)[0, 0])
    return name, cause(kit, own * there.designs[0, worst], bound - misfit, misfit, of="its bound")


def _kept(errors: DeviceMap, keep: Sequence[bool]) -> DeviceMap:
    """Return the map in which the other standards are free of error."""
    chosen: FloatArray = np.array(keep, dtype=float)
    pairs = np.repeat(chosen, 2)
    return replace(
        errors,
        misfits=errors.misfits * chosen,
        covariances=tuple(covariance * np.outer(pairs, pairs) for covariance in errors.covariances),
    )
