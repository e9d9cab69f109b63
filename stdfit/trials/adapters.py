"""Simulated adapters, and sessions in which standards are read through them."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.records import Sweep
from stdfit.data.bench_records import AdapterEntry, Bench, StandardEntry
from stdfit.pipeline import characterise
from stdfit.pipeline.adapters.determined import adapter_from
from stdfit.trials.analyser import draw_residuals, imperfect_correction
from stdfit.trials.bench import SimulatedBench, draw_bench
from stdfit.trials.elements import Element, LineSection, StepCapacitance
from stdfit.trials.families import demo_scenario
from stdfit.trials.scenario import Scenario
from stdfit.trials.score import bench_of, score
from stdfit.trials.session import Connections, connect, draw_connections, draw_noise
from stdfit.validity.adapter import Adapter
from stdfit.validity.ancestry import Origin
from stdfit.validity.kit import Kit, curve
from stdfit.writing.adapter_file import adapter_text

POINTS = 60
"""Points of each curve that are scored."""


@dataclass(frozen=True, slots=True, eq=False)
class AdapterTrial:
    """An adapter that was determined, and standards that were characterised with it, beside the truth.

    Attributes
    ----------
    adapter : Adapter
    s : complex array of shape (n, 3)
        Its true S11, S21, S22 at its frequencies.
    kit : Kit
        Of the standards.
    simulated : SimulatedBench
        The standards.
    """

    adapter: Adapter
    s: ComplexArray
    kit: Kit
    simulated: SimulatedBench

    @property
    def curves_inside(self) -> FloatArray:
        """Part of each standard's curve, over its fit range, that lies within its bound."""
        inside = []
        for one in self.kit.definitions:
            grid = np.linspace(one.fit_low_hz, one.fit_top_hz, POINTS)
            gamma, bound = curve(self.kit, one, grid)
            inside.append(np.mean(np.abs(gamma - self.simulated.truth_at(one.name, grid)) <= bound))
        return np.array(inside)

    @property
    def s_inside(self) -> FloatArray:
        """Part of the frequencies at which S11, S21, S22 lie within their bounds."""
        at = np.isin(self.adapter.frequency_hz, self.adapter.known_hz)
        return np.asarray((np.abs(self.adapter.s - self.s)[at] <= self.adapter.s_bounds).mean(axis=0))


def draw_adapter(rng: np.random.Generator, delay_s: float = 95e-12) -> tuple[Element, ...]:
    """Draw a barrel: two connectors and a body of unequal impedances, with a step of the field at each end.

    Parameters
    ----------
    rng : numpy Generator
    delay_s : float
        One way, without losses.
    """
    lengths = delay_s * np.array([0.2, 0.6, 0.2])
    return (
        StepCapacitance(1e-15 * float(rng.uniform(0.0, 15.0))),
        *(
            LineSection(float(50.0 + rng.normal()), float(length), 1e9 * float(rng.uniform(1.0, 3.0)), 3e-4)
            for length in lengths
        ),
        StepCapacitance(1e-15 * float(rng.uniform(0.0, 15.0))),
    )


def chain_of(elements: Sequence[Element], frequency_hz: FloatArray) -> ComplexArray:
    """Return how voltage and current at the near side follow from those at the far side, shape (n, 2, 2)."""
    one, nothing = np.ones(frequency_hz.size, dtype=complex), np.zeros(frequency_hz.size, dtype=complex)
    columns = []
    for pair in ((one, nothing), (nothing, one)):
        for element in reversed(elements):
            pair = element.carry(pair, frequency_hz)
        columns.append(np.stack(pair, axis=-1))
    return np.stack(columns, axis=-1)


def s_parameters(
    elements: Sequence[Element], frequency_hz: FloatArray, reference_ohm: float = 50.0
) -> ComplexArray:
    """Return S11, S21, S22 of a chain of elements, shape (n, 3).

    With A, B/Z, C·Z, D of the chain and Δ their sum: S11 = (A + B − C − D)/Δ, S21 = 2/Δ, S22 = (−A + B − C + D)/Δ
    (D. M. Pozar, *Microwave Engineering*, table of conversions; from memory).
    """
    chain = chain_of(elements, frequency_hz)
    a, d = chain[:, 0, 0], chain[:, 1, 1]
    b, c = chain[:, 0, 1] / reference_ohm, chain[:, 1, 0] * reference_ohm
    return np.stack([a + b - c - d, np.full_like(a, 2.0), -a + b - c + d], axis=-1) / (a + b + c + d)[:, None]


