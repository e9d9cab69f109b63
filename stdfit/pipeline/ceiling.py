"""The connector family of a bench, with the ceiling that its drawings set."""

from dataclasses import replace

from stdfit.circuits.connectors import Family, family_of
from stdfit.data.bench import Bench


def family_on(bench: Bench) -> Family:
    """Return the connector family of a bench; where a next mode begins lower in a drawn part, that is its top."""
    family = family_of(bench.connector)
    onset = min((entry.next_mode_hz for entry in bench.standards), default=family.top_hz)
    return replace(family, top_hz=min(family.top_hz, onset))
