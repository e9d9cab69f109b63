"""Readings that contradict the names of their standards, and odd ones that do not."""

from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import PhysicsError
from stdfit.base.records import Sweep
from stdfit.data.readings import read_reading
from stdfit.data.verify import phase_at_zero, verify_standards

SHARED = Path(__file__).parents[3] / "shared" / "readings"
GRID = np.linspace(50e6, 6e9, 201)


def part(kind, f, delay=20e-12, c=60e-15, inductance=30e-12, loss=0.002):
    jw = 2j * np.pi * f
    line = np.exp(-2 * jw * delay - loss * np.sqrt(f / 1e9))
    if kind == "open":
        return (1 - jw * c * 50) / (1 + jw * c * 50) * line
    if kind == "short":
        return (jw * inductance - 50) / (jw * inductance + 50) * line
    return (0.6 + jw * 0.3e-9) / (100.6 + jw * 0.3e-9) * line


def readings(delay=20e-12, f=GRID, count=3, noise=1e-4, seed=3, kinds=("open", "short", "load")):
    rng = np.random.default_rng(seed)

    def sweep(name, kind, number):
        scatter = noise * (rng.normal(size=f.size) + 1j * rng.normal(size=f.size))
        return Sweep(f, part(kind, f, delay) + scatter, name=f"{name}-{number}.s1p")

    return {
        name: (name, [sweep(name, kind, i + 1) for i in range(count)])
        for name, kind in zip(("open", "short", "load"), kinds, strict=True)
    }


@pytest.mark.parametrize("delay", [-5e-12, 0, 20e-12, 100e-12, 1e-9, 3e-9])
@pytest.mark.parametrize(
    "f", [GRID, np.linspace(40e6, 200e6, 641), np.linspace(1e9, 3e9, 401)], ids=["a", "b", "c"]
)
def test_sound_readings_pass_at_any_offset(delay, f):
    assert verify_standards(readings(delay, f)) == ()


@pytest.mark.parametrize("delay", [0, 20e-12, 300e-12, 1e-9])
def test_a_swap_is_named(delay):
    with pytest.raises(PhysicsError) as caught:
        verify_standards(readings(delay, kinds=("short", "open", "load")))
    assert caught.value.what == "standards 'open' and 'short' are swapped: each reads like the other kind"
    assert caught.value.file == "open-1.s1p"


@pytest.mark.parametrize(
    ("kinds", "what"),
    [
        (
            ("open", "short", "open"),
            "standard 'load' is called a load but reflects like a short or open (|Γ| = 1.00)",
        ),
        (("load", "short", "load"), "standards 'open' (open) and 'load' (load) read the same"),
        (("open", "open", "load"), "standards 'open' (open) and 'short' (short) read the same"),
        (("open", "open", "open"), "standards 'open' (open) and 'short' (short) read the same"),
    ],
)
def test_wrong_parts_are_named(kinds, what):
    data = readings(kinds=kinds)
    if kinds == ("open", "short", "open"):
        # Another open than the first, so that it is not found as the same part.
        data["load"] = ("load", [Sweep(GRID, part("open", GRID, delay=500e-12), name="load-1.s1p")])
    with pytest.raises(PhysicsError) as caught:
        verify_standards(data)
    assert caught.value.what == what


def test_single_contradictions():
    data = readings()
    with pytest.raises(
        PhysicsError, match=r"'x' is called an open but reads like a short \(phase -?1\d\d° at f → 0\)"
    ):
        verify_standards({"x": ("open", data["short"][1])})
    with pytest.raises(PhysicsError, match=r"'x' is called a short but reads like an open"):
        verify_standards({"x": ("short", data["open"][1])})
    with pytest.raises(PhysicsError, match=r"'x' is called a short but absorbs like a load \(\|Γ\| = 0.01\)"):
        verify_standards({"x": ("short", data["load"][1])})


