"""The entry sheet for eyes: aligned, with units, the verdict last."""

from dataclasses import replace

import pytest

from stdfit.validity.entry.sheet import Wanted, entry_sheet
from stdfit.validity.entry.units import units_from
from stdfit.validity.limit import Limit
from stdfit.writing.sheet_data import COLUMNS, sheet_rows
from stdfit.writing.sheet_text import sheet_text, verdict


@pytest.fixture
def sheet(small_kit):
    wanted = Wanted(("delay", "c0", "c1", "z0"), units_from(["capacitance=F"], None), ("3",))
    return entry_sheet(small_kit, wanted)


def test_what_to_type(sheet):
    lines = sheet_text(sheet).splitlines()
    start = lines.index("  open")
    assert [line.split("  ")[-1].strip() for line in lines[start + 1 : start + 4]] == [
        "ps (one way)",
        "Ω",
        "F",
    ]
    assert len({line.rindex("  ") for line in lines[start + 1 : start + 4]}) == 1
    assert "e-14" in lines[start + 3]
    assert lines[start + 4] == "    0: C1"
    assert lines[start + 5] == "    not accepted: offset loss, C2, C3"
    load = lines.index("  load")
    assert any("not accepted: offset loss, resistance (50 Ω)" in line for line in lines[load : load + 6])


def test_the_verdict_is_the_last_line(sheet):
    last = sheet_text(sheet).splitlines()[-1]
    assert last == verdict(sheet)
    assert last.startswith("within 0.02 the kit as typed is good to ")


def test_verdicts(sheet):
    before, left = Limit(0.02, 4e9, "load: this"), Limit(0.02, 4e9, "open: that")
    same = replace(sheet, before=before, left=left)
    assert verdict(same) == "within 0.02 the kit as typed is good to 4 GHz, as before: open: that"
    less = replace(same, left=replace(left, limit_hz=1e9))
    assert verdict(less) == "within 0.02 the kit as typed is good to 1 GHz, instead of 4 GHz: open: that"
    none = replace(same, left=replace(left, limit_hz=0.0))
    assert verdict(none) == (
        "within 0.02 the kit as typed cannot be trusted at any frequency, instead of to 4 GHz: open: that"
    )
    never = replace(none, before=replace(before, limit_hz=0.0))
    assert verdict(never) == "within 0.02 the kit cannot be trusted at any frequency: load: this"


def test_nothing_accepted(small_kit):
    text = sheet_text(entry_sheet(small_kit, Wanted(("nothing",))))
    assert "Nothing to type: the standards pass for ideal ones, open +1, short −1, load 0" in text
    (line,) = [one for one in text.splitlines() if one.startswith("ideal standards would cost")]
    # By hand: 20.25 ps and 45.5 fF turn by 4πfτ + 2·atan(2πfC·Zr), 0.283 rad at 1 GHz and 0.849 rad at 3 GHz.
    assert "an extra error of 0.28 at 1 GHz (open), 0.82 at 3 GHz (open)" in line
    assert line.endswith(("within 0.02",))


def test_short_readings_are_told_at_their_end(small_kit):
    short = tuple(
        replace(one, read_top_hz=0.8e9, fit_top_hz=0.8e9, limit=replace(one.limit, limit_hz=0.8e9))
        for one in small_kit.definitions
    )
    text = sheet_text(entry_sheet(replace(small_kit, definitions=short), Wanted(("nothing",))))
    assert " at 800 MHz (open); " in text


def test_rows(sheet):
    rows = sheet_rows(sheet)
    assert {len(row) for row in rows} == {len(COLUMNS)}
    table = {tuple(row[:3]): tuple(row[3:]) for row in rows}
    assert len(table) == len(rows)
    assert table["open", "open", "delay"][1] == "ps (one way)"
    assert table["open", "open", "largest extra error"] == (repr(sheet.entries[0].extra), "1")
    assert table["", "", "limit left"] == (repr(sheet.left.limit_hz), "Hz")