def through(
    elements: Sequence[Element], gamma: ComplexArray, frequency_hz: FloatArray, *, removed: bool = False
) -> ComplexArray:
    """Return reflections of shape (..., n) as they are seen through a chain.

    Parameters
    ----------
    elements : sequence of Element
    gamma : complex array of shape (..., n)
    frequency_hz : array of shape (n,)
    removed : bool
        The reflections are on the near side, and wanted as an analyser shows them that was calibrated at the far side.
    """
    chain = chain_of(elements, frequency_hz)
    if removed:
        chain = np.asarray(np.linalg.inv(chain), dtype=complex)
    wave = np.stack([1.0 + gamma, (1.0 - gamma) / 50.0], axis=-1)
    voltage, current = np.moveaxis((chain @ wave[..., None])[..., 0], -1, 0)
    return np.asarray((voltage - 50.0 * current) / (voltage + 50.0 * current))


def read_session(
    truths: Mapping[str, ComplexArray],
    elements: Sequence[Element],
    scenario: Scenario,
    rng: np.random.Generator,
    *,
    removed: bool = False,
) -> dict[str, ComplexArray]:
    """Return readings of one session, shape (K, n) for each standard.

    Standards are connected again for each reading. The adapter is connected to the analyser once: with the standards
    behind it, or, `removed`, when the analyser was calibrated at its far end.

    Parameters
    ----------
    truths : mapping of str to complex array of shape (n,)
    elements : sequence of Element
        The adapter.
    scenario : Scenario
    rng : numpy Generator
    removed : bool
    """
    f = scenario.frequency_hz
    residuals = draw_residuals(scenario.residual, f, rng, scale=scenario.residual_scale)
    at_port = draw_connections(replace(scenario, connections=1), "open", rng)
    readings = {}
    for name, truth in truths.items():
        seen = connect(truth, f, draw_connections(scenario, name, rng), scenario.reference_ohm)
        if removed:
            back = Connections(-at_port.shift_s, -at_port.series_ohm, -at_port.shunt_f)
            before = np.stack([connect(one, f, back, scenario.reference_ohm)[0] for one in seen])
            shown = through(elements, before, f, removed=True)
        else:
            behind = through(elements, seen, f)
            shown = np.stack([connect(one, f, at_port, scenario.reference_ohm)[0] for one in behind])
        shown = imperfect_correction(shown, residuals)
        readings[name] = shown + draw_noise(shown, scenario, rng)
    return readings


def draw_trial(folder: Path, rng: np.random.Generator, *, removed: bool = False) -> AdapterTrial:
    """Draw a reference kit, an adapter and standards, determine the adapter, and characterise the standards with it.

    Parameters
    ----------
    folder : path
        Where the adapter file is written.
    rng : numpy Generator
    removed : bool
        Whether the analyser is calibrated with the adapter, instead of the standards being read through it.
    """
    scenario = replace(demo_scenario(), bad_connection=None, glitches=0)
    reference, simulated = (draw_bench(scenario, rng) for _ in range(2))
    elements = draw_adapter(rng)
    kit, _ = score(reference)
    bench, _ = bench_of(reference)
    path = folder / "reference.toml"
    determining = replace(
        bench,
        standards=tuple(
            StandardEntry(name, kind, (), from_kit=path, standard=name, behind="barrel")
            for name, kind in reference.kinds.items()
        ),
        adapters=(AdapterEntry("barrel"),),
    )
    readings = read_session(reference.truth, elements, scenario, rng)
    adapter = adapter_from(
        determining,
        as_sweeps(readings, scenario),
        created="2000-01-01",
        origins={path: Origin(kit, "0" * 64)},
    )
    file = folder / "barrel.adapter.toml"
    file.write_text(adapter_text(adapter), encoding="utf-8")
    behind = read_session(simulated.truth, elements, scenario, rng, removed=removed)
    asked = replace(bench_of(simulated)[0], highest_hz=adapter.band[1])
    new = characterise(_with_adapter(asked, file, removed), as_sweeps(behind, scenario), created="2000-01-01")
    return AdapterTrial(adapter, s_parameters(elements, adapter.frequency_hz), new, simulated)


def _with_adapter(bench: Bench, file: Path, removed: bool) -> Bench:
    adapters = (AdapterEntry("barrel", file=file),)
    if removed:
        return replace(bench, adapters=adapters, calibrated_with="barrel")
    standards = tuple(replace(one, behind="barrel") for one in bench.standards)
    return replace(bench, adapters=adapters, standards=standards)


def as_sweeps(readings: Mapping[str, ComplexArray], scenario: Scenario) -> dict[str, list[Sweep]]:
    """Return readings of shape (K, n) for each standard as sweeps."""
    return {
        name: [
            Sweep(scenario.frequency_hz, one, scenario.reference_ohm, f"{name}-{k + 1}")
            for k, one in enumerate(own)
        ]
        for name, own in readings.items()
    }
