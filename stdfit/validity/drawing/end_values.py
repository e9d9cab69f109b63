"""Capacitance, inductance and resistance of a drawn part's end."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import exp, hypot, sqrt

import numpy as np

from stdfit.circuits.coaxial.dimensions import flat_short_ohm
from stdfit.circuits.coaxial.flush_open import BARE_FACE_SHARE, finite_flange_share, tem_bound_f
from stdfit.data.drawing_records import EndEntry, PartEntry
from stdfit.validity.drawing.chips import chip_parasitics
from stdfit.validity.drawing.evidence import DrawnValue
from stdfit.validity.drawing.fields import flush_capacitance, shielded_capacitance
from stdfit.validity.drawing.spread import spread

POINTS = 9
"""Frequencies at which C(f) is computed; it is smooth and even, and the polynomial has two terms."""

FEW_POINTS = 5
"""The same for an end that radiates: its fields take a hundred times as long."""

FALL_OFF = 2.0 * 2.404825557695773
"""The field beyond the pin falls as e^(−2.405 z/b), b the pipe's radius: TM01 of a pipe far below its cut-off. What
comes back from its mouth has gone there and back."""

UNSURE_EDGE = 0.02
"""Relative standard uncertainty of a capacitance for the edge of the pin, drawn sharp and made broken or with a burr
(common practice, no source)."""

JOINT_PH = 0.5
"""Standard uncertainty of a flat short's inductance for its joint: 0.01 ps (common practice, no source)."""

UNSURE_SKIN = 0.5
"""Relative standard uncertainty of an inductance from conductivity, as for the loss."""

UNKNOWN_SKIN_PH = 0.5
"""Inductance of a flat short whose metal is not known: below 1 pH at 1 GHz (derived), so its middle."""


@dataclass(frozen=True, slots=True, eq=False)
class EndValues:
    """What a drawing tells of an end.

    Attributes
    ----------
    values : tuple of DrawnValue
    held : tuple of str
        Parameters that physics holds at zero.
    notes : tuple of str
    """

    values: tuple[DrawnValue, ...] = ()
    held: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()


def end_values(part: PartEntry, to_hz: float) -> EndValues:
    """Return what a drawing tells of the end of a part.

    Parameters
    ----------
    part : PartEntry
    to_hz : float
        Top of the band over which a polynomial is to stand for C(f).
    """
    if part.end is None:
        return EndValues()
    if part.end.form == "chip":
        return _chips(part.end)
    return _flat(part, to_hz) if part.end.form == "flat" else _open(part, part.end, to_hz)


def _open(part: PartEntry, end: EndEntry, to_hz: float) -> EndValues:
    """Return C0 and C2: the even polynomial nearest to the computed C(f).

    A lossless open's C(f) is even (R. M. Foster, Bell Syst. Tech. J. 3, 1924, 259–267; from memory), so C1 = C3 = 0.
    For an end that radiates the susceptance is odd in frequency all the same, since readings in time are real.
    """
    f = to_hz * np.sin(np.linspace(0.02, 0.5, POINTS if end.form == "shielded" else FEW_POINTS) * np.pi)
    capacitance, numeric, conductance = _capacitance(part, f)
    full = _even(f, capacitance)

    def computed(one: PartEntry) -> Mapping[str, float]:
        if end.form == "flush":
            # The fields of a half space take a second; their static bound moves with the dimensions as they do.
            ratio = tem_bound_f(*_diameters(one)) / tem_bound_f(*_diameters(part))
            return {name: value * ratio for name, value in full.items()}
        return _even(f, _capacitance(one, f)[0])

    best = dict(full)
    left = float(np.abs(capacitance - best["c0"] * 1e-15 - best["c2"] * 1e-36 * f**2).max())
    unsure = float(numeric.max())
    shifts = spread(part, computed, lambda label: _of_end(label, len(part.sections)))
    # What is off in proportion, and what the polynomial and its numbers leave, in fF.
    relative, absolute = (
        {"edge of the pin": UNSURE_EDGE},
        {"computation": 1e15 * unsure, "higher orders": 1e15 * left / sqrt(3.0)},
    )
    inner, outer = _diameters(part)
    notes = []
    if end.form == "shielded" and end.pipe_m is not None and not end.closed:
        relative["pipe's open mouth"] = exp(-FALL_OFF * end.pipe_m.value / (0.5 * outer))
    if end.form == "flush":
        # A flange that ends has less than one without end, anywhere from 0 to a share of it: the middle is taken.
        flange = None if end.flange_m is None else end.flange_m.value
        half = 0.5 * (BARE_FACE_SHARE if flange is None else finite_flange_share(inner, outer, flange))
        best = {name: (1.0 - half) * value for name, value in full.items()}
        relative["flange of finite size"] = half / (1.0 - half) / sqrt(3.0)
        # What runs along a flange comes back from its rim, as G/ω at most (a judgement, no source).
        absolute["rim of the flange"] = 1e15 * float((conductance / (2.0 * np.pi * f)).max())
        if end.pin_m is not None:
            relative["pin not flush"] = min(
                hypot(end.pin_m.value, end.pin_m.u) / (0.5 * (outer - inner)), 1.0
            )
        drop = 2.0 * 50.0 * float(conductance.max())
        if drop > 0.001:
            notes.append(
                f"it radiates: |Γ| falls by about {drop:.2g} at {to_hz / 1e9:.3g} GHz, for which the model has no term"
            )
    parts_of = {
        name: {
            **shifts.get(name, {}),
            **{label: share * best[name] for label, share in relative.items()},
            **{label: u * scale for label, u in absolute.items()},
        }
        for name, scale in (("c0", 1.0), ("c2", 1e21 / to_hz**2))
    }
    how = f"fields of the {end.form} end, even polynomial to {to_hz / 1e9:.3g} GHz"
    return EndValues(
        (
            DrawnValue("c0", best["c0"], parts_of["c0"], how),
            DrawnValue("c2", best["c2"], parts_of["c2"], how),
        ),
        ("c1", "c3"),
        tuple(notes),
    )


