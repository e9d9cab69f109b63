"""From a kit file, and a newer one or a bench, to what has changed between them."""

from pathlib import Path

from stdfit.base.errors import RequestError
from stdfit.data.bench import BENCH_NAME, read_bench
from stdfit.data.ordinary import beginning, digest
from stdfit.pipeline.path import fit_bench
from stdfit.validity.change.refusals import refuse_words
from stdfit.validity.change.wear import Wear, wear
from stdfit.validity.kit import Kit
from stdfit.writing.kit_file import KIT_NAME, is_kit_file, kit_file_of
from stdfit.writing.kit_reading import read_kit

BENCH_MARK = b"stdfit-bench/"


def wear_of(old_file: Path | str, new_file: Path | str, *, same_calibration: bool = False) -> Wear:
    """Read a kit and a newer one, or fit a new bench, and compare them.

    Parameters
    ----------
    old_file : path
        A kit file, or a folder with a kit.toml.
    new_file : path
        A kit file, a bench file, or a folder with a bench.toml or a kit.toml; a bench comes first.
    same_calibration : bool
        The user's word that both sets of readings were taken with one calibration of the analyser.

    Raises
    ------
    InputError
        A file is wrong, or the kits cannot be compared.
    FitError
        No fit came out of sound readings.
    """
    old_file, new_file = kit_file_of(old_file), Path(new_file)
    if not _is_bench(new_file):
        new_file = kit_file_of(new_file)
    old = read_kit(old_file)
    if is_kit_file(new_file) and _digest(new_file) == _digest(old_file):
        raise RequestError("both are the same kit file", "name a newer kit, or a new bench", file=new_file)
    if _is_bench(new_file):
        bench = read_bench(new_file)
        # Before the long fit, in which nothing of this changes.
        refuse_words(old.connector, bench.connector, old.reference_ohm, bench.reference_ohm)
        new: Kit = fit_bench(bench)
    else:
        new = read_kit(new_file)
    return wear(old, new, same_calibration=same_calibration)


def _is_bench(path: Path) -> bool:
    """Tell whether a path is a folder with a bench, or a file that says of itself that it is a bench file."""
    if path.is_dir():
        return (path / BENCH_NAME).exists() or not (path / KIT_NAME).is_file()
    return BENCH_MARK in beginning(path, 4096) or (path.name == BENCH_NAME and not path.exists())


def _digest(path: Path) -> str:
    return digest(path)
