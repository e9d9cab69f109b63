"""Kit files read back: decoded strictly, then checked for sense."""

import stat
import tomllib
from pathlib import Path
from typing import Annotated, Any

import msgspec
import numpy as np

from stdfit.base.errors import KitError
from stdfit.circuits.standard import PARAMETERS
from stdfit.data.words import suggestion
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Combination, Definition, Fitted, Kit, Rung, SourceFile
from stdfit.validity.limit import Limit
from stdfit.writing.kit_file import FORMAT, rows_of, triangle_size

LARGEST_BYTES = 32 * 2**20

Size = Annotated[float, msgspec.Meta(ge=0.0)]
Count = Annotated[int, msgspec.Meta(ge=1)]


class _Strict(msgspec.Struct, forbid_unknown_fields=True):
    """A table in which unknown keys are faults."""


class _Head(_Strict):
    name: str
    connector: str
    reference_impedance_ohm: Annotated[float, msgspec.Meta(gt=0.0)]
    created: str
    program_version: str
    within: Annotated[float, msgspec.Meta(gt=0.0, lt=1.0)]
    limit_hz: Size
    limit_reason: str
    connector_top_hz: Size
    warnings: list[str]


class _Parameter(_Strict):
    name: str
    value: float
    unit: str
    u: Size
    low_95: float
    high_95: float
    role: str
    covariance_name: str


class _Combination(_Strict):
    label: str
    value: float
    unit: str
    u: Size
    low_95: float
    high_95: float
    correlation_of_parts: Annotated[float, msgspec.Meta(ge=-1.0001, le=1.0001)]


class _Misfit(_Strict):
    frequency_hz: list[float]
    bound: list[Size]


class _Standard(_Strict):
    name: str
    kind: str
    order: str
    connections: Count
    read_from_hz: Size
    read_to_hz: Size
    fit_from_hz: Size
    fit_to_hz: Size
    limit_hz: Size
    limit_reason: str
    notes: list[str]
    parameter: list[_Parameter]
    misfit: _Misfit
    combination: list[_Combination] = []


class _Rung(_Strict):
    within: Size
    kit_limit_hz: Size
    standard_limits_hz: list[Size]


class _Covariance(_Strict):
    order: list[str]


class _Source(_Strict):
    name: str
    degrees_of_freedom: Annotated[float, msgspec.Meta(gt=0.0)]
    lower_triangles: list[list[float]]


class _File(_Strict):
    standard: str
    name: str
    sha256: str


class _Whole(_Strict):
    format: str
    kit: _Head
    standard: list[_Standard]
    covariance: _Covariance
    ladder: list[_Rung] = []
    source: list[_Source] = []
    file: list[_File] = []


_FIELDS: dict[str, type[_Strict]] = {
    "kit": _Head,
    "standard": _Standard,
    "parameter": _Parameter,
    "combination": _Combination,
    "misfit": _Misfit,
    "ladder": _Rung,
    "covariance": _Covariance,
    "source": _Source,
    "file": _File,
}
"""The tables by the last part of their key."""


def read_kit(path: Path | str) -> Kit:
    """Return the kit of a kit file.

    Raises
    ------
    KitError
        The file cannot be read, is no kit file, or says something that cannot be.
    """
    path = Path(path)
    try:
        status = path.stat()
        if not stat.S_ISREG(status.st_mode):
            raise KitError("not an ordinary file", "name a kit file", file=path)
        if status.st_size > LARGEST_BYTES:
            raise KitError("larger than 32 MB", "name a kit file", file=path)
        text = path.read_bytes().decode("utf-8-sig")
    except FileNotFoundError as fault:
        raise KitError("no such kit file", "write one with 'stdfit fit BENCH -o KIT'", file=path) from fault
    except UnicodeDecodeError as fault:
        raise KitError("not UTF-8 text", "name a kit file", file=path) from fault
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or "not a possible file name"
        raise KitError(f"cannot be read: {why}", "check the path", file=repr(str(path))[1:-1]) from fault
    return parse_kit(text, path)


def parse_kit(text: str, path: Path | str) -> Kit:
    """Return the kit that a TOML text describes.

    Raises
    ------
    KitError
        With the key at which it fails.
    """
    try:
        values = tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as fault:
        raise KitError(f"not TOML: {fault}", "take the file as stdfit wrote it", file=path) from fault
    if values.get("format") != FORMAT:
        raise KitError(
            f"not a kit file of this version (format = {FORMAT!r})",
            "name a kit file",
            file=path,
            key="format",
        )
    try:
        whole = msgspec.convert(values, _Whole)
    except msgspec.ValidationError as fault:
        raise _fault(str(fault), values, path) from fault
    return _checked(_kit(whole, path), path)


def _fault(message: str, values: dict[str, Any], path: Path | str) -> KitError:
    """Turn a decoder's message into one with key and nearest valid key."""
    what, _, where = message.partition(" - at `$")
    key = where.rstrip("`").lstrip(".") or None
    if "unknown field" in what:
        unknown = what.split("`")[1]
        known = _FIELDS.get((key or "").replace("[...]", "").split(".")[-1], _Whole)
        return KitError(
            f"unknown key '{unknown}'{suggestion(unknown, known.__struct_fields__)}",
            "remove it, or take the file as stdfit wrote it",
            file=path,
            key=key,
        )
    return KitError(what[:1].lower() + what[1:], "take the file as stdfit wrote it", file=path, key=key)


