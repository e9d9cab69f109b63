"""What limits a kit, and what would move the limit: each remedy is put into the numbers and the fit done again."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import Wish
from stdfit.pipeline.adapters.acting import OF_ADAPTERS
from stdfit.pipeline.path import kit_of
from stdfit.pipeline.prepare import Prepared, sources_of
from stdfit.pipeline.raw.remedies import OF_REFERENCES, with_reference_connections
from stdfit.pipeline.settle import choose_all, settle
from stdfit.uncertainty.budget import radius
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, Source, WhiteSource
from stdfit.validity.evidence.sharing import source_parts
from stdfit.validity.kit import Definition, Kit, misfit_at, model

BETTER_DB = 6.0
"""How much better a reference is in the remedy that asks for one."""

RULER_PS = 0.1
"""Standard uncertainty of a length in the remedy that asks for one: 0.03 mm of air line."""

RESISTANCE_OHM = 0.02
"""Standard uncertainty of a DC resistance in the remedy that asks for one."""

SMALLEST_GAIN = 0.05
"""Gains below this part of the present limit are none."""

LONGER = 1.5
"""How much longer a sweep is in the remedy that asks for one."""


@dataclass(frozen=True, slots=True)
class Contribution:
    """What one source does at the kit's limit: its part of the bound, 0 … 1, and the 95 % radius it has alone."""

    name: str
    part: float
    alone: float


@dataclass(frozen=True, slots=True)
class Remedy:
    """Something to do, and the kit's limit that it is predicted to give.

    Attributes
    ----------
    what : str
        In words.
    limit_hz : float
    gain_hz : float
        Against the present limit.
    at_most : bool
        True where the prediction leaves out what only new readings can show.
    """

    what: str
    limit_hz: float
    gain_hz: float
    at_most: bool


@dataclass(frozen=True, slots=True, eq=False)
class Plan:
    """A kit as it stands or is predicted, what makes up its bound at the limit, and the remedies by gain.

    Attributes
    ----------
    kit : Kit
    standard : str
        The standard that holds the kit back.
    at_hz : float
        Where the contributions are taken.
    bound, misfit : float
    contributions : tuple of Contribution
    remedies : tuple of Remedy
    """

    kit: Kit
    standard: str
    at_hz: float
    bound: float
    misfit: float
    contributions: tuple[Contribution, ...]
    remedies: tuple[Remedy, ...]


def plan(prepared: Prepared, tell: Callable[[int, int], None] | None = None) -> Plan:
    """Predict what limits a kit and what would move the limit.

    Parameters
    ----------
    prepared : Prepared
        Measured, or imagined.
    tell : callable, optional
        Is told (done, total), of the orders of the fit as it stands, then of the remedies.
    """
    kit = _kit(prepared, tell)
    held_back = min(kit.definitions, key=lambda one: one.limit.limit_hz)
    at_hz = max(held_back.limit.limit_hz, held_back.read_low_hz)
    _, design = model(kit, held_back, np.array([at_hz]))
    wrong = float(misfit_at(held_back, np.array([at_hz]))[0])
    spread = radius(design, kit.shares)
    bound = float(spread[0]) + wrong
    parts = source_parts(design, kit.shares, spread)[:, 0] / max(bound, 1e-300)
    contributions = [
        Contribution(share.name, float(part), float(radius(design, [share])[0]))
        for share, part in zip(kit.shares, parts, strict=True)
    ]
    ideas = list(_remedies(prepared, kit, held_back))
    remedies = []
    for done, (what, changed, at_most) in enumerate(ideas, start=1):
        limit_hz = _kit(changed).limit.limit_hz
        remedies.append(Remedy(what, limit_hz, limit_hz - kit.limit.limit_hz, at_most))
        if tell:
            tell(done, len(ideas))
    return Plan(
        kit=kit,
        standard=held_back.name,
        at_hz=at_hz,
        bound=bound,
        misfit=wrong,
        contributions=tuple(sorted(contributions, key=lambda one: -one.part)),
        remedies=tuple(sorted(remedies, key=lambda one: -one.gain_hz)),
    )


