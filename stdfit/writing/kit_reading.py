"""Kit files read back: decoded strictly, then handed to `kit_checks`."""

from pathlib import Path
from typing import Annotated

import msgspec
import numpy as np

from stdfit.base.errors import KitError
from stdfit.data.mistaken import refuse_mistaken
from stdfit.data.whole_text import whole_text
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Ancestor, Combination, Definition, Fitted, Kit, Rung, SourceFile
from stdfit.validity.limit import Limit
from stdfit.validity.thru import LINE_TERMS, LineTerm, Thru
from stdfit.writing.analyser_text import AnalyserTable, analyser_from
from stdfit.writing.decoding import decoder_fault, toml_of
from stdfit.writing.kit_checks import checked, refuse_control_characters
from stdfit.writing.kit_file import FORMAT, kit_file_of, rows_of, triangle_size
from stdfit.writing.session_file import MeanTable, SessionTable, session_from
from stdfit.writing.sheet_reading import looks_like_a_sheet, parse_sheet

LARGEST_BYTES = 16 * 2**20

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
    checks: list[str] = []
    measured: str = ""
    calibration: str = ""


class _Parameter(_Strict):
    name: str
    value: float
    unit: str
    u: Size
    low_95: float
    high_95: float
    role: str
    covariance_name: str
    given_value: float | None = None
    given_u: Annotated[float, msgspec.Meta(gt=0.0)] | None = None


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
    orders_tried: list[str] = []
    orders_limit_hz: list[Size] = []
    combination: list[_Combination] = []
    matings: Annotated[int, msgspec.Meta(ge=0, le=10**9)] | None = None


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


class _Ancestor(_Strict):
    name: str
    created: str
    sha256: str
    of: str


class _Term(_Strict):
    value: float
    u: Size
    low_95: float
    high_95: float


class _Thru(_Strict):
    name: str
    sha256: str
    delay_ps: _Term
    loss_gohm_per_s: _Term
    z0_ohm: _Term


class _Whole(_Strict):
    format: str
    kit: _Head
    standard: list[_Standard]
    covariance: _Covariance
    ladder: list[_Rung] = []
    source: list[_Source] = []
    file: list[_File] = []
    ancestor: list[_Ancestor] = []
    thru: _Thru | None = None
    session: SessionTable | None = None
    analyser: AnalyserTable | None = None


_FIELDS: dict[str, type[msgspec.Struct]] = {
    "kit": _Head,
    "standard": _Standard,
    "parameter": _Parameter,
    "combination": _Combination,
    "misfit": _Misfit,
    "ladder": _Rung,
    "covariance": _Covariance,
    "source": _Source,
    "file": _File,
    "ancestor": _Ancestor,
    "thru": _Thru,
    "session": SessionTable,
    "analyser": AnalyserTable,
    "mean": MeanTable,
    **dict.fromkeys((name for name, _ in LINE_TERMS), _Term),
}
"""The tables by the last part of their key."""


def read_kit(path: Path | str) -> Kit:
    """Return the kit of a kit file or of the kit.toml in a folder, or the kit as typed from an entry sheet's JSON.

    Raises
    ------
    KitError
        The file cannot be read, is no kit file, or says something that cannot be.
    """
    path = kit_file_of(path)
    text = whole_text(path, "kit file", LARGEST_BYTES, KitError, "write one with 'stdfit fit BENCH -o KIT'")
    return parse_sheet(text, path) if looks_like_a_sheet(text) else parse_kit(text, path)


def parse_kit(text: str, path: Path | str) -> Kit:
    """Return the kit that a TOML text describes.

    Raises
    ------
    KitError
        With the key at which it fails.
    """
    refuse_mistaken(text, path, "kit file", KitError)
    values = toml_of(text, path)
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
        raise decoder_fault(str(fault), path, _FIELDS, _Whole) from fault
    refuse_control_characters(values, path)
    return checked(_kit(whole, path), path)


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
        shape = (len(source.lower_triangles), count, count)
        matrices = np.array([rows_of(one, count) for one in source.lower_triangles]).reshape(shape)
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
        definitions=tuple(_definition(one, head.within, path) for one in whole.standard),
        order=tuple(whole.covariance.order),
        shares=tuple(shares),
        ladder=tuple(
            Rung(one.within, one.kit_limit_hz, tuple(one.standard_limits_hz)) for one in whole.ladder
        ),
        files=tuple(SourceFile(one.standard, one.name, one.sha256) for one in whole.file),
        warnings=tuple(head.warnings),
        checks=tuple(head.checks),
        ancestors=tuple(Ancestor(one.name, one.created, one.sha256, one.of) for one in whole.ancestor),
        thru=None if whole.thru is None else _thru(whole.thru),
        measured=head.measured,
        calibration=head.calibration,
        session=None if whole.session is None else session_from(whole.session),
        analyser=None if whole.analyser is None else analyser_from(whole.analyser),
    )


def _thru(one: _Thru) -> Thru:
    delay, loss, z0 = (
        LineTerm(term.value, term.u, term.low_95, term.high_95)
        for term in (one.delay_ps, one.loss_gohm_per_s, one.z0_ohm)
    )
    return Thru(one.name, (delay, loss, z0), one.sha256)


def _definition(one: _Standard, within: float, path: Path | str) -> Definition:
    if len(one.orders_tried) != len(one.orders_limit_hz):
        raise KitError(
            "orders_tried and orders_limit_hz must be equally long",
            "take the file as stdfit wrote it",
            file=path,
            key=f"standard '{one.name}'.orders_tried",
        )
    for place, own in enumerate(one.parameter):
        if (own.given_value is None) != (own.given_u is None):
            raise KitError(
                "given_value and given_u stand together or not at all",
                "take the file as stdfit wrote it",
                file=path,
                key=f"standard '{one.name}'.parameter[{place}].given_value",
            )
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
            Fitted(
                *(p.name, p.unit, p.value, p.u, p.low_95, p.high_95, p.role, p.covariance_name),
                given=None if p.given_value is None or p.given_u is None else (p.given_value, p.given_u),
            )
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
        tried=tuple(zip(one.orders_tried, one.orders_limit_hz, strict=True)),
        matings=one.matings,
    )
