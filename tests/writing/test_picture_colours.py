"""The colours of pictures can be told apart by everybody, on a light background and on a dark one."""

from itertools import combinations

import numpy as np
import pytest

from stdfit.writing.pictures.palette import AREAS, DARK, LINES, MISFIT_COLOUR, PALETTE

DATA = ("series-1", "series-2", "series-3", "series-4", "series-5", "rest")

SIGHT = {
    "usual": np.eye(3),
    "protanopia": [
        [0.152286, 1.052583, -0.204868],
        [0.114503, 0.786281, 0.099216],
        [-0.003882, -0.048116, 1.051998],
    ],
    "deuteranopia": [
        [0.367322, 0.860646, -0.227968],
        [0.280085, 0.672501, 0.047413],
        [-0.011820, 0.042940, 0.968881],
    ],
    "tritanopia": [
        [1.255528, -0.076749, -0.178779],
        [-0.078411, 0.930809, 0.147602],
        [0.004733, 0.691367, 0.303900],
    ],
}
"""G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, IEEE Trans. Vis. Comput. Graph. 15, 2009, 1291–1298, severity 1,
on linear RGB; from memory. Each row adds up to 1, so that white stays white."""

TO_XYZ = np.array(
    [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
)
"""Linear sRGB to CIE XYZ under D65: IEC 61966-2-1; from memory."""


def linear(colour):
    """Linear RGB of "#rrggbb" (IEC 61966-2-1)."""
    value = np.array([int(colour[k : k + 2], 16) for k in (1, 3, 5)]) / 255.0
    return np.where(value <= 0.04045, value / 12.92, ((value + 0.055) / 1.055) ** 2.4)


def lab(rgb):
    """CIE 1976 L*a*b* of linear RGB."""
    part = TO_XYZ @ np.clip(rgb, 0.0, 1.0) / TO_XYZ.sum(axis=1)
    root = np.where(part > (6 / 29) ** 3, np.cbrt(part), part / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116.0 * root[1] - 16.0, 500.0 * (root[0] - root[1]), 200.0 * (root[1] - root[2])])


def contrast(one, two):
    """Contrast ratio: W3C Recommendation "Web Content Accessibility Guidelines 2.1", section 1.4.3."""
    low, high = sorted(float(linear(colour) @ TO_XYZ[1]) for colour in (one, two))
    return (high + 0.05) / (low + 0.05)


def test_the_measures_are_right():
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0, rel=1e-6)
    assert np.allclose(lab(linear("#ffffff")), [100.0, 0.0, 0.0], atol=1e-6)
    assert np.allclose([np.sum(row, axis=1) for row in SIGHT.values()], 1.0, atol=1e-5)
    red, green = linear("#c03030"), linear("#5a7a20")
    apart = [np.linalg.norm(lab(SIGHT[k] @ red) - lab(SIGHT[k] @ green)) for k in ("usual", "deuteranopia")]
    assert apart[0] > 60.0 > 30.0 > apart[1]


@pytest.mark.parametrize("palette", [PALETTE, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("sight", SIGHT)
def test_data_colours_are_apart_for_every_sight(palette, sight):
    seen = {name: lab(np.asarray(SIGHT[sight]) @ linear(palette[name])) for name in DATA}
    for one, two in combinations(DATA, 2):
        assert np.linalg.norm(seen[one] - seen[two]) > 25.0, (one, two)


@pytest.mark.parametrize("palette", [PALETTE, DARK], ids=["light", "dark"])
def test_words_and_lines_stand_out_from_the_background(palette):
    assert contrast(palette["ink"], palette["paper"]) > 7.0
    assert contrast(palette["quiet"], palette["paper"]) > 4.5
    for name in LINES:
        assert contrast(palette[name], palette["paper"]) > 4.5


def test_both_palettes_name_the_same_colours_once():
    assert list(PALETTE) == list(DARK)
    assert len(set(PALETTE.values())) == len(PALETTE)
    assert {*LINES, *AREAS, MISFIT_COLOUR, "rest"} == set(DATA)
    assert MISFIT_COLOUR not in AREAS
