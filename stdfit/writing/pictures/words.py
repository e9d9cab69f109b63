"""Title, caption and alternative text of the pictures of a standard, with their key figures."""

import re

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.evidence.element import QUANTITIES
from stdfit.validity.evidence.kept import Connections, KeptReadings
from stdfit.validity.evidence.sharing import STATED
from stdfit.validity.evidence.standard import StandardEvidence
from stdfit.writing.numbers import figure, frequency, rounded
from stdfit.writing.pictures.bound import highest
from stdfit.writing.pictures.whole_words import Words

_MINUS = re.compile(r"(?<![\w.])-(?=\d)")

NEARLY_ALL = 0.99

INSIDE = 0.95
"""Of all readings of single connections; so many are expected to lie within."""

ELEMENTS = {"open": "capacitance", "short": "inductance", "load": "impedance"}
"""What stands at the end of the offset line."""

EDGE = 0.999
"""A limit above this part of the last reading is where the readings end."""


def bound_words(one: StandardEvidence) -> Words:
    """Return the words of the bound with its sources."""
    first, last = one.frequency_hz[0], one.frequency_hz[-1]
    low, top = figure(float(one.bound[0])), figure(float(one.bound[-1]))
    kind, part = largest_part(one)
    reach = "is above" if one.limit_hz <= 0.0 else "keeps within"
    until = "from the first reading on" if one.limit_hz <= 0.0 else f"up to {frequency(one.limit_hz)}"
    kept = f"{reach} the tolerance of {one.within:g} {until}"
    ends, most = f": {one.reason}", ""
    if " of the bound" not in one.reason:  # the readings or the connector end
        much = "nearly all" if part > NEARLY_ALL else f"{100.0 * part:.0f} %"
        ends = ", where the readings end" if one.limit_hz >= EDGE * last else ""
        most = "" if kind == STATED else f"; there {kind} {_make(kind)} {much} of it"
    end = highest(one)
    cut = f" The axis ends at {figure(end)}." if end < float(one.bound.max()) else ""
    caption = (
        "How far the reflection that you type in may be from the true one, and what makes it. "
        f"The bound {kept}{ends}{most}.{cut}"
    )
    alt = (
        f"Bound on the error of {one.name} over frequency: {low} at {frequency(first)}, {_at_limit(one)}"
        f"{top} at {frequency(last)}; it {kept}"
        + ("." if kind == STATED else f"; {kind} {_make(kind)} the largest part of it there.")
    )
    return f"{one.name}: bound and what makes it", caption, alt


def deviation_words(one: StandardEvidence) -> Words:
    """Return the words of the comparison with the ideal standard."""
    f, length = one.frequency_hz, np.abs(one.gamma)
    read = (
        "" if one.readings is None else " Dots are mean readings, the line is the model, the band its bound."
    )
    missing = " The kit keeps no readings to show beside it." if one.readings is None else read
    if one.kind == "load":
        low, top = figure(float(length[0])), figure(float(length[-1]))
        key = f"|Γ| of the model is {low} at {frequency(f[0])} and {top} at {frequency(f[-1])}"
        caption = f"An ideal load reflects nothing: {key}.{missing}"
        alt = (
            f"Reflection of {one.name} over frequency, magnitude above, real and imaginary part below: {key}."
        )
    else:
        turned = np.degrees(np.unwrap(np.angle(one.gamma / one.ideal)))
        level = 20.0 * np.log10(max(float(length[-1]), 1e-6))
        key = _signed(
            f"at {frequency(f[-1])} |Γ| is {rounded(level, 3)} dB and the phase is {turned[-1]:.0f}°"
        )
        caption = f"An ideal {one.kind} has 0 dB and 0° everywhere; {key}.{missing}"
        alt = (
            f"Reflection of {one.name} over frequency, magnitude above, phase against an ideal {one.kind} below: "
            f"{key}."
        )
    return f"{one.name} beside the ideal {one.kind}", caption, alt


def residual_words(one: StandardEvidence, readings: KeptReadings) -> Words:
    """Return the words of what the model leaves."""
    fitted = readings.frequency_hz <= one.fit_top_hz
    left = float(np.abs(readings.residual[fitted]).max(initial=0.0))
    misfit = float(one.misfit[one.frequency_hz <= one.fit_top_hz].max(initial=0.0))
    key = f"up to {frequency(one.fit_top_hz)}, where the fit ends, they differ by {figure(left)} at most"
    caption = (
        f"Mean readings minus model: {key}. What the known sources of error cannot explain is misfit, "
        f"{figure(misfit)} at most there; it is part of the bound."
    )
    alt = (
        f"Difference of readings and model of {one.name} over frequency, real and imaginary part: {key}; the misfit is "
        f"{figure(misfit)} at most there."
    )
    return f"{one.name}: what the model leaves", caption, alt


