"""Every file of the museum: the good ones read as what they are, the broken ones give the exact message.

All numbers are simulated from the formulas below (invented data). A sidecar `x.expected` holds the message
for `x`; "⟨…⟩" stands for words of the TOML parser, which change with its version.
"""

import re
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import BenchError, ReadingError
from stdfit.data.bench import read_bench
from stdfit.data.readings import read_reading

FILES = Path(__file__).parents[1] / "files"
BENCHES = (FILES / "valid" / "bench", FILES / "invalid" / "bench")


def readings_in(folder: str) -> list[Path]:
    return sorted(
        path
        for path in (FILES / folder).iterdir()
        if path.is_file() and path.suffix != ".expected" and not path.name.startswith(".")
    )


VALID, INVALID = readings_in("valid"), readings_in("invalid")
INVALID_BENCHES = sorted(BENCHES[1].glob("*.toml"))
GRID_HZ = np.array([50, 100, 200, 400, 800, 1600, 2400, 3200, 4000, 5000]) * 1e6


def open_in(f, zr, delay=12e-12):
    """An open of 45 fF behind 12 ps of a line of impedance zr."""
    z = 1 / (2j * np.pi * np.where(f == 0, 1e-30, f) * 45e-15)
    return (z - zr) / (z + zr) * np.exp(-4j * np.pi * f * delay)


def in_50_ohm(gamma, zr):
    z = zr * (1 + gamma) / (1 - gamma)
    return (z - 50) / (z + 50)


def short(f):
    z = 2j * np.pi * f * 20e-12
    return (z - 50) / (z + 50) * np.exp(-4j * np.pi * f * 12e-12)


def load(f):
    z = 50.3 + 2j * np.pi * f * 0.2e-9
    return (z - 50) / (z + 50)


def bare_open(f):
    return open_in(f, 50, delay=0)


OTHER = {
    "short-ri.s1p": short,
    "load-ri.s1p": load,
    "seventy-five-ohm.s1p": lambda f: in_50_ohm(open_in(f, 75), 75),
    "version-2-reference.s1p": lambda f: in_50_ohm(open_in(f, 75), 75),
    "odd-resistance.s1p": lambda f: in_50_ohm(open_in(f, 12.5), 12.5),
    "impedance-normalised.s1p": bare_open,
    "admittance-normalised.s1p": bare_open,
    "version-2-impedance.ts": bare_open,
    "version-2-admittance.ts": bare_open,
    "bare-points.s1p": lambda f: np.exp(-1j * np.deg2rad(f / 1e8)),
}
GRIDS = {
    "zero-frequency.s1p": np.concatenate([[0.0], GRID_HZ]),
    "bare-points.s1p": np.arange(1, 11) * 1e8,
}
NOTES = {
    "one-port-in-s2p.s2p": "the name says 2 port(s), the rows hold 1",
    "two-port-in-s1p.s1p": "the name says 1 port(s), the rows hold 2",
    "second-option-line.s1p": "a later option line says otherwise; the first one counts, as the format wants it",
    "two-port-noise.s2p": "noise parameters were left out",
    "seventy-five-ohm.s1p": "changed from 75 Ω to 50 Ω",
    "version-2-reference.s1p": "changed from 75 Ω to 50 Ω",
    "odd-resistance.s1p": "changed from 12.5 Ω to 50 Ω",
}


def test_the_museum_is_there():
    assert len(VALID) > 50
    assert len(INVALID) > 60
    assert len(INVALID_BENCHES) > 60


@pytest.mark.parametrize("path", VALID, ids=lambda path: path.name)
def test_a_good_file_reads_as_what_it_is(path):
    sweep = read_reading(path)
    frequency = GRIDS.get(path.name, GRID_HZ)
    np.testing.assert_allclose(sweep.frequency_hz, frequency, rtol=1e-14)
    truth = OTHER.get(path.name, lambda f: open_in(f, 50))(frequency)
    np.testing.assert_allclose(sweep.gamma, truth, atol=3e-8)
    assert sweep.reference_ohm == 50
    expected = NOTES.get(path.name)
    if expected is None and ("impedance" in path.name or "admittance" in path.name):
        expected = f"reflection computed from {'Z' if 'impedance' in path.name else 'Y'} parameters"
    assert sweep.notes == ((expected,) if expected else ())


TWO_PORTS = [path for path in VALID if path.suffix == ".s2p" and path.name != "one-port-in-s2p.s2p"]


@pytest.mark.parametrize("path", TWO_PORTS, ids=lambda path: path.name)
def test_port_2_of_a_two_port_file(path):
    np.testing.assert_allclose(read_reading(path, port=2).gamma, load(GRID_HZ), atol=3e-8)


def compare(fault, path):
    expected = Path(f"{path}.expected").read_text(encoding="utf-8").removesuffix("\n")
    pattern = re.escape(expected).replace("⟨…⟩", ".*")
    assert re.fullmatch(pattern, str(fault)), f"{fault!s}\n--- expected ---\n{expected}"
    assert str(fault).count("\n") == 1  # two lines: what and where, then what to do


@pytest.mark.parametrize("path", INVALID, ids=lambda path: path.name)
def test_a_broken_file_gives_the_exact_message(path, monkeypatch):
    monkeypatch.chdir(path.parent)
    with pytest.raises(ReadingError) as caught:
        read_reading(Path(path.name))
    compare(caught.value, path)


@pytest.mark.parametrize("path", INVALID_BENCHES, ids=lambda path: path.stem)
def test_a_broken_bench_gives_the_exact_message(path, monkeypatch):
    monkeypatch.chdir(path.parent)
    with pytest.raises(BenchError) as caught:
        read_bench(Path(path.name))
    compare(caught.value, path)


def test_every_sidecar_belongs_to_a_file():
    for folder in (FILES / "invalid", BENCHES[1]):
        for sidecar in folder.glob("*.expected"):
            assert sidecar.with_suffix("").exists(), sidecar.name
