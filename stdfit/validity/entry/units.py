"""Units in which a definition is typed, and numbers with so many significant digits."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.standard import PARAMETERS, Parameter
from stdfit.data.words import quoted, suggestion

SPEED_OF_LIGHT = 299792458.0
"""m/s, exact."""

DECIBEL = 10.0 / np.log(10.0)
"""20·log10(e)/2: a one-way loss is this times r·τ/Z0 in dB at 1 GHz, since Re γl = rτ/2Z0 there."""

TWO_WAY = "two-way-"

PLAIN_FROM, PLAIN_TO = 1e-3, 1e6
"""Outside, numbers are written with a power of ten."""

_TIMES = {"ps": 1e-12, "ns": 1e-9, "s": 1.0}
_LENGTHS = {"mm": 1e-3, "m": 1.0}
_SIZES = {
    "capacitance": {"F": 1.0, "pF": 1e-12, "fF": 1e-15},
    "inductance": {"H": 1.0, "nH": 1e-9, "pH": 1e-12},
}
_POWERS = ("", "", "²", "³", "⁴", "⁵")

CHOICES: dict[str, tuple[str, ...]] = {
    "delay": tuple(way + one for way in ("", TWO_WAY) for one in (*_TIMES, *_LENGTHS)),
    "loss": ("GΩ/s", "Ω/s", "dB", TWO_WAY + "dB"),
    "capacitance": ("trade", *_SIZES["capacitance"]),
    "inductance": ("trade", *_SIZES["inductance"]),
    "resistance": ("Ω",),
}
"""The units of each quantity, the usual one first."""


@dataclass(frozen=True, slots=True)
class Unit:
    """The unit of one number.

    Attributes
    ----------
    label : str
        As it stands behind the number.
    size : float
        Trade units in one of it; of a loss in dB, one-way dB in one of it.
    tied : bool
        A loss in dB: the number depends on delay and impedance too.
    """

    label: str
    size: float
    tied: bool = False


@dataclass(frozen=True, slots=True)
class Units:
    """Units of all quantities.

    Attributes
    ----------
    chosen : mapping of quantity to unit
        Words of `CHOICES`; the usual one stands for what is not named.
    velocity_factor : float
        Of delays that are typed as lengths.
    """

    chosen: Mapping[str, str]
    velocity_factor: float = 1.0

    def of(self, parameter: Parameter) -> Unit:
        """Return the unit of a parameter."""
        quantity = quantity_of(parameter)
        word = self.chosen.get(quantity) or CHOICES.get(quantity, ("trade",))[0]
        if quantity == "delay":
            return _delay(parameter, word, self.velocity_factor)
        if quantity == "loss":
            if word.endswith("dB"):
                way = "two ways" if word.startswith(TWO_WAY) else "one way"
                return Unit(f"dB at 1 GHz ({way})", 0.5 if word.startswith(TWO_WAY) else 1.0, tied=True)
            return Unit(word, (1e9 if word == "GΩ/s" else 1.0) / parameter.si)
        if word == "trade" or quantity not in _SIZES:
            return Unit(parameter.unit, 1.0)
        # fF and its like go with GHz, farads with Hz.
        hertz, per = (1.0, "Hz") if word in ("F", "H") else (1e9, "GHz")
        label = word + (f"/{per}{_POWERS[parameter.power]}" if parameter.power else "")
        return Unit(label, _SIZES[quantity][word] / hertz**parameter.power / parameter.si)


def _delay(parameter: Parameter, word: str, velocity_factor: float) -> Unit:
    """Return the unit of a delay; two-way numbers are twice as large."""
    base = word.removeprefix(TWO_WAY)
    way = "two ways" if word.startswith(TWO_WAY) else "one way"
    seconds = _TIMES[base] if base in _TIMES else _LENGTHS[base] / (SPEED_OF_LIGHT * velocity_factor)
    at = f", velocity factor {velocity_factor:g}" if base in _LENGTHS else ""
    return Unit(f"{base} ({way}{at})", seconds / parameter.si / (2.0 if word.startswith(TWO_WAY) else 1.0))


def quantity_of(parameter: Parameter) -> str:
    """Return what a parameter measures: a key of `CHOICES`, or "" for what has its trade unit only."""
    unit = re.sub(r"^1e-\d+ ", "", parameter.unit).partition("/")
    if unit[0] == "GΩ":
        return "loss"
    return {"s": "delay", "Ω": "resistance", "F": "capacitance", "H": "inductance"}.get(unit[0][-1:], "")


def units_from(words: Sequence[str], velocity_factor: float | None) -> Units:
    """Return the units that words "quantity=unit" ask for; the usual ones where none is asked for.

    Raises
    ------
    RequestError
        An unknown quantity or unit, one named twice, or a velocity factor that has no use or no sense.
    """
    chosen = {quantity: choices[0] for quantity, choices in CHOICES.items()}
    asked: set[str] = set()
    for word in words:
        quantity, equals, unit = word.partition("=")
        if not equals:
            raise RequestError(f"{quoted(word)} names no unit", "write it like delay=ns")
        if quantity not in CHOICES:
            raise RequestError(f"no quantity {quoted(quantity)} has units", suggestion(quantity, CHOICES))
        if quantity in asked:
            raise RequestError(f"two units for {quantity}", "give one")
        asked.add(quantity)
        chosen[quantity] = _word(quantity, unit)
    if velocity_factor is not None:
        if not 0.0 < velocity_factor <= 1.0:
            raise RequestError(f"a velocity factor of {velocity_factor:g}", "give one above 0 and up to 1")
        if chosen["delay"].removeprefix(TWO_WAY) not in _LENGTHS:
            raise RequestError("a velocity factor says nothing of a delay in time", "add --units delay=mm")
    return Units(chosen, 1.0 if velocity_factor is None else velocity_factor)


def _word(quantity: str, unit: str) -> str:
    """Return the word of `CHOICES` that is meant: Ω may be written as ohm."""
    meant = re.sub("\N{OHM SIGN}|ohms?", "Ω", unit)
    if meant not in CHOICES[quantity]:
        raise RequestError(f"no unit {quoted(unit)} of {quantity}", suggestion(unit, CHOICES[quantity]))
    return meant


@dataclass(frozen=True, slots=True)
class Typing:
    """How the values of one kind of standard become numbers to type, and back.

    Attributes
    ----------
    parameters : tuple of Parameter
        In the order of ``PARAMETERS[kind]``, as all arrays below.
    units : tuple of Unit
    digits : tuple of int
        Significant digits.
    """

    parameters: tuple[Parameter, ...]
    units: tuple[Unit, ...]
    digits: tuple[int, ...]

    @property
    def delay(self) -> int:
        """Place of the delay."""
        return self._place("offset_delay_ps")

    def is_line(self, place: int) -> bool:
        """Return whether a parameter says what a line is like, and nothing where the line has no length."""
        return self.parameters[place].name.startswith("offset_") and place != self.delay

    def _place(self, name: str) -> int:
        return [one.name for one in self.parameters].index(name)

    def typed(self, values: FloatArray, place: int) -> FloatArray:
        """Return the numbers of one parameter for values in trade units of shape (..., p), not yet rounded."""
        unit = self.units[place]
        own = values[..., place]
        if unit.tied:
            return np.asarray(self._decibel(values) * own / unit.size)
        return np.asarray(own / unit.size)

    def value(self, number: FloatArray | float, values: FloatArray, place: int) -> FloatArray:
        """Return the trade value of typed numbers of shape (...); `values` holds delay and Z0 for a loss in dB."""
        unit = self.units[place]
        number = np.asarray(number, dtype=float)
        if not unit.tied:
            return np.asarray(number * unit.size)
        each = np.broadcast_to(self._decibel(values), number.shape)
        return np.divide(number * unit.size, each, out=np.zeros(number.shape), where=each != 0.0)

    def meant(self, numbers: FloatArray, typed: Sequence[int], others: FloatArray) -> FloatArray:
        """Return the trade values that sets of typed numbers mean.

        Parameters
        ----------
        numbers : array of shape (..., p)
        typed : sequence of int
            Places that are typed.
        others : array of shape (p,)
            Values of the rest.
        """
        values = np.array(np.broadcast_to(others, numbers.shape))
        for place in sorted(typed, key=lambda place: self.units[place].tied):
            values[..., place] = self.value(numbers[..., place], values, place)
        return values

    def _decibel(self, values: FloatArray) -> FloatArray:
        """Return the one-way loss in dB at 1 GHz for a loss of one trade unit."""
        delay, loss, z0 = self.delay, self._place("offset_loss_gohm_per_s"), self._place("offset_z0_ohm")
        per_unit = DECIBEL * self.parameters[loss].si * self.parameters[delay].si
        impedance = np.where(values[..., z0] == 0.0, np.inf, values[..., z0])
        return np.asarray(per_unit * values[..., delay] / impedance)


def typing_of(kind: str, units: Units, digits: Sequence[int] | None = None) -> Typing:
    """Return how the values of a kind are typed; without `digits`, for reading alone."""
    parameters = PARAMETERS[kind]
    return Typing(
        parameters,
        tuple(units.of(one) for one in parameters),
        tuple(digits) if digits is not None else (1,) * len(parameters),
    )


def nearest_number(value: float, digits: int) -> float:
    """Return the number with so many significant digits that is nearest."""
    return float(f"{value:.{digits - 1}e}")


def last_digit(number: float, digits: int) -> float:
    """Return what one more in the last digit is worth; 0 for 0."""
    return 0.0 if number == 0.0 else float(f"1e{Decimal(f'{number:.{digits - 1}e}').adjusted() - digits + 1}")


def text_of(number: float, digits: int) -> str:
    """Return a rounded number as people type it.

    Examples
    --------
    >>> text_of(16.2, 4), text_of(3.979e-14, 4), text_of(-12300.0, 3), text_of(0.0, 4)
    ('16.20', '3.979e-14', '-12300', '0')
    """
    if number == 0.0:
        return "0"
    short = f"{number:.{digits - 1}e}"
    return f"{Decimal(short):f}" if PLAIN_FROM <= abs(number) < PLAIN_TO else short
