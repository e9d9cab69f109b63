"""Paths that hold no readings, and the choice of the reader."""

import os
import socket
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import ReadingError
from stdfit.data.exported import FIRST_LINE
from stdfit.data.readings import read_reading

VALID = Path(__file__).parents[1] / "files" / "valid"
SHARED = Path(__file__).parents[3] / "shared" / "readings"


def refuse(path, **options):
    with pytest.raises(ReadingError) as caught:
        read_reading(path, **options)
    return caught.value


def test_a_folder(tmp_path):
    assert refuse(tmp_path).what == "a folder, not a file of readings"


def test_a_missing_file_names_the_nearest(tmp_path):
    (tmp_path / "open-1.s1p").write_text("x")
    fault = refuse(tmp_path / "opne-1.s1p")
    assert (fault.what, fault.mend) == ("no such file", "did you mean 'open-1.s1p'?")
    assert refuse(tmp_path / "nowhere" / "a.s1p").what == "no such file, nor its folder"
    assert refuse(tmp_path / "quite different").mend == "check the path"


@pytest.mark.parametrize("name", ["a\0b", "x" * 5000])
def test_an_impossible_name(name):
    assert refuse(name).what.startswith("cannot be read")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes on this system")
def test_a_pipe_does_not_hang(tmp_path):
    os.mkfifo(tmp_path / "pipe.s1p")
    assert refuse(tmp_path / "pipe.s1p").what == "not an ordinary file"


@pytest.mark.skipif(not Path("/dev/zero").exists(), reason="no such device on this system")
def test_a_device_does_not_hang():
    assert refuse("/dev/zero").what == "not an ordinary file"


@pytest.mark.skipif(not hasattr(socket, "AF_UNIX"), reason="no local sockets on this system")
def test_a_socket(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    with socket.socket(socket.AF_UNIX) as opened:
        opened.bind("s")
        assert refuse("s").what == "not an ordinary file"


def test_links(tmp_path):
    (tmp_path / "a").symlink_to(tmp_path / "b")
    assert refuse(tmp_path / "a").what == "a link to a file that does not exist"
    (tmp_path / "b").symlink_to(tmp_path / "a")
    assert refuse(tmp_path / "a").what == "a link that leads back to itself"
    (tmp_path / "c.s1p").symlink_to(VALID / "plain-ri.s1p")
    assert len(read_reading(tmp_path / "c.s1p").gamma) == 10


def test_a_giant(tmp_path):
    with (tmp_path / "giant.s1p").open("wb") as file:
        file.truncate(600 * 2**20)  # sparse: takes no room
    assert refuse(tmp_path / "giant.s1p").what == "larger than 64 MB"


@pytest.mark.skipif(
    not hasattr(os, "geteuid") or os.geteuid() == 0, reason="the superuser may read everything"
)
def test_no_permission(tmp_path):
    (tmp_path / "x.s1p").write_text("x")
    (tmp_path / "x.s1p").chmod(0)
    assert refuse(tmp_path / "x.s1p").what == "may not be read"


def test_a_file_that_vanishes_between_look_and_open(tmp_path, monkeypatch):
    path = tmp_path / "x.s1p"
    path.write_text("x")

    def gone(*arguments):
        raise FileNotFoundError

    monkeypatch.setattr(os, "open", gone)
    assert refuse(path).what == "no such file"


@pytest.mark.parametrize("suffix", [".txt", ".dat", ".csv", ""])
def test_touchstone_is_known_by_its_content(tmp_path, suffix):
    for source in (
        "plain-ri.s1p",
        "utf-16.s1p",
        "byte-order-mark.s1p",
        "version-2.ts",
        "lower-case-odd-order.s1p",
    ):
        (tmp_path / f"x{suffix}").write_bytes((VALID / source).read_bytes())
        assert len(read_reading(tmp_path / f"x{suffix}").gamma) == 10


@pytest.mark.parametrize("suffix", [".txt", ".dat", ""])
def test_columns_are_known_by_their_content(tmp_path, suffix):
    for source in ("gamma.csv", "tabs.tsv", "bom-crlf.csv"):
        (tmp_path / f"x{suffix}").write_bytes((VALID / source).read_bytes())
        assert len(read_reading(tmp_path / f"x{suffix}").gamma) == 10


def test_port_2_of_columns_is_refused():
    assert refuse(VALID / "gamma.csv", port=2).what == "a CSV file holds one port, and port 2 was asked for"


def test_the_reference_impedance_is_the_one_asked_for():
    there = read_reading(VALID / "seventy-five-ohm.s1p", reference_ohm=75.0)
    assert there.notes == ()
    here = read_reading(VALID / "seventy-five-ohm.s1p")
    z = 75 * (1 + there.gamma) / (1 - there.gamma)
    np.testing.assert_allclose(here.gamma, (z - 50) / (z + 50), rtol=1e-12)
    assert (there.reference_ohm, here.reference_ohm) == (75, 50)


@pytest.mark.skipif(not SHARED.is_dir(), reason="the measured readings are not beside the project")
def test_measured_readings():
    files = sorted(SHARED.glob("*/*.s1p"))
    assert len(files) == 24
    for file in files:
        sweep = read_reading(file)
        assert len(sweep.gamma) in (641, 2501)
        assert np.abs(sweep.gamma).max() < 1.05


@pytest.mark.parametrize("above", ["", "! of May\n", "\n! \u00e9t\u00e9\r\n"])
@pytest.mark.parametrize("code", ["utf-8", "utf-8-sig", "utf-16"])
def test_an_exported_definition_is_no_reading(tmp_path, above, code):
    text = (VALID / "seventy-five-ohm.s1p").read_text(encoding="utf-8")
    path = tmp_path / "open-1.s1p"
    path.write_bytes(f"{above}{FIRST_LINE}\n{text}".encode(code))
    with pytest.raises(
        ReadingError, match=r"open-1\.s1p: a definition that 'stdfit export' wrote, and no reading"
    ):
        read_reading(path)
    assert len(read_reading(path, exported=True).gamma) == len(
        read_reading(VALID / "seventy-five-ohm.s1p").gamma
    )


def test_words_about_an_export_are_no_mark(tmp_path):
    text = (VALID / "seventy-five-ohm.s1p").read_text(encoding="utf-8")
    path = tmp_path / "open-1.s1p"
    path.write_text(f"! stdfit export\n! against{FIRST_LINE}\n{text}\n{FIRST_LINE}\n", encoding="utf-8")
    assert len(read_reading(path).gamma)
