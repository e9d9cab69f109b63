"""From readings to what a fit needs: means, scatter, sources of error, and what the user must be told."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.connectors import Family
from stdfit.data.bench import Bench, StatedResidual
from stdfit.data.uncorrected import like_uncorrected
from stdfit.data.verify import verify_standards
from stdfit.fitting.observed import Observed, noise_of, without_delay
from stdfit.fitting.roles import Wish
from stdfit.fitting.screen import screen_points
from stdfit.pipeline.adapters.acting import adapter_sources_on, residual_sources
from stdfit.pipeline.adapters.brought import brought, to_verify
from stdfit.pipeline.adapters.known import adapter_ancestors, adapter_cautions
from stdfit.pipeline.adapters.planes import NO_ADAPTERS, Planes, planes_of
from stdfit.pipeline.ceiling import family_on
from stdfit.uncertainty.connections import Repeatability, assumed_repeatability, pooled_repeatability
from stdfit.uncertainty.outlying import without_outlying
from stdfit.uncertainty.sources import Source, connection_sources
from stdfit.validity.analyser import Analyser, analyser_of, same_residuals
from stdfit.validity.kit import Ancestor

ASSUMED_RESIDUAL = StatedResidual(
    frequency_hz=frozen_float([1e9, 6e9]),
    directivity=frozen_float([10 ** (-36 / 20), 10 ** (-32 / 20)]),
    source_match=frozen_float([10 ** (-34 / 20), 10 ** (-28 / 20)]),
    reflection_tracking=frozen_float([10 ** (0.1 / 20) - 1, 10 ** (0.2 / 20) - 1]),
)
"""Residuals that are assumed where a bench states none: those of an analyser corrected with a kit of modest,
unverified standards (common practice, no source)."""

CORRECTED_HERE = StatedResidual(
    frequency_hz=frozen_float([1e9]),
    directivity=frozen_float([0.0]),
    source_match=frozen_float([0.0]),
    reflection_tracking=frozen_float([0.0]),
)
"""Of raw readings that are corrected with references: what that leaves are sources of their own, and no residuals."""


@dataclass(frozen=True, slots=True, eq=False)
class Prepared:
    """A bench, ready to be fitted.

    Attributes
    ----------
    bench : Bench
    observed : tuple of Observed
    wishes : tuple of Wish
    residual : StatedResidual
        Stated, or assumed.
    scatter : Repeatability
    sources : tuple of Source
    family : Family
    warnings : tuple of str
    imagined_connections : int
        How many connections of each standard the sources stand for, where it is more than were made; else 0.
    ancestors : tuple of Ancestor
        Of raw readings: the kits that the references are of, and theirs.
    reference_connections : int
        Of raw readings: the fewest connections of any reference; else 0.
    """

    bench: Bench
    observed: tuple[Observed, ...]
    wishes: tuple[Wish, ...]
    residual: StatedResidual
    scatter: Repeatability
    sources: tuple[Source, ...]
    family: Family
    warnings: tuple[str, ...]
    imagined_connections: int = 0
    ancestors: tuple[Ancestor, ...] = ()
    reference_connections: int = 0

    @property
    def connections(self) -> int:
        """Most connections of any standard."""
        return max(self.imagined_connections, *(one.connections for one in self.observed))


def prepare(bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], *, imagined: bool = False) -> Prepared:
    """Verify and screen readings, and gather the sources of error.

    Parameters
    ----------
    bench : Bench
    sweeps : mapping
        For each standard, one sweep for each connection.
    imagined : bool
        True for readings that nobody took, which need no check of what they are.

    Raises
    ------
    InputError
        The readings cannot be what they are called, or the bench asks for what cannot be.
    """
    if bench.state != "corrected":
        raise RequestError(
            "a bench of raw readings cannot be planned before it is read",
            'read it first, or plan with state = "corrected" and the residuals that its known standards will leave',
            file=bench.path,
            key="analyser.state",
        )
    if not 0.0 < bench.within < 1.0:
        raise RequestError("the tolerance must lie between 0 and 1", "try 0.02", key="within")
    refuse_known(bench)
    planes = planes_of(bench)
    warnings: list[str] = []
    if not imagined:
        sweeps = brought(bench, sweeps, planes)
        readings = to_verify(bench, sweeps, planes)
        warnings += verify_standards(readings)
        warnings += like_uncorrected(readings, _given_delays(bench))
    family = family_on(bench)
    observed, left_out = _observe(bench, sweeps, family)
    wishes = tuple(
        Wish({name: (given.value, given.u) for name, given in entry.given.items()}, entry.same_offset_as)
        for entry in bench.standards
    )
    scatter = repeatability(observed, family, bench.reference_ohm)
    residual = bench.residual if bench.residual is not None else ASSUMED_RESIDUAL
    warnings += (
        left_out + _cautions(bench, observed, scatter, family) + adapter_cautions(bench, planes.in_use)
    )
    return Prepared(
        bench=bench,
        observed=tuple(observed),
        wishes=wishes,
        residual=residual,
        scatter=scatter,
        sources=sources_of(observed, residual, scatter, bench.reference_ohm, planes),
        family=family,
        warnings=tuple(warnings),
        ancestors=adapter_ancestors(planes.in_use),
    )


def _given_delays(bench: Bench) -> dict[str, float]:
    """Return the offset delays that are given, in ps, for standards that share a line too."""
    own = {
        entry.name: entry.given["offset_delay_ps"].value
        for entry in bench.standards
        if "offset_delay_ps" in entry.given
    }
    shared = {one.name: own[one.same_offset_as] for one in bench.standards if one.same_offset_as in own}
    return {**shared, **own}


def refuse_known(bench: Bench) -> None:
    """Refuse known standards among corrected readings: they determine an adapter, and are no part of a kit.

    Raises
    ------
    RequestError
    """
    for entry in bench.standards:
        if entry.from_kit is not None:
            raise RequestError(
                f"known standards behind an adapter determine the adapter '{entry.behind}'",
                f"run 'stdfit adapter {bench.path}'; of the standards to be characterised leave out from_kit",
                file=bench.path,
                key=f"standard[{entry.name}].from_kit",
            )


def sources_of(
    observed: Sequence[Observed],
    residual: StatedResidual,
    scatter: Repeatability,
    reference_ohm: float,
    planes: Planes = NO_ADAPTERS,
) -> tuple[Source, ...]:
    """Return all sources of error of a bench, evidence apart."""
    passages = [planes.passage(one.name, np.asarray(one.frequency_hz)) for one in observed]
    return (
        *residual_sources(observed, passages, residual),
        *connection_sources(observed, scatter, reference_ohm),
        *adapter_sources_on(observed, passages, planes, scatter, reference_ohm),
    )


def _observe(
    bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], family: Family
) -> tuple[list[Observed], list[str]]:
    """Reduce the readings of each standard; leave out what does not belong, and say so."""
    observed, told = [], []
    for entry in bench.standards:
        grid = sweeps[entry.name][0].frequency_hz
        inside = grid > 0.0
        if bench.highest_hz is not None:
            inside &= grid <= bench.highest_hz
        if np.count_nonzero(inside) < 8:
            raise ReadingError(
                f"fewer than 8 readings of '{entry.name}' lie in the band that is asked for",
                "raise goal.highest_hz or take more points",
                file=sweeps[entry.name][0].name,
            )
        readings = np.array([sweep.gamma[inside] for sweep in sweeps[entry.name]])
        screened = screen_points(grid[inside], readings)
        for sweep, row in zip(sweeps[entry.name], screened.replaced, strict=True):
            if row.any():
                told.append(single_points(sweep.name, grid[inside][row]))
        observed.append(Observed.from_readings(entry.name, entry.kind, grid[inside], screened.readings))
    kept, left_out = without_outlying(observed, bench.reference_ohm, family.repeatability)
    for s, k, distance in left_out:
        name = sweeps[bench.standards[s].name][k].name
        told.append(
            f"{name}: this connection lies {distance:.2g} from the others, far beyond their scatter, and is left out. "
            "Clean and tighten, and read it again."
        )
    return kept, told


def single_points(name: str, frequencies: FloatArray) -> str:
    """Say which single points were left out."""
    some = ", ".join(f"{f / 1e9:.4g}" for f in frequencies[:4]) + (", …" if frequencies.size > 4 else "")
    return (
        f"{name}: {frequencies.size} single point{'s' if frequencies.size > 1 else ''} ({some} GHz) left out: "
        "off from their neighbours in this connection alone, as beside an analyser's band edges"
    )


def analyser_told(prepared: Prepared) -> Analyser | None:
    """Return what the analyser's own correction was told or taken to leave; None of raw readings."""
    if prepared.bench.state != "corrected":
        return None
    stated = prepared.bench.residual
    assumed = stated is None or same_residuals(stated, ASSUMED_RESIDUAL)
    return analyser_of(prepared.residual, assumed=assumed)


