"""Standards as a workshop makes them: drawn at random, evaluated at any frequency."""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import RequestError
from stdfit.trials.elements import (
    ChipPairEnd,
    Element,
    End,
    LineSection,
    PinEnd,
    PlateEnd,
    Resonator,
    StepCapacitance,
)
from stdfit.trials.scenario import Scenario, Workmanship, workmanship

LOAD_TRIES = 200


@dataclass(frozen=True, slots=True)
class Part:
    """One standard: pieces from the reference plane inwards, and what closes it.

    Attributes
    ----------
    kind : str
        "open", "short" or "load".
    reference_ohm : float
        Reference impedance of its reflection coefficient, in ohms.
    elements : tuple of Element
        From the reference plane to the end.
    end : End
        What closes it.
    """

    kind: str
    reference_ohm: float
    elements: tuple[Element, ...]
    end: End

    @property
    def delay_s(self) -> float:
        """One-way delay of all line sections, in seconds: what a ruler tells."""
        return sum(piece.delay_s for piece in self.elements if isinstance(piece, LineSection))


def reflection(part: Part, frequency_hz: npt.ArrayLike) -> ComplexArray:
    """Return the true reflection coefficient, Γ = (V − Zr I)/(V + Zr I).

    Parameters
    ----------
    part : Part
        The standard.
    frequency_hz : array of shape (n,)
        In hertz, zero allowed.

    Returns
    -------
    complex array of shape (n,)
    """
    frequency = np.atleast_1d(np.asarray(frequency_hz, dtype=np.float64))
    pair = part.end.pair(frequency)
    for piece in reversed(part.elements):
        pair = piece.carry(pair, frequency)
    voltage, current = pair
    gamma: ComplexArray = (voltage - part.reference_ohm * current) / (voltage + part.reference_ohm * current)
    return gamma


def draw_body(scenario: Scenario, rng: np.random.Generator) -> tuple[Element, ...]:
    """Draw the line between the connector's plane and the end: sections with steps of impedance between them.

    Parameters
    ----------
    scenario : Scenario
        Says how many sections, how well they are made, and the total delay.
    rng : numpy Generator
        Source of all chance.
    """
    work = workmanship(scenario.connector)
    low, high = work.delay_ps if scenario.offset_delay_ps is None else scenario.offset_delay_ps
    delay_s = rng.uniform(low, high) * 1e-12
    count = int(rng.integers(1, 4)) if scenario.sections is None else scenario.sections
    shares = rng.dirichlet(np.full(count, 3.0))
    scatter, loss = rng.uniform(*work.z0_scatter_ohm), rng.uniform(*work.loss_gohm_per_s)
    scatter = scatter if scenario.z0_scatter_ohm is None else scenario.z0_scatter_ohm
    loss = loss if scenario.loss_gohm_per_s is None else scenario.loss_gohm_per_s
    tangent = rng.uniform(*work.loss_tangent)
    roughness = rng.uniform(0.0, 0.5e-6)
    pieces: list[Element] = []
    for share in shares:
        pieces.append(StepCapacitance(rng.uniform(0.0, 8e-15) * work.size))
        z0 = scenario.reference_ohm + scatter * rng.standard_normal()
        pieces.append(LineSection(z0, delay_s * share, loss * 1e9, tangent, roughness))
    return tuple(pieces)


def draw_end(scenario: Scenario, kind: str, rng: np.random.Generator) -> End:
    """Draw what closes a standard of this kind."""
    work = workmanship(scenario.connector)
    if kind == "open":
        drop = rng.uniform(*scenario.radiation_drop) if scenario.open_kind == "radiating" else 0.0
        return PinEnd(
            capacitance_f=rng.uniform(*work.fringe_ff) * 1e-15,
            self_resonance_hz=rng.uniform(25e9, 60e9) / work.size,
            radiation_s=drop / (2 * scenario.reference_ohm),
        )
    if kind == "short":
        return PlateEnd(
            inductance_h=rng.uniform(0.0, 40e-12) * work.size,
            skin_ohm=rng.uniform(1e-3, 6e-3),
            contact_ohm=rng.uniform(0.0, 2e-3),
        )
    return draw_chips(scenario, work, rng)