def _kit(prepared: Prepared, tell: Callable[[int, int], None] | None = None) -> Kit:
    return kit_of(prepared, settle(prepared, choose_all(prepared, tell)), created="planned")


def _remedies(prepared: Prepared, kit: Kit, held_back: Definition) -> Iterator[tuple[str, Prepared, bool]]:
    """Yield each remedy in words, the bench as it would then be, and whether the prediction is at most."""
    referenced = prepared.reference_connections > 0
    for count in more_than(prepared.connections):
        each = "new standard" if referenced else "standard"
        yield f"make {count} connections of each {each}", with_connections(prepared, count), False
    if referenced:
        for count in more_than(prepared.reference_connections):
            better = with_reference_connections(prepared, count)
            yield f"make {count} connections of each reference", better, False
    yield (
        f"take references that are known {BETTER_DB:.0f} dB better"
        if referenced
        else f"correct the analyser with a kit whose residuals are {BETTER_DB:.0f} dB smaller",
        with_better_reference(prepared, 10.0 ** (-BETTER_DB / 20.0)),
        True,
    )
    lengths = [one for one in kit.definitions if one.kind != "load" and one.parameters[0].role == "free"]
    if lengths:
        ruled = prepared
        for one in lengths:
            ruled = with_given(ruled, one.name, "offset_delay_ps", one.parameters[0].value, RULER_PS)
        names = " and ".join(f"'{one.name}'" for one in lengths)
        yield f"measure the offset length of {names} to {RULER_PS:g} ps (0.03 mm in air)", ruled, False
    for one in kit.definitions:
        resistance = next((p for p in one.parameters if p.name == "resistance_ohm"), None)
        if resistance is not None and resistance.role == "free":
            yield (
                f"measure the DC resistance of '{one.name}' to {RESISTANCE_OHM:g} Ω",
                with_given(prepared, one.name, "resistance_ohm", resistance.value, RESISTANCE_OHM),
                False,
            )
    top = max(one.read_top_hz for one in kit.definitions)
    # Further up references and adapters may not be known, and what the analyser does there is not read.
    if (
        not (referenced or prepared.bench.adapters)
        and kit.limit.limit_hz >= 0.999 * min(one.read_top_hz for one in kit.definitions)
        and top < kit.top_hz
    ):
        reach = min(LONGER * top, kit.top_hz)
        yield f"read on up to {reach / 1e9:.3g} GHz", with_longer_sweep(prepared, kit, reach), True
    if held_back.misfit.max() > 0.0 and not prepared.imagined_connections:
        yield (
            f"make '{held_back.name}' so that it follows its model (fewer steps, shorter leads, no resonance)",
            with_model_for(prepared, kit, held_back),
            True,
        )


def more_than(connections: int) -> list[int]:
    """Return the next two numbers of connections that are worth a trial."""
    return [count for count in (3, 5, 10, 20, 40) if count > connections][:2]


def with_sources(prepared: Prepared, change: Callable[[Source], Source]) -> Prepared:
    """Return the bench with each source of error changed."""
    return replace(prepared, sources=tuple(change(source) for source in prepared.sources))


def with_connections(prepared: Prepared, count: int) -> Prepared:
    """Return the bench as it would be with so many connections of each standard that scatter as before."""
    each = [max(one.connections, prepared.imagined_connections) for one in prepared.observed]
    shrink = [np.sqrt(own / count) for own in each]
    contrasts = sum(own - 1 for own in each)
    more = (count - 1) * len(prepared.observed) / contrasts if contrasts else 1.0

    def change(source: Source) -> Source:
        if isinstance(source, WhiteSource):
            return replace(
                source, variances=tuple(v * k**2 for v, k in zip(source.variances, shrink, strict=True))
            )
        if isinstance(source, LumpedSource):
            vectors = tuple(v * k for v, k in zip(source.vectors, shrink, strict=True))
            return replace(source, vectors=vectors, freedom=source.freedom * more)
        if isinstance(source, SmoothSource) and not source.common:
            profiles = tuple(p * k for p, k in zip(source.profiles, shrink, strict=True))
            return replace(source, profiles=profiles, freedom=source.freedom * more)
        return source

    return replace(with_sources(prepared, change), imagined_connections=count)