def test_grids_must_agree():
    data = readings()
    odd = Sweep(GRID[:-1], data["open"][1][0].gamma[:-1], name="open-9.s1p")
    data["open"][1].append(odd)
    with pytest.raises(PhysicsError) as caught:
        verify_standards(data)
    assert caught.value.file == "open-9.s1p"
    assert (
        "200 points, 50000000 to 5970250000 Hz) differ from those of open-1.s1p (201 points"
        in caught.value.what
    )
    data["open"][1][-1] = Sweep(GRID + 1e6, part("open", GRID), name="open-9.s1p")
    with pytest.raises(PhysicsError, match="differ"):
        verify_standards(data)
    # Frequencies rounded when written out are the same grid.
    data["open"][1][-1] = Sweep(GRID + 100.0, part("open", GRID), name="open-9.s1p")
    assert verify_standards(data) == ()


def test_grids_of_raw_readings_must_agree_over_the_bench():
    data = {**readings(), "load": ("load", [Sweep(GRID[:-1], part("load", GRID[:-1]), name="l.s1p")])}
    assert verify_standards(data) == ()
    with pytest.raises(PhysicsError, match="differ from those of open-1"):
        verify_standards(data, state="raw")


def test_the_same_readings_twice():
    data = readings()
    again = Sweep(GRID, data["open"][1][0].gamma, name="copy.s1p")
    with pytest.raises(PhysicsError, match=r"the same readings as open-1.s1p, in standard 'open'"):
        verify_standards({**data, "open": ("open", [*data["open"][1], again])})
    with pytest.raises(PhysicsError, match=r"the same readings as open-1.s1p, in 'open' and in 'other'"):
        verify_standards({**data, "other": ("open", [again])})


def test_readings_above_one():
    gamma = part("open", GRID)
    few = gamma.copy()
    few[[10, 90]] *= 1.3
    assert verify_standards({"open": ("open", [Sweep(GRID, few, name="x")])}) == ()
    with pytest.raises(PhysicsError, match=r"\|Γ\| is up to 1\.\d+ .*which no passive part reaches"):
        verify_standards({"open": ("open", [Sweep(GRID, 1.15 * gamma, name="x")])})
    warnings = verify_standards({"open": ("open", [Sweep(GRID, 1.07 * gamma, name="x")])})
    assert len(warnings) == 1
    assert warnings[0].startswith("standard 'open': |Γ| is up to 1.0")


def test_raw_readings_are_not_judged_by_phase_or_magnitude():
    raw = {
        name: (kind, [Sweep(GRID, 0.05 + 1.6j * s.gamma, name=s.name) for s in sweeps])
        for name, (kind, sweeps) in readings().items()
    }
    assert verify_standards(raw, state="raw") == ()
    with pytest.raises(PhysicsError, match="read the same"):
        verify_standards(readings(kinds=("open", "open", "open")), state="raw")


def test_no_readings():
    with pytest.raises(PhysicsError, match="has no readings"):
        verify_standards({"open": ("open", [])})


def test_phase_at_zero():
    assert phase_at_zero(GRID, part("open", GRID, delay=100e-12)) == pytest.approx(0, abs=3)
    assert abs(phase_at_zero(GRID, part("short", GRID, delay=100e-12))) == pytest.approx(180, abs=3)
    # Half a turn and more from point to point cannot be followed; a sweep far above zero tells nothing.
    assert phase_at_zero(GRID, part("open", GRID, delay=7e-9)) is None
    assert phase_at_zero(GRID + 30e9, part("open", GRID + 30e9)) is None


@pytest.mark.skipif(not SHARED.is_dir(), reason="the measured readings are not beside the project")
def test_measured_readings_pass():
    folder = SHARED / "sma-male"
    assert (
        verify_standards({k: (k, [read_reading(folder / f"{k}.s1p")]) for k in ("open", "short", "load")})
        == ()
    )
    raw = {
        name: (kind, [read_reading(SHARED / "switched" / f"{name}-{i}.s1p") for i in range(1, 7)])
        for name, kind in (("open", "open"), ("short", "short"), ("match", "load"))
    }
    assert verify_standards(raw, state="raw") == ()
