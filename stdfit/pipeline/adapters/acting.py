"""What the analyser's residuals and the adapters put on standards: sources of error in the planes of the standards."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.pipeline.adapters.known import Known
from stdfit.pipeline.adapters.planes import Passage, Planes
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.sources import SharedSource, SmoothSource, Source, analyser_sources

OF_ADAPTERS = "adapter ("
"""How the names of sources begin that come from adapters."""


def residual_sources(
    observed: Sequence[Observed], passages: Sequence[Passage], residual: StatedResidual
) -> list[Source]:
    """Return what the analyser's residuals, which act on readings, do in the planes of the standards."""
    read = [replace(one, gamma=own.back(one.gamma)) for one, own in zip(observed, passages, strict=True)]
    slopes = [own.slopes(one.gamma)[0] for one, own in zip(observed, passages, strict=True)]
    return [
        replace(
            source,
            profiles=tuple(profile * slope for profile, slope in zip(source.profiles, slopes, strict=True)),
        )
        for source in analyser_sources(read, residual)
        if isinstance(source, SmoothSource)
    ]


def adapter_sources_on(
    observed: Sequence[Observed],
    passages: Sequence[Passage],
    planes: Planes,
    scatter: Repeatability,
    reference_ohm: float,
) -> list[Source]:
    """Return what the adapters are wrong by, common to all standards that they lie before.

    Besides, an adapter was connected to the analyser once more, which added lumped parts of its own at port 1.

    Parameters
    ----------
    observed, passages : sequences
        In the planes of the standards.
    planes : Planes
    scatter : Repeatability
        Of the standards' connections; the adapter's are taken to scatter alike.
    reference_ohm : float
    """
    sources: list[Source] = []
    span = (
        min(float(one.frequency_hz[0]) for one in observed),
        max(float(one.frequency_hz[-1]) for one in observed),
    )
    for known in planes.in_use:
        places = [
            next((k for k, step in enumerate(own.steps) if step.known is known), None) for own in passages
        ]
        acting = [
            _acting(one, own, place) for one, own, place in zip(observed, passages, places, strict=True)
        ]
        each = [known.term_sources(np.asarray(one.frequency_hz), span) for one in observed]
        for i, first in enumerate(each[0]):
            vectors = tuple(
                tuple(
                    np.einsum("nt,ntq->nq", powers, own[i].vectors[length])
                    for (powers, _), own in zip(acting, each, strict=True)
                )
                for length in range(len(first.vectors))
            )
            sources.append(SharedSource(_named(known, first.part), vectors, first.freedom))
        for i, part in enumerate(PARTS):
            lumped = tuple(
                (scatter.sd[i] * slope * responses(plane, np.asarray(one.frequency_hz), reference_ohm)[:, i])[
                    :, None
                ]
                for one, (_, (plane, slope)) in zip(observed, acting, strict=True)
            )
            sources.append(
                SharedSource(_named(known, f"connection, {part}"), (lumped,), float(scatter.freedom[i]))
            )
    return sources


def _acting(
    one: Observed, passage: Passage, place: int | None
) -> tuple[ComplexArray, tuple[ComplexArray, ComplexArray]]:
    """Return how an adapter's terms act on a standard, and the reflection at its port 1 with dΓ by it; else zeros."""
    gamma = np.asarray(one.gamma)
    if place is None:
        nothing = np.zeros(gamma.size, dtype=complex)
        return np.zeros((gamma.size, 3), dtype=complex), (nothing, nothing)
    planes, slopes, step = passage.planes(gamma), passage.slopes(gamma), passage.steps[place]
    powers = step.powers(planes[place], planes[place + 1]) * slopes[place + 1][:, None]
    port = place if step.inward else place + 1
    return powers, (planes[port], slopes[port])


def _named(known: Known, part: str) -> str:
    """Return the name of a source; a reason names the kind before the first bracket, so the rest has none."""
    return f"{OF_ADAPTERS}{known.name.replace('(', '').replace(')', '')}: {part})"
