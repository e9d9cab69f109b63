"""Physical pieces of a home-made standard, as voltage and current carried from the end to the connector.

Every piece takes the pair (V, I) at its far side and gives the pair at its near side, so that an open (I = 0)
and a short (V = 0) need no special case, and frequency zero is allowed.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray

COPPER_SKIN_DEPTH_M = 2.0898e-6  # at 1 GHz; only the scale of the roughness correction
RADIATION_LEVELS_HZ = 18e9  # above this the f**4 law of a small aperture levels off

Pair = tuple[ComplexArray, ComplexArray]


class Element(Protocol):
    """A two-port that carries (V, I) from its far side to its near side."""

    def carry(self, pair: Pair, frequency_hz: FloatArray) -> Pair:
        """Return the pair at the near side."""


class End(Protocol):
    """What closes a standard: gives the pair (V, I) up to a common factor."""

    def pair(self, frequency_hz: FloatArray) -> Pair:
        """Return voltage and current at the end's terminals."""


@dataclass(frozen=True, slots=True)
class LineSection:
    """A piece of coaxial line with skin effect, rough conductors and a lossy dielectric.

    Series Z = jω Z0 τ + r τ √(f/1 GHz) (k + j), shunt Y = (jω + ω tan δ) τ / Z0, with the roughness factor
    k = 1 + (2/π) arctan(1.4 (h/δs)²), h the rms roughness and δs the skin depth.
    Source: S. Ramo, J. Whinnery, T. Van Duzer, "Fields and Waves in Communication Electronics", ch. 5;
    roughness: E. Hammerstad, O. Jensen, IEEE MTT-S Digest 1980, 407-409 (both from memory).

    Attributes
    ----------
    z0_ohm : float
        Impedance without losses, in ohms.
    delay_s : float
        One-way delay without losses, in seconds.
    loss_ohm_per_s : float
        Series resistance per second of delay at 1 GHz with smooth conductors.
    loss_tangent : float
        tan δ of the dielectric.
    roughness_m : float
        Rms roughness of the conductors, in metres.
    """

    z0_ohm: float
    delay_s: float
    loss_ohm_per_s: float = 0.0
    loss_tangent: float = 0.0
    roughness_m: float = 0.0

    def carry(self, pair: Pair, frequency_hz: FloatArray) -> Pair:
        """Return the pair at the near side."""
        voltage, current = pair
        omega = 2 * np.pi * frequency_hz
        ratio = frequency_hz / 1e9
        rough = 1 + 2 / np.pi * np.arctan(1.4 * (self.roughness_m / COPPER_SKIN_DEPTH_M) ** 2 * ratio)
        series = 1j * omega * self.z0_ohm * self.delay_s + (
            self.loss_ohm_per_s * self.delay_s * np.sqrt(ratio) * (rough + 1j)
        )
        shunt = (1j + self.loss_tangent) * omega * self.delay_s / self.z0_ohm
        theta = np.sqrt(series * shunt)
        # sinh(θ)/θ is 1 at f = 0, where the characteristic impedance itself would be 0/0.
        still = theta == 0
        shape = np.where(still, 1.0, np.sinh(theta) / np.where(still, 1.0, theta))
        cosh = np.cosh(theta)
        return voltage * cosh + current * series * shape, current * cosh + voltage * shunt * shape


@dataclass(frozen=True, slots=True)
class StepCapacitance:
    """The fringing field at a change of diameter: a capacitance across the line, in farads."""

    capacitance_f: float

    def carry(self, pair: Pair, frequency_hz: FloatArray) -> Pair:
        """Return the pair at the near side."""
        voltage, current = pair
        return voltage, current + 2j * np.pi * frequency_hz * self.capacitance_f * voltage


@dataclass(frozen=True, slots=True)
class Resonator:
    """A parasitic resonance: a series LC across the line, or a cavity behind a gap in series with it.

    Across: Y = y0 / (1 + jQ(f/f0 − f0/f)) with `strength` y0 in siemens;
    in series: Z = z0 / (1 + jQ(f/f0 − f0/f)) with `strength` z0 in ohms.
    Source: R. E. Collin, "Foundations for Microwave Engineering", ch. 7 (from memory).

    Attributes
    ----------
    frequency_hz : float
        Resonance frequency f0.
    quality : float
        Quality factor Q without the line's load.
    strength : float
        Conductance or resistance at resonance.
    across : bool
        True: across the line; False: in series.
    """

    frequency_hz: float
    quality: float
    strength: float
    across: bool

    def carry(self, pair: Pair, frequency_hz: FloatArray) -> Pair:
        """Return the pair at the near side."""
        voltage, current = pair
        ratio = frequency_hz / self.frequency_hz
        # s/(s + jQ(s² − 1)) is the same as 1/(1 + jQ(s − 1/s)), without the pole at s = 0.
        value = self.strength * ratio / (ratio + 1j * self.quality * (ratio**2 - 1))
        if self.across:
            return voltage, current + value * voltage
        return voltage + value * current, current


