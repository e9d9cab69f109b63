"""Between the plane of a reading and the plane of its standard: the adapters there, removed or put back.

A standard that was read through an adapter, m = A(Γ), is Γ = A⁻¹(m). An analyser that was calibrated at the far end of
an adapter which is gone now shows m = A⁻¹(Γ), so that Γ = A(m). To first order errors of the adapter are
q(Γ) = δ0 + δ1·Γ + δ2·Γ² in the first case, and −q(m)·dΓ/dm in the second.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.error_box import corrected, seen_raw
from stdfit.circuits.two_port import box_of, product_of
from stdfit.data.bench import Bench
from stdfit.pipeline.adapters.known import Known, known_adapters


@dataclass(frozen=True, slots=True, eq=False)
class Step:
    """One adapter on the way from a reading to its standard.

    Attributes
    ----------
    known : Known
    inward : bool
        True where the standard is behind it, False where the analyser was calibrated with it.
    box : complex array of shape (n, 3)
        Its error terms.
    """

    known: Known
    inward: bool
    box: ComplexArray

    def on(self, before: ComplexArray) -> ComplexArray:
        """Return what a reflection on the side of the reading is on the side of the standard."""
        return corrected(self.box, before) if self.inward else seen_raw(self.box, before)

    def back(self, after: ComplexArray) -> ComplexArray:
        """Return what a reflection on the side of the standard is on the side of the reading."""
        return seen_raw(self.box, after) if self.inward else corrected(self.box, after)

    def slope(self, before: ComplexArray, after: ComplexArray) -> ComplexArray:
        """Return the derivative of what it is after the step by what it was before."""
        product = product_of(self.box)
        if self.inward:
            return np.asarray((1.0 - self.box[:, 2] * after) ** 2 / product)
        return np.asarray(product / (1.0 - self.box[:, 2] * before) ** 2)

    def powers(self, before: ComplexArray, after: ComplexArray) -> ComplexArray:
        """Return how each of the adapter's three terms acts after the step, shape (n, 3)."""
        if self.inward:
            return np.asarray(after[:, None] ** np.arange(3))
        return np.asarray(-self.slope(before, after)[:, None] * before[:, None] ** np.arange(3))


@dataclass(frozen=True, slots=True, eq=False)
class Passage:
    """All adapters on the way from the readings of one standard to its plane, in this order; often none."""

    steps: tuple[Step, ...] = ()

    def on(self, read: ComplexArray) -> ComplexArray:
        """Return readings of shape (..., n) in the plane of the standard."""
        for step in self.steps:
            read = step.on(read)
        return read

    def back(self, gamma: ComplexArray) -> ComplexArray:
        """Return how a reflection in the plane of the standard reads."""
        for step in reversed(self.steps):
            gamma = step.back(gamma)
        return gamma

    def planes(self, gamma: ComplexArray) -> list[ComplexArray]:
        """Return the reflection in each plane, from the reading's to the standard's."""
        planes = [gamma]
        for step in reversed(self.steps):
            planes.insert(0, step.back(planes[0]))
        return planes

    def slopes(self, gamma: ComplexArray) -> list[ComplexArray]:
        """Return the derivative of Γ by the reflection in each plane, from the reading's to the standard's."""
        planes, slopes = self.planes(gamma), [np.ones(gamma.shape, dtype=complex)]
        for k in reversed(range(len(self.steps))):
            slopes.insert(0, slopes[0] * self.steps[k].slope(planes[k], planes[k + 1]))
        return slopes


@dataclass(frozen=True, slots=True, eq=False)
class Planes:
    """The adapters of a bench, and between which planes they lie.

    Attributes
    ----------
    known : mapping of str to Known
    calibrated_with : str or None
    behind : mapping of str to str
        The adapter of each standard that was read through one.
    """

    known: Mapping[str, Known]
    calibrated_with: str | None
    behind: Mapping[str, str]

    @property
    def in_use(self) -> tuple[Known, ...]:
        """The adapters that lie before any standard."""
        names = dict.fromkeys(
            (*([self.calibrated_with] if self.calibrated_with else []), *self.behind.values())
        )
        return tuple(self.known[name] for name in names)

    def passage(self, standard: str, frequency_hz: FloatArray) -> Passage:
        """Return what lies before a standard, at some frequencies.

        Raises
        ------
        RequestError
            An adapter is not known there.
        """
        return Passage(
            tuple(Step(known, inward, box_of(known.s(frequency_hz))) for known, inward in self.way(standard))
        )

    def way(self, standard: str) -> list[tuple[Known, bool]]:
        """Return the adapters on the way from the reading to a standard, and whether each leads inwards."""
        named = [(self.calibrated_with, False), (self.behind.get(standard), True)]
        return [(self.known[name], inward) for name, inward in named if name is not None]


NO_ADAPTERS = Planes({}, None, {})
"""Every reading is in the plane of its standard."""


def planes_of(bench: Bench) -> Planes:
    """Return the planes of a bench, with its adapters read.

    Raises
    ------
    InputError
        An adapter is not known, or its file cannot be used.
    """
    behind = {one.name: one.behind for one in bench.standards if one.behind is not None}
    return Planes(known_adapters(bench), bench.calibrated_with, behind)
