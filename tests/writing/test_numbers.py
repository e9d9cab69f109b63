"""Numbers as people read and type them."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.writing.numbers import (
    ROUNDING,
    decimals,
    frequency,
    half_width,
    label_of,
    plus_minus,
    second_digit,
)

TEXTS = {
    0.0: "0 Hz",
    42.0: "42 Hz",
    999.4: "999 Hz",
    999.6: "1 kHz",
    1234.0: "1.23 kHz",
    999.4e3: "999 kHz",
    999.6e3: "1 MHz",
    2e8: "200 MHz",
    999.6e6: "1 GHz",
    2.13922e9: "2.14 GHz",
    18e9: "18 GHz",
    135.7e9: "136 GHz",
    1.2344e12: "1234 GHz",
}


@pytest.mark.parametrize("hertz, text", TEXTS.items())
def test_frequencies(hertz, text):
    assert frequency(hertz) == text


def test_no_frequency_is_written_with_an_exponent():
    for hertz in np.geomspace(1.0, 1e13, 997):
        text = frequency(float(hertz))
        number, unit = text.split()
        assert "e" not in number
        size = {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9}[unit]
        assert float(number) * size == pytest.approx(hertz, rel=5e-3 if hertz > 100 else 0.5)


@pytest.mark.parametrize(
    "value, half, digits, text",
    [
        (20.25, 0.5, 3, "20.250 ± 0.500"),
        (-1.2345, 0.0321, 2, "-1.23 ± 0.032"),
        (611.44, 699.4, 0, "611 ± 699"),
        (50.0, 99.6, 1, "50.0 ± 100"),
        (50.0, 12.34, 1, "50.0 ± 12.3"),
        (-0.004, 0.5, 2, "0.00 ± 0.50"),
        (-0.006, 0.5, 2, "-0.01 ± 0.50"),
    ],
)
def test_value_and_half_width(value, half, digits, text):
    assert plus_minus(value, half, digits) == text


def test_labels_are_the_trade_s():
    assert [label_of("open", one.name) for one in PARAMETERS["open"]][3:] == ["C0", "C1", "C2", "C3"]
    assert label_of("load", "resistance_ohm") == "resistance"


def test_the_digits_shown_keep_the_curve(small_kit):
    """Each parameter as shown moves Γ by no more than the stated rounding; one digit less would, or would hide a part
    of its uncertainty."""
    for definition in small_kit.definitions:
        grid = np.linspace(definition.fit_low_hz, definition.fit_top_hz, 101)
        exact, _ = reflection(definition.kind, definition.values, grid, 50.0)
        for k, digits in enumerate(decimals(small_kit, definition)):
            shown = digits == second_digit(half_width(definition.parameters[k]))
            for step, inside in ((0.5 * 10.0**-digits, True), (5.0 * 10.0**-digits, False)):
                values = definition.values.copy()
                values[k] += step
                moved = np.abs(reflection(definition.kind, values, grid, 50.0)[0] - exact).max()
                if inside:
                    assert moved <= 1.05 * ROUNDING
                elif 0 < digits < 9 and not shown:
                    assert moved > 0.9 * ROUNDING


def test_no_value_is_rounded_to_more_than_a_tenth_of_its_uncertainty(small_kit):
    """A C2 of 4.766 ± 0.23 hardly moves the curve, and is no 5."""
    opened = small_kit.definitions[0]
    place = [one.name for one in opened.parameters].index("c2")
    sure = replace(opened.parameters[place], value=4.766, low=4.536, high=4.996, role="free")
    parameters = (*opened.parameters[:place], sure, *opened.parameters[place + 1 :])
    digits = decimals(small_kit, replace(opened, parameters=parameters))[place]
    assert plus_minus(sure.value, half_width(sure), digits) == "4.77 ± 0.23"