def repeatability(observed: Sequence[Observed], family: Family, reference_ohm: float) -> Repeatability:
    """Measure how connections scatter, or assume it where nothing was connected twice."""
    if any(one.connections > 1 for one in observed):
        return pooled_repeatability(observed, reference_ohm, family.repeatability)
    noise = float(np.median([noise_of(without_delay(one.frequency_hz, one.gamma)) for one in observed]))
    return assumed_repeatability(observed, family.repeatability, noise)


def _cautions(
    bench: Bench, observed: Sequence[Observed], scatter: Repeatability, family: Family
) -> list[str]:
    """Say loudly what had to be assumed."""
    cautions = []
    if bench.residual is None:
        cautions.append(
            "no analyser residuals are stated: those of a modest calibration are assumed "
            "(36 … 32 dB directivity, 34 … 28 dB source match, 0.1 … 0.2 dB tracking; common practice, no source). "
            "State yours under [analyser.residual]."
        )
    elif same_residuals(bench.residual, ASSUMED_RESIDUAL):
        cautions.append(
            "the analyser residuals are still those of the draft, a modest calibration's (common practice, no source). "
            "State yours under [analyser.residual]: limits rest on them."
        )
    return cautions + scatter_cautions(observed, scatter, family, bench.connector)


def scatter_cautions(
    observed: Sequence[Observed], scatter: Repeatability, family: Family, connector: str
) -> list[str]:
    """Say what had to be assumed of connections and connector."""
    cautions = []
    if not scatter.measured:
        resistance, shift, _ = family.repeatability
        cautions.append(
            f"one connection of each standard says nothing about how well it repeats: {1e3 * resistance:.0f} mΩ and "
            f"{shift:g} ps (one standard deviation) are assumed (common practice, no source). "
            "Connect each standard at least three times."
        )
    elif any(one.connections == 1 for one in observed):
        names = ", ".join(one.name for one in observed if one.connections == 1)
        cautions.append(
            f"one connection only of {names}: the scatter of the other standards is taken for it."
        )
    if family.name == "":
        cautions.append(
            f"the connector '{connector}' is not in the table of families: no limit is set by its next mode."
        )
    return cautions
