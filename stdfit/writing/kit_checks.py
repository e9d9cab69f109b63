"""Does a kit that was read make sense? Whatever passes can be shown, drawn and compared without a fault."""

import re
from collections.abc import Iterator
from pathlib import Path

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import KitError, RequestError
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Definition, Kit, curve
from stdfit.validity.limits import limits
from stdfit.validity.thru import line_faults
from stdfit.writing.analyser_text import analyser_faults
from stdfit.writing.session_file import session_faults

MEND = "take the file as stdfit wrote it"

FURTHER = 1.1
"""A limit further than the rest of the file makes it by more than this was not written by the program; versions of it
may differ a little in where they look."""

ROLES = ("free", "given", "assumed", "held", "unused", "at its bound")

_SHA256 = re.compile(r"[0-9a-f]{64}")

ABOVE = 1.0 + 1e-12
"""Limits may exceed the last reading by rounding."""

NEGATIVE = 1e-6
"""Eigenvalues of correlations may be negative by rounding."""

CURVE_POINTS = 65
"""Points at which Γ and its bound must be finite, besides those of the misfit."""

Faults = Iterator[tuple[str, str]]
"""(key, what is wrong), the first fault first."""


def refuse_control_characters(values: object, path: Path | str, key: str = "") -> None:
    """Refuse texts with characters that cannot be printed: they would act on the terminal that shows the kit.

    Raises
    ------
    KitError
    """
    if isinstance(values, dict):
        for name, value in values.items():
            refuse_control_characters(value, path, f"{key}.{name}" if key else name)
    elif isinstance(values, list):
        for k, value in enumerate(values):
            refuse_control_characters(value, path, f"{key}[{k}]")
    elif isinstance(values, str) and not values.isprintable():
        raise KitError("the text holds a control character", MEND, file=path, key=key)


def checked(kit: Kit, path: Path | str) -> Kit:
    """Return the kit when it can be.

    Raises
    ------
    KitError
        With the key of what cannot be.
    """
    for faults in (
        _whole(kit),
        _covariances(kit),
        _definitions(kit),
        _limits(kit),
        _curves(kit),
        _ancestors(kit),
        _thru(kit),
        session_faults(kit),
        analyser_faults(kit.analyser),
        _limits_again(kit),
    ):
        for key, what in faults:
            raise KitError(what, MEND, file=path, key=key)
    return kit


def _whole(kit: Kit) -> Faults:
    names = [definition.name for definition in kit.definitions]
    if not names:
        yield "standard", "the kit holds no standard"
    if len(set(names)) != len(names):
        yield "standard", "two standards have the same name"
    if len(set(kit.order)) != len(kit.order):
        yield "covariance.order", "a quantity is named twice"
    if kit.order and not kit.shares:
        yield "source", "the kit holds no source of uncertainty"
    if not np.isfinite(kit.reference_ohm):
        yield "kit.reference_impedance_ohm", "not a finite number"


def _definitions(kit: Kit) -> Faults:
    for s, definition in enumerate(kit.definitions):
        key = f"standard[{s}]"
        if definition.kind not in PARAMETERS:
            yield f"{key}.kind", "no kind of standard; there are open, short and load"
        wanted = [parameter.name for parameter in PARAMETERS[definition.kind]]
        if [parameter.name for parameter in definition.parameters] != wanted:
            yield f"{key}.parameter", f"the parameters of this kind are {', '.join(wanted)}, in this order"
        for p, (own, known) in enumerate(
            zip(definition.parameters, PARAMETERS[definition.kind], strict=True)
        ):
            if own.unit != known.unit:
                yield f"{key}.parameter[{p}].unit", f"{own.name} is in {known.unit}"
        yield from _parameters(definition, kit.order, key)
        for c, one in enumerate(definition.combinations):
            if not np.isfinite([one.value, one.u, one.low, one.high]).all():
                yield f"{key}.combination[{c}]", "a value is not a finite number"
            if not one.low <= one.value <= one.high:
                yield f"{key}.combination[{c}]", "the value lies outside its own 95 % interval"
        if not 0.0 < definition.read_low_hz < definition.read_top_hz < np.inf:
            yield f"{key}.read_to_hz", "the band of the readings is empty or not finite"
        if (
            not definition.read_low_hz
            <= definition.fit_low_hz
            < definition.fit_top_hz
            <= definition.read_top_hz
        ):
            yield f"{key}.fit_to_hz", "the fit range does not lie within the readings"
        if not definition.limit.limit_hz <= definition.read_top_hz * ABOVE:
            yield f"{key}.limit_hz", "the limit lies above the last reading"
        if not np.isfinite([limit_hz for _, limit_hz in definition.tried]).all():
            yield f"{key}.orders_limit_hz", "a limit is not a finite number"
        grid, misfit = definition.misfit_hz, definition.misfit
        if grid.size < 1 or grid.size != misfit.size or not np.isfinite([*grid, *misfit]).all():
            yield f"{key}.misfit", "frequency_hz and bound must be equally long and finite"
        if (np.diff(grid) <= 0.0).any():
            yield f"{key}.misfit.frequency_hz", "the frequencies do not rise"


