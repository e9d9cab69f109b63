"""What is said of devices: columns, words and data."""

import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.validity.device.bound import by_magnitude, device_map, residual_terms, three_of
from stdfit.validity.device.questions import Answer, answers, phase_within, return_loss_within
from stdfit.writing.device_text import (
    TABLE_GHZ,
    answer_data,
    answer_lines,
    as_a_kit,
    device_data,
    device_rows,
    device_text,
    ideal_line,
    round_frequencies,
)
from stdfit.writing.summary import summary

GRID = np.array([1e9, 3e9])


@pytest.fixture
def errors(usual_kit):
    return device_map(usual_kit, three_of(usual_kit), GRID)


def without_bound(errors):
    return replace(errors, standards=np.array([[1.0, -1.0, 0.0], [1.0, 1.0, 0.0]]))


def test_rows_hold_terms_in_decibels_and_bounds(errors):
    names, rows = device_rows(errors, (0.1, 1.0))
    assert names == [
        *("frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db"),
        *("worst_at_0.1", "typical_at_0.1", "worst_at_1", "typical_at_1"),
    ]
    columns = np.array(rows).T
    terms = residual_terms(errors)
    np.testing.assert_allclose(columns[0], GRID)
    np.testing.assert_allclose(10.0 ** (-columns[1] / 20.0), terms.directivity)
    np.testing.assert_allclose(10.0 ** (-columns[2] / 20.0), terms.source_match)
    np.testing.assert_allclose(1.0 - 10.0 ** (-columns[3] / 20.0), terms.reflection_tracking)
    worst, typical = by_magnitude(errors, (0.1, 1.0))
    np.testing.assert_allclose(columns[4::2].T, worst)
    np.testing.assert_allclose(columns[5::2].T, typical)


def test_the_text_says_what_the_rows_hold(usual_kit, errors):
    text = device_text(usual_kit, errors, (0.0, 1.0))
    _, rows = device_rows(errors, (0.0, 1.0))
    lines = text.splitlines()
    assert lines[0] == "Simulated bench: an analyser corrected with open, short, load, 95 %"
    assert "connections, drift and noise of the day come on top" in lines[1]
    assert lines[4].split() == ["frequency", "directivity", "source", "match", "reflection", "tracking"]
    for line, (hertz, d, m, t, *_) in zip(lines[5:7], rows, strict=True):
        told = f"{hertz / 1e9:.3g} GHz {d:.1f} dB {m:.1f} dB ± {t:.2g} dB"
        assert line.split() == told.split()
    assert re.split(r" {2,}", lines[9].strip()) == ["frequency", "|Γ| = 0", "|Γ| = 1"]
    last = rows[-1]
    for figure in (f"{last[4]:.2g} ({last[5]:.2g})", f"{last[6]:.2g} ({last[7]:.2g})"):
        assert figure in lines[-1]
    assert text.endswith("\n") and not text.endswith("\n\n")


def test_where_there_is_no_bound(usual_kit, errors):
    lost = without_bound(errors)
    text = device_text(usual_kit, lost, (0.0, 1.0))
    assert text.count("no bound") == 5
    assert "inf" not in text and "nan" not in text
    first, second = device_data(usual_kit, lost, (0.0,))["device"]
    assert None not in first.values()
    assert [name for name, value in second.items() if value is not None] == ["frequency_hz"]
    line = ideal_line(lost)
    assert line.startswith(
        "were the standards typed in as ideal, a device's Γ would be wrong by up to 0 at 1 GHz, any amount at 3 GHz; "
    )
    assert line.endswith(", any amount")


def test_data_hold_what_the_rows_hold(usual_kit, errors):
    data = device_data(usual_kit, errors, (0.1,))
    assert data["name"] == "Simulated bench"
    assert data["standards"] == ["open", "short", "load"]
    names, rows = device_rows(errors, (0.1,))
    assert data["device"] == [dict(zip(names, row, strict=True)) for row in rows]


def test_answers_in_words_and_as_data():
    asked = phase_within(2.0)
    found = [Answer(asked, 2.5e9, "short", "short: noise"), Answer(asked, 0.0, "", "why not")]
    assert answer_lines(found) == [
        "asked                                 good to  ends because",
        "phase of a full reflection within 2°  2.5 GHz  short: noise",
        "phase of a full reflection within 2°  none     why not",
    ]
    assert answer_data(found) == [
        {
            "asked": "phase of a full reflection within 2°",
            "limit_hz": 2.5e9,
            "held_back_by": "short",
            "reason": "short: noise",
        },
        {
            "asked": "phase of a full reflection within 2°",
            "limit_hz": 0.0,
            "held_back_by": None,
            "reason": "why not",
        },
    ]


def test_a_kit_with_three_standards_is_told_as_a_kit(usual_kit):
    lines = as_a_kit(usual_kit)
    assert "\n".join(lines) in summary(usual_kit)
    assert lines[0].startswith("As a kit (")
    assert [line.split("  ")[1] for line in lines[2:5]] == ["1 GHz", "3 GHz", "6 GHz"]
    (found,) = answers(usual_kit, [return_loss_within(20.0, 1.0)])
    assert lines[5].startswith(f"  {found.question.label}: to {found.limit_hz / 1e9:.3g} GHz")
    assert [line.split(":")[0].strip() for line in lines[6:8]] == [
        "|Z| near 50 Ω within 2 %",
        "phase of a full reflection within 2°",
    ]
    assert lines[8].startswith(
        "  were the standards typed in as ideal, a device's Γ would be wrong by up to "
    )
    assert len(lines) == 9


def test_a_kit_of_another_reference_asks_for_its_own(workshop):
    assert any("|Z| near 75 Ω within 2 %" in line for line in as_a_kit(workshop(reference_ohm=75.0).kit()))


def test_what_fails_at_once_is_told(usual_kit):
    poor = replace(usual_kit.definition("load"), misfit_hz=np.array([50e6, 6e9]), misfit=np.array([0.5, 0.5]))
    rest = tuple(poor if one.name == "load" else one for one in usual_kit.definitions)
    lines = as_a_kit(replace(usual_kit, definitions=rest))
    assert "  return loss of 20 dB within 1 dB: none, held back by load" in lines


def test_fewer_standards_are_no_kit_for_devices(small_kit, usual_kit):
    assert as_a_kit(small_kit) == []
    assert "As a kit" not in summary(small_kit)
    assert as_a_kit(replace(usual_kit, top_hz=1e6)) == []


def test_round_frequencies():
    assert round_frequencies(1e6, 6e9, 3).tolist() == [1e9, 3e9, 6e9]
    assert round_frequencies(2e9, 6e9, 3).tolist() == [3e9, 6e9]
    assert round_frequencies(3.1e9, 5.9e9, 3).tolist() == [5.9e9]
    assert round_frequencies(1e9, 6e9, 8, TABLE_GHZ).tolist() == [1e9, 2e9, 3e9, 4e9, 5e9, 6e9]
    assert list(TABLE_GHZ) == sorted(TABLE_GHZ)