def connection_words(one: StandardEvidence, connections: Connections) -> Words:
    """Return the words of the single connections."""
    which, away, where = connections.farthest()
    count = connections.deviations.shape[0]
    near = np.argmin(np.abs(connections.frequency_hz - where))
    usual = figure(float(connections.expected[near]))
    key = f"connection {which} lies farthest from the mean, by {figure(away)} at {frequency(where)}"
    found = _verdict(connections)
    caption = (
        f"Each of the {count} connections that went into the mean, in their order, against it: {key}. {found}: "
        f"95 % should lie below it, {usual} there, by the lumped parts of a connection, as all standards of the bench "
        "show them, and noise."
    )
    alt = (
        f"Distance of {count} connections of {one.name} from their mean over frequency: {key}; "
        f"95 % should stay below {usual} there."
    )
    return f"{one.name}: connections one by one", caption, alt


def _verdict(connections: Connections) -> str:
    """Say whether all connections are as close as is expected, or which is not."""
    above = connections.above()
    if above is None:
        inside = (np.abs(connections.deviations) <= connections.expected).mean()
        return f"{'All stay within' if inside > INSIDE else 'None lies far above'} what is expected, the dotted line"
    number, low, top = above
    until = "on" if top >= EDGE * connections.frequency_hz[-1] else f"to {frequency(top)}"
    return (
        f"Connection {number} lies clearly above what is expected, the dotted line, from {frequency(low)} {until}: "
        "look at it"
    )


def element_words(one: StandardEvidence) -> Words:
    """Return the words of the element."""
    element, f = one.element, one.frequency_hz
    ends = []
    for k, (symbol, unit, _) in enumerate(QUANTITIES[one.kind]):
        first, last = (_with_band(element.values[k], element.u95[k], place) for place in (0, -1))
        if first == last:
            ends.append(f"{symbol} = {first} {unit} everywhere")
        else:
            ends.append(
                f"{symbol} = {first} {unit} at {frequency(f[0])} and {last} {unit} at {frequency(f[-1])}"
            )
    key = ", ".join(ends)
    sure = " (95 %)" if element.u95.any() else "; the kit states no uncertainty of it"
    what = ELEMENTS[one.kind]
    caption = f"The {what} at the end of the offset line: {key}{sure}."
    if element.traded and element.u95_of_rest is not None:
        rest = figure(float(element.u95_of_rest[-1].mean()))
        caption += (
            " Most of the band is the trade-off with the delay, and does not show in Γ: "
            f"with the delay known {element.symbols[-1]} would be ± {rest} {element.units[-1]} on average."
        )
    return (
        f"{one.name}: its {what}",
        caption,
        f"The {what} of {one.name} over frequency: {key}{sure}.",
    )


def largest_part(one: StandardEvidence) -> tuple[str, float]:
    """Return which kind makes most of the bound at the limit, or at the first frequency, and its part."""
    place = int(np.argmin(np.abs(one.frequency_hz - max(one.limit_hz, one.frequency_hz[0]))))
    kind = int(np.argmax(one.parts[:, place]))
    whole = float(one.bound[place])
    return one.kinds[kind], float(one.parts[kind, place]) / whole if whole > 0.0 else 0.0


def _make(kind: str) -> str:
    return "make" if kind.endswith("s") else "makes"


def _at_limit(one: StandardEvidence) -> str:
    """Return the bound at the limit, where this lies between the ends."""
    if not one.frequency_hz[0] < one.limit_hz < EDGE * one.frequency_hz[-1]:
        return ""
    there = float(np.interp(one.limit_hz, one.frequency_hz, one.bound))
    return f"{figure(there)} at {frequency(one.limit_hz)}, where its limit is, and "


def _with_band(values: FloatArray, halves: FloatArray, place: int) -> str:
    value, half = float(values[place]), float(halves[place])
    if half <= 0.0:
        return _signed(f"{value:.3g}")
    digits = min(max(0, 1 - int(np.floor(np.log10(half)))), 6)
    return _signed(f"{rounded(value, digits)} ± {figure(half)}")


def _signed(text: str) -> str:
    """Return a text with the sign for minus before numbers."""
    return _MINUS.sub("−", text)
