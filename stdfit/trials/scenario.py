"""What kind of bench is to be simulated: connector, sweep, session and evidence."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import RequestError
from stdfit.trials.analyser import Correlation, ResidualKind, StatedDecibels

KINDS = ("open", "short", "load")
SIZES = ("residual_scale", "scatter_ps", "scatter_ohm", "scatter_ff", "noise", "trace_noise", "drift_deg")

OpenKind = Literal["radiating", "shielded"]
Body = Literal["own", "shared"]
ReadingOrder = Literal["blocks", "rounds"]


@dataclass(frozen=True, slots=True)
class Workmanship:
    """Ranges from which the making of a connector family's parts is drawn.

    Attributes
    ----------
    size : float
        Scale of lumped parasitics against SMA.
    z0_scatter_ohm, delay_ps, loss_gohm_per_s, loss_tangent, fringe_ff : tuple of two floats
        Low and high of: the standard deviation of section impedances, the offset delay, the loss at 1 GHz,
        the dielectric's tan δ, the open's fringing capacitance.
    """

    size: float
    z0_scatter_ohm: tuple[float, float]
    delay_ps: tuple[float, float]
    loss_gohm_per_s: tuple[float, float]
    loss_tangent: tuple[float, float]
    fringe_ff: tuple[float, float]


WORKMANSHIP = {
    "SMA": Workmanship(1.0, (0.3, 1.0), (5.0, 60.0), (0.8, 2.5), (2e-4, 5e-4), (20.0, 60.0)),
    "3.5 mm": Workmanship(0.3, (0.05, 0.25), (5.0, 40.0), (1.2, 2.0), (0.0, 0.0), (30.0, 50.0)),
    "N 75": Workmanship(1.5, (0.4, 1.2), (10.0, 80.0), (0.4, 1.2), (0.0, 3e-4), (30.0, 80.0)),
}


def workmanship(connector: str) -> Workmanship:
    """Return the ranges of a connector family; an unknown one is made like SMA."""
    return WORKMANSHIP.get(connector, WORKMANSHIP["SMA"])


@dataclass(frozen=True, slots=True, eq=False)
class Scenario:
    """Everything that is decided before the dice are thrown. None means: draw it.

    Attributes
    ----------
    frequency_hz : array of shape (n,)
        Sweep, strictly rising, in hertz.
    residual : StatedDecibels
        95 % bounds of the analyser's residual errors, as the user is told them.
    residual_scale : float
        True size of the residuals against the stated one; 1 is an honest statement.
    connector : str
        Connector family.
    reference_ohm : float
        Reference impedance, in ohms.
    connections : int or mapping
        Readings of each standard.
    scatter_ps, scatter_ohm, scatter_ff : float
        Standard deviation from connection to connection of plane shift, series resistance, shunt capacitance.
    noise : float
        White noise, standard deviation per component.
    trace_noise : float
        Noise that grows with |Γ|, standard deviation per component.
    correlation : "any", "long" or "short"
        Correlation length of the residuals.
    residual_kind : "any", "gaussian" or "ripple"
        How they are built.
    resonance_hz : float, optional
        Frequency of a parasitic resonance; None: no resonance.
    resonance_standard : str, optional
        Which standard has it.
    resonance_quality, resonance_peak : float, optional
        Its unloaded Q (20 … 80 when drawn) and peak |ΔΓ| (0.05 … 0.3 when drawn).
    glitches : int
        Number of band edges at which single points are off.
    drift_deg : float
        Standard deviation of the cable's phase at the top of the sweep at the end of the session, in degrees.
    reading_order : "blocks" or "rounds"
        One standard after the other, or all standards in turn; matters with drift only.
    bad_connection : str, optional
        Standard one of whose connections is bad.
    open_kind : "radiating" or "shielded"
        How the open ends.
    radiation_drop : tuple of two floats
        Range of the loss of |Γ| to radiation at 6 GHz.
    load_reflection : tuple of two floats
        Range of the bare load's |Γ| at 6 GHz, for SMA.
    offset_delay_ps : tuple of two floats, optional
        Range of the offset delays.
    sections : int, optional
        Line sections in each standard.
    z0_scatter_ohm, loss_gohm_per_s : float, optional
        Standard deviation of section impedances; loss at 1 GHz.
    body : "own" or "shared"
        Whether all standards have the same line in front.
    given_resistance_u_ohm : float, optional
        Standard uncertainty of a DC reading of the load; None: not measured.
    given_delay_u_ps : float, optional
        Standard uncertainty of a ruler's reading of each offset; None: not measured.

    Raises
    ------
    RequestError
        A sweep that does not rise, a count below one, a standard that does not exist, a negative size.
    """

    frequency_hz: FloatArray
    residual: StatedDecibels
    residual_scale: float = 1.0
    connector: str = "SMA"
    reference_ohm: float = 50.0
    connections: int | Mapping[str, int] = 5
    scatter_ps: float = 0.15
    scatter_ohm: float = 0.015
    scatter_ff: float = 0.9
    noise: float = 1e-4
    trace_noise: float = 1e-4
    correlation: Correlation = "any"
    residual_kind: ResidualKind = "any"
    resonance_hz: float | None = None
    resonance_standard: str | None = None
    resonance_quality: float | None = None
    resonance_peak: float | None = None
    glitches: int = 0
    drift_deg: float = 0.0
    reading_order: ReadingOrder = "blocks"
    bad_connection: str | None = None
    open_kind: OpenKind = "radiating"
    radiation_drop: tuple[float, float] = (0.002, 0.012)
    load_reflection: tuple[float, float] = (0.02, 0.06)
    offset_delay_ps: tuple[float, float] | None = None
    sections: int | None = None
    z0_scatter_ohm: float | None = None
    loss_gohm_per_s: float | None = None
    body: Body = "own"
    given_resistance_u_ohm: float | None = None
    given_delay_u_ps: float | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        if self.frequency_hz.size < 2 or self.frequency_hz[0] < 0 or np.any(np.diff(self.frequency_hz) <= 0):
            raise RequestError(
                "the sweep does not rise", "give two or more rising frequencies", key="frequency_hz"
            )
        for key in ("resonance_standard", "bad_connection"):
            name = getattr(self, key)
            if name is not None and name not in KINDS:
                raise RequestError(f"no standard is called {name!r}", f"choose one of {KINDS}", key=key)
        if isinstance(self.connections, Mapping) and set(self.connections) != set(KINDS):
            raise RequestError(
                "connections are not given for each standard", f"name {KINDS}", key="connections"
            )
        if min(self.counts().values()) < 1:
            raise RequestError("a standard without a reading", "ask for one or more", key="connections")
        for key in SIZES:
            if getattr(self, key) < 0:
                raise RequestError("a size cannot be negative", "give zero or more", key=key)

    def counts(self) -> dict[str, int]:
        """Return the number of readings of each standard."""
        if isinstance(self.connections, Mapping):
            return {kind: int(self.connections[kind]) for kind in KINDS}
        return dict.fromkeys(KINDS, int(self.connections))
