"""Kit files: a kit as TOML, so that reading one back and writing it again gives the same bytes."""

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import tomlkit

from stdfit.base.errors import KitError
from stdfit.base.shown import shown
from stdfit.data.ordinary import beginning
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Combination, Definition, Fitted, Kit
from stdfit.writing.adapter_file import line_table
from stdfit.writing.analyser_text import analyser_table
from stdfit.writing.session_file import session_table
from stdfit.writing.toml_tables import rows_below_each_other, table_of, tables_of

FORMAT = "stdfit-kit/1"

KIT_NAME = "kit.toml"
"""What a folder's kit file is called."""

HEAD = """A calibration kit: definitions of standards, how sure they are (95 %), and up to which frequency.
Written by stdfit; the format is described in docs/files.md of the program."""


def kit_text(kit: Kit) -> str:
    """Return the text of a kit file."""
    document = tomlkit.document()
    for line in HEAD.splitlines():
        document.add(tomlkit.comment(line))
    document.add("format", tomlkit.item(FORMAT))
    document.add(
        "kit",
        table_of(
            name=kit.name,
            connector=kit.connector,
            reference_impedance_ohm=kit.reference_ohm,
            created=kit.created,
            **({"measured": kit.measured} if kit.measured else {}),
            **({"calibration": kit.calibration} if kit.calibration else {}),
            program_version=kit.version,
            within=kit.within,
            limit_hz=kit.limit.limit_hz,
            limit_reason=kit.limit.reason,
            connector_top_hz=kit.top_hz,
            warnings=list(kit.warnings),
            checks=list(kit.checks),
        ),
    )
    if kit.analyser is not None:
        document.add("analyser", analyser_table(kit.analyser))
    document.add("standard", tables_of(_standard(definition) for definition in kit.definitions))
    document.add(
        "ladder",
        tables_of(
            table_of(within=rung.within, kit_limit_hz=rung.kit_hz, standard_limits_hz=list(rung.standards_hz))
            for rung in kit.ladder
        ),
    )
    document.add("covariance", table_of(order=list(kit.order)))
    document.add("source", tables_of(_source(share) for share in kit.shares))
    document.add(
        "file",
        tables_of(table_of(standard=one.standard, name=one.file, sha256=one.sha256) for one in kit.files),
    )
    if kit.ancestors:
        document.add(
            "ancestor",
            tables_of(
                table_of(name=one.name, created=one.created, sha256=one.sha256, of=one.of)
                for one in kit.ancestors
            ),
        )
    if kit.thru is not None:
        document.add("thru", line_table(kit.thru.line, name=kit.thru.name, sha256=kit.thru.sha256))
    if kit.session is not None:
        document.add("session", session_table(kit.session))
    return tomlkit.dumps(document)


def _standard(definition: Definition) -> Any:
    table = table_of(
        name=definition.name,
        kind=definition.kind,
        order=definition.shape,
        connections=definition.connections,
        **({} if definition.matings is None else {"matings": definition.matings}),
        read_from_hz=definition.read_low_hz,
        read_to_hz=definition.read_top_hz,
        fit_from_hz=definition.fit_low_hz,
        fit_to_hz=definition.fit_top_hz,
        limit_hz=definition.limit.limit_hz,
        limit_reason=definition.limit.reason,
        orders_tried=[order for order, _ in definition.tried],
        orders_limit_hz=[limit_hz for _, limit_hz in definition.tried],
        notes=list(definition.notes),
    )
    table.add("parameter", tables_of(_parameter(one) for one in definition.parameters))
    if definition.combinations:
        table.add("combination", tables_of(_combination(one) for one in definition.combinations))
    table.add(
        "misfit",
        table_of(frequency_hz=definition.misfit_hz.tolist(), bound=definition.misfit.tolist()),
    )
    return table


def _parameter(one: Fitted) -> Any:
    return table_of(
        name=one.name,
        value=one.value,
        unit=one.unit,
        u=one.u,
        low_95=one.low,
        high_95=one.high,
        role=one.role,
        covariance_name=one.of,
        **({} if one.given is None else {"given_value": one.given[0], "given_u": one.given[1]}),
    )


def _combination(one: Combination) -> Any:
    return table_of(
        label=one.label,
        value=one.value,
        unit=one.unit,
        u=one.u,
        low_95=one.low,
        high_95=one.high,
        correlation_of_parts=one.correlation,
    )


def _source(share: Share) -> Any:
    """Return a source's covariance as lower triangles, one for each correlation length."""
    triangles = rows_below_each_other(
        [float(covariance[i, j]) for i in range(covariance.shape[0]) for j in range(i + 1)]
        for covariance in share.covariances
    )
    return table_of(
        name=share.name,
        degrees_of_freedom=share.freedom,
        lower_triangles=triangles,
    )


def triangle_size(count: int) -> int:
    """Return how many numbers the lower triangle of a matrix of that size has."""
    return count * (count + 1) // 2


def rows_of(triangle: Sequence[float], count: int) -> list[list[float]]:
    """Return the full symmetric matrix of a lower triangle."""
    rows = [[0.0] * count for _ in range(count)]
    place = 0
    for i in range(count):
        for j in range(i + 1):
            rows[i][j] = rows[j][i] = triangle[place]
            place += 1
    return rows


def kit_file_of(path: Path | str) -> Path:
    """Return a kit file: of a folder the kit.toml in it.

    Raises
    ------
    KitError
        The folder holds none.
    """
    path = Path(path)
    try:
        if not path.is_dir():
            return path
        if (path / KIT_NAME).is_file():
            return path / KIT_NAME
    except (OSError, ValueError):  # no possible name: who reads it says so
        return path
    kits = sorted(one for one in path.glob("*.toml") if is_kit_file(one))
    mend = "name a kit file: 'stdfit fit BENCH' writes one"
    if kits:
        mend = f"name the kit file, such as {shown(kits[0])}"
    raise KitError(f"the folder holds no {KIT_NAME}", mend, file=path)


def is_kit_file(path: Path) -> bool:
    """Return whether a file says of itself, near its top, that it is a kit file."""
    return b'format = "stdfit-kit/' in beginning(path, 4096)
