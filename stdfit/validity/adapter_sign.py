"""The sign of S21 of a reciprocal two-port, of which reflections tell the square alone.

A passive line-like part lets everything through, unturned, at f → 0: the phase of S21, followed from reading to
reading and continued downwards, ends near 0. Of the root with the wrong sign it ends near half a turn.
"""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import FitError
from stdfit.data.bench_records import Given

HALF_TURN = np.pi

FAST = 2.0
"""Steps of the phase of S21² in rad from which on, in the middle, it can no longer be followed without an estimate."""

STRAY = 0.03
"""Part of the phase below the first reading by which it may stray from the slope above (common practice, no source)."""

FIRM = 4.0
"""Standard uncertainties of an estimate that are allowed for: a wrong sign is no small error."""


@dataclass(frozen=True, slots=True)
class _End:
    """Where the phase of S21 ends at f → 0 by one kind of evidence, in rad, and how far it may be off."""

    phase: float
    reach: float

    @property
    def half_turns(self) -> int:
        return round(self.phase / HALF_TURN)

    @property
    def decided(self) -> bool:
        """Whether the other sign is out of reach."""
        off = abs(self.phase - self.half_turns * HALF_TURN)
        return off + self.reach < 0.5 * HALF_TURN


def signed_root(
    product: ComplexArray, frequency_hz: FloatArray, bound: FloatArray, delay_ps: Given | None, name: str
) -> ComplexArray:
    """Return S21 from its square, with the sign that a passive line-like part has.

    Parameters
    ----------
    product : complex array of shape (n,)
        S21².
    frequency_hz : array of shape (n,)
        Above 0, rising.
    bound : array of shape (n,)
        95 % bound on the phase of S21 in rad.
    delay_ps : Given or None
        Estimate of the delay with its standard uncertainty.
    name : str
        Of the adapter, for messages.

    Returns
    -------
    complex array of shape (n,)

    Raises
    ------
    FitError
        The sign cannot be told, or the estimate contradicts the readings.
    """
    phase = _followed(product, frequency_hz, delay_ps, name)
    ends = [_by_slope(phase, frequency_hz, bound)]
    if delay_ps is not None:
        ends.append(_by_estimate(product, phase, frequency_hz, bound, delay_ps))
    decided = [one for one in ends if one.decided]
    if not decided:
        raise _untold(
            name,
            f"where its phase ends at f → 0 is known to ± {min(np.degrees(one.reach) for one in ends):.0f}° only, "
            f"counted from {frequency_hz[0] / 1e9:.4g} GHz",
            delay_ps,
        )
    if len({one.half_turns % 2 for one in decided}) > 1:
        read = -(phase[0] - decided[0].half_turns * HALF_TURN) / (2e-12 * np.pi * frequency_hz[0])
        raise FitError(
            f"the sign of S21 of '{name}' cannot be told: the slope of its phase means about {read:.4g} ps",
            f"mend the estimate of {delay_ps.value if delay_ps else 0.0:g} ps, or its u",
        )
    turned = phase - decided[0].half_turns * HALF_TURN
    return np.asarray(np.sqrt(np.abs(product)) * np.exp(1j * turned))


def _followed(
    product: ComplexArray, frequency_hz: FloatArray, delay_ps: Given | None, name: str
) -> FloatArray:
    """Return half of the phase of S21², unwrapped, in rad."""
    widest = float(np.diff(frequency_hz).max())
    if delay_ps is None:
        steps = np.abs(np.angle(product[1:] / product[:-1]))
        phase = 0.5 * np.unwrap(np.angle(product))
        if np.median(steps) > FAST or _line(frequency_hz, phase)[1] >= 0.0:
            raise _untold(name, "its phase turns too fast from reading to reading", None)
        return phase
    if FIRM * (delay_ps.u or 0.0) * 4e-12 * np.pi * widest > HALF_TURN:
        raise _untold(
            name,
            f"± {delay_ps.u:g} ps are too many turns for readings {widest / 1e6:.3g} MHz apart",
            delay_ps,
        )
    # What the estimate leaves turns slowly, however long the part is.
    taken = 2e-12 * np.pi * frequency_hz * delay_ps.value
    left = product * np.exp(2j * taken)
    return np.asarray(0.5 * np.unwrap(np.angle(left)) - taken)


def _line(frequency_hz: FloatArray, phase: FloatArray) -> tuple[float, float]:
    """Return value at f = 0 and slope in rad/Hz of a straight line."""
    slope, middle = np.polyfit(frequency_hz - frequency_hz.mean(), phase, 1)
    return float(middle - slope * frequency_hz.mean()), float(slope)


def _by_slope(phase: FloatArray, frequency_hz: FloatArray, bound: FloatArray) -> _End:
    """Continue the phase downwards in a straight line.

    An error of the readings that grows over the band by twice its bound tips the line; halves of the band that give
    other lines show what the phase does besides.
    """
    half = phase.size // 2
    end, slope = _line(frequency_hz, phase)
    others = [
        _line(frequency_hz[part], phase[part])[0] for part in (slice(None, half + 1), slice(half, None))
    ]
    span = frequency_hz[-1] - frequency_hz[0]
    tipped = (1.0 + 2.0 * frequency_hz.mean() / span) * float(np.median(bound))
    spread = max(abs(other - end) for other in others)
    return _End(end, spread + tipped + STRAY * abs(slope) * float(frequency_hz[0]))


def _by_estimate(
    product: ComplexArray, phase: FloatArray, frequency_hz: FloatArray, bound: FloatArray, delay_ps: Given
) -> _End:
    """Turn the first reading back by the estimated delay; the skin effect adds as many rad as it takes Np."""
    turn = 2e-12 * np.pi * float(frequency_hz[0])
    skin = 0.5 * abs(float(np.log(np.abs(product[0]))))
    reach = turn * (FIRM * (delay_ps.u or 0.0) + STRAY * delay_ps.value) + skin + float(bound[0])
    return _End(float(phase[0]) + turn * delay_ps.value, reach)


def _untold(name: str, why: str, delay_ps: Given | None) -> FitError:
    mend = (
        "give delay_ps = { value = …, u = … } at the adapter, or read from lower on with closer points"
        if delay_ps is None
        else "give delay_ps with a smaller u at the adapter, or read from lower on with closer points"
    )
    return FitError(f"the sign of S21 of '{name}' cannot be told: {why}", mend)
