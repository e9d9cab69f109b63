"""What a plan may change about the references of raw readings."""

from dataclasses import replace

import numpy as np

from stdfit.pipeline.prepare import Prepared
from stdfit.uncertainty.sources import SharedSource, SmoothSource, Source

OF_REFERENCES = ("reference kit (", "reference misfit (")
"""How the names of sources begin that are errors of the references' definitions."""

OF_CONNECTIONS = "reference connections ("


def with_reference_connections(prepared: Prepared, count: int) -> Prepared:
    """Return the bench as it would be with so many connections of each reference; the least read one sets the scale."""
    shrink = np.sqrt(prepared.reference_connections / count)

    def change(source: Source) -> Source:
        if not source.name.startswith(OF_CONNECTIONS):
            return source
        if isinstance(source, SharedSource):
            scaled = tuple(tuple(shrink * vector for vector in own) for own in source.vectors)
            return replace(source, vectors=scaled)
        if isinstance(source, SmoothSource):
            return replace(source, profiles=tuple(shrink * profile for profile in source.profiles))
        return source

    return replace(
        prepared,
        sources=tuple(change(source) for source in prepared.sources),
        reference_connections=count,
    )
