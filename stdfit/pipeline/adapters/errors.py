"""How sure a determined adapter is: all that its known standards are wrong by, as errors on a standard behind it.

Known standards that are wrong by εᵢ give an adapter that shows a standard Γ behind it wrong by Σᵢ wᵢ(Γ)·εᵢ =
δ0 + δ1·Γ + δ2·Γ², as references of raw readings do. Errors of their readings act alike once they are carried to the
plane of the standards.
"""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.two_port import product_of, terms_by_reading
from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.pipeline.raw.references import Reference
from stdfit.pipeline.raw.sources import kit_sources, reading_sources
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.region import effective_freedom
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN
from stdfit.uncertainty.sources import SharedSource, SmoothSource, Source, WhiteSource, analyser_sources


def adapter_sources(
    references: Sequence[Reference],
    known: Sequence[Observed],
    read: Sequence[Observed],
    terms: ComplexArray,
    box: ComplexArray,
    residual: StatedResidual,
    scatter: Repeatability,
    reference_ohm: float,
) -> list[Source]:
    """Return the sources of error of an adapter; in place of standards they act on the terms δ0, δ1, δ2.

    Parameters
    ----------
    references : sequence of r Reference
    known, read : sequences of r Observed
        The known standards in their own plane, and as they are read through the adapter.
    terms : complex array of shape (n, 3, r)
        How much of the error of each the terms take.
    box : complex array of shape (n, 3)
        The error terms that the adapter stands for.
    residual : StatedResidual
    scatter : Repeatability
        Of the known standards.
    reference_ohm : float
    """
    weights = [terms[:, power] for power in range(3)]
    frequency_hz = np.asarray(known[0].frequency_hz)
    sources = [
        *kit_sources(references, weights, frequency_hz),
        *reading_sources(known, weights, scatter, reference_ohm),
    ]
    slope = (1.0 - box[:, 2:] * np.stack([one.gamma for one in known], axis=1)) ** 2 / product_of(box)[
        :, None
    ]
    for source in analyser_sources(read, residual):
        if isinstance(source, SmoothSource):
            profiles = np.stack(source.profiles, axis=1) * slope
            acting = tuple((weight * profiles).sum(axis=1) for weight in weights)
            sources.append(SmoothSource(source.name, acting, common=True))
    return [*sources, *_port_sources(box, frequency_hz, scatter, reference_ohm)]


def _port_sources(
    box: ComplexArray, frequency_hz: FloatArray, scatter: Repeatability, reference_ohm: float
) -> list[Source]:
    """Return what the adapter's own connection to the analyser adds: it was made once, and taken for the adapter's own.

    The lumped parts change a reading by a quadratic of it; three values tell its coefficients.
    """
    off, low, high = (
        responses(np.full(frequency_hz.size, value, dtype=complex), frequency_hz, reference_ohm)
        for value in (0.0, -1.0, 1.0)
    )
    quadratic = np.stack([off, 0.5 * (high - low), 0.5 * (high + low) - off], axis=-1)
    terms = terms_by_reading(box[:, None], quadratic)
    return [
        SharedSource(
            f"adapter's connection ({part})",
            (tuple((scatter.sd[i] * terms[:, i, power])[:, None] for power in range(3)),),
            float(scatter.freedom[i]),
        )
        for i, part in enumerate(PARTS)
    ]


def covariance_of_terms(sources: Sequence[Source]) -> tuple[FloatArray, float]:
    """Return the joint covariance of the three terms at each frequency, shape (n, 6, 6), and its degrees of freedom.

    Sources of different correlation lengths are summed up for one length at a time; at each frequency that one counts
    which is worst for a full reflection, whose mean variance over all phases is the sum of the variances of the terms.

    Parameters
    ----------
    sources : sequence of Source
        From `adapter_sources`.

    Notes
    -----
    Degrees of freedom by Welch and Satterthwaite (JCGM 100:2008, G.4.1), at the frequency at which they are fewest.
    """
    each = [_covariances(source) for source in sources]
    count = max(own.shape[1] for own in each)
    stack = np.array([np.broadcast_to(own, (len(LENGTHS_PER_SPAN), count, 6, 6)) for own in each])
    traces = np.einsum("slnii->sln", stack)
    worst = traces.sum(axis=0).argmax(axis=0)
    places = np.arange(count)
    freedom = effective_freedom(traces[:, worst, places], np.array([source.freedom for source in sources]))
    return np.asarray(stack.sum(axis=0)[worst, places]), float(freedom.min())


def _covariances(source: Source) -> FloatArray:
    """Return the covariance of one source for each correlation length, shape (1 or lengths, 1 or n, 6, 6)."""
    if isinstance(source, SharedSource):
        vectors = np.array([np.stack(own, axis=1) for own in source.vectors])
    elif isinstance(source, SmoothSource):
        profiles = np.stack(source.profiles, axis=1)[None, ..., None]
        vectors = np.concatenate([profiles, 1j * profiles], axis=-1)
    elif isinstance(source, WhiteSource):
        return np.asarray(np.diag(np.repeat(source.variances, 2))[None, None])
    else:
        raise TypeError(f"'{source.name}' acts on each standard alone, and the terms are common to all")
    real = np.stack([vectors.real, vectors.imag], axis=3).reshape(*vectors.shape[:2], 6, -1)
    return np.asarray(real @ np.swapaxes(real, -1, -2))
