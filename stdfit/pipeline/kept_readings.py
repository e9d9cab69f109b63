"""What a kit keeps of the readings that it was made from."""

from collections.abc import Sequence
from math import ceil

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.pipeline.prepare import Prepared
from stdfit.uncertainty.region import effective_freedom
from stdfit.uncertainty.sources import LumpedSource, Source, WhiteSource
from stdfit.validity.session import MeanReading, Session

POINTS = 200
"""About how many readings are kept of each standard."""

CONNECTION_POINTS = 50
"""About how many of them are kept of each connection: enough to see which one stands apart, and in what."""

OF_CALIBRATION = ("analyser residuals", "reference kit", "reference misfit")
"""How the names of sources begin that stay the same as long as the analyser is not calibrated anew."""

DECIMALS, DIGITS = 7, 4
"""Readings are kept to so many decimals, sizes of errors to so many digits."""


def session_of(prepared: Prepared) -> Session:
    """Return the mean readings of a bench with the sizes of their errors.

    Parameters
    ----------
    prepared : Prepared
        Of evidence nothing is kept: it changes no reading.
    """
    own = [
        source
        for source in prepared.sources
        if not source.name.startswith(OF_CALIBRATION) and not isinstance(source, LumpedSource | WhiteSource)
    ]
    means = []
    for k, observed in enumerate(prepared.observed):
        step = max(1, observed.frequency_hz.size // POINTS)
        kept = slice(None, None, step)
        some = slice(None, None, step * ceil(observed.frequency_hz[kept].size / CONNECTION_POINTS))
        repeated = observed.connections > 1
        calibration = [one for one in prepared.sources if one.name.startswith(OF_CALIBRATION)]
        white = sum(one.variances[k] for one in prepared.sources if isinstance(one, WhiteSource))
        means.append(
            MeanReading(
                standard=observed.name,
                connections=observed.connections,
                frequency_hz=observed.frequency_hz[kept],
                gamma=_rounded(observed.gamma[kept]),
                calibration_sd=_size(calibration, k, observed.frequency_hz.size)[kept],
                session_sd=_size(own, k, observed.frequency_hz.size)[kept],
                noise_sd=float(_short(np.sqrt(white))),
                connection_hz=observed.frequency_hz[some] if repeated else None,
                deviations=_rounded(observed.deviations[:, some]) if repeated else None,
            )
        )
    return Session(
        scatter_sd=_short(prepared.scatter.sd),
        scatter_freedom=_short(prepared.scatter.freedom),
        session_freedom=_freedom(own, len(prepared.observed)),
        means=tuple(means),
    )


def _rounded(values: ComplexArray) -> ComplexArray:
    """Return readings as they are kept; without a minus before a zero, which would not come back from a file."""
    return np.asarray(np.round(values, DECIMALS) + 0.0)


def _size(sources: Sequence[Source], index: int, count: int) -> FloatArray:
    """Return the standard deviation per component of some sources together, shape (n,)."""
    power = np.zeros(count)
    for source in sources:
        if not isinstance(source, WhiteSource):
            power = power + source.power(index)
    return _short(np.sqrt(power))


def _freedom(sources: Sequence[Source], standards: int) -> float:
    """Return the degrees of freedom of some sources together, by their mean powers."""
    powers = [
        sum(float(source.power(k).mean()) for k in range(standards))
        for source in sources
        if not isinstance(source, WhiteSource)
    ]
    if not any(powers):
        return float("inf")
    freedom = effective_freedom(np.array(powers)[:, None], np.array([one.freedom for one in sources]))
    return float(_short(freedom[0]))


def _short(values: FloatArray | float) -> FloatArray:
    """Return values with few digits: they are sizes, and files should stay small."""
    values = np.asarray(values, dtype=float)
    told = np.isfinite(values) & (values != 0.0)
    power = np.floor(np.log10(np.abs(values), out=np.zeros(values.shape), where=told))
    factor = 10.0 ** np.clip(DIGITS - 1 - power, -300, 300)
    return np.asarray(np.where(told, np.round(values * factor) / factor, values))
