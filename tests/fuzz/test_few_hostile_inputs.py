"""A few inputs of the fuzz program, drawn from a seed; `python tests/fuzz/run.py --inputs 20000` runs many."""

import pytest
from fuzz_loop import run_many

INPUTS = 80

ONCE_FAULTS = {
    52994: "a Touchstone file named .csv, read rightly and held for wrong",
    53549: "raw readings of a short called an open: the derivatives overflowed",
}
"""Inputs of seed 1 that showed a fault, of the program or of its judge."""


def test_hostile_input_is_told_in_two_lines_and_harms_nothing():
    counts = run_many(range(INPUTS), seed=1000)
    assert counts.faults == {}
    assert counts.inputs == INPUTS
    assert counts.codes[2] > INPUTS // 3  # most inputs are refused, not all
    assert counts.codes[0] > 0


@pytest.mark.parametrize("number", ONCE_FAULTS)
def test_inputs_that_showed_a_fault(number):
    assert run_many([number], seed=1).faults == {}
