"""Conversions at 50 Ω that the trade uses daily; derived from first principles here, not a publication."""

import numpy as np
import pytest

from stdfit.circuits.load import load
from stdfit.circuits.standard import PARAMETERS, reflection

AT_1_GHZ = np.array([1e9])


def gamma_of(kind, **parts):
    values = [parts.get(p.name, 50.0 if p.name == "offset_z0_ohm" else 0.0) for p in PARAMETERS[kind]]
    return complex(reflection(kind, values, AT_1_GHZ, 50.0)[0][0])


def slope_of(kind, name, at=None):
    values = [
        {"offset_z0_ohm": 50.0, "resistance_ohm": 50.0, **(at or {})}.get(p.name, 0.0)
        for p in PARAMETERS[kind]
    ]
    place = [p.name for p in PARAMETERS[kind]].index(name)
    return complex(reflection(kind, values, AT_1_GHZ, 50.0)[1][0, place])


@pytest.mark.parametrize(
    ("kind", "parts"),
    [
        ("open", {"offset_delay_ps": 1.0}),
        ("open", {"c0": 20.0}),
        ("short", {"offset_delay_ps": 1.0}),
        ("short", {"l0": 50.0}),
    ],
)
def test_a_picosecond_is_0_720_degrees(kind, parts):
    ideal = 1.0 if kind == "open" else -1.0
    assert -np.degrees(np.angle(gamma_of(kind, **parts) / ideal)) == pytest.approx(0.720, abs=5e-4)


@pytest.mark.parametrize(("kind", "name", "amount"), [("open", "c0", 20.0), ("short", "l0", 50.0)])
def test_capacitance_and_inductance_are_a_delay_to_first_order(kind, name, amount):
    assert amount * slope_of(kind, name) == pytest.approx(slope_of(kind, "offset_delay_ps"), rel=1e-12)


@pytest.mark.parametrize(("ohm", "decibels"), [(0.1, -60.0), (0.5, -46.0)])
def test_resistance_of_a_load_in_decibels_to_first_order(ohm, decibels):
    change = abs(slope_of("load", "resistance_ohm")) * ohm
    assert 20 * np.log10(change) == pytest.approx(decibels, abs=0.05)


def test_a_tenth_of_an_ohm_on_a_load():
    assert 20 * np.log10(abs(gamma_of("load", resistance_ohm=50.1))) == pytest.approx(-60.0, abs=0.05)


def test_only_l_minus_c_z0_squared_of_a_load_shows_to_first_order():
    """100 pH and 40 fF cancel: 40 fF · (50 Ω)² = 100 pH."""
    pair = 100.0 * slope_of("load", "inductance_ph") + 40.0 * slope_of("load", "capacitance_ff")
    alone = 100.0 * slope_of("load", "inductance_ph")
    assert abs(pair) < 1e-12 * abs(alone)
    assert abs(load(AT_1_GHZ, 50.0, 1e-12, 0.4e-15, 50.0)[0][0]) < 1e-3 * abs(
        load(AT_1_GHZ, 50.0, 1e-12, 0.0, 50.0)[0][0]
    )


def test_a_delay_in_front_of_a_perfect_load_does_not_show():
    assert abs(slope_of("load", "offset_delay_ps")) < 1e-15
    assert gamma_of("load", resistance_ohm=50.0, offset_delay_ps=20.0) == pytest.approx(0.0, abs=1e-15)
