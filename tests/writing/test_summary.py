"""The terminal's text against reference text."""

from dataclasses import replace

from stdfit.validity.limit import Limit
from stdfit.validity.limits import limits
from stdfit.writing.aligned import aligned
from stdfit.writing.plain_data import kit_data, limit_data
from stdfit.writing.summary import limit_lines, summary, verdict

REFERENCE = """\
Garden shed set (invented) (SMA, 50 Ω)
within 0.02 the kit is good to 3.5 GHz: open: the readings leave the model here (misfit)

  standard  good to  fitted to  order     ends because
  open      3.5 GHz  5 GHz      constant  the readings leave the model here (misfit)
  load      6 GHz    6 GHz      R         the readings end here

What to type in (± 95 %); take all values of a standard together, since single ones trade off
  open
    offset delay          20.250 ± 0.500  ps    free
    offset loss           1.0             GΩ/s  held
    offset Z0             50.00           Ω     held
    C0                    45.50 ± 8.00    fF    given
    offset delay + Z0·C0  22.525 ± 0.250  ps    the sum that the readings fix
    all others: 0
    order constant, good to 3.5 GHz; others: even 3.25 GHz
  load
    offset Z0   50            Ω  held
    resistance  50.25 ± 0.12  Ω  free
    all others: 0
  (other orders are told as estimated over their own best range; of nearly equal ones the simplest is taken)

How far at which tolerance on |error of Γ|
  within  kit      open     load
  0.01    2.5 GHz  2.5 GHz  6 GHz
  0.02    3.5 GHz  3.5 GHz  6 GHz

What would push it further, at least about so far without another fit ('stdfit plan BENCH' fits again, and often \
finds more)
  4.03 GHz  only all of this together moves the limit: halve what 'directivity' puts into the bound of 'open'; \
average each reading four times as long; build 'open' so that the model is followed twice as closely: fewer steps, \
shorter leads or adapters, no resonance

Notes
  open: delay and C0 trade off

Checked
  nothing was drawn at random

Warnings
  one connection only of nothing
"""

LIMITS = """\
within  what  good to   ends because
0.01    kit   2.08 GHz  open: directivity, 92 % of the bound
        open  2.08 GHz  directivity, 92 % of the bound
        load  6 GHz     the readings end here
0.02    kit   3.22 GHz  open: directivity, 71 % of the bound; misfit 28 %
        open  3.22 GHz  directivity, 71 % of the bound; misfit 28 %
        load  6 GHz     the readings end here
"""


def test_summary(small_kit):
    assert summary(small_kit) == REFERENCE


def test_summary_without_warnings_and_notes(small_kit):
    definitions = tuple(replace(one, notes=()) for one in small_kit.definitions)
    text = summary(replace(small_kit, warnings=(), checks=(), definitions=definitions))
    assert text == REFERENCE[: REFERENCE.index("\nNotes")]


def test_a_kit_that_is_good_for_nothing(small_kit):
    kit = replace(small_kit, limit=Limit(0.02, 0.0, "open: noise"), connector="")
    assert verdict(kit) == "within 0.02 the kit cannot be trusted at any frequency: open: noise"
    assert summary(kit).startswith("Garden shed set (invented) (connector not named, 50 Ω)\n")


def test_limits(small_kit):
    assert limit_lines(small_kit, limits(small_kit, [0.01, 0.02])) == LIMITS


def test_columns_stand_below_each_other():
    assert aligned([["a", "Ω", "c"], ["long", "b", ""]]) == ["  a     Ω  c", "  long  b"]
    assert aligned([]) == []


def test_a_standard_of_which_nothing_is_used(small_kit):
    opened = small_kit.definitions[0]
    nothing = replace(
        opened,
        parameters=tuple(replace(p, role="unused") for p in opened.parameters),
        combinations=(),
        tried=(),
    )
    text = summary(replace(small_kit, definitions=(nothing, small_kit.definitions[1])))
    assert "  open\n    all others: 0\n  load\n" in text


def test_data_says_what_the_text_says(small_kit):
    data = kit_data(small_kit)
    assert data["limit_hz"] == 3.5e9
    assert data["reason"] == small_kit.limit.reason
    opened = data["standards"][0]
    assert opened["parameters"][0] == {
        "name": "offset_delay_ps",
        "value": 20.25,
        "unit": "ps",
        "u": 0.25,
        "low_95": 19.75,
        "high_95": 20.75,
        "role": "free",
    }
    assert opened["combinations"][0]["correlation_of_parts"] == -0.875
    assert data["ladder"][0]["standards"] == {"open": 2.5e9, "load": 6e9}


def test_limit_data_has_the_fixed_form(small_kit):
    found = limits(small_kit, [0.02])
    (one,) = limit_data(small_kit, found)["limits"]
    assert one == {
        "within": 0.02,
        "kit": {"limit_hz": found[0][0].limit_hz, "reason": found[0][0].reason},
        "standards": [
            {"name": "open", "limit_hz": found[0][1][0].limit_hz, "reason": found[0][1][0].reason},
            {"name": "load", "limit_hz": 6e9, "reason": "the readings end here"},
        ],
    }
