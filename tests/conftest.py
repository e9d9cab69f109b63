"""Simulated benches whose truth lies inside the model family: invented data, made from the formulas."""

import os
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.data.bench_records import Bench, Given, StandardEntry, StatedResidual
from stdfit.pipeline import characterise


def pytest_configure():
    """Keep the workers to one core each: with threads of the libraries beside them everything takes twice as long."""
    for library in ("OPENBLAS", "OMP", "MKL"):
        os.environ.setdefault(f"{library}_NUM_THREADS", "1")


@dataclass(frozen=True)
class Workshop:
    """What is measured in a test; `readings` draws it with a seed, `kit` characterises it."""

    values: dict
    frequency_hz: np.ndarray = field(default_factory=lambda: np.linspace(50e6, 6e9, 101))
    connections: int = 3
    noise: float = 1e-4
    shift_ps: float = 0.1
    residual_db: float | None = 60.0
    reference_ohm: float = 50.0
    connector: str = "SMA"
    within: float = 0.02
    given: dict = field(default_factory=dict)
    same_offset_as: dict = field(default_factory=dict)
    polynomial: str = "chosen"
    changed: dict = field(default_factory=dict)
    seed: int = 0

    def truth(self, name, frequency_hz):
        kind, values = self.values[name]
        gamma, _ = reflection(kind, values, np.maximum(frequency_hz, 1.0), self.reference_ohm)
        return gamma * self.changed.get(name, np.ones_like)(frequency_hz)

    def bench(self):
        ratio = 0.0 if self.residual_db is None else 10 ** (-self.residual_db / 20)
        residual = StatedResidual([1e9], [ratio], [ratio], [ratio])
        entries = tuple(
            StandardEntry(
                name,
                kind,
                (),
                {key: Given(*value) for key, value in self.given.get(name, {}).items()},
                self.same_offset_as.get(name),
                polynomial="chosen" if kind == "load" else self.polynomial,
            )
            for name, (kind, _) in self.values.items()
        )
        return Bench(
            path=Path("bench.toml"),
            name="Simulated bench",
            connector=self.connector,
            reference_ohm=self.reference_ohm,
            within=self.within,
            highest_hz=None,
            state="corrected",
            residual=None if self.residual_db is None else residual,
            standards=entries,
        )

    def readings(self):
        rng = np.random.default_rng(self.seed)
        f = self.frequency_hz
        sweeps = {}
        for name in self.values:
            sweeps[name] = []
            for k in range(self.connections):
                turn = np.exp(-4e-12j * np.pi * f * self.shift_ps * rng.standard_normal())
                noise = self.noise * (rng.standard_normal(f.size) + 1j * rng.standard_normal(f.size))
                gamma = self.truth(name, f) * turn + noise
                sweeps[name].append(Sweep(f, gamma, self.reference_ohm, f"{name}-{k + 1}"))
        return sweeps

    def kit(self):
        return characterise(self.bench(), self.readings(), created="2000-01-01")


def values_at(reference_ohm):
    """An open and a short behind one body of 25 ps, and a load that is 0.6 % high."""
    return {
        "open": ("open", [25.0, 1.0, reference_ohm, 45.0, 0.0, 300.0, 0.0]),
        "short": ("short", [25.0, 1.0, reference_ohm, 5.0, 0.0, 0.0, 0.0]),
        "load": ("load", [0.0, 0.0, reference_ohm, 1.006 * reference_ohm, 20.0, 0.0]),
    }


@pytest.fixture(scope="session")
def workshop():
    """Return a function that makes a Workshop; its arguments are the fields that differ."""

    def make(**fields):
        return Workshop(**{"values": values_at(fields.get("reference_ohm", 50.0)), **fields})

    return make


@pytest.fixture(scope="session")
def usual_kit(workshop):
    """The kit of `workshop()`, for tests that only look at it."""
    return workshop().kit()