def _kit(whole: _Whole, path: Path | str) -> Kit:
    count = len(whole.covariance.order)
    shares = []
    for k, source in enumerate(whole.source):
        key = f"source[{k}].lower_triangles"
        if not source.lower_triangles or any(
            len(one) != triangle_size(count) for one in source.lower_triangles
        ):
            raise KitError(
                f"a lower triangle of {count} quantities has {triangle_size(count)} numbers",
                "take the file as stdfit wrote it",
                file=path,
                key=key,
            )
        matrices = np.array([rows_of(one, count) for one in source.lower_triangles])
        shares.append(Share(source.name, source.degrees_of_freedom, matrices))
    head = whole.kit
    return Kit(
        name=head.name,
        connector=head.connector,
        reference_ohm=head.reference_impedance_ohm,
        within=head.within,
        top_hz=head.connector_top_hz,
        created=head.created,
        version=head.program_version,
        limit=Limit(head.within, head.limit_hz, head.limit_reason),
        definitions=tuple(_definition(one, head.within) for one in whole.standard),
        order=tuple(whole.covariance.order),
        shares=tuple(shares),
        ladder=tuple(
            Rung(one.within, one.kit_limit_hz, tuple(one.standard_limits_hz)) for one in whole.ladder
        ),
        files=tuple(SourceFile(one.standard, one.name, one.sha256) for one in whole.file),
        warnings=tuple(head.warnings),
    )


def _definition(one: _Standard, within: float) -> Definition:
    return Definition(
        name=one.name,
        kind=one.kind,
        shape=one.order,
        connections=one.connections,
        read_low_hz=one.read_from_hz,
        read_top_hz=one.read_to_hz,
        fit_low_hz=one.fit_from_hz,
        fit_top_hz=one.fit_to_hz,
        parameters=tuple(
            Fitted(p.name, p.unit, p.value, p.u, p.low_95, p.high_95, p.role, p.covariance_name)
            for p in one.parameter
        ),
        combinations=tuple(
            Combination(c.label, c.unit, c.value, c.u, c.low_95, c.high_95, c.correlation_of_parts)
            for c in one.combination
        ),
        misfit_hz=np.array(one.misfit.frequency_hz),
        misfit=np.array(one.misfit.bound),
        limit=Limit(within, one.limit_hz, one.limit_reason),
        notes=tuple(one.notes),
    )


def _checked(kit: Kit, path: Path | str) -> Kit:
    """Refuse what cannot be, naming the key."""

    def refuse(key: str, what: str) -> KitError:
        return KitError(what, "take the file as stdfit wrote it", file=path, key=key)

    if not kit.definitions:
        raise refuse("standard", "the kit holds no standard")
    names = [definition.name for definition in kit.definitions]
    if len(set(names)) != len(names):
        raise refuse("standard", "two standards have the same name")
    if len(set(kit.order)) != len(kit.order):
        raise refuse("covariance.order", "a quantity is named twice")
    for s, definition in enumerate(kit.definitions):
        key = f"standard[{s}]"
        if definition.kind not in PARAMETERS:
            raise refuse(
                f"{key}.kind", f"'{definition.kind}' is no kind of standard; there are open, short and load"
            )
        wanted = [parameter.name for parameter in PARAMETERS[definition.kind]]
        if [parameter.name for parameter in definition.parameters] != wanted:
            raise refuse(f"{key}.parameter", f"the parameters of a {definition.kind} are {', '.join(wanted)}")
        for p, parameter in enumerate(definition.parameters):
            own = f"{key}.parameter[{p}]"
            if not np.isfinite([parameter.value, parameter.u, parameter.low, parameter.high]).all():
                raise refuse(own, f"a value of {parameter.name} is not a finite number")
            if not parameter.low <= parameter.value <= parameter.high:
                raise refuse(own, f"{parameter.name} lies outside its own 95 % interval")
            if parameter.of and parameter.of not in kit.order:
                raise refuse(f"{own}.covariance_name", f"'{parameter.of}' is not in covariance.order")
        if not 0.0 < definition.read_low_hz < definition.read_top_hz < np.inf:
            raise refuse(f"{key}.read_to_hz", "the band of the readings is empty or not finite")
        if not definition.fit_low_hz < definition.fit_top_hz <= definition.read_top_hz:
            raise refuse(f"{key}.fit_to_hz", "the fit range does not lie within the readings")
        if not definition.limit.limit_hz <= definition.read_top_hz * (1.0 + 1e-12):
            raise refuse(f"{key}.limit_hz", "the limit lies above the last reading")
        grid = definition.misfit_hz
        if (
            grid.size < 1
            or grid.size != definition.misfit.size
            or not np.isfinite([*grid, *definition.misfit]).all()
        ):
            raise refuse(f"{key}.misfit", "frequency_hz and bound must be equally long and finite")
        if (np.diff(grid) <= 0.0).any():
            raise refuse(f"{key}.misfit.frequency_hz", "frequencies must rise")
    for k, share in enumerate(kit.shares):
        own = f"source[{k}].lower_triangles"
        if not np.isfinite(share.covariances).all():
            raise refuse(own, "a covariance is not finite")
        for matrix in share.covariances:
            size = np.sqrt(np.abs(np.diag(matrix)))
            size[size == 0.0] = 1.0
            if matrix.size and np.linalg.eigvalsh(matrix / np.outer(size, size)).min() < -1e-6:
                raise refuse(own, "a covariance is not positive")
    if kit.limit.limit_hz > min(definition.read_top_hz for definition in kit.definitions) * (1.0 + 1e-12):
        raise refuse("kit.limit_hz", "the limit lies above the last reading of a standard")
    return kit
