"""What a Monte Carlo check says of the linear bounds, in words."""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.uncertainty.monte_carlo import Compared

DIFFERENT = 0.10
"""Relative difference that is told."""

NEAR_ZERO = 2.0
"""|Γ| below this multiple of its bound is near zero."""

CHANCE = 3.0
"""And beyond this many times the chance spread of a quantile from so many draws."""

SPREAD = 0.95
"""Relative standard deviation of a 95 % radius from N draws, times √N: on a line; 0.73 where they are circular."""


def check_lines(compared: Sequence[Compared], draws: int) -> tuple[str, ...]:
    """Return one or two lines for each standard.

    A quantile from N draws has the variance 0.05·0.95/(N·p²), p the density there: p = 0.1169/σ at 1.960 σ of a
    normal value on a line, and 0.1224/σ at 2.448 σ per component of a circular one.
    """
    bar = max(DIFFERENT, CHANCE * SPREAD / np.sqrt(draws))
    lines = []
    for one in compared:
        ratio = one.drawn / np.maximum(one.linear, 1e-300)
        different = np.abs(ratio - 1.0) > bar
        if not different.any():
            worst = 100.0 * float(np.abs(ratio - 1.0).max())
            lines.append(
                f"{one.standard}: Monte Carlo ({draws} draws) and linear bounds agree within {worst:.0f} %"
            )
        else:
            lines.append(
                f"{one.standard}: Monte Carlo ({draws} draws) and linear bounds differ by more than "
                f"{100.0 * bar:.0f} % at {_bands(one.frequency_hz, different)}: there the bound should be "
                f"{float(ratio[different].min()):.2f} … {float(ratio[different].max()):.2f} times as large"
            )
        size = one.drawn_magnitude_u / np.maximum(one.linear_magnitude_u, 1e-300)
        # Where Γ is far from zero its magnitude is of no concern of its own: the bound on Γ holds it.
        bent = (np.abs(size - 1.0) > bar) & (one.magnitude < NEAR_ZERO * one.linear)
        if bent.any():
            lines.append(
                f"{one.standard}: the uncertainty of |Γ| alone is not linear at "
                f"{_bands(one.frequency_hz, bent)}, where |Γ| is as small as its own uncertainty; use the bound on Γ"
            )
        if one.unsettled > 0.01:
            lines.append(
                f"{one.standard}: {100.0 * one.unsettled:.0f} % of the draws did not settle and are left out"
            )
    return tuple(lines)


def _bands(frequency_hz: FloatArray, marked: np.ndarray) -> str:
    """Return where something holds, as a frequency band."""
    low, high = frequency_hz[marked][0] / 1e9, frequency_hz[marked][-1] / 1e9
    return f"{low:.3g} GHz" if low == high else f"{low:.3g} … {high:.3g} GHz"
