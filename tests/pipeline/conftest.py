"""The demo's kind of bench, simulated with a number of seeds, and what its limits and its plan are."""

from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.data.bench import read_bench
from stdfit.pipeline import (
    choose_all,
    fit_bench,
    kit_of,
    prepare,
    prepare_bench,
    read_sweeps,
    settle,
    with_limits,
)
from stdfit.pipeline.plan import plan
from stdfit.trials import demo_scenario, draw_bench
from stdfit.trials.files import touchstone_text
from stdfit.trials.score import bench_of
from stdfit.writing.kit_file import kit_text

SEEDS = 6
"""The limit of a kit differs by a third of itself from one of these benches to the next: what a change does to it is
compared on the same six, whose parts and analyser's errors stay the same."""


def kit_from(prepared):
    return kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01")


def simulate(seed, **fields):
    """Prepare the demo's kind of bench, with some fields of the scenario changed."""
    scenario = replace(demo_scenario(), **fields)
    return prepare(*bench_of(draw_bench(scenario, np.random.default_rng([66, seed]))))


@pytest.fixture(scope="session")
def fitted():
    """Return a function that makes a kit of what is prepared."""
    return kit_from


@pytest.fixture(scope="session")
def limit_of():
    """Return a function that gives the limit in Hz of what is prepared."""
    return lambda prepared: kit_from(prepared).limit.limit_hz


@pytest.fixture(scope="session")
def simulated():
    """Return a function (seed, fields of the scenario) that prepares a simulated bench."""
    return simulate


@pytest.fixture(scope="session")
def benches():
    return [simulate(seed) for seed in range(SEEDS)]


@pytest.fixture(scope="session")
def measured_hz(benches, limit_of):
    return np.array([limit_of(one) for one in benches])


@pytest.fixture(scope="session")
def first(benches):
    """The plan of one bench."""
    told = []
    found = plan(benches[0], lambda done, total: told.append((done, total)))
    # The orders of the first fit, then the remedies.
    count = len(found.remedies)
    assert told[-count:] == [(k + 1, count) for k in range(count)]
    assert told[:-count] == [(k + 1, len(told) - count) for k in range(len(told) - count)]
    return found


NEW = {
    "open": ("open", [40.0, 1.2, 50.0, 30.0, 0.0, 200.0, 0.0]),
    "short": ("short", [33.0, 1.2, 50.0, 8.0, 0.0, 0.0, 0.0]),
    "load": ("load", [0.0, 0.0, 50.0, 50.4, 40.0, 0.0]),
}
"""Standards to be characterised, inside the model family: invented data."""

GRID_HZ = np.linspace(60e6, 5.9e9, 101)


def raw_box(f, turn=0.0):
    """Error terms of an analyser without correction: directivity −25 dB, source match −20 dB, a cable of 2 ns."""
    directivity = 0.056 * np.exp(-4j * np.pi * f * 0.4e-9 + 0.3j)
    match = 0.1 * np.exp(-4j * np.pi * f * 0.25e-9 - 1.0j)
    tracking = 0.9 * np.exp(-4j * np.pi * f * 2e-9 + 1j * turn * f / f[-1])
    return np.stack([directivity, tracking - directivity * match, match], axis=-1)


@dataclass
class RawBench:
    """Raw readings of references and of `NEW`, written as a user would have them; the arguments are what differs.

    `known` lists the references as (name, standard of the kit, set); `turn` gives the cable's phase for each set and,
    as the set "", for the new standards; `wrong` turns a reference's true reflection away from what its kit says.
    """

    folder: Path
    kit: object
    known: tuple = (("known open", "open", ""), ("known short", "short", ""), ("known load", "load", ""))
    new: dict = field(default_factory=lambda: dict(NEW))
    frequency_hz: np.ndarray = field(default_factory=lambda: GRID_HZ)
    connections: int = 3
    noise: float = 0.0
    shift_ps: float = 0.0
    turn: dict = field(default_factory=dict)
    wrong: dict = field(default_factory=dict)
    changed: dict = field(default_factory=dict)
    kit_name: str = "reference.toml"
    others: str = ""
    seed: int = 0

    def terms(self):
        """Return the error terms of the analyser while the new standards are read."""
        return raw_box(self.frequency_hz, self.turn.get("", 0.0))

    def truth(self, name):
        """Return the true reflection of a standard of this bench."""
        f = self.frequency_hz
        if name in self.new:
            kind, values = self.new[name]
            return reflection(kind, values, f, 50.0)[0]
        part = next(standard for own, standard, _ in self.known if own == name)
        definition = self.kit.definition(part)
        gamma = reflection(definition.kind, definition.values, f, 50.0)[0]
        return gamma + self.wrong.get(part, 0.0) * np.ones_like(gamma)

    def write(self):
        """Write kit, readings and bench file; return the bench file's path."""
        self.folder.mkdir(exist_ok=True)
        if self.kit is not None:
            # Kits that a test has changed get the limits that go with their bounds.
            (self.folder / self.kit_name).write_text(kit_text(with_limits(self.kit)), encoding="utf-8")
        rng, f = np.random.default_rng(self.seed), self.frequency_hz
        lines = [
            'format = "stdfit-bench/1"',
            'kit = { name = "Second set", connector = "SMA" }',
            'analyser = { state = "raw" }',
        ]
        entries = [(name, None, "") for name in self.new] + list(self.known)
        for name, standard, reading_set in entries:
            kind = self.new[name][0] if standard is None else self.kit.definition(standard).kind
            box = raw_box(f, self.turn.get(reading_set, 0.0))
            files = []
            for k in range(self.connections):
                seen = self.truth(name) * np.exp(-4e-12j * np.pi * f * self.shift_ps * rng.standard_normal())
                raw = seen_raw(box, seen)
                raw = raw + self.noise * (rng.standard_normal(f.size) + 1j * rng.standard_normal(f.size))
                # The same numbers twice would be a copied file.
                raw = raw + 1e-14 * k + self.changed.get((name, k), 0.0)
                files.append(f"{name}-{k + 1}.s1p")
                (self.folder / files[-1]).write_text(touchstone_text(f, raw, 50.0, name), encoding="utf-8")
            lines += ["[[standard]]", f'name = "{name}"', f'kind = "{kind}"', f"readings = {files}"]
            if standard is not None:
                lines += [f'from_kit = "{self.kit_name}"', f'standard = "{standard}"']
            if reading_set:
                lines.append(f'set = "{reading_set}"')
        path = self.folder / "bench.toml"
        path.write_text("\n".join(lines) + "\n" + self.others, encoding="utf-8")
        return path

    def prepared(self):
        bench = read_bench(self.write())
        return prepare_bench(bench, read_sweeps(bench))

    def fitted(self):
        return fit_bench(self.write(), created="2000-01-01")


def exactly(kit):
    """Return a kit whose definitions have no uncertainty at all."""
    definitions = tuple(
        replace(
            one,
            parameters=tuple(replace(p, u=0.0, low=p.value, high=p.value, of="") for p in one.parameters),
            misfit=np.zeros_like(one.misfit),
        )
        for one in kit.definitions
    )
    return replace(kit, definitions=definitions, order=(), shares=(), warnings=())


@pytest.fixture(scope="session")
def exact_kit(usual_kit):
    """A kit of an open, a short and a load that are known exactly."""
    return exactly(usual_kit)


@pytest.fixture
def raw_bench(tmp_path, usual_kit):
    """Return a function that makes a RawBench; its arguments are the fields that differ."""

    def make(folder="raw", **fields):
        return RawBench(tmp_path / folder, **{"kit": usual_kit, **fields})

    return make
