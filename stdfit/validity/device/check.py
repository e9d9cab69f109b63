"""A kit checked with devices that it was not made from: is what they show within the bounds?"""

from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.validity.device.check_physics import INDEPENDENT, plain_line, reflects_fully, steady_loss
from stdfit.validity.device.check_value import Value
from stdfit.validity.limit import first_gap

ALLOWED_OUTSIDE = 0.05
"""Part of the frequencies that may lie outside: the bounds are of 95 %."""

AGREES, DOUBT, FAILS, SILENT = "agrees", "in doubt", "fails", "tells nothing"

Mask = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Finding:
    """What one device says of a kit in one respect.

    Attributes
    ----------
    device : str
    against : str
        What it is compared with.
    frequency_hz : array of shape (n,)
    gamma : complex array of shape (n,)
        As corrected with the kit.
    difference : array of shape (n,)
        |Γ − value|, or by how much physics is violated; below zero where it is not.
    bound : array of shape (n,)
        95 % bound on the difference.
    judged : bool array of shape (n,)
        Where the verdict is given: within the kit's limit.
    tells : bool
        False where no error of the kit could show.
    """

    device: str
    against: str
    frequency_hz: FloatArray
    gamma: ComplexArray
    difference: FloatArray
    bound: FloatArray
    judged: Mask
    tells: bool = True

    def __post_init__(self) -> None:
        for name in ("frequency_hz", "difference", "bound"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        judged = np.array(self.judged, dtype=bool)
        judged.flags.writeable = False
        object.__setattr__(self, "judged", judged)
        if not judged.any():
            object.__setattr__(self, "tells", False)

    @property
    def ratio(self) -> FloatArray:
        """Difference in bounds: E_n where it is compared with a value."""
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = self.difference / self.bound
        # Nothing against nothing is no difference.
        return np.where((self.difference <= 0.0) & (self.bound <= 0.0), 0.0, ratio)

    def inside(self, *, judged: bool = True) -> float | None:
        """Return the part of frequencies within the bound, where it is judged or beyond; None where there are none."""
        ratio = self.ratio[self.judged if judged else ~self.judged]
        return float(np.mean(ratio <= 1.0)) if ratio.size else None

    @property
    def largest(self) -> tuple[float, float, float]:
        """Largest ratio where it is judged, its frequency, and the bound there."""
        places = np.flatnonzero(self.judged)
        k = places[int(np.argmax(self.ratio[places]))]
        return float(self.ratio[k]), float(self.frequency_hz[k]), float(self.bound[k])

    @property
    def agrees_to_hz(self) -> float:
        """The highest frequency up to which the ratio is at most 1 without a gap; 0 where it never is."""
        return first_gap(self.frequency_hz, self.ratio, 1.0)[0]

    def verdict(self, factor: float) -> str:
        """Return what the whole curve says.

        It fails when more than 5 % of the judged frequencies lie beyond `factor` bounds, and is in doubt when
        more than 5 % lie beyond one bound.
        """
        if not self.tells:
            return SILENT
        ratio = self.ratio[self.judged]
        if np.mean(~(ratio <= factor)) > ALLOWED_OUTSIDE:
            return FAILS
        return DOUBT if np.mean(~(ratio <= 1.0)) > ALLOWED_OUTSIDE else AGREES


def compared(
    device: str,
    frequency_hz: FloatArray,
    gamma: ComplexArray,
    bound: FloatArray,
    value: Value,
    judged: Mask,
) -> Finding:
    """Return how far a device lies from its value: E_n = |Γ − Γ_ref|/√(U² + U_ref²).

    Parameters
    ----------
    device : str
    frequency_hz : array of shape (n,)
    gamma, bound : arrays of shape (n,)
        Γ as corrected with the kit, and its 95 % bound U.
    value : Value
        Γ_ref and U_ref; frequencies at which nothing is known are left out.
    judged : bool array of shape (n,)

    Notes
    -----
    ISO 13528 (from memory). U and U_ref are taken as independent.
    """
    known = np.isfinite(value.bound)
    return Finding(
        device,
        value.label,
        frequency_hz[known],
        gamma[known],
        np.abs(gamma - value.gamma)[known],
        np.hypot(bound, value.bound)[known],
        judged[known],
    )


def by_physics(
    device: str,
    frequency_hz: FloatArray,
    gamma: ComplexArray,
    bound: FloatArray,
    judged: Mask,
    reference_ohm: float,
    expect: str | None = None,
) -> list[Finding]:
    """Return what physics says of a device without a value.

    Every device: |Γ| ≤ 1. One that reflects fully, unless it is expected to be passive alone: a loss that rises
    steadily with frequency, so that a ripple on |Γ| is an error of the kit. One that is expected to be a line: the
    nearest plain line with an open or shorted end.

    Parameters
    ----------
    device : str
    frequency_hz : array of shape (n,)
    gamma, bound : arrays of shape (n,)
    judged : bool array of shape (n,)
    reference_ohm : float
    expect : {"line", "passive"} or None
    """
    size = np.abs(gamma)
    # A device well inside the circle would have to be shown very wrong to leave it.
    near = bool((size + bound >= 1.0)[judged].any())
    findings = [Finding(device, "|Γ| ≤ 1", frequency_hz, gamma, size - 1.0, bound, judged, near)]
    if not judged.any() or expect == "passive":
        return findings
    hertz, inner, limits = frequency_hz[judged], gamma[judged], bound[judged]
    everywhere = np.ones(hertz.size, dtype=bool)
    if expect == "line" or reflects_fully(inner):
        apart = np.abs(np.abs(inner) - steady_loss(hertz, inner, limits))
        findings.append(Finding(device, "steady loss", hertz, inner, apart, limits, everywhere))
    if expect == "line":
        apart = np.abs(inner - plain_line(hertz, inner, limits, reference_ohm))
        findings.append(Finding(device, "a plain line", hertz, inner, apart, limits, everywhere))
    return findings


def curve_factor(curves: int) -> float:
    """Return by how many bounds whole curves may be exceeded by chance, with 95 % confidence.

    Smooth errors have about four independent values over a sweep. That none of m = 4·curves normal values exceeds
    k bounds of 95 % has the probability 0.95 when Φ(1.960·k) = (1 + 0.95^{1/m})/2. Errors that curves share make a
    false alarm rarer.

    Parameters
    ----------
    curves : int

    Notes
    -----
    Z. Šidák, J. Amer. Statist. Assoc. 62, 1967, 626–633 (from memory).

    Examples
    --------
    >>> round(curve_factor(1), 2), round(curve_factor(3), 2), round(curve_factor(10), 2)
    (1.27, 1.46, 1.64)
    """
    normal = NormalDist()
    level = 0.95 ** (1.0 / (INDEPENDENT * max(curves, 1)))
    return normal.inv_cdf(0.5 * (1.0 + level)) / normal.inv_cdf(0.975)


@dataclass(frozen=True, slots=True, eq=False)
class Check:
    """What all devices say of a kit.

    Attributes
    ----------
    kit : str
        Its name.
    standards : tuple of str
        The three of the correction.
    corrected_before : bool
        Whether the analyser corrected with the kit itself.
    low_hz, top_hz : float
        Where the verdict is given.
    read_top_hz : float
        The highest frequency of the comparison.
    findings : tuple of Finding
    notes : tuple of str
    """

    kit: str
    standards: tuple[str, ...]
    corrected_before: bool
    low_hz: float
    top_hz: float
    read_top_hz: float
    findings: tuple[Finding, ...]
    notes: tuple[str, ...]

    @property
    def factor(self) -> float:
        """How many bounds a curve may be off by chance.

        Every finding counts: devices share the errors of the kit, but each has connections and a value of its own.
        """
        return curve_factor(len(self.telling))

    @property
    def telling(self) -> tuple[Finding, ...]:
        """The findings in which an error of the kit could show."""
        return tuple(one for one in self.findings if one.tells)

    @property
    def verdict(self) -> str:
        """The worst of all: fails before in doubt before agrees; tells nothing where none tells anything."""
        found = {one.verdict(self.factor) for one in self.findings}
        return next((word for word in (FAILS, DOUBT, AGREES) if word in found), SILENT)
