"""The change of a standard between two mean readings.

Order, range and evidence of the fits play no part, and an error that both sessions share cancels.
"""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.connections import PARTS, responses
from stdfit.validity.change.difference import Change, Effect, enough, smooth_effect
from stdfit.validity.device.pairing import Pair
from stdfit.validity.kit import Definition, Kit, model
from stdfit.validity.session import MeanReading, Session

FORMS = 3
"""Errors that act like directivity, like tracking and like source match: 1, Γ and Γ²."""

MIXING = 2.0
"""An imperfect correction shows a change ΔΓ as (1 + δT + 2·δM·Γ)·ΔΓ: wrong by so many of its own errors."""


def by_readings(
    pair: Pair,
    kits: tuple[Kit, Kit],
    sessions: tuple[Session, Session],
    means: tuple[MeanReading, MeanReading],
    *,
    common: bool,
) -> Change:
    """Return the change of a standard between two mean readings.

    Parameters
    ----------
    pair : Pair
    kits, sessions, means
        Of the old and of the new kit.
    common : bool
        Whether both sessions share the correction of the analyser, or the reference kit: its errors cancel then.

    Raises
    ------
    RequestError
        Too few common frequencies.
    """
    low = max(one.frequency_hz[0] for one in means)
    top = min(one.frequency_hz[-1] for one in means)
    f = means[0].frequency_hz[(means[0].frequency_hz >= low) & (means[0].frequency_hz <= top)]
    enough(f, pair)
    shown = [_at(f, *three) for three in zip(means, kits, (pair.one, pair.two), strict=True)]
    gamma = 0.5 * (shown[0] + shown[1])
    turning = np.exp(1j * np.unwrap(np.angle(gamma))) if pair.one.kind != "load" else np.ones(f.size)
    basis = responses(gamma, f, kits[0].reference_ohm)
    effects, correction = [], []
    for mean, session in zip(means, sessions, strict=True):
        effects += [
            Effect(
                f"connections ({part})",
                float(session.scatter_freedom[i]),
                (basis[:, i : i + 1] * session.scatter_sd[i] / np.sqrt(mean.connections),),
            )
            for i, part in enumerate(PARTS)
        ]
        own = np.interp(f, mean.frequency_hz, mean.session_sd)
        if own.any():
            effects.append(smooth_effect("session", own, f, session.session_freedom))
        left = np.interp(f, mean.frequency_hz, mean.calibration_sd)
        if left.any():
            # How the errors act on a full reflection decides what they can pass for, so all three ways count.
            correction += [
                smooth_effect("calibration", left / np.sqrt(FORMS) * turning**power, f)
                for power in range(FORMS)
            ]
    mixing = [
        MIXING * np.max([np.interp(f, one.frequency_hz, one.calibration_sd) for one in session.means], axis=0)
        for session in sessions
    ]
    return Change(
        pair=pair,
        by="readings",
        reference_ohm=kits[0].reference_ohm,
        frequency_hz=f,
        gamma=gamma,
        difference=shown[1] - shown[0],
        noise_sd=float(np.hypot(means[0].noise_sd, means[1].noise_sd)),
        effects=tuple(effects if common else [*effects, *correction]),
        common=tuple(correction if common else []),
        mixing=np.max(mixing, axis=0),
    )


def _at(frequency_hz: FloatArray, mean: MeanReading, kit: Kit, definition: Definition) -> ComplexArray:
    """Return a mean reading at other frequencies: what it keeps beside the model runs straight between points."""
    left = mean.gamma - model(kit, definition, mean.frequency_hz)[0]
    between = np.interp(frequency_hz, mean.frequency_hz, left.real) + 1j * np.interp(
        frequency_hz, mean.frequency_hz, left.imag
    )
    return np.asarray(model(kit, definition, frequency_hz)[0] + between)
