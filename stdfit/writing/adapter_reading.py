"""Adapter files read back, strictly: what passes can be used without a fault."""

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Annotated

import msgspec
import numpy as np

from stdfit.base.errors import KitError
from stdfit.data.whole_text import whole_text
from stdfit.validity.adapter import S_NAMES, Adapter
from stdfit.validity.kit import Ancestor, SourceFile
from stdfit.validity.thru import LineTerm, line_faults
from stdfit.writing.adapter_file import FORMAT, TERM_NAMES
from stdfit.writing.decoding import MEND, decoder_fault, toml_of
from stdfit.writing.kit_checks import refuse_control_characters

LARGEST_BYTES = 64 * 2**20
LARGEST_S = 1.5
"""No adapter has an S-parameter of a magnitude above this."""

SMALLEST_S21 = 1e-3
"""An adapter that lets less through than this is none."""

ROUNDING = 1e-6
"""Eigenvalues may be negative, and bounds differ from their covariance, by this part."""

Size = Annotated[float, msgspec.Meta(ge=0.0)]
_SHA256 = re.compile(r"[0-9a-f]{64}")


class _Strict(msgspec.Struct, forbid_unknown_fields=True):
    """A table in which unknown keys are faults."""


class _Head(_Strict):
    name: str
    reference_impedance_ohm: Annotated[float, msgspec.Meta(gt=0.0)]
    created: str
    program_version: str
    degrees_of_freedom: Annotated[float, msgspec.Meta(gt=0.0)]
    warnings: list[str]


class _Term(_Strict):
    """One number of a line."""

    value: float
    u: Size
    low_95: float
    high_95: float

    def as_record(self) -> LineTerm:
        """Return it as it is used."""
        return LineTerm(self.value, self.u, self.low_95, self.high_95)


class _Line(_Strict):
    delay_ps: _Term
    loss_gohm_per_s: _Term
    z0_ohm: _Term


class _Parameters(_Strict):
    frequency_hz: list[float]
    s11_re: list[float]
    s11_im: list[float]
    s21_re: list[float]
    s21_im: list[float]
    s22_re: list[float]
    s22_im: list[float]


class _Bound(_Strict):
    frequency_hz: list[float]
    s11: list[Size]
    s21: list[Size]
    s22: list[Size]
    term_0: list[Size]
    term_1: list[Size]
    term_2: list[Size]


class _Covariance(_Strict):
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


class _Whole(_Strict):
    format: str
    adapter: _Head
    line: _Line
    s_parameters: _Parameters
    bound: _Bound
    covariance: _Covariance
    file: list[_File] = []
    ancestor: list[_Ancestor] = []


_FIELDS: dict[str, type[msgspec.Struct]] = {
    "adapter": _Head,
    "line": _Line,
    "delay_ps": _Term,
    "loss_gohm_per_s": _Term,
    "z0_ohm": _Term,
    "s_parameters": _Parameters,
    "bound": _Bound,
    "covariance": _Covariance,
    "file": _File,
    "ancestor": _Ancestor,
}
"""The tables by the last part of their key."""


def read_adapter(path: Path | str) -> Adapter:
    """Return the adapter of an adapter file.

    Raises
    ------
    KitError
        The file cannot be read, is no adapter file, or says something that cannot be.
    """
    path = Path(path)
    text = whole_text(path, "adapter file", LARGEST_BYTES, KitError, "write one with 'stdfit adapter BENCH'")
    return parse_adapter(text, path)


def parse_adapter(text: str, path: Path | str) -> Adapter:
    """Return the adapter that a TOML text describes.

    Raises
    ------
    KitError
        With the key at which it fails.
    """
    values = toml_of(text, path)
    if values.get("format") != FORMAT:
        raise KitError(
            f"not an adapter file of this version (format = {FORMAT!r})",
            "name an adapter file, as 'stdfit adapter BENCH' writes it",
            file=path,
            key="format",
        )
    try:
        whole = msgspec.convert(values, _Whole)
    except msgspec.ValidationError as fault:
        raise decoder_fault(str(fault), path, _FIELDS, _Whole) from fault
    refuse_control_characters(values, path)
    for key, what in _shape_faults(whole):
        raise KitError(what, MEND, file=path, key=key)
    adapter = _adapter(whole)
    for key, what in _faults(adapter, whole.bound):
        raise KitError(what, MEND, file=path, key=key)
    return adapter


