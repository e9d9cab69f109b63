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


def check_lines(compared: Sequence[Compared], draws: int) -> tuple[str, ...]:
    """Return one or two lines for each standard.

    The relative spread of a 95 % radius from N draws is about 1/√N for a circular normal value: the quantile's
    variance 0.05·0.95/(N·p²) with the density p = 0.05·2.448 per unit of the component's standard deviation.
    """
    bar = max(DIFFERENT, CHANCE * 0.73 / np.sqrt(draws))
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
