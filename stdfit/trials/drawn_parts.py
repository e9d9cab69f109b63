"""Parts made to a drawing: their truth lies within its tolerances, and its physics is not that of the evidence."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.base.arrays import frozen_complex
from stdfit.data.drawing import parse_drawing
from stdfit.data.drawing_records import Drawing
from stdfit.trials.analyser import draw_residuals, imperfect_correction
from stdfit.trials.bench import Drawn, SimulatedBench
from stdfit.trials.elements import ChipPairEnd, End, LineSection, PinEnd, PlateEnd
from stdfit.trials.families import draw_plain
from stdfit.trials.parts import Part, reflection
from stdfit.trials.scenario import KINDS, Scenario
from stdfit.trials.session import connect, draw_connections, draw_drift, draw_noise

DRAWING_NAME = "parts.drawing.toml"
LIGHT_MM_PER_PS = 0.299792458
AIR = 1.000635

OPEN_RATIOS = (2.0, 2.3023, 3.0, 4.0)
OPEN_FF_PER_CM = (43.363, 36.242, 26.720, 19.830)
"""Capacitance of a shielded open per outer circumference, in vacuum at low frequency, over the ratio of diameters.

2.3023 (50 Ω): P. I. Somlo, "The discontinuity capacitance and the effective position of a shielded open circuit in a
coaxial line", Proc. IREE Australia 28(1), 1967, 7–9 (published, quoted second-hand). The others: derived once,
elsewhere, by matching of TM0n modes."""

RISE = 1.49
"""C(f) = C/(1 − (f/fs)²) with fs that many times the cut-off of TM01 in the pipe (derived; 0.4 % of C at 6 GHz)."""

EDGE = 0.02
"""Standard deviation of C by the edge of the pin."""


@dataclass(frozen=True, slots=True, eq=False)
class DrawnBench:
    """A simulated bench beside the drawing of its parts.

    Attributes
    ----------
    simulated : SimulatedBench
    text : str
        The drawing file: nominal dimensions with their tolerances, as the maker wrote them down.
    open_ff, delays_ps : float, dict of float
        True capacitance of the open at low frequency, and true delay of each part.
    """

    simulated: SimulatedBench
    text: str
    open_ff: float
    delays_ps: dict[str, float]

    @property
    def drawing(self) -> Drawing:
        """What the drawing file says."""
        return parse_drawing(self.text, Path(DRAWING_NAME))


@dataclass(frozen=True, slots=True)
class Making:
    """What is written down of a part, and what it really is; in mm."""

    nominal: tuple[float, float, float]
    tolerance: tuple[float, float, float]
    true: tuple[float, float, float]


def open_capacitance_ff(inner_mm: float, outer_mm: float) -> float:
    """Return the capacitance of a shielded open in air, interpolated between published ratios.

    A cubic in ln(D/d) through the logarithms of the four published values.
    """
    cubic = np.polyfit(np.log(OPEN_RATIOS), np.log(OPEN_FF_PER_CM), 3)
    per_cm = np.exp(np.polyval(cubic, np.log(outer_mm / inner_mm)))
    return float(per_cm * AIR * np.pi * outer_mm / 10.0)


def draw_drawn_bench(rng: np.random.Generator, *, longer_mm: float = 0.0) -> DrawnBench:
    """Draw three parts with their drawing, and a session of readings to 6 GHz.

    Parameters
    ----------
    rng : numpy Generator
    longer_mm : float
        By how much the open is longer than its tolerance allows: a mistake.
    """
    scenario = draw_plain(
        rng,
        connector="3.5 mm",
        open_kind="shielded",
        body="own",
        given_resistance_u_ohm=None,
        given_delay_u_ps=None,
    )
    bore, ratio = rng.uniform(3.0, 7.0), rng.uniform(2.1, 2.6)
    made = {kind: _make(bore, bore / ratio, rng) for kind in KINDS}
    siemens = rng.uniform(0.8e7, 4e7)
    parts, open_ff, delays = {}, 0.0, {}
    for kind in KINDS:
        length, inner, outer = made[kind].true
        length += longer_mm if kind == "open" else 0.0
        line = _line(length, inner, outer, siemens, rng)
        end: End
        if kind == "open":
            open_ff = open_capacitance_ff(inner, outer) * (1.0 + EDGE * rng.standard_normal())
            cut_off = 2.404826 * LIGHT_MM_PER_PS * 1e12 / (np.pi * outer)
            end = PinEnd(open_ff * 1e-15, RISE * cut_off)
        elif kind == "short":
            skin = _surface_ohm(siemens) / (2.0 * np.pi) * np.log(outer / inner)
            end = PlateEnd(float(abs(0.5e-12 * rng.standard_normal())), float(skin))
        else:
            first, second = (100.0 * (1.0 + 0.01 * rng.uniform(-1.0, 1.0, 2))).tolist()
            henry, farad = rng.uniform(0.3e-9, 0.9e-9, 2).tolist(), rng.uniform(5e-15, 25e-15, 2).tolist()
            end = ChipPairEnd((first, second), tuple(henry), tuple(farad), rng.uniform(20e-15, 60e-15))
        delays[kind] = 1e12 * line.delay_s
        parts[kind] = Part(kind, scenario.reference_ohm, (line,), end)
    return DrawnBench(_read(scenario, parts, rng), _text(made, siemens), open_ff, delays)


def _make(outer_mm: float, inner_mm: float, rng: np.random.Generator) -> Making:
    """Draw a part's dimensions; each lies anywhere within its limits."""
    nominal = (round(rng.uniform(3.0, 15.0), 2), round(inner_mm, 3), round(outer_mm, 3))
    tolerance = (float(rng.choice([0.02, 0.05, 0.1])), float(rng.choice([0.01, 0.02])), 0.02)
    offs = rng.uniform(-1.0, 1.0, 3)
    length, inner, outer = (value + t * off for value, t, off in zip(nominal, tolerance, offs, strict=True))
    return Making(nominal, tolerance, (float(length), float(inner), float(outer)))


