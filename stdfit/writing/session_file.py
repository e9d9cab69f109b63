"""The readings that a kit file keeps: its tables `session` and `session.mean`, written, read back and checked."""

from collections.abc import Iterator, Sequence
from typing import Annotated, Any

import msgspec
import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.uncertainty.connections import PARTS
from stdfit.validity.kit import Kit
from stdfit.validity.session import MeanReading, Session
from stdfit.writing.toml_tables import rows_below_each_other, table_of, tables_of

Size = Annotated[float, msgspec.Meta(ge=0.0)]
Freedom = Annotated[float, msgspec.Meta(gt=0.0)]

HIGHEST_MAGNITUDE = 3.0
"""A mean |Γ| above this is no reading of a standard, and no error of one is as large."""

LARGEST_SCATTER = 1000.0
"""Ω or ps: no connection scatters by more."""

FEWEST_FREEDOM = 0.1
"""With fewer degrees of freedom an error may have any size: a fit counts none below 0.3."""


class MeanTable(msgspec.Struct, forbid_unknown_fields=True):
    """The mean reading of one standard."""

    standard: str
    connections: Annotated[int, msgspec.Meta(ge=1)]
    noise_sd: Size
    frequency_hz: list[Size]
    mean_re: list[float]
    mean_im: list[float]
    calibration_sd: list[Size]
    session_sd: list[Size]
    connection_hz: list[Size] | None = None
    deviations_re: list[list[float]] | None = None
    deviations_im: list[list[float]] | None = None


class SessionTable(msgspec.Struct, forbid_unknown_fields=True):
    """What holds for all readings of a bench."""

    connection_sd: list[Size]
    connection_freedom: list[Freedom]
    session_freedom: Freedom
    mean: list[MeanTable]


def session_table(session: Session) -> Any:
    """Return the table of a kit file."""
    table = table_of(
        connection_sd=session.scatter_sd.tolist(),
        connection_freedom=session.scatter_freedom.tolist(),
        session_freedom=session.session_freedom,
    )
    table.add(
        "mean",
        tables_of(
            table_of(
                standard=one.standard,
                connections=one.connections,
                noise_sd=one.noise_sd,
                frequency_hz=one.frequency_hz.tolist(),
                mean_re=one.gamma.real.tolist(),
                mean_im=one.gamma.imag.tolist(),
                calibration_sd=one.calibration_sd.tolist(),
                session_sd=one.session_sd.tolist(),
                **_connections(one),
            )
            for one in session.means
        ),
    )
    return table


def _connections(one: MeanReading) -> dict[str, Any]:
    """Return the keys of what single connections read, one row for each."""
    if one.connection_hz is None or one.deviations is None:
        return {}
    return {
        "connection_hz": one.connection_hz.tolist(),
        "deviations_re": rows_below_each_other(one.deviations.real.tolist()),
        "deviations_im": rows_below_each_other(one.deviations.imag.tolist()),
    }


def session_from(table: SessionTable) -> Session:
    """Return what a table says; lists of different lengths are left to `session_faults`."""
    means = []
    for one in table.mean:
        gamma = np.zeros(0, dtype=complex)
        if len(one.mean_re) == len(one.mean_im):
            gamma = _complex(one.mean_re, one.mean_im)
        means.append(
            MeanReading(
                standard=one.standard,
                connections=one.connections,
                frequency_hz=np.array(one.frequency_hz),
                gamma=gamma,
                calibration_sd=np.array(one.calibration_sd),
                session_sd=np.array(one.session_sd),
                noise_sd=one.noise_sd,
                connection_hz=None if one.connection_hz is None else np.array(one.connection_hz, dtype=float),
                deviations=_deviations(one),
            )
        )
    return Session(
        scatter_sd=np.array(table.connection_sd),
        scatter_freedom=np.array(table.connection_freedom),
        session_freedom=table.session_freedom,
        means=tuple(means),
    )


def _deviations(table: MeanTable) -> ComplexArray | None:
    """Return what single connections read, without any value where the rows are not equally long."""
    real, imag = table.deviations_re, table.deviations_im
    if real is None and imag is None:
        return None
    real, imag = real or [], imag or []
    if len(real) != len(imag) or len({len(row) for row in (*real, *imag)}) > 1:
        return np.zeros((0, 0), dtype=complex)
    return _complex(real, imag)


