"""A few inputs of the fuzz program, drawn from a seed; `python tests/fuzz/run.py --inputs 20000` runs many."""

from fuzz_loop import run_many

INPUTS = 80


def test_hostile_input_is_told_in_two_lines_and_harms_nothing():
    counts = run_many(range(INPUTS), seed=1000)
    assert counts.faults == {}
    assert counts.inputs == INPUTS
    assert counts.codes[2] > INPUTS // 3  # most inputs are refused, not all
    assert counts.codes[0] > 0
