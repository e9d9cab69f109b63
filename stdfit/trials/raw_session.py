"""One session of raw readings: the standards of a kit as references, and others beside them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex
from stdfit.base.records import Sweep
from stdfit.data.bench_records import Bench, StandardEntry
from stdfit.pipeline import Prepared, choose_all, kit_of, prepare, settle
from stdfit.pipeline.raw.referenced import prepare_referenced
from stdfit.trials.analyser import Residuals, StatedDecibels, draw_residuals, imperfect_correction
from stdfit.trials.bench import Drawn, SimulatedBench, draw_bench, draw_evidence, draw_standards
from stdfit.trials.parts import Part, reflection
from stdfit.trials.scenario import KINDS, Scenario
from stdfit.trials.score import bench_of
from stdfit.trials.session import connect, draw_connections, draw_noise
from stdfit.validity.ancestry import Origin

RAW = StatedDecibels(
    frequency_hz=np.array([1e9]),
    directivity_db=np.array([25.0]),
    source_match_db=np.array([20.0]),
    reflection_tracking_db=np.array([1.0]),
)
"""Errors of an analyser without any correction (common practice, no source)."""

CABLE_S = (0.2e-9, 4e-9)
"""Range of the one-way delay between analyser and reference plane."""

KIT_PATH = Path("reference.toml")


@dataclass(frozen=True, slots=True, eq=False)
class RawSession:
    """Raw readings with the truth beside them.

    Attributes
    ----------
    bench : Bench
        References first, named "known open" and so on, with the set where there is more than one.
    sweeps : dict of list of Sweep
    origin : Origin
        The kit of the references, with a mark in place of a file's SHA-256.
    simulated : SimulatedBench
        The other standards: truth, readings, evidence.
    true_references : dict of Part
        The standards of the kit, by kind.
    """

    bench: Bench
    sweeps: dict[str, list[Sweep]]
    origin: Origin
    simulated: SimulatedBench
    true_references: dict[str, Part]

    def prepared(self, within: float = 0.02) -> Prepared:
        """Return the session, corrected with its references, for a tolerance."""
        return prepare_referenced(replace(self.bench, within=within), self.sweeps, {KIT_PATH: self.origin})


def draw_raw_session(
    scenario: Scenario, rng: np.random.Generator, sets: Sequence[str] = ("before", "after")
) -> RawSession:
    """Draw a kit that was characterised earlier, new standards, and a session in which both are read raw.

    The kit is fitted to corrected readings that are drawn by the same scenario without drift, so that its errors are
    those of a real kit. Of the cable's drift a random walk is drawn over all readings: the first set, the new standards
    in the order in which they stand, the second set.

    Parameters
    ----------
    scenario : Scenario
        Of the new standards; its residuals are those under which the references were characterised.
    rng : numpy Generator
    sets : sequence of str
        Names of the sets of reference readings: one before, or one before and one after the others.
    """
    made = draw_bench(replace(scenario, drift_deg=0.0, bad_connection=None, glitches=0), rng)
    prepared = prepare(*bench_of(made))
    origin = Origin(kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01"), "0" * 64)
    parts, resonance = draw_standards(scenario, rng)
    given = draw_evidence(scenario, parts, rng)
    f, counts = scenario.frequency_hz, scenario.counts()

    known = [_known(kind, name) for name in sets for kind in KINDS]
    order = [(one.name, one.kind, made.parts[one.kind]) for one in known[: len(KINDS)]]
    order += [(kind, kind, parts[kind]) for kind in KINDS]
    order += [(one.name, one.kind, made.parts[one.kind]) for one in known[len(KINDS) :]]
    errors = draw_residuals(RAW, f, rng)
    cable = np.exp(-4j * np.pi * f * rng.uniform(*CABLE_S))
    walk = _drift(scenario, sum(counts[kind] for _, kind, _ in order), rng)
    readings, connections = {}, {}
    for name, kind, part in order:
        connections[name] = draw_connections(scenario, kind, rng)
        seen = connect(reflection(part, f), f, connections[name], scenario.reference_ohm)
        states, walk = walk[: counts[kind]], walk[counts[kind] :]
        shown = seen_raw_through(seen * np.exp(np.outer(states, f / f[-1])), errors, cable)
        readings[name] = frozen_complex(shown + draw_noise(shown, scenario, rng))

    shared = {"open": "short", "load": "short"} if scenario.body == "shared" else {}
    simulated = SimulatedBench(
        frequency_hz=f,
        kinds={kind: kind for kind in KINDS},
        parts=parts,
        truth={kind: frozen_complex(reflection(parts[kind], f)) for kind in KINDS},
        readings={kind: readings[kind] for kind in KINDS},
        given=given,
        same_offset_as=shared,
        residual=scenario.residual,
        scenario=scenario,
        drawn=Drawn(errors, {kind: connections[kind] for kind in KINDS}, (), resonance),
    )
    bench, sweeps = bench_of(simulated)
    for entry in known:
        sweeps[entry.name] = [
            Sweep(f, reading, scenario.reference_ohm, f"{entry.name}-{k + 1}")
            for k, reading in enumerate(readings[entry.name])
        ]
    whole = replace(bench, state="raw", residual=None, standards=(*known, *bench.standards))
    return RawSession(whole, sweeps, origin, simulated, made.parts)


def _known(kind: str, reading_set: str) -> StandardEntry:
    """Return the entry of a reference in one set; without sets the name is empty."""
    name = f"{reading_set} known {kind}".strip()
    return StandardEntry(name, kind, (), from_kit=KIT_PATH, standard=kind, reading_set=reading_set or None)


def seen_raw_through(gamma: ComplexArray, errors: Residuals, cable: ComplexArray) -> ComplexArray:
    """Return m = D + C·(1 + T)·Γ/(1 − M·Γ): the three terms, with the cable's turn on all that comes back.

    Parameters
    ----------
    gamma : complex array of shape (K, n)
    errors : Residuals
        D, T, M of an analyser without correction.
    cable : complex array of shape (n,)
    """
    return np.asarray(errors.directivity + cable * (imperfect_correction(gamma, errors) - errors.directivity))


def _drift(scenario: Scenario, count: int, rng: np.random.Generator) -> ComplexArray:
    """Draw the cable's state at every reading, as `session.draw_drift` does for a session without references."""
    step = np.radians(scenario.drift_deg) / np.sqrt(count)
    size: FloatArray = rng.standard_normal((count, 2))
    return np.cumsum(step * (size @ np.array([0.1, 1j])))
