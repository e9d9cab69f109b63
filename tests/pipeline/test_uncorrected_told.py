"""A bench that is called corrected and looks raw: its user is asked, unless a given length explains it."""

import numpy as np
import pytest

from stdfit.pipeline import prepare_bench

CABLE = {
    "open": ("open", [3500.0, 1.0, 50.0, 45.0, 0.0, 0.0, 0.0]),
    "short": ("short", [3500.0, 1.0, 50.0, 5.0, 0.0, 0.0, 0.0]),
    "load": ("load", [0.0, 0.0, 50.0, 50.3, 20.0, 0.0]),
}
GIVEN = {"open": {"offset_delay_ps": (3500.0, 5.0)}}


@pytest.mark.parametrize(
    "fields, names",
    [
        ({}, "'open', 'short'"),
        ({"given": GIVEN}, "'short'"),
        ({"given": GIVEN, "same_offset_as": {"short": "open"}}, None),
        ({"given": dict.fromkeys(("open", "short"), GIVEN["open"])}, None),
    ],
)
def test_a_cable_is_asked_about_where_nothing_explains_it(workshop, fields, names):
    made = workshop(values=CABLE, frequency_hz=np.linspace(40e6, 2e9, 401), **fields)
    told = [one for one in prepare_bench(made.bench(), made.readings()).warnings if "correction?" in one]
    assert len(told) == (names is not None)
    assert all(f"correction? {names} seen behind 35" in one for one in told)


def test_usual_standards_are_not_asked_about(workshop):
    made = workshop()
    assert not any("correction?" in one for one in prepare_bench(made.bench(), made.readings()).warnings)
