"""What one file of readings says."""

from dataclasses import dataclass, field

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float


@dataclass(frozen=True, slots=True, eq=False)
class Sweep:
    """Reflection readings over frequency.

    Attributes
    ----------
    frequency_hz : array of shape (n,)
        Strictly rising, in hertz.
    gamma : complex array of shape (n,)
        Reflection coefficient with respect to `reference_ohm`.
    reference_ohm : complex
        Reference impedance in ohms.
    name : str
        Where it came from, for messages.
    notes : tuple of str
        What was done to the numbers on the way in, in words for the user.
    """

    frequency_hz: FloatArray
    gamma: ComplexArray
    reference_ohm: complex = 50.0
    name: str = ""
    notes: tuple[str, ...] = field(default=())

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        object.__setattr__(self, "reference_ohm", complex(self.reference_ohm))
