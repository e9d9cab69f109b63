"""Evidence on the parameters of a standard, with where each part of its uncertainty comes from."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import hypot
from types import MappingProxyType


@dataclass(frozen=True, slots=True, eq=False)
class DrawnValue:
    """One parameter as a drawing tells it.

    Attributes
    ----------
    name : str
        Its key in a bench file's `given`.
    value : float
        In the trade's unit.
    parts : mapping of str to float
        Where its uncertainty comes from, and how much each part is, as standard uncertainties in the same unit.
    how : str
        How it was computed, in a few words.
    """

    name: str
    value: float
    parts: Mapping[str, float]
    how: str

    def __post_init__(self) -> None:
        kept = {label: abs(u) for label, u in self.parts.items() if u}
        object.__setattr__(self, "parts", MappingProxyType(kept))

    @property
    def u(self) -> float:
        """Standard uncertainty, the root of the sum of squares of its parts."""
        return hypot(*self.parts.values())

    @property
    def most(self) -> tuple[str, float]:
        """The part that weighs most, and its share of the variance; empty and 0 where the value is exact."""
        if not self.parts:
            return "", 0.0
        label = max(self.parts, key=lambda one: self.parts[one])
        return label, (self.parts[label] / self.u) ** 2


@dataclass(frozen=True, slots=True, eq=False)
class DrawnPart:
    """What a drawing says of one part.

    Attributes
    ----------
    name, kind, form : str
    values : tuple of DrawnValue
        In the order of the parameters of the kind; only what the drawing tells.
    held : tuple of str
        Parameters that physics holds at zero: odd orders of a lossless end.
    next_mode_hz : float
        Where the next mode begins in the narrowest place; infinite where no diameter is drawn.
    to_hz : float
        Top of the band over which it was computed.
    notes : tuple of str
    """

    name: str
    kind: str
    form: str
    values: tuple[DrawnValue, ...]
    held: tuple[str, ...]
    next_mode_hz: float
    to_hz: float
    notes: tuple[str, ...] = field(default=())

    def get(self, name: str) -> DrawnValue | None:
        """Return the value of that name, or None where the drawing does not tell it."""
        return next((one for one in self.values if one.name == name), None)
