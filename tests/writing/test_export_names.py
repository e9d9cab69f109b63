"""Names of standards may hold any character; names of files and comments may not."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.data.readings import read_reading
from stdfit.validity.kit import curve
from stdfit.writing.export import STANDARDS, export_files
from stdfit.writing.plain_names import as_ascii, file_names

HOSTILE = [
    "../../etc/passwd",
    "/absolute",
    "..",
    "",
    "a\nb\r\n# Hz S MA R 75",
    "! Port[1] = x",
    "! Gamma 1 2",
    "x::y",
    "[Version] 2.0",
    "con",
    "Öffner 50 Ω",
    "✓✓",
    'quote "and, comma',
    "S-parameter uses the power definition",
    "n" * 500,
    "a = b = c",
    "NUL.x",
    "\ud800",
]


def renamed(kit, *names):
    """The kit with its first standard under each of the names."""
    first = kit.definitions[0]
    return replace(kit, definitions=tuple(replace(first, name=name) for name in names))


@pytest.mark.parametrize("name", HOSTILE, ids=lambda name: repr(name)[:20])
def test_hostile_names_do_no_harm(small_kit, tmp_path, name):
    rf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    kit = replace(renamed(small_kit, name), name=name, warnings=(name,))
    grid = np.linspace(1e8, 6e9, 11)
    (file,) = file_names(kit)
    assert file.isascii()
    assert file.endswith(".s1p")
    assert len(file) <= 80
    assert not set(file) & set('/\\:*?"<>| \n')
    assert file[0] not in ".-"
    text = export_files(kit, grid)[file]
    assert text.isascii()
    (tmp_path / file).write_text(text, encoding="ascii", newline="\n")
    expected, _ = curve(kit, kit.definitions[0], grid)
    np.testing.assert_allclose(
        read_reading(tmp_path / file, exported=True).gamma, expected, rtol=0, atol=1e-15
    )
    network = rf.Network(str(tmp_path / file))
    np.testing.assert_allclose(network.s[:, 0, 0], expected, rtol=0, atol=1e-15)
    assert (network.z0 == 50.0).all()


@pytest.mark.parametrize(
    "names, files",
    [
        (["open", "Open", "OPEN"], ["open.s1p", "Open-2.s1p", "OPEN-3.s1p"]),
        (["a b", "a/b", "a-b-2"], ["a-b.s1p", "a-b-2.s1p", "a-b-2-2.s1p"]),
        (["✓", "∞"], ["open.s1p", "open-2.s1p"]),
        (["aux", "COM1.x"], ["standard-aux.s1p", "standard-COM1.x.s1p"]),
        (["Größe 2"], ["Grosse-2.s1p"]),
        (["n" * 99, "n" * 98], ["n" * 60 + ".s1p", "n" * 60 + "-2.s1p"]),
    ],
)
def test_names_of_files_are_distinct(small_kit, names, files):
    assert file_names(renamed(small_kit, *names)) == files


def test_the_tables_keep_the_true_names(small_kit):
    kit = renamed(small_kit, 'Größe "2", ✓', "short")
    text = export_files(kit, np.array([1e9]))[STANDARDS]
    assert text.splitlines()[1].startswith('"Größe ""2"", ✓",1000000000.0,')


def test_as_ascii():
    assert as_ascii("50 Ω, Größe 2 ± 1 ✓") == "50 ohm, Grosse 2 +/- 1 ?"
    assert as_ascii("two\n lines\x07") == "two lines?"
