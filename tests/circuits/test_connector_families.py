"""Connector families named in free text."""

import pytest

from stdfit.circuits.connectors import FAMILIES, UNKNOWN, family_of


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
