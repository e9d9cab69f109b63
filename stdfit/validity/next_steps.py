"""What would push a kit's limit further: an estimate from the kit alone, without a new fit."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import kind_of, parts_of_variance
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.kit import Definition, Kit, misfit_at, model
from stdfit.validity.limits import limits

END_OF_READINGS = "end of readings"
NEXT_MODE = "next mode"

SMALLEST_GAIN = 0.02
"""Gains below this part of the present limit are none."""

MOST = 5
"""So many steps are told."""

MATTERS = 0.03
"""A kind of source below this part of the variance, or of the tolerance, moves nothing when it is halved."""

TOGETHER = 3
"""So many kinds of source are halved together where none moves the limit alone."""

LONGER = 1.5
"""How much longer the sweep is in the step that asks for one."""

ACTIONS: Mapping[str, str] = {
    MISFIT: "build {names} so that the model is followed twice as closely: fewer steps, shorter leads or adapters, no "
    "resonance",
    "analyser residuals": "correct the analyser with a kit whose residuals are half as large (6 dB), or have those "
    "that are stated confirmed at half their size",
    "connections": "make four times as many connections of {names}",
    "noise": "average each reading four times as long",
    "reference kit": "take references that are known twice as well",
    "reference misfit": "take references that follow their models twice as closely",
    "reference connections": "make four times as many connections of each reference",
    "reference noise": "average each reading of the references four times as long",
    "drift": "take half the time from the first set of references to the last",
    "adapter": "determine the adapter twice as well, or take a shorter one or none",
    "model errors": "take parts that follow their models twice as closely (fewer steps, shorter leads), or more parts",
}
"""What halves a kind of source, or the misfit, at the standards that are named."""

EVIDENCE: Mapping[str, tuple[str, str]] = {
    "given values": ("given", "measure again, twice as well, what was given"),
    "assumed values": ("assumed", "find out what is only assumed, to half of its uncertainty"),
}
"""The role of the values in question, and what to do about them."""


@dataclass(frozen=True, slots=True)
class Step:
    """Something to do at the bench, and the kit's limit that it is estimated to give.

    Attributes
    ----------
    kind : str
        The kind of source that is halved, as reasons of limits name it, or "misfit", "end of readings", "next mode";
        several are joined by " and ".
    action : str
        What to do, in one sentence.
    limit_hz : float
        Estimated limit of the kit at its tolerance.
    """

    kind: str
    action: str
    limit_hz: float


def next_steps(kit: Kit) -> tuple[Step, ...]:
    """Return what would push the limit of a kit furthest, best first, at most five steps.

    Each kind of source that matters where the kit ends is halved: its covariances are taken at ¼, the misfit at ½.
    The fit, its range and its orders stay as they are, and new readings may show what the old ones could not: this is
    an estimate, mostly low, for which `stdfit plan` does the fit again. Where no kind moves the limit alone, as two
    standards end alike for different reasons, those that must be halved together are told as one step.

    Parameters
    ----------
    kit : Kit

    Returns
    -------
    tuple of Step
        Empty where the kit carries no sources of error, as one that was read back from a sheet, or where nothing
        helps. A limit at the end of the readings or at the connector's top has one step, which says so.
    """
    if not kit.shares:
        return ()
    ending = _ending(kit)
    if kit.top_hz < ending.read_low_hz or ending.limit.limit_hz >= _end_of(kit, ending):
        return (_at_the_end(kit),)
    steps = []
    for kind in _kinds_at(kit, ending, ending.limit.limit_hz):
        reached = min(_limits(kit, [kind]))
        if _gains(kit, reached):
            steps.append(Step(kind, _action(kind, _behind(kit, reached)), reached))
    if not steps:
        return _together(kit)
    return tuple(sorted(steps, key=lambda one: -one.limit_hz)[:MOST])


def _ending(kit: Kit) -> Definition:
    """Return the standard with which the kit ends; in a file changed by hand the kit's own limit may be another."""
    return min(kit.definitions, key=lambda one: one.limit.limit_hz)


def can_be_planned(kit: Kit) -> bool:
    """Tell whether `stdfit plan` takes the bench of a kit: not where raw readings had no references."""
    return not any(kind_of(share.name) == "model errors" for share in kit.shares)


def _end_of(kit: Kit, definition: Definition) -> float:
    """Return where a standard ends at the latest: at its last reading, or at the connector's top."""
    return min(definition.read_top_hz, kit.top_hz)


def _gains(kit: Kit, reached: float) -> bool:
    """Return whether a limit is enough above the present one."""
    now = _ending(kit).limit.limit_hz
    return reached > now and reached >= (1.0 + SMALLEST_GAIN) * now


def _limits(kit: Kit, kinds: Sequence[str]) -> list[float]:
    """Return the limits of the standards with some kinds of source halved."""
    # What has come to its end already cannot move, and need not be worked out again.
    moving = [one for one in kit.definitions if one.limit.limit_hz < _end_of(kit, one)]
    changed = _halved(replace(kit, definitions=tuple(moving)), kinds)
    ((_, each),) = limits(changed, [kit.within])
    reached = dict(zip((one.name for one in moving), each, strict=True))
    return [reached.get(one.name, one.limit).limit_hz for one in kit.definitions]