def _complex(real: Sequence[Any], imag: Sequence[Any]) -> ComplexArray:
    """Return complex numbers; a sum with 1j times the imaginary part would lose the minus before a zero."""
    values = np.empty(np.shape(real), dtype=complex)
    values.real, values.imag = real, imag
    return values


def session_faults(kit: Kit) -> Iterator[tuple[str, str]]:
    """Yield (key, what is wrong) of the readings that a kit keeps."""
    session = kit.session
    if session is None:
        return
    if session.scatter_sd.shape != (len(PARTS),) or not np.isfinite(session.scatter_sd).all():
        yield "session.connection_sd", f"{len(PARTS)} finite numbers are needed: {', '.join(PARTS)}"
    elif (session.scatter_sd > LARGEST_SCATTER).any():
        yield "session.connection_sd", f"no connection scatters by more than {LARGEST_SCATTER:g} Ω or ps"
    few = f"below {FEWEST_FREEDOM:g} degrees of freedom nothing is known of a size"
    if session.scatter_freedom.shape != (len(PARTS),):
        yield "session.connection_freedom", f"{len(PARTS)} numbers are needed: {', '.join(PARTS)}"
    elif not (session.scatter_freedom >= FEWEST_FREEDOM).all():
        yield "session.connection_freedom", few
    if not session.session_freedom >= FEWEST_FREEDOM:
        yield "session.session_freedom", few
    names = [one.standard for one in session.means]
    if len(set(names)) != len(names):
        yield "session.mean", "a standard is named twice"
    for k, one in enumerate(session.means):
        key = f"session.mean[{k}]"
        if one.standard not in [definition.name for definition in kit.definitions]:
            yield f"{key}.standard", "the kit holds no such standard"
        yield from _mean_faults(one, key)


def _mean_faults(one: MeanReading, key: str) -> Iterator[tuple[str, str]]:
    count = one.frequency_hz.size
    sizes = {"mean_re": one.gamma, "calibration_sd": one.calibration_sd, "session_sd": one.session_sd}
    for name, values in sizes.items():
        if count < 1 or values.shape != (count,):
            yield f"{key}.{name}", "the lists of a mean reading must be equally long"
        elif not np.isfinite(values).all():
            yield f"{key}.{name}", "a value is not a finite number"
        elif name != "mean_re" and (values > HIGHEST_MAGNITUDE).any():
            yield f"{key}.{name}", f"no error of a reading is larger than {HIGHEST_MAGNITUDE:g}"
    if not one.noise_sd <= HIGHEST_MAGNITUDE:
        yield f"{key}.noise_sd", f"no noise of a reading is larger than {HIGHEST_MAGNITUDE:g}"
    if (one.frequency_hz <= 0.0).any():
        yield f"{key}.frequency_hz", "a frequency is not above 0 Hz"
    if not np.isfinite(one.frequency_hz).all() or (np.diff(one.frequency_hz) <= 0.0).any():
        yield f"{key}.frequency_hz", "the frequencies do not rise"
    if (np.abs(one.gamma) > HIGHEST_MAGNITUDE).any():
        yield f"{key}.mean_re", f"|Γ| above {HIGHEST_MAGNITUDE:g} is no reading of a standard"
    yield from _connection_faults(one, key)


def _connection_faults(one: MeanReading, key: str) -> Iterator[tuple[str, str]]:
    places, deviations = one.connection_hz, one.deviations
    if places is None and deviations is None:
        return
    if places is None or deviations is None:
        yield (
            f"{key}.connection_hz",
            "it stands together with deviations_re and deviations_im, or none of them",
        )
        return
    if places.size < 1 or deviations.shape != (one.connections, places.size):
        yield (
            f"{key}.deviations_re",
            "deviations_re and deviations_im need one row for each connection, each as long as connection_hz",
        )
    if not np.isfinite(places).all() or (places <= 0.0).any() or (np.diff(places) <= 0.0).any():
        yield f"{key}.connection_hz", "the frequencies must be above 0 Hz and rise"
    if not np.isfinite(deviations).all():
        yield f"{key}.deviations_re", "a value is not a finite number"
    elif (np.abs(deviations) > HIGHEST_MAGNITUDE).any():
        yield f"{key}.deviations_re", f"no connection deviates by more than {HIGHEST_MAGNITUDE:g}"
