"""Raw readings without a reference, from readings to kit: invented parts inside the model family."""

from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import FitError
from stdfit.base.records import Sweep
from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.data.bench_records import Bench, Given, StandardEntry
from stdfit.pipeline import characterise
from stdfit.pipeline.raw import eliminate
from stdfit.pipeline.raw.anchors import gather
from stdfit.uncertainty.connections import responses
from stdfit.validity.kit import curve
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit

FIVE = {
    "short": ("short", [0.0, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "open": ("open", [5.2, 1.4, 50.0, 38.0, 0.0, 120.0, 0.0]),
    "load": ("load", [5.4, 0.0, 50.0, 50.3, 20.0, 0.0]),
    "offset short 1": ("short", [33.3, 1.6, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "offset short 2": ("short", [66.7, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
}
HELD = {
    **{name: {"offset_delay_ps": (FIVE[name][1][0], None)} for name in FIVE if "short" in name},
    "load": {"resistance_ohm": (50.3, None)},
}
MEASURED = {
    **{name: {"offset_delay_ps": (FIVE[name][1][0], 0.1)} for name in FIVE if "short" in name},
    "load": {"resistance_ohm": (50.3, 0.02)},
}


@dataclass
class Parts:
    """Raw readings of parts of known truth; the fields are what differs.

    `wrong` adds an error to a part's true reflection, as a function of frequency; `off` moves single connections.
    """

    parts: dict = field(default_factory=lambda: dict(FIVE))
    given: dict = field(default_factory=lambda: MEASURED)
    lines_held: bool = False
    connections: int = 3
    shift_ps: float = 0.0
    noise: float = 1e-4
    points: int = 101
    within: float = 0.02
    wrong: dict = field(default_factory=dict)
    off: dict = field(default_factory=dict)
    seed: int = 0

    @property
    def frequency_hz(self):
        return np.linspace(50e6, 6e9, self.points)

    def truth(self, name, f):
        kind, values = self.parts[name]
        return reflection(kind, values, f, 50.0)[0] + self.wrong.get(name, np.zeros_like)(f)

    def bench(self):
        entries = []
        for name, (kind, _) in self.parts.items():
            given = dict(self.given.get(name, {}))
            if self.lines_held:
                given["offset_z0_ohm"] = (50.0, None)
            told = {key: Given(*value) for key, value in given.items()}
            entries.append(StandardEntry(name, kind, (), told))
        return Bench(Path("bench.toml"), "Parts", "SMA", 50.0, self.within, None, "raw", None, tuple(entries))

    def sweeps(self):
        rng, f = np.random.default_rng(self.seed), self.frequency_hz
        turn = np.exp(-4j * np.pi * f * 0.8e-9)
        match = 0.1 * np.exp(-4j * np.pi * f * 0.25e-9 - 1j)
        box = np.stack([0.05 * np.exp(-4j * np.pi * f * 0.4e-9), 0.9 * turn, match], axis=-1)
        sweeps = {}
        for name in self.parts:
            sweeps[name] = []
            for k in range(self.connections):
                seen = self.truth(name, f)
                moved = [0.0, self.shift_ps * rng.standard_normal(), 0.0]
                seen = seen + responses(seen, f, 50.0) @ moved + self.off.get((name, k), 0.0)
                noise = self.noise * (rng.standard_normal((f.size, 2)) @ [1.0, 1j])
                sweeps[name].append(Sweep(f, seen_raw(box, seen) + noise, 50.0, f"{name}-{k + 1}.s1p"))
        return sweeps

    def kit(self):
        return characterise(self.bench(), self.sweeps(), created="2000-01-01")

    def errors(self, kit):
        """Return the largest error of each standard, and the part of its curve that its bound covers."""
        found = {}
        for one in kit.definitions:
            f = np.linspace(50e6, 6e9, 60)
            gamma, bound = curve(kit, one, f)
            error = np.abs(gamma - self.truth(one.name, f))
            found[one.name] = (error.max(), np.mean(error <= bound))
        return found


@pytest.fixture(scope="module")
def scattered():
    """Five parts whose connections scatter, and their kit; to be looked at only."""
    parts = Parts(shift_ps=0.15, seed=4)
    return parts, parts.kit()


LOADS = {"near": [5.4, 0.0, 50.0, 50.3, 20.0, 0.0], "far": [60.0, 0.0, 50.0, 50.3, 60.0, 0.0]}


def exactly_known(load):
    """Parts whose lengths, lines and resistance are known exactly: noise alone is left, 1e-4 a reading."""
    return Parts({**FIVE, "load": ("load", LOADS[load])}, given=HELD, lines_held=True)


@pytest.mark.parametrize("load", LOADS)
def test_there_is_no_floor(load):
    """A thousandth is allowed. A load's small reflection turns with its delay: each turn has a minimum of its own."""
    parts = exactly_known(load)
    errors = parts.errors(parts.kit())
    assert set(errors) == set(FIVE)
    assert max(worst for worst, _ in errors.values()) < 1e-3


def test_one_start_does_not_find_every_load(monkeypatch):
    parts = exactly_known("far")
    monkeypatch.setattr(eliminate, "LOAD_DELAYS_PS", (0.0,))
    assert parts.errors(parts.kit())["load"][0] > 1e-3


def test_bounds_hold_and_say_what_they_are_of(scattered):
    parts, kit = scattered
    errors = parts.errors(kit)
    assert max(worst for worst, _ in errors.values()) < 0.02
    assert min(inside for _, inside in errors.values()) > 0.9
    names = {share.name.partition(" (")[0] for share in kit.shares}
    assert names == {"connections", "noise", "given values", "assumed values", "model errors"}
    assert {one.shape for one in kit.definitions} == {"constant+Z0", "even+Z0", "R+L+delay+Z0"}
    (line,) = kit.warnings
    assert line.startswith("the bounds rest on the given lengths and resistances")


def test_a_kit_file_of_it_reads_back(scattered):
    _, kit = scattered
    text = kit_text(kit)
    assert kit_text(parse_kit(text, Path("kit.toml"))) == text


def smooth_error(size):
    return lambda f: size * np.exp(2j * np.pi * f / 2.4e9) * np.minimum(f / 1e9, 1.0)


@pytest.fixture(scope="module")
def misfitting():
    """The kit of parts of which the open is wrong by 0.02."""
    return Parts(points=201, wrong={"open": smooth_error(0.02)}).kit()


def test_an_error_of_a_model_is_found_in_the_over_determination(misfitting):
    """Found within a factor of 2.5. Which standard it is cannot be told: no bound is without."""
    clean = Parts(points=201).kit()
    assert max(one.misfit.max() for one in clean.definitions) < 1e-3
    rms = {one.name: np.sqrt(np.mean(one.misfit**2)) for one in misfitting.definitions}
    assert 0.02 / 2.5 < rms["open"] < 2.5 * 0.02
    assert min(rms.values()) > 0.02 / np.sqrt(5.0) / 2.0


def test_model_errors_count_once_in_a_parameter_and_in_a_curve(misfitting):
    """They are among the shares already: a parameter's u is what the shares give, not more."""
    total = sum(np.diagonal(share.covariances, axis1=1, axis2=2).max(axis=0) for share in misfitting.shares)
    (of_models,) = [one for one in misfitting.shares if one.name.startswith("model errors")]
    part = np.diagonal(of_models.covariances, axis1=1, axis2=2).max(axis=0) / total
    most = int(np.argmax(part))
    assert part[most] > 0.1
    standard, _, name = misfitting.order[most].partition(".")
    u = next(p.u for p in misfitting.definition(standard).parameters if p.name == name)
    assert u**2 <= total[most] * (1.0 + 1e-9)


def resonance(f):
    return 0.3 / (1.0 + 40j * (f / 5.4e9 - 5.4e9 / f))


def test_a_resonance_at_the_top_is_left_out_of_the_range():
    kit = Parts(points=201, shift_ps=0.05, within=0.03, wrong={"open": resonance}).kit()
    assert all(one.fit_top_hz < 5.3e9 for one in kit.definitions)
    assert 2e9 < kit.limit.limit_hz < 5.1e9


def test_what_lies_beyond_the_range_is_seen():
    """A fit to less than half of the sweep leaves a resonance of 0.3 beyond it: found, at the standard that has it."""
    parts = Parts(points=201, shift_ps=0.05, wrong={"open": resonance})
    gathered = gather(parts.bench(), parts.sweeps())
    short = eliminate.eliminate(gathered, 2.7e9, eliminate.eliminate(gathered))
    peak = int(np.argmin(np.abs(gathered.frequency_hz[short.points] - 5.4e9)))
    assert short.misfits[1, peak] > 0.2
    assert short.errors[peak] > 0.1


def test_one_connection_that_is_off_is_left_out_and_named():
    parts = Parts(connections=5, shift_ps=0.1, off={("load", 2): 0.05})
    kit = parts.kit()
    line = kit.warnings[0]
    assert line.startswith("load-3.s1p: this connection lies 0.05")
    assert kit.definition("load").connections == 4
    assert kit.definition("open").connections == 5
    assert parts.errors(kit)["load"][0] < 0.01


def test_scatter_that_had_to_be_assumed_is_told():
    kit = Parts(connections=1).kit()
    assert any("one connection of each standard says nothing" in line for line in kit.warnings)


def test_a_band_that_is_asked_for():
    parts = Parts()
    kit = characterise(replace(parts.bench(), highest_hz=3e9), parts.sweeps(), created="2000-01-01")
    assert all(one.read_top_hz <= 3e9 for one in kit.definitions)


@pytest.mark.parametrize(
    ("length_ps", "line"),
    [(67.7, "cannot all be as sure as stated"), (76.7, "contradict each other by about")],
)
def test_a_wrong_length_is_told(length_ps, line):
    """By 1 ps, ten of its standard uncertainties, it pulls others along; by 10 ps nothing fits."""
    given = {**MEASURED, "offset short 2": {"offset_delay_ps": (length_ps, 0.1)}}
    assert any(line in warning for warning in Parts(given=given).kit().warnings)


def test_a_poor_length_is_told_with_its_figure():
    poor = {name: {"offset_delay_ps": (FIVE[name][1][0], 2.0)} for name in FIVE if "short" in name}
    kit = Parts(given={**MEASURED, **poor}).kit()
    assert any("a common shift of the plane is fixed to ± 1.2 ps only" in line for line in kit.warnings)


def test_lines_that_are_shared_are_one_line():
    parts = Parts()
    bench = parts.bench()
    entries = tuple(
        replace(one, same_offset_as="open") if one.name == "load" else one for one in bench.standards
    )
    kit = characterise(replace(bench, standards=entries), parts.sweeps(), created="2000-01-01")
    delays = [kit.definition(name).parameters[0] for name in ("open", "load")]
    assert delays[0].of == delays[1].of == "open.offset_delay_ps"


def lengths(**changed):
    """Return what was measured, with other lengths in ps."""
    given = {name: dict(evidence) for name, evidence in MEASURED.items()}
    for name, value in changed.items():
        given[name.replace("_", " ")]["offset_delay_ps"] = (value, 0.1)
    return given


def test_lengths_in_the_wrong_unit_are_told_and_are_no_fault_of_the_program():
    """10 mm and 20 mm typed as ps."""
    parts = Parts(given=lengths(offset_short_1=10.0, offset_short_2=20.0))
    try:
        said = " ".join(parts.kit().warnings)
    except FitError as fault:
        said = str(fault)
    assert "length" in said
    assert "one way" in said