def _kinds_at(kit: Kit, definition: Definition, at_hz: float) -> list[str]:
    """Return the kinds that matter to one standard where it ends, largest first, the misfit last."""
    at = np.array([max(at_hz, definition.read_low_hz)])
    _, design = model(kit, definition, at)
    parts: dict[str, float] = {}
    for share, part in zip(kit.shares, parts_of_variance(design, kit.shares)[:, 0], strict=True):
        parts[kind_of(share.name)] = parts.get(kind_of(share.name), 0.0) + float(part)
    found = sorted((kind for kind in parts if parts[kind] >= MATTERS), key=lambda kind: -parts[kind])
    # A step of the misfit lies just above the limit.
    beyond = np.array([at[0], min(at[0] * (1.0 + SMALLEST_GAIN), definition.read_top_hz)])
    wrong = misfit_at(definition, beyond).max() >= MATTERS * kit.within
    return [*found, MISFIT] if wrong else found


def _halved(kit: Kit, kinds: Sequence[str]) -> Kit:
    """Return the kit with the errors of these kinds half as large, everything else as it is."""
    shares = tuple(
        replace(share, covariances=0.25 * share.covariances) if kind_of(share.name) in kinds else share
        for share in kit.shares
    )
    definitions = kit.definitions
    if MISFIT in kinds:
        definitions = tuple(replace(one, misfit=0.5 * one.misfit) for one in definitions)
    return replace(kit, shares=shares, definitions=definitions)


def _behind(kit: Kit, reached: float) -> list[Definition]:
    """Return the standards that hold the kit back from a limit, all of which have to move."""
    return [one for one in kit.definitions if one.limit.limit_hz < reached]


def _together(kit: Kit) -> tuple[Step, ...]:
    """Return the one step that halves several kinds, each the largest of the standard that then ends first."""
    kinds: list[str] = []
    each = [one.limit.limit_hz for one in kit.definitions]
    while len(kinds) < TOGETHER:
        lowest = min(range(len(each)), key=lambda place: each[place])
        changed = _halved(kit, kinds)
        found = _kinds_at(changed, changed.definitions[lowest], each[lowest])
        left = [one for one in found if one not in kinds]
        if not left:
            return ()
        kinds.append(left[0])
        each = _limits(kit, kinds)
        if _gains(kit, min(each)):
            todo = "; ".join(_action(kind, _behind(kit, min(each))) for kind in kinds)
            said = f"only all of this together moves the limit: {todo}"
            return (Step(" and ".join(kinds), said, min(each)),)
    return ()


def _at_the_end(kit: Kit) -> Step:
    """Return the step of a kit whose bound keeps within the tolerance as far as anything is known."""
    limit_hz = _ending(kit).limit.limit_hz
    if limit_hz >= kit.top_hz or limit_hz <= 0.0:
        return Step(
            NEXT_MODE,
            "the limit is the top of the connector: only standards of a smaller connector go further",
            limit_hz,
        )
    reach = min(LONGER * limit_hz, kit.top_hz)
    longer = tuple(replace(one, read_top_hz=max(one.read_top_hz, reach)) for one in kit.definitions)
    ((whole, _),) = limits(replace(kit, definitions=longer), [kit.within])
    ending = _quoted([one for one in kit.definitions if one.read_top_hz <= limit_hz])
    return Step(
        END_OF_READINGS,
        f"the limit is where the readings of {ending} end: read on up to {reach / 1e9:.3g} GHz; the estimate takes "
        "the models to go on as they are, and to be no surer for what is read there",
        max(whole.limit_hz, limit_hz),
    )


def _action(kind: str, behind: Sequence[Definition]) -> str:
    """Say what halves a kind of source at the standards that hold the kit back."""
    names = _quoted(behind)
    if kind in EVIDENCE:
        role, todo = EVIDENCE[kind]
        values = _values_of(behind, role)
        return f"{todo}: {values}" if values else todo
    if kind in ACTIONS:
        return ACTIONS[kind].format(names=names)
    return f"halve what '{kind}' puts into the bound of {names}"


def _values_of(behind: Sequence[Definition], role: str) -> str:
    """Name the evidence of that role at some standards, and what tells it."""
    named, tools = [], []
    for one in behind:
        names = [parameter.name for parameter in one.parameters if parameter.role == role]
        labels = [parameter.label for parameter in PARAMETERS[one.kind] if parameter.name in names]
        if labels:
            named.append(f"{', '.join(labels)} of '{one.name}'")
        tools += [_tool(one.kind, name) for name in names]
    told = " and ".join(dict.fromkeys(tools))
    return f"{'; '.join(named)} ({told})" if named else ""


def _tool(kind: str, name: str) -> str:
    """Return what tells a parameter besides readings (common practice, no source)."""
    if name == "resistance_ohm":
        return "a multimeter"
    if name == "offset_loss_gohm_per_s":
        return "the loss of a longer line of that make"
    if kind == "load":
        return "the size of the resistor"
    return "a caliper or a drawing"


def _quoted(definitions: Sequence[Definition]) -> str:
    """Return the names of some standards in a sentence."""
    *most, last = [f"'{one.name}'" for one in definitions]
    return f"{', '.join(most)} and {last}" if most else last
