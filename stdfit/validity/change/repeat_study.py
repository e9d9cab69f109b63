"""How well connections of a standard repeat: components of scatter of the lumped parts, and of Γ at frequencies."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs
from stdfit.base.errors import RequestError
from stdfit.fitting.observed import noise_of
from stdfit.uncertainty.connections import PARTS, responses
from stdfit.validity.change.nested import Components, Design, components

TURNED = 0.02
"""Part by which reflection tracking may be wrong: 0.17 dB, a modest calibration (common practice, no source)."""

LEAK = 0.5
"""How much of a part's expected scatter may come from the others in that way."""

ROUNDING = 1e-12
"""What keeps parts that cannot be told apart at all from a singular matrix."""


@dataclass(frozen=True, slots=True, eq=False)
class Scatter:
    """Components of one quantity of one standard.

    Attributes
    ----------
    what : str
        One of `PARTS`, or "|ΔΓ|".
    at_hz : float or None
        Frequency of |ΔΓ|.
    unit : str
        Ω or ps; empty for |ΔΓ|.
    found : Components
    """

    what: str
    at_hz: float | None
    unit: str
    found: Components


@dataclass(frozen=True, slots=True, eq=False)
class Repeats:
    """What the nested readings of one standard say.

    Attributes
    ----------
    standard, kind : str
    counts : tuple of tuples of int
        Readings of each connection of each calibration.
    rows : tuple of Scatter
    unseen : tuple of str
        Lumped parts that these readings do not tell apart from the others.
    """

    standard: str
    kind: str
    counts: tuple[tuple[int, ...], ...]
    rows: tuple[Scatter, ...]
    unseen: tuple[str, ...]

    @property
    def calibrations(self) -> int:
        """Number of calibrations."""
        return len(self.counts)


def repeats_of(
    standard: str,
    kind: str,
    frequency_hz: FloatArray,
    readings: ComplexArray,
    counts: Sequence[Sequence[int]],
    reference_ohm: float,
    at_hz: Sequence[float],
    expected: Sequence[float],
) -> Repeats:
    """Return the components of scatter of one standard.

    Each reading's deviation from the mean of all is laid on the lumped parts of `uncertainty.connections.responses` by
    least squares, ΔΓ = Σ x_p·R_p(f); the x_p are analysed like the ΔΓ at single frequencies.

    Parameters
    ----------
    standard, kind : str
    frequency_hz : array of shape (f,)
    readings : complex array of shape (n, f)
        In the order of `counts`.
    counts : sequence of sequences of int
        Readings of each connection of each calibration.
    reference_ohm : float
    at_hz : sequence of float
        The nearest readings are taken.
    expected : sequence of three floats
        How much each lumped part scatters with the connector's family; parts that noise hides below are left out.

    Raises
    ------
    RequestError
        A single reading, or a frequency outside the sweep.
    """
    if readings.shape[0] < 2:
        raise RequestError(
            f"a single reading of '{standard}' does not scatter", "connect it again and read it again"
        )
    for asked in at_hz:
        if not frequency_hz[0] <= asked <= frequency_hz[-1]:
            raise RequestError(
                f"{asked:.10g} Hz lies outside the readings of '{standard}'",
                f"ask for frequencies from {frequency_hz[0]:.10g} to {frequency_hz[-1]:.10g} Hz",
            )
    design = Design.of(counts)
    middle = readings.mean(axis=0)
    away = readings - middle
    basis = responses(middle, frequency_hz, reference_ohm)
    seen = seen_parts(basis, noise_of(away), expected)
    sizes = np.linalg.lstsq(as_pairs(basis[:, seen]), as_pairs(away.T), rcond=None)[0]
    units = ("Ω", "ps", "ps")
    rows = [
        Scatter(PARTS[p], None, units[p], components(design, own)) for p, own in zip(seen, sizes, strict=True)
    ]
    nearest = [int(np.argmin(np.abs(frequency_hz - asked))) for asked in at_hz]
    rows += [
        Scatter("|ΔΓ|", float(frequency_hz[k]), "", components(design, away[:, k]))
        for k in dict.fromkeys(nearest)
    ]
    unseen = tuple(part for p, part in enumerate(PARTS) if p not in seen)
    return Repeats(standard, kind, tuple(tuple(own) for own in counts), tuple(rows), unseen)


def seen_parts(basis: ComplexArray, noise: float, expected: Sequence[float]) -> list[int]:
    """Return which lumped parts are told apart; the worst one is left out until the others are told.

    A part is told where two things leave it surer than it is expected to scatter: the noise of one reading, and what
    the analyser makes of the other parts. An error of its reflection tracking turns their phase, so that `TURNED` of
    them shows as something else: as more than the contact resistance itself on a flush open.

    Parameters
    ----------
    basis : complex array of shape (f, 3)
        From `responses`.
    noise : float
        Standard deviation per component of one reading.
    expected : sequence of three floats
        The family's scatter of a connection.
    """
    sizes = np.asarray(expected)
    seen = [p for p in range(sizes.size) if basis[:, p].any()]
    turned = TURNED * as_pairs(1j * basis) * sizes
    while seen:
        columns = as_pairs(basis[:, seen]) * sizes[seen]
        normal = columns.T @ columns
        normal += ROUNDING * np.diag(np.diag(normal))
        inverse = np.linalg.solve(normal, columns.T)
        noisy = noise * np.sqrt(np.diag(np.linalg.inv(normal)))
        unsure = np.maximum(noisy, np.linalg.norm(inverse @ turned, axis=1) / LEAK)
        worst = int(np.argmax(unsure))
        if unsure[worst] <= 1.0:
            break
        del seen[worst]
    return seen