def draw_chips(scenario: Scenario, work: Workmanship, rng: np.random.Generator) -> ChipPairEnd:
    """Draw two chip resistors of 2·Zr whose reflection at 6 GHz (scaled by size) lies in the asked range.

    A maker tries chips and pads until the load looks good; the same is done here, so that the residue of
    inductance and capacitance is not tied to one sign. When no try fits, the nearest is kept.
    """
    zr, size = scenario.reference_ohm, work.size
    low, high = scenario.load_reflection
    spot = np.array([6e9 / size])
    best, miss = None, np.inf
    for _ in range(LOAD_TRIES):
        dc = zr * rng.uniform(0.99, 1.02)
        split = rng.uniform(-0.01, 0.01)
        first = 2 * dc * (1 + split)
        second = 1 / (1 / dc - 1 / first)
        henry = rng.uniform(0.3e-9, 0.7e-9, 2) * size * zr / 50
        element = rng.uniform(5e-15, 25e-15, 2) * size * 50 / zr
        pad = rng.uniform(20e-15, 80e-15) * size * 50 / zr
        end = ChipPairEnd(
            (first, second),
            (float(henry[0]), float(henry[1])),
            (float(element[0]), float(element[1])),
            pad,
        )
        mismatch = float(np.abs(reflection(Part("load", zr, (), end), spot))[0])
        off = max(low - mismatch, mismatch - high, 0.0)
        if off < miss:
            best, miss = end, off
        if miss == 0.0:
            break
    assert best is not None  # the first try always beats infinity
    return best


def draw_part(
    scenario: Scenario,
    kind: str,
    rng: np.random.Generator,
    *,
    body: tuple[Element, ...] | None = None,
) -> Part:
    """Draw one standard.

    Parameters
    ----------
    scenario : Scenario
        How it is made.
    kind : str
        "open", "short" or "load".
    rng : numpy Generator
        Source of all chance.
    body : tuple of Element, optional
        The line, when it is shared with another standard; drawn when not given.

    Returns
    -------
    Part
    """
    elements = draw_body(scenario, rng) if body is None else body
    return Part(kind, scenario.reference_ohm, elements, draw_end(scenario, kind, rng))


def with_resonance(part: Part, frequency_hz: float, quality: float, peak: float) -> Part:
    """Return the part with a parasitic resonance at its connector that moves Γ by `peak` at the resonance.

    A series LC across the line where the voltage is the larger, a cavity behind a gap in series where the
    current is: with u = 1 ± Γ and a the normalised half strength times u, |ΔΓ| = |u a/(1 + a)|, solved for
    the strength. It grows steadily with the strength, because Re u > 0 on the chosen side.

    Parameters
    ----------
    part : Part
        The standard without it.
    frequency_hz : float
        Resonance frequency, in hertz.
    quality : float
        Unloaded quality factor.
    peak : float
        |ΔΓ| at the resonance.

    Returns
    -------
    Part

    Raises
    ------
    RequestError
        A peak that is not between 0 and 0.9.
    """
    if not 0 < peak <= 0.9:
        raise RequestError(f"a resonance cannot have a peak of {peak:g}", "ask for more than 0, at most 0.9")
    gamma = complex(reflection(part, [frequency_hz])[0])
    across = abs(1 + gamma) >= abs(1 - gamma)
    lever = 1 + gamma if across else 1 - gamma
    strengths = np.geomspace(1e-5, 1e2, 2000)
    a = strengths / 2 * lever
    strength = float(np.interp(peak, np.abs(lever * a / (1 + a)), strengths))
    zr = part.reference_ohm
    piece = Resonator(frequency_hz, quality, strength / zr if across else strength * zr, across)
    return replace(part, elements=(piece, *part.elements))