def _surface_ohm(siemens_per_m: float) -> float:
    """Return the surface resistance at 1 GHz."""
    return float(np.sqrt(np.pi * 1e9 * 4e-7 * np.pi / siemens_per_m))


def _line(
    length_mm: float, inner_mm: float, outer_mm: float, siemens: float, rng: np.random.Generator
) -> LineSection:
    """Return the line with a loss that the surface makes more or less than the metal's own."""
    z0 = 59.9584916 / np.sqrt(AIR) * np.log(outer_mm / inner_mm)
    metres = 1e-3 * np.array([inner_mm, outer_mm])
    loss = _surface_ohm(siemens) / np.pi * (1.0 / metres).sum() * 2.99792458e8 / np.sqrt(AIR)
    loss *= max(1.0 + 0.5 * rng.standard_normal(), 0.2)
    delay = length_mm * np.sqrt(AIR) / LIGHT_MM_PER_PS * 1e-12
    return LineSection(float(z0), float(delay), float(loss))


def _text(made: dict[str, Making], siemens: float) -> str:
    """Return the drawing file."""
    ends = {
        "open": 'form = "shielded"',
        "short": 'form = "flat"',
        "load": 'form = "chip"\nsize = "0603"\ncount = 2\nresistance_ohm = { value = 100.0, tolerance = 1.0 }',
    }
    lines = ['format = "stdfit-drawing/1"', 'name = "Parts of a lathe (simulated, invented data)"']
    for kind, one in made.items():
        lines += ["", "[[part]]", f'name = "{kind}"', f'kind = "{kind}"', f"conductor = {siemens!r}"]
        lines.append("[[part.section]]")
        for key, value, tolerance in zip(
            ("length_mm", "inner_mm", "outer_mm"), one.nominal, one.tolerance, strict=True
        ):
            lines.append(f"{key} = {{ value = {value!r}, tolerance = {tolerance!r} }}")
        lines += ["[part.end]", ends[kind]]
    return "\n".join(lines) + "\n"


def _read(scenario: Scenario, parts: dict[str, Part], rng: np.random.Generator) -> SimulatedBench:
    """Draw a session with these parts."""
    f = scenario.frequency_hz
    truth = {name: frozen_complex(reflection(part, f)) for name, part in parts.items()}
    residuals = draw_residuals(
        scenario.residual,
        f,
        rng,
        kind=scenario.residual_kind,
        correlation=scenario.correlation,
        scale=scenario.residual_scale,
    )
    drift = draw_drift(scenario, rng)
    connections = {name: draw_connections(scenario, name, rng) for name in KINDS}
    readings = {}
    for name in KINDS:
        seen = connect(truth[name], f, connections[name], scenario.reference_ohm)
        shown = imperfect_correction(seen * drift[name], residuals)
        readings[name] = frozen_complex(shown + draw_noise(shown, scenario, rng))
    return SimulatedBench(
        frequency_hz=f,
        kinds={kind: kind for kind in KINDS},
        parts=parts,
        truth=truth,
        readings=readings,
        given={},
        same_offset_as={},
        residual=scenario.residual,
        scenario=scenario,
        drawn=Drawn(residuals, connections, (), None),
    )