def _adapter(whole: _Whole) -> Adapter:
    s, count = whole.s_parameters, len(whole.bound.frequency_hz)
    covariance = np.zeros((count, 6, 6))
    low = np.tril_indices(6)
    covariance[:, low[0], low[1]] = whole.covariance.lower_triangles
    covariance[:, low[1], low[0]] = whole.covariance.lower_triangles
    return Adapter(
        name=whole.adapter.name,
        reference_ohm=whole.adapter.reference_impedance_ohm,
        created=whole.adapter.created,
        version=whole.adapter.program_version,
        frequency_hz=np.array(s.frequency_hz),
        s=np.stack(
            [
                np.array(getattr(s, f"{name}_re")) + 1j * np.array(getattr(s, f"{name}_im"))
                for name in S_NAMES
            ],
            axis=-1,
        ),
        known_hz=np.array(whole.bound.frequency_hz),
        covariance=covariance,
        freedom=whole.adapter.degrees_of_freedom,
        line=(
            whole.line.delay_ps.as_record(),
            whole.line.loss_gohm_per_s.as_record(),
            whole.line.z0_ohm.as_record(),
        ),
        files=tuple(SourceFile(one.standard, one.name, one.sha256) for one in whole.file),
        ancestors=tuple(Ancestor(one.name, one.created, one.sha256, one.of) for one in whole.ancestor),
        warnings=tuple(whole.adapter.warnings),
    )


def _shape_faults(whole: _Whole) -> Iterator[tuple[str, str]]:
    """Yield what makes lists unfit to be set side by side."""
    for key, table in (("s_parameters", whole.s_parameters), ("bound", whole.bound)):
        grid = table.frequency_hz
        if len(grid) < 2:
            yield f"{key}.frequency_hz", "fewer than two frequencies"
        for name in table.__struct_fields__:
            listed = getattr(table, name)
            if len(listed) != len(grid):
                yield f"{key}.{name}", f"{len(listed)} values for {len(grid)} frequencies"
            if not np.isfinite(listed).all():
                yield f"{key}.{name}", "a value is not a finite number"
        if not (np.diff([0.0, *grid]) > 0.0).all():
            yield f"{key}.frequency_hz", "the frequencies do not rise from above 0"
    ends, own = whole.s_parameters.frequency_hz, whole.bound.frequency_hz
    if (ends[0], ends[-1]) != (own[0], own[-1]):
        yield "bound.frequency_hz", "does not begin and end where s_parameters do"
    triangles = whole.covariance.lower_triangles
    if len(triangles) != len(own) or any(len(one) != 21 for one in triangles):
        yield "covariance.lower_triangles", "21 numbers for each frequency of the bounds are needed"
    if not all(np.isfinite(one).all() for one in triangles):
        yield "covariance.lower_triangles", "a covariance is not a finite number"


def _faults(adapter: Adapter, stated: _Bound) -> Iterator[tuple[str, str]]:
    if not np.isfinite(adapter.reference_ohm):
        yield "adapter.reference_impedance_ohm", "not a finite number"
    size = np.abs(adapter.s)
    if size.max() > LARGEST_S:
        yield "s_parameters", f"a magnitude is {size.max():.4g}, far above 1"
    if size[:, 1].min() < SMALLEST_S21:
        yield "s_parameters.s21_re", "lets next to nothing through"
    value = np.linalg.eigvalsh(adapter.covariance)
    if (value[:, 0] < -ROUNDING * np.maximum(value[:, -1], 1e-300)).any():
        yield "covariance.lower_triangles", "a covariance is not positive"
    bounds = np.hstack([adapter.s_bounds, adapter.term_bounds])
    for k, name in enumerate((*S_NAMES, *TERM_NAMES)):
        if not np.allclose(getattr(stated, name), bounds[:, k], rtol=ROUNDING, atol=1e-15):
            yield f"bound.{name}", "not the bound that the covariance gives"
    for name, what in line_faults(adapter.line):
        yield f"line.{name}", what
    before: set[str] = set()
    for k, one in enumerate(adapter.ancestors):
        if not _SHA256.fullmatch(one.sha256):
            yield f"ancestor[{k}].sha256", "no SHA-256: 64 digits 0 … 9, a … f are needed"
        if one.of and one.of not in before:
            yield f"ancestor[{k}].of", "not the SHA-256 of an ancestor that stands before it"
        before.add(one.sha256)