def with_better_reference(prepared: Prepared, factor: float) -> Prepared:
    """Return the bench with all errors of the reference scaled, in what is stated and in the readings' misfit.

    Those are the analyser's residuals, or of raw readings what the kit of the references says of them.

    The readings keep the residuals that they have; so that those do not pass for misfit, the part of the readings
    that the model does not follow is scaled too.
    """

    def change(source: Source) -> Source:
        if prepared.reference_connections and not source.name.startswith(OF_REFERENCES):
            return source
        if source.name.startswith(OF_ADAPTERS):
            return source
        if isinstance(source, SmoothSource) and source.common:
            return replace(source, profiles=tuple(factor * profile for profile in source.profiles))
        if isinstance(source, SharedSource):
            scaled = tuple(tuple(factor * vector for vector in own) for own in source.vectors)
            return replace(source, vectors=scaled)
        return source

    kit = _kit(prepared)
    observed = tuple(
        _reading(one, _model_of(kit, one) + factor * (one.gamma - _model_of(kit, one)))
        for one in prepared.observed
    )
    return replace(with_sources(prepared, change), observed=observed)


def with_given(prepared: Prepared, standard: str, name: str, value: float, u: float) -> Prepared:
    """Return the bench with one more piece of evidence, which agrees with the present fit."""
    wishes: list[Wish] = []
    for one, wish in zip(prepared.observed, prepared.wishes, strict=True):
        wishes.append(replace(wish, given={**wish.given, name: (value, u)}) if one.name == standard else wish)
    return replace(prepared, wishes=tuple(wishes))


def with_longer_sweep(prepared: Prepared, kit: Kit, top_hz: float) -> Prepared:
    """Return the bench with readings up to a higher frequency, where standards go on as their models do."""
    observed = []
    for one in prepared.observed:
        spacing = float(np.median(np.diff(one.frequency_hz)))
        beyond = np.arange(one.frequency_hz[-1] + spacing, top_hz * (1.0 + 1e-9), spacing)
        grid = np.concatenate([one.frequency_hz, beyond])
        gamma = np.concatenate([one.gamma, model(kit, kit.definition(one.name), beyond)[0]])
        deviations = np.pad(one.deviations, [(0, 0), (0, beyond.size)], mode="edge")
        observed.append(Observed(one.name, one.kind, grid, gamma, deviations))
    leftover = tuple(
        np.pad(own, (0, one.frequency_hz.size - own.size), mode="edge")
        for own, one in zip(prepared.scatter.leftover, observed, strict=True)
    )
    scatter = replace(prepared.scatter, leftover=leftover)
    sources = sources_of(observed, prepared.residual, scatter, prepared.bench.reference_ohm)
    longer = replace(
        prepared, observed=tuple(observed), scatter=scatter, sources=sources, imagined_connections=0
    )
    planned = prepared.imagined_connections
    return with_connections(longer, planned) if planned else longer


def with_model_for(prepared: Prepared, kit: Kit, definition: Definition) -> Prepared:
    """Return the bench as it would be if one standard followed its model."""
    observed = tuple(
        _reading(one, _model_of(kit, one)) if one.name == definition.name else one
        for one in prepared.observed
    )
    return replace(prepared, observed=observed)


def _model_of(kit: Kit, one: Observed) -> ComplexArray:
    return model(kit, kit.definition(one.name), one.frequency_hz)[0]


def _reading(one: Observed, gamma: ComplexArray) -> Observed:
    return Observed(one.name, one.kind, one.frequency_hz, gamma, one.deviations)


def ranked(remedies: Sequence[Remedy]) -> tuple[list[Remedy], list[Remedy]]:
    """Return the remedies that help, best first, and those that move the limit by less than `SMALLEST_GAIN`."""
    helping = [one for one in remedies if one.gain_hz > SMALLEST_GAIN * (one.limit_hz - one.gain_hz)]
    return helping, [one for one in remedies if one not in helping]