@dataclass(frozen=True, slots=True)
class PinEnd:
    """An open pin: fringing capacitance with the pin's inductance in series, and radiation.

    Y = jωC/(1 − (f/fs)²) + g (f/6 GHz)⁴/(1 + (f/18 GHz)⁴). The capacitance is even in frequency, as Foster's
    theorem asks of a lossless end (R. M. Foster, Bell Syst. Tech. J. 3, 1924, 259-267; from memory); the
    radiation of a small aperture grows with f⁴ (N. Marcuvitz, "Waveguide Handbook", 1951, sec. 4.16; from
    memory).

    Attributes
    ----------
    capacitance_f : float
        Fringing capacitance at low frequency, in farads.
    self_resonance_hz : float
        fs, far above the sweep.
    radiation_s : float
        g, radiation conductance at 6 GHz, in siemens; 0 for a shielded open.
    """

    capacitance_f: float
    self_resonance_hz: float
    radiation_s: float = 0.0

    def pair(self, frequency_hz: FloatArray) -> Pair:
        """Return voltage and current at the pin."""
        rise = 1 - (frequency_hz / self.self_resonance_hz) ** 2
        radiation = self.radiation_s * (frequency_hz / 6e9) ** 4
        radiation = radiation / (1 + (frequency_hz / RADIATION_LEVELS_HZ) ** 4)
        admittance = (2j * np.pi * frequency_hz * self.capacitance_f / rise + radiation).astype(np.complex128)
        one: ComplexArray = np.ones_like(admittance)
        return one, admittance


@dataclass(frozen=True, slots=True)
class PlateEnd:
    """A soldered plate or bridge: Z = R0 + (1+j) Rs √(f/1 GHz) + jωL.

    Attributes
    ----------
    inductance_h : float
        L in henries.
    skin_ohm : float
        Rs, surface resistance seen at 1 GHz, in ohms.
    contact_ohm : float
        R0, resistance at DC, in ohms.
    """

    inductance_h: float
    skin_ohm: float
    contact_ohm: float = 0.0

    def pair(self, frequency_hz: FloatArray) -> Pair:
        """Return voltage and current at the plate."""
        skin = (1 + 1j) * self.skin_ohm * np.sqrt(frequency_hz / 1e9)
        impedance = self.contact_ohm + skin + 2j * np.pi * frequency_hz * self.inductance_h
        return impedance, np.ones_like(impedance)


@dataclass(frozen=True, slots=True)
class ChipPairEnd:
    """Two chip resistors side by side on one pad: each jωL + R/(1 + jωRCe), both shunted by the pad.

    Attributes
    ----------
    resistance_ohm : tuple of two floats
        Values of the chips, in ohms.
    inductance_h : tuple of two floats
        Series inductance of each, in henries.
    element_f : tuple of two floats
        Capacitance along each element, in farads.
    pad_f : float
        Capacitance of the pad to ground, in farads.
    """

    resistance_ohm: tuple[float, float]
    inductance_h: tuple[float, float]
    element_f: tuple[float, float]
    pad_f: float

    @property
    def dc_resistance_ohm(self) -> float:
        """Resistance of the pair at DC, in ohms."""
        first, second = self.resistance_ohm
        return first * second / (first + second)

    def pair(self, frequency_hz: FloatArray) -> Pair:
        """Return voltage and current at the pad."""
        s: ComplexArray = np.multiply(2j * np.pi, frequency_hz, dtype=np.complex128)
        admittance: ComplexArray = s * self.pad_f
        for ohm, henry, farad in zip(self.resistance_ohm, self.inductance_h, self.element_f, strict=True):
            admittance = admittance + 1 / (s * henry + ohm / (1 + s * ohm * farad))
        one: ComplexArray = np.ones_like(admittance)
        return one, admittance
