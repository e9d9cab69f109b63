"""Connector families named in free text."""

import pytest

from stdfit.circuits.coaxial.dimensions import line_impedance_ohm
from stdfit.circuits.coaxial.modes import line_te11_hz
from stdfit.circuits.connectors import FAMILIES, UNKNOWN, family_of

DRAWN = [key for key, family in FAMILIES.items() if family.bore_m is not None]


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("SMA", "SMA"),
        ("sma female", "SMA"),
        ("3.5 mm male", "3.5 mm"),
        ("type N", "type N"),
        ("N(f)", "type N"),
        ("2.92mm", "2.92 mm"),
        ("7 mm", "7 mm"),
        ("BNC plug", "BNC"),
    ],
)
def test_families_are_found_in_free_text(text, name):
    assert family_of(text).name == name


@pytest.mark.parametrize("text", ["", "a bare board edge", "coaxial, home-made"])
def test_other_connectors_have_no_ceiling(text):
    assert family_of(text) is UNKNOWN
    assert UNKNOWN.top_hz == float("inf")


@pytest.mark.parametrize(
    ("key", "cut_off_ghz", "recommended_ghz"),
    [("3.5", 38.8, 33), ("2.92", 46.5, 40), ("2.4", 56.5, 50), ("1.85", 73.3, 65), ("1.0", 135.7, 110)],
)
def test_next_mode_of_precision_connectors(key, cut_off_ghz, recommended_ghz):
    """Cut-offs and recommended tops of IEEE Std 287.1-2021, as tabulated in papers of DesignCon 2024."""
    assert FAMILIES[key].top_hz == pytest.approx(cut_off_ghz * 1e9)
    assert FAMILIES[key].top_hz > recommended_ghz * 1e9
    assert FAMILIES[key].recommended_hz == recommended_ghz * 1e9
    assert FAMILIES[key].next_mode_hz == FAMILIES[key].top_hz


@pytest.mark.parametrize("key", ["3.5", "2.92", "2.4", "1.85", "1.0"])
def test_published_cut_offs_are_the_exact_root_of_te11(key):
    """J1'(x)·Y1'(bx/a) = J1'(bx/a)·Y1'(x) for the bore and pin of the table; published to 0.1 GHz."""
    family = FAMILIES[key]
    assert line_te11_hz(family.pin_m, family.bore_m) == pytest.approx(family.next_mode_hz, rel=3e-3)


@pytest.mark.parametrize("key", DRAWN)
def test_lines_of_the_table_are_near_50_ohm(key):
    """Air lines to a few hundredths; SMA's 1.27 in 4.1 mm of PTFE is nominal only."""
    family = FAMILIES[key]
    off = 0.03 if family.permittivity == 1.0 else 1.0
    assert line_impedance_ohm(family.pin_m, family.bore_m, family.permittivity) == pytest.approx(
        50.0, abs=off
    )


@pytest.mark.parametrize("key", DRAWN)
def test_no_top_lies_beyond_the_next_mode(key):
    family = FAMILIES[key]
    assert family.top_hz < 1.003 * line_te11_hz(family.pin_m, family.bore_m, family.permittivity)


def test_every_figure_has_its_source():
    assert all(family.source for family in FAMILIES.values())
