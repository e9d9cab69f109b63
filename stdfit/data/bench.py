"""Bench files: the text says what was measured and with what; out comes a `Bench`."""

from pathlib import Path

from stdfit.base.arrays import frozen_float
from stdfit.base.errors import BenchError
from stdfit.data.bench_adapters import check_named, decode_adapters, decode_thru
from stdfit.data.bench_devices import decode_devices
from stdfit.data.bench_records import Bench, Given, PlannedSweep, StandardEntry, StatedResidual
from stdfit.data.bench_standards import decode_standards
from stdfit.data.bench_table import Table
from stdfit.data.mistaken import refuse_mistaken
from stdfit.data.toml_text import parse_toml
from stdfit.data.whole_text import whole_text
from stdfit.data.words import nearest, quoted

__all__ = ["Bench", "Given", "PlannedSweep", "StandardEntry", "StatedResidual", "parse_bench", "read_bench"]

FORMAT = "stdfit-bench/1"
BENCH_NAME = "bench.toml"
LARGEST_BYTES = 4 * 2**20
DEFAULT_WITHIN = 0.02
# A bound of 0.5 dB on tracking is a bad analyser; these only catch a wrong sign, unit or column.
HIGHEST_DB = {"directivity_db": 400.0, "source_match_db": 400.0, "reflection_tracking_db": 20.0}


def read_bench(path: Path | str, *, devices_alone: bool = False) -> Bench:
    """Return the bench that a bench file, or a folder with a bench.toml, describes.

    Parameters
    ----------
    path : path
        The bench file or its folder.
    devices_alone : bool
        Whether devices may stand there without any standard.

    Raises
    ------
    BenchError
        The file cannot be read, is no TOML, or says something that cannot be.
    """
    path = Path(path)
    if path.is_dir():
        path = path / BENCH_NAME
        if not path.exists():
            raise BenchError(
                f"the folder holds no {BENCH_NAME}", "write one, or name the file", file=path.parent
            )
    text = whole_text(path, "bench file", LARGEST_BYTES, BenchError, "check the path")
    return parse_bench(text, path, devices_alone=devices_alone)


def parse_bench(text: str, path: Path, *, devices_alone: bool = False) -> Bench:
    """Return the bench that a TOML text describes.

    Parameters
    ----------
    text : str
        The content of a bench file.
    path : path
        Where it stands: patterns are relative to its folder, and messages name it.
    devices_alone : bool
        Whether devices may stand there without any standard.

    Raises
    ------
    BenchError
        The text is no TOML, or says something that cannot be; the message names line or key.
    """
    refuse_mistaken(text, path, "bench file", BenchError)
    values = parse_toml(text, path)
    _check_format(values, path)
    whole = Table(
        values,
        path,
        "",
        ("format", "kit", "goal", "analyser", "plan", "standard", "device", "adapter", "thru"),
    )
    kit = Table(
        _required(whole, "kit"), path, "kit", ("name", "connector", "reference_impedance_ohm", "date")
    )
    goal = Table(values.get("goal", {}), path, "goal", ("within", "highest_hz"))
    within = goal.number("within", DEFAULT_WITHIN, above=0.0)
    if within >= 1.0:
        raise goal.fault("within", f"{within:g} is not below 1", "write for example 0.02")
    analyser = Table(
        _required(whole, "analyser"),
        path,
        "analyser",
        ("state", "residual", "calibrated_with", "calibration"),
    )
    state = analyser.choice(
        "state",
        ("corrected", "raw"),
        mend='write "corrected" (read through the analyser\'s own correction) or "raw" (without any)',
    )
    if state == "raw" and "residual" in analyser:
        raise analyser.fault(
            "residual", "belongs to corrected readings", 'leave it out, or set state = "corrected"'
        )
    if state == "raw" and "calibrated_with" in analyser:
        raise analyser.fault(
            "calibrated_with", "belongs to corrected readings", 'leave it out, or set state = "corrected"'
        )
    if state == "raw" and "calibration" in analyser:
        raise analyser.fault(
            "calibration", "belongs to corrected readings", 'leave it out, or set state = "corrected"'
        )
    standards: tuple[StandardEntry, ...] = ()
    if not devices_alone or "standard" in whole or "device" not in whole:
        standards = decode_standards(whole, state, planned="plan" in whole)
    adapters, thru = decode_adapters(whole), decode_thru(whole)
    calibrated_with = analyser.text("calibrated_with") if "calibrated_with" in analyser else None
    check_named(path, adapters, standards, calibrated_with, thru)
    return Bench(
        path=path,
        name=kit.text("name"),
        connector=kit.text("connector"),
        reference_ohm=kit.number("reference_impedance_ohm", 50.0, above=0.0),
        within=within,
        highest_hz=goal.number("highest_hz", above=0.0) if "highest_hz" in goal else None,
        state=state,
        residual=_residual(analyser.values["residual"], path) if "residual" in analyser else None,
        standards=standards,
        date=kit.day("date"),
        plan=_plan(values["plan"], path) if "plan" in whole else None,
        devices=decode_devices(whole),
        adapters=adapters,
        calibrated_with=calibrated_with,
        thru=thru,
        calibration=analyser.text("calibration") if "calibration" in analyser else None,
    )