def _even(f: np.ndarray, capacitance: np.ndarray) -> dict[str, float]:
    """Return C0 and C2, in trade units, of the least squares fit."""
    x = (f / f[-1]) ** 2
    c2, c0 = np.polyfit(x, capacitance, 1)
    return {"c0": float(c0) * 1e15, "c2": float(c2) * 1e36 / float(f[-1]) ** 2}


def _capacitance(part: PartEntry, f: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return C(f), its numerical uncertainty, and the conductance of radiation."""
    inner, outer = _diameters(part)
    er, end = part.sections[-1].permittivity.value, part.end
    assert end is not None  # the caller looked
    frequencies = tuple(float(one) for one in f)
    if end.form == "flush":
        farad, u, siemens = flush_capacitance(inner, outer, frequencies, er)
        return np.array(farad), np.array(u), np.array(siemens)
    beyond = end.beyond.value if end.beyond is not None else er
    wall = end.pipe_m.value if end.closed and end.pipe_m is not None else None
    farad, u = shielded_capacitance(inner, outer, frequencies, er, beyond, wall)
    return np.array(farad), np.array(u), np.zeros(f.size)


def _diameters(part: PartEntry) -> tuple[float, float]:
    last = part.sections[-1]
    assert last.inner_m is not None and last.outer_m is not None  # the reader of drawings looked
    return last.inner_m.value, last.outer_m.value


def _of_end(label: str, sections: int) -> bool:
    return label in (
        f"inner_mm of section {sections}",
        f"outer_mm of section {sections}",
        f"dielectric of section {sections}",
        "beyond",
        "pipe_mm",
    )


def _flat(part: PartEntry, to_hz: float) -> EndValues:
    """Return L0 of a flat short: the reactance of its skin, (1 + j)·(Rs/2π)·ln(b/a).

    It goes as 1/√f, and the one L0 that is nearest to ωL over the band stands for it.
    """
    inner, outer = _diameters(part)
    value, parts, how = UNKNOWN_SKIN_PH, {"metal not known": UNKNOWN_SKIN_PH}, "below 1 pH for any metal"
    if part.conductivity is not None:
        f = np.linspace(to_hz / POINTS, to_hz, POINTS)
        reactance = flat_short_ohm(inner, outer, f, part.conductivity, part.roughness_m).imag
        value = 1e12 * float(np.dot(reactance, f) / np.dot(f, f)) / (2.0 * np.pi)
        parts, how = {"surface of the conductors": UNSURE_SKIN * value}, f"skin effect of {part.conductor}"
    return EndValues((DrawnValue("l0", value, {**parts, "joint": JOINT_PH}, how),), ("l1", "l2", "l3"))


def _chips(end: EndEntry) -> EndValues:
    """Return R, L and C of chips in parallel; chips of one reel are off alike, so that R keeps their tolerance."""
    assert end.resistance_ohm is not None  # the reader of drawings looked
    rough = chip_parasitics(end.size, end.count)
    parts = {"resistance_ohm": end.resistance_ohm.u / end.count}
    how = f"{end.count} × {end.size}, common practice, no source"
    return EndValues(
        (
            DrawnValue(
                "resistance_ohm",
                end.resistance_ohm.value / end.count,
                parts,
                f"nominal, {end.count} in parallel",
            ),
            DrawnValue(
                "inductance_ph", 1e12 * rough.inductance_h, {"package": 1e12 * rough.inductance_u_h}, how
            ),
            DrawnValue(
                "capacitance_ff", 1e15 * rough.capacitance_f, {"package": 1e15 * rough.capacitance_u_f}, how
            ),
        )
    )