def _parameters(definition: Definition, order: tuple[str, ...], key: str) -> Faults:
    for p, parameter in enumerate(definition.parameters):
        own = f"{key}.parameter[{p}]"
        if not np.isfinite([parameter.value, parameter.u, parameter.low, parameter.high]).all():
            yield own, f"a value of {parameter.name} is not a finite number"
        if not parameter.low <= parameter.value <= parameter.high:
            yield own, f"{parameter.name} lies outside its own 95 % interval"
        if parameter.given is not None and not np.isfinite(parameter.given).all():
            yield f"{own}.given_value", "not a finite number"
        if parameter.role not in ROLES:
            yield f"{own}.role", f"no role; there are {', '.join(ROLES)}"
        if parameter.of and parameter.of not in order:
            yield f"{own}.covariance_name", "not named in covariance.order"


def _covariances(kit: Kit) -> Faults:
    for k, share in enumerate(kit.shares):
        key = f"source[{k}].lower_triangles"
        if share.covariances.shape[0] not in (1, _lengths(kit.shares)):
            yield key, "sources have one lower triangle, or all the same number of them"
        if not np.isfinite(share.covariances).all():
            yield key, "a covariance is not a finite number"
        if not all(_positive(matrix) for matrix in share.covariances):
            yield key, "a covariance is not positive"


def _lengths(shares: tuple[Share, ...]) -> int:
    return max(int(share.covariances.shape[0]) for share in shares)


def _positive(matrix: FloatArray) -> bool:
    """Return whether a symmetric matrix can be a covariance."""
    variance = np.diag(matrix)
    if (variance < 0.0).any():
        return False
    sd = np.sqrt(variance)
    sd = np.where(sd > 0.0, sd, 1.0)
    with np.errstate(all="ignore"):
        correlation = matrix / sd[:, None] / sd
    if not (np.abs(correlation) <= 1.0 + NEGATIVE).all():
        return False
    return matrix.size == 0 or bool(np.linalg.eigvalsh(correlation).min() >= -NEGATIVE)


def _limits(kit: Kit) -> Faults:
    if any(kit.limit.limit_hz > definition.read_top_hz * ABOVE for definition in kit.definitions):
        yield "kit.limit_hz", "the limit lies above the last reading of a standard"
    for k, rung in enumerate(kit.ladder):
        if len(rung.standards_hz) != len(kit.definitions):
            yield f"ladder[{k}].standard_limits_hz", "one limit for each standard is needed"
        if not np.isfinite([rung.within, rung.kit_hz, *rung.standards_hz]).all():
            yield f"ladder[{k}]", "a value is not a finite number"


def _limits_again(kit: Kit) -> Faults:
    """No limit may lie further than bounds and misfits make it: somebody would trust the kit there."""
    ((whole, each),) = limits(kit, [kit.within])
    for s, (definition, again) in enumerate(zip(kit.definitions, each, strict=True)):
        if definition.limit.limit_hz > FURTHER * again.limit_hz:
            yield f"standard[{s}].limit_hz", f"the bound allows no limit above {again.limit_hz:.4g} Hz"
    if kit.limit.limit_hz > FURTHER * whole.limit_hz:
        yield "kit.limit_hz", f"the bounds allow no limit above {whole.limit_hz:.4g} Hz"


def _ancestors(kit: Kit) -> Faults:
    """Every ancestor but the kit's own references was a reference of one that stands before it: so no rings."""
    before: set[str] = set()
    for k, one in enumerate(kit.ancestors):
        if not _SHA256.fullmatch(one.sha256):
            yield f"ancestor[{k}].sha256", "no SHA-256: 64 digits 0 … 9, a … f are needed"
        if one.of and one.of not in before:
            yield f"ancestor[{k}].of", "not the SHA-256 of an ancestor that stands before it"
        before.add(one.sha256)


def _thru(kit: Kit) -> Faults:
    if kit.thru is None:
        return
    if not _SHA256.fullmatch(kit.thru.sha256):
        yield "thru.sha256", "no SHA-256: 64 digits 0 … 9, a … f are needed"
    for name, what in line_faults(kit.thru.line):
        yield f"thru.{name}", what


def _curves(kit: Kit) -> Faults:
    for s, definition in enumerate(kit.definitions):
        low, top = definition.read_low_hz, definition.read_top_hz
        grid = np.concatenate([np.linspace(low, top, CURVE_POINTS), definition.misfit_hz])
        grid = grid[(grid > 0.0) & (grid <= top)]
        try:
            with np.errstate(all="raise", under="ignore"):
                reflection(definition.kind, definition.values, grid, kit.reference_ohm)
                gamma, bound = curve(kit, definition, grid)
            sound = bool((np.isfinite(gamma) & np.isfinite(bound)).all())
        except (FloatingPointError, RequestError):
            sound = False
        if not sound:
            yield f"standard[{s}].parameter", "the values give no finite reflection and bound"