def _plan(values: object, path: Path) -> PlannedSweep:
    """Return how standards without readings are going to be read."""
    table = Table(values, path, "plan", ("from_hz", "to_hz", "points", "connections"))
    low, high = table.number("from_hz", above=0.0), table.number("to_hz", above=0.0)
    if high <= low:
        raise table.fault("to_hz", "does not lie above from_hz", "give the sweep's upper end")
    counts = {}
    for key, default, least, most in (("points", 201.0, 8, 100_001), ("connections", 3.0, 1, 100)):
        value = table.number(key, default)
        if value != int(value) or not least <= value <= most:
            raise table.fault(key, f"must be a whole number from {least} to {most}", "mend the number")
        counts[key] = int(value)
    return PlannedSweep(low, high, counts["points"], counts["connections"])


def _check_format(values: dict[str, object], path: Path) -> None:
    """Refuse what does not call itself a bench file of this version."""
    stated = values.get("format")
    if stated == FORMAT:
        return
    near = nearest("format", values) if stated is None else None
    if near is not None:
        raise BenchError("unknown key", "did you mean 'format'?", file=path, key=near)
    what = "missing" if stated is None else f"{quoted(str(stated))} is not known"
    raise BenchError(what, f'a bench file begins with format = "{FORMAT}"', file=path, key="format")


def _required(whole: Table, key: str) -> object:
    """Return a table that must be there."""
    if key not in whole:
        raise whole.fault(key, "the table is missing", f"write [{key}]")
    return whole.values[key]


def _residual(values: object, path: Path) -> StatedResidual:
    """Return the stated bounds, turned from decibels into linear ones."""
    table = Table(values, path, "analyser.residual", ("frequency_hz", *HIGHEST_DB))
    frequency = frozen_float(table.numbers("frequency_hz", above=0.0))
    if (frequency[1:] <= frequency[:-1]).any():
        raise table.fault(
            "frequency_hz", "the frequencies do not rise", "put them in rising order, each once"
        )
    decibels = {}
    for key, highest in HIGHEST_DB.items():
        listed = frozen_float(table.numbers(key, above=0.0))
        if listed.size != frequency.size:
            raise table.fault(
                key, f"{listed.size} values for {frequency.size} frequencies", "give one value a frequency"
            )
        if listed.max() > highest:
            raise table.fault(key, f"{listed.max():g} dB is too much to be meant", "check the unit")
        decibels[key] = listed
    return StatedResidual(
        frequency_hz=frequency,
        directivity=10.0 ** (-decibels["directivity_db"] / 20.0),
        source_match=10.0 ** (-decibels["source_match_db"] / 20.0),
        reflection_tracking=10.0 ** (decibels["reflection_tracking_db"] / 20.0) - 1.0,
    )
