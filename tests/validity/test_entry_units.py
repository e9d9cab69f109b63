"""Units and digits of typed numbers: conversions by hand, both ways, and what is refused."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.validity.entry.units import (
    CHOICES,
    Units,
    last_digit,
    nearest_number,
    quantity_of,
    text_of,
    typing_of,
    units_from,
)

OPEN = np.array([100.0, 2.3, 50.0, 40.0, 1200.0, 600.0, -7.0])
LOAD = np.array([100.0, 2.3, 51.0, 50.2, 95.0, 30.0])


def number(kind, values, name, *words, velocity_factor=None):
    typing = typing_of(kind, units_from(words, velocity_factor))
    place = [one.name for one in PARAMETERS[kind]].index(name)
    return float(typing.typed(values, place)), typing.units[place].label


@pytest.mark.parametrize(
    ("name", "words", "factor", "expected", "label"),
    [
        # Derived by hand; c = 299792458 m/s.
        ("offset_delay_ps", [], None, 100.0, "ps (one way)"),
        ("offset_delay_ps", ["delay=two-way-ns"], None, 0.2, "ns (two ways)"),
        ("offset_delay_ps", ["delay=s"], None, 1e-10, "s (one way)"),
        ("offset_delay_ps", ["delay=mm"], None, 29.9792458, "mm (one way, velocity factor 1)"),
        ("offset_delay_ps", ["delay=two-way-m"], 0.7, 0.041970944, "m (two ways, velocity factor 0.7)"),
        ("offset_loss_gohm_per_s", ["loss=Ω/s"], None, 2.3e9, "Ω/s"),
        ("offset_loss_gohm_per_s", ["loss=ohm/s"], None, 2.3e9, "Ω/s"),
        # 20·log10(e)·2.3e9·100e-12/(2·50) = 8.685890·0.0023.
        ("offset_loss_gohm_per_s", ["loss=dB"], None, 0.01997755, "dB at 1 GHz (one way)"),
        ("offset_loss_gohm_per_s", ["loss=two-way-dB"], None, 0.03995509, "dB at 1 GHz (two ways)"),
        ("c0", [], None, 40.0, "1e-15 F"),
        ("c0", ["capacitance=F"], None, 4e-14, "F"),
        ("c1", ["capacitance=F"], None, 1.2e-24, "F/Hz"),
        ("c1", ["capacitance=fF"], None, 1.2, "fF/GHz"),
        ("c2", ["capacitance=fF"], None, 0.6, "fF/GHz²"),
        ("c3", ["capacitance=pF"], None, -7e-6, "pF/GHz³"),
    ],
)
def test_numbers_of_an_open(name, words, factor, expected, label):
    found, own = number("open", OPEN, name, *words, velocity_factor=factor)
    assert (found, own) == (pytest.approx(expected, rel=1e-6), label)


def test_numbers_of_a_load_and_a_short():
    assert number("load", LOAD, "capacitance_ff", "capacitance=pF")[0] == pytest.approx(0.03)
    assert number("load", LOAD, "inductance_ph", "inductance=nH") == (pytest.approx(0.095), "nH")
    short = np.array([0.0, 0.0, 50.0, 10.0, 2000.0, 300.0, 4.0])
    assert number("short", short, "l1", "inductance=pH") == (pytest.approx(2.0), "pH/GHz")
    assert number("short", short, "l3", "inductance=H") == (pytest.approx(4e-42), "H/Hz³")


def test_a_loss_in_decibels_is_what_the_line_loses():
    """Against the line's own formula: a long line of impedance Zr, terminated in +1, at 1 GHz."""
    values = np.array([10_000.0, 2.3, 50.0, 0.0, 0.0, 0.0, 0.0])
    two_way, _ = number("open", values, "offset_loss_gohm_per_s", "loss=two-way-dB")
    gamma, _ = reflection("open", values, np.array([1e9]), 50.0)
    # Zc is not quite Zr, since the loss acts on it too: by 0.18 Ω, which changes |Γ| by up to 0.4 %.
    assert two_way == pytest.approx(3.9955, abs=1e-4)
    assert -20.0 * np.log10(abs(gamma[0])) == pytest.approx(two_way, abs=0.035)


@pytest.mark.parametrize("kind", ["open", "short", "load"])
def test_back_and_forth_in_all_units(kind):
    values = {"open": OPEN, "short": OPEN, "load": LOAD}[kind]
    longest = max(len(choices) for choices in CHOICES.values())
    for k in range(longest):
        chosen = {quantity: choices[k % len(choices)] for quantity, choices in CHOICES.items()}
        typing = typing_of(kind, Units(chosen, 0.66))
        places = range(len(values))
        numbers = np.array([float(typing.typed(values, place)) for place in places])
        np.testing.assert_allclose(typing.meant(numbers, places, values), values, rtol=1e-13)
        pair = typing.meant(np.stack([numbers, 2.0 * numbers]), places, values)
        np.testing.assert_allclose(pair[0], values, rtol=1e-13)


def test_a_loss_in_decibels_of_no_line_is_no_loss():
    typing = typing_of("open", units_from(["loss=dB"], None))
    values = np.zeros(7)
    values[1:3] = (2.0, 50.0)
    assert typing.typed(values, 1) == 0.0
    assert typing.value(0.5, values, 1) == 0.0


def test_every_parameter_has_a_quantity():
    for kind, parameters in PARAMETERS.items():
        for one in parameters:
            assert quantity_of(one) in CHOICES, (kind, one.name)


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (16.204, 4, "16.20"),
        (-0.00151834, 3, "-0.00152"),
        (0.000151834, 3, "1.52e-04"),
        (3.979e-14, 2, "4.0e-14"),
        (-12345.6, 3, "-12300"),
        (9.996, 3, "10.0"),
        (1234567.0, 3, "1.23e+06"),
        (0.0, 4, "0"),
        (50.0, 1, "50"),
    ],
)
def test_texts(value, digits, text):
    assert text_of(nearest_number(value, digits), digits) == text
    assert float(text) == nearest_number(value, digits)


def test_last_digits():
    assert [last_digit(x, 3) for x in (12.3, 0.999, -1000.0, 0.0)] == [0.1, 0.001, 10.0, 0.0]


@pytest.mark.parametrize(
    ("words", "factor", "what", "mend"),
    [
        (["delay"], None, "'delay' names no unit", "delay=ns"),
        (["dealy=ps"], None, "no quantity 'dealy' has units", "did you mean 'delay'?"),
        (["delay=pss"], None, "no unit 'pss' of delay", "did you mean 'ps'?"),
        (["delay=ps", "delay=ns"], None, "two units for delay", "give one"),
        (["loss=db"], None, "no unit 'db' of loss", "did you mean 'dB'?"),
        ([], 0.7, "a velocity factor says nothing of a delay in time", "add --units delay=mm"),
        (["delay=mm"], 1.2, "a velocity factor of 1.2", "above 0 and up to 1"),
        (["delay=mm"], float("nan"), "a velocity factor of nan", "above 0 and up to 1"),
    ],
)
def test_what_is_refused(words, factor, what, mend):
    with pytest.raises(RequestError) as refused:
        units_from(words, factor)
    assert refused.value.what == what
    assert mend in refused.value.mend
