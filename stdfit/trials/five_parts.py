"""A workshop without any reference: five parts, a ruler, a multimeter, and raw readings."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.records import Sweep
from stdfit.data.bench_records import Bench, Given, StandardEntry
from stdfit.pipeline import choose_all, kit_of, prepare, settle
from stdfit.pipeline.raw.unreferenced import eliminated
from stdfit.trials.analyser import draw_residuals
from stdfit.trials.bench import draw_bench, read_out
from stdfit.trials.elements import LineSection, PinEnd, PlateEnd
from stdfit.trials.families import demo_scenario
from stdfit.trials.parts import Part, draw_chips, reflection
from stdfit.trials.raw_session import CABLE_S, KIT_PATH, RAW, seen_raw_through
from stdfit.trials.scenario import Scenario, workmanship
from stdfit.trials.score import Score, bench_of, scores_of
from stdfit.trials.session import Connections, connect
from stdfit.uncertainty.budget import Share
from stdfit.validity.ancestry import Origin
from stdfit.validity.kit import Kit

REFERENCE_OHM = 50.0
LENGTHS_PS = {"short": 0.0, "offset short 1": 33.3, "offset short 2": 66.7}
NEAR_PS = 5.0
"""About how far behind the plane open and load begin; nobody measures it."""


@dataclass(frozen=True, slots=True)
class Workshop:
    """How well parts are made and measured; standard deviations.

    Attributes
    ----------
    plane_u_ps, length_u_ps, resistance_u_ohm : float
        What is known of the flush short's plane, the offset shorts' lengths, and the load's DC resistance.
    line_sd_ohm : float
        Scatter of the lines' impedances.
    loss_part : float
        Scatter of the lines' losses, as part of their mean.
    scatter_ps, scatter_ohm : float
        Of connections.
    connections : int
    noise : float
        Per component of a raw reading.
    top_hz : float
    points : int
    """

    plane_u_ps: float = 0.02
    length_u_ps: float = 0.1
    resistance_u_ohm: float = 0.02
    line_sd_ohm: float = 0.4
    loss_part: float = 0.1
    scatter_ps: float = 0.15
    scatter_ohm: float = 0.015
    connections: int = 5
    noise: float = 1e-4
    top_hz: float = 6e9
    points: int = 201


@dataclass(frozen=True, slots=True, eq=False)
class FiveParts:
    """Raw readings with the truth beside them.

    Attributes
    ----------
    bench : Bench
    sweeps : dict of list of Sweep
    parts : dict of Part
    origins : dict of Origin
        The kit of the known standard, where there is one, by the path under which the bench names it.
    """

    bench: Bench
    sweeps: dict[str, list[Sweep]]
    parts: dict[str, Part]
    origins: dict[Path, Origin]

    @property
    def frequency_hz(self) -> FloatArray:
        """Frequencies of the readings, shape (n,)."""
        return self.sweeps["short"][0].frequency_hz

    def truth_at(self, name: str, frequency_hz: npt.ArrayLike) -> ComplexArray:
        """Return the true Γ of a part."""
        return reflection(self.parts[name], frequency_hz)


def draw_five_parts(
    workshop: Workshop, rng: np.random.Generator, within: float = 0.02, *, known: str | None = None
) -> FiveParts:
    """Draw a flush short, an open, a load and two offset shorts, and raw readings of them.

    Parameters
    ----------
    workshop : Workshop
    rng : numpy Generator
    within : float
        Tolerance.
    known : str, optional
        Kind of a sixth part, from a kit that was characterised earlier like the demo's.
    """
    f = np.linspace(50e6, workshop.top_hz, workshop.points)
    parts = _parts(workshop, rng)
    origins = {}
    if known is not None:
        made = draw_bench(demo_scenario(), rng)
        prepared = prepare(*bench_of(made))
        kit = kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01")
        origins[KIT_PATH] = Origin(kit, "0" * 64)
        parts[f"known {known}"] = made.parts[known]
    errors = draw_residuals(RAW, f, rng)
    cable = np.exp(-4j * np.pi * f * rng.uniform(*CABLE_S))
    entries, sweeps = [], {}
    for name, part in parts.items():
        count = workshop.connections
        shift = 1e-12 * workshop.scatter_ps * rng.standard_normal(count)
        ohms = workshop.scatter_ohm * rng.standard_normal(count)
        seen = connect(reflection(part, f), f, Connections(shift, ohms, np.zeros(count)), REFERENCE_OHM)
        shown = seen_raw_through(seen, errors, cable)
        white = rng.standard_normal((2, *shown.shape))
        shown = shown + workshop.noise * (white[0] + 1j * white[1])
        sweeps[name] = [Sweep(f, row, REFERENCE_OHM, f"{name}-{k + 1}") for k, row in enumerate(shown)]
        if name.startswith("known "):
            entries.append(StandardEntry(name, part.kind, (), from_kit=KIT_PATH, standard=part.kind))
        else:
            entries.append(StandardEntry(name, part.kind, (), _evidence(name, part, workshop, rng)))
    bench = Bench(
        path=Path("bench.toml"),
        name="Five parts",
        connector="SMA",
        reference_ohm=REFERENCE_OHM,
        within=within,
        highest_hz=None,
        state="raw",
        residual=None,
        standards=tuple(entries),
    )
    return FiveParts(bench, sweeps, parts, origins)


def score_five_parts(simulated: FiveParts, within: float = 0.02) -> tuple[Kit, list[Score]]:
    """Characterise five parts without a reference and compare each that the kit holds with its truth."""
    kit, found = eliminated(
        simulated.bench, simulated.sweeps, created="2000-01-01", origins=simulated.origins
    )
    problem, solution = found.raw.problem, found.solution
    alone = Share("fit alone", np.inf, (solution.unscaled_covariance * solution.residual_variance)[None])
    return kit, scores_of(kit, problem, problem.expand(solution.values), alone, simulated, within)


def _parts(workshop: Workshop, rng: np.random.Generator) -> dict[str, Part]:
    """Draw the parts; lengths and impedances scatter about what they should be."""
    loss = rng.uniform(1e9, 2e9)

    def line(delay_ps: float, u_ps: float) -> LineSection:
        return LineSection(
            z0_ohm=REFERENCE_OHM + workshop.line_sd_ohm * rng.standard_normal(),
            delay_s=1e-12 * (delay_ps + u_ps * rng.standard_normal()),
            loss_ohm_per_s=loss * (1.0 + workshop.loss_part * rng.standard_normal()),
        )

    def plate() -> PlateEnd:
        return PlateEnd(rng.uniform(0.0, 0.5e-12), rng.uniform(0.5e-3, 3e-3), 0.0)

    scenario = Scenario(np.linspace(50e6, workshop.top_hz, 2), RAW, load_reflection=(0.01, 0.04))
    fringe = 1e-15 * rng.uniform(*workmanship("SMA").fringe_ff)
    pin = PinEnd(fringe, rng.uniform(25e9, 60e9), 0.0)
    chips = draw_chips(scenario, workmanship("SMA"), rng)
    parts = {
        "short": Part("short", REFERENCE_OHM, (line(0.0, workshop.plane_u_ps),), plate()),
        "open": Part("open", REFERENCE_OHM, (line(NEAR_PS, 1.0),), pin),
        "load": Part("load", REFERENCE_OHM, (line(NEAR_PS, 1.0),), chips),
    }
    for name in ("offset short 1", "offset short 2"):
        parts[name] = Part("short", REFERENCE_OHM, (line(LENGTHS_PS[name], workshop.length_u_ps),), plate())
    return parts


def _evidence(name: str, part: Part, workshop: Workshop, rng: np.random.Generator) -> dict[str, Given]:
    """Return what ruler and multimeter say; a length is the nominal one, about which the true one scatters."""
    if name in LENGTHS_PS:
        u = workshop.plane_u_ps if name == "short" else workshop.length_u_ps
        return {"offset_delay_ps": Given(LENGTHS_PS[name], u or None)}
    if part.kind == "load":
        gamma = float(reflection(part, [0.0])[0].real)
        told = read_out(REFERENCE_OHM * (1 + gamma) / (1 - gamma), workshop.resistance_u_ohm, rng)
        return {"resistance_ohm": Given(told.value, told.u or None)}
    return {}
