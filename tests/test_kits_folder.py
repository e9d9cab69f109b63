"""Every kit in kits/ reads, belongs to the readings beside it, and comes out of its bench again."""

import hashlib
import shutil
from pathlib import Path

import pytest

from stdfit.cli import main
from stdfit.data.bench import read_bench
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit

KITS = Path(__file__).parents[1] / "kits"
FOLDERS = sorted(path for path in KITS.iterdir() if path.is_dir())
CLOSE = 1e-6
"""Relative to the larger of value and standard uncertainty: what another processor's rounding may do."""


def test_there_is_a_kit():
    assert FOLDERS


@pytest.fixture(params=FOLDERS, ids=lambda path: path.name)
def folder(request):
    return request.param


def test_kit_file_reads_and_writes_back_the_same_bytes(folder):
    path = folder / "kit.toml"
    assert kit_text(read_kit(path)).encode() == path.read_bytes()


def test_kit_belongs_to_the_readings_beside_it(folder):
    kit, bench = read_kit(folder / "kit.toml"), read_bench(folder)
    assert [(one.standard, one.file) for one in kit.files] == [
        (entry.name, path.relative_to(folder).as_posix()) for entry in bench.standards for path in entry.files
    ]
    for one in kit.files:
        assert hashlib.sha256((folder / one.file).read_bytes()).hexdigest() == one.sha256, one.file


def test_every_reading_of_the_folder_is_used(folder):
    used = {one.file for one in read_kit(folder / "kit.toml").files}
    assert {path.name for path in folder.glob("*.s?p")} == used


def test_simulated_data_says_so_in_every_file(folder):
    if "simulated" not in read_bench(folder).name:
        pytest.skip("measured data")
    silent = [path.name for path in folder.iterdir() if "invented data" not in path.read_text("utf-8")]
    assert silent == []


def test_fitting_the_bench_again_gives_the_same_definitions(folder, tmp_path, capsys):
    bench = shutil.copytree(folder, tmp_path / "bench")
    (bench / "kit.toml").unlink()
    assert main(["fit", str(bench)]) == 0
    capsys.readouterr()
    kept, again = read_kit(folder / "kit.toml"), read_kit(bench / "kit.toml")

    assert (kept.name, kept.order, kept.warnings) == (again.name, again.order, again.warnings)
    assert again.limit.limit_hz == pytest.approx(kept.limit.limit_hz, rel=CLOSE)
    assert again.limit.reason == kept.limit.reason
    for old, new in zip(kept.definitions, again.definitions, strict=True):
        assert (old.name, old.kind, old.shape) == (new.name, new.kind, new.shape)
        assert new.limit.limit_hz == pytest.approx(old.limit.limit_hz, rel=CLOSE)
        for a, b in zip(old.parameters, new.parameters, strict=True):
            assert (a.name, a.unit, a.role, a.of) == (b.name, b.unit, b.role, b.of)
            size = max(abs(a.value), a.u)
            for one, other in ((a.value, b.value), (a.u, b.u), (a.low, b.low), (a.high, b.high)):
                assert abs(one - other) <= CLOSE * size, f"{old.name}.{a.name}"
