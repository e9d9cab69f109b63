"""What is said of wear: figures with their units, all causes that fit, and the last line."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.trials.wear_study import quick_kit, wear_scenario
from stdfit.validity.change.cause import Cause, Explained
from stdfit.validity.change.wear import wear
from stdfit.writing.wear_text import COLUMNS, wear_data, wear_rows, wear_text, wear_verdict


@pytest.fixture(scope="module")
def found():
    worn = Worn("open", "plane shift", shift_ps=1.0)
    pair = draw_pair(wear_scenario(), np.random.default_rng(31), same_calibration=True, worn=worn)
    return wear(*(quick_kit(one) for one in pair), same_calibration=True)


def with_open(found, **fields):
    first, *others = found.standards
    return replace(found, standards=(replace(first, **fields), *others))


@pytest.mark.parametrize(
    ("cause", "told"),
    [
        (Cause("contact resistance", "Ω", 0.0612, 0.021), "contact resistance +61 ± 21 mΩ"),
        (Cause("contact resistance", "Ω", -1.234, 0.21), "contact resistance -1.23 ± 0.21 Ω"),
        (Cause("capacitance", "fF", 12.3, 4.56), "capacitance +12.3 ± 4.6 fF"),
        # 1 ps is 299.8 µm in vacuum.
        (
            Cause("plane shift", "ps", 1.0, 0.2),
            "plane shift +1.00 ± 0.20 ps (+300 ± 60 µm in air): reflects later",
        ),
        (Cause("plane shift", "ps", -1.0, 0.2), "(-300 ± 60 µm in air): reflects earlier"),
    ],
)
def test_a_cause_is_told_with_its_figures(found, cause, told):
    assert told in wear_text(with_open(found, explained=Explained((cause,), ())))


def test_causes_that_fit_as_well_are_all_told(found):
    one, other = Cause("plane shift", "ps", 1.0, 0.2), Cause("capacitance", "fF", 20.0, 4.0)
    lines = wear_text(with_open(found, explained=Explained((one,), ((other,),)))).splitlines()
    assert "  or as well: capacitance +20.0 ± 4.0 fF" in lines


def test_the_last_line_says_what_to_do(found):
    assert wear_verdict(found).startswith("changed: open; ")
    far, near = (
        replace(found, old_limit_hz=1e9, new_limit_hz=2e9),
        replace(found, old_limit_hz=1.9e9, new_limit_hz=2e9),
    )
    assert wear_verdict(far) == (
        "changed: open; mend what can be mended and read it again, or type the new definition"
    )

    assert "still serves to 1.9 GHz" in wear_verdict(near)
    same = with_open(found, verdict="not changed")
    assert wear_verdict(same) == "not changed: no need to type anything anew"
    unsure = with_open(found, verdict="too uncertain to tell")
    assert wear_verdict(unsure).startswith("too uncertain to tell: a change of open by more than 0.02")


def test_what_falls_without_a_change_is_explained(found):
    standing = [replace(one, old_limit_hz=one.new_limit_hz) for one in found.standards]
    fallen = [replace(one, old_limit_hz=0.5 * one.new_limit_hz) for one in standing]
    assert [one.verdict for one in found.standards] == ["changed", "not changed", "not changed"]
    for of_short, told in ((standing[1], []), (fallen[1], ["note: short: no change was found"])):
        some = replace(found, standards=(fallen[0], of_short, standing[2]))
        lines = wear_text(some).splitlines()
        assert [line.partition(",")[0] for line in lines if "no change was found" in line] == told


def test_data_and_rows_say_the_same(found):
    data, rows = wear_data(found), wear_rows(found)
    assert [one["verdict"] for one in data["standards"]] == [one.verdict for one in found.standards]
    of_open = np.array([row[1:] for row in rows if row[0] == "open"], dtype=float)
    assert len(COLUMNS) == 1 + of_open.shape[1]
    assert of_open[:, 3].max() == data["standards"][0]["largest_normalised"]
    assert data["standards"][0]["explained_by"][0][0]["length_um"] == pytest.approx(300.0, abs=70.0)


def test_limits_of_nothing_are_none(found):
    nowhere = replace(with_open(found, old_limit_hz=0.0), old_limit_hz=0.0, new_limit_hz=0.0)
    text = wear_text(nowhere)
    assert "0 Hz" not in text
    assert [line.split()[1:] for line in text.splitlines() if line.split()[:1] == ["kit"]] == [
        ["none", "none"]
    ]
    assert "neither definition is good at any frequency within" in text
