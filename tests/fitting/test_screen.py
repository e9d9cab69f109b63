"""Single points that are off in one connection are mended; what all connections show is left alone."""

import zlib

import numpy as np
import pytest

from stdfit.fitting.screen import LONGEST_RUN, SMALLEST, screen_points
from stdfit.trials import draw_bench, families
from stdfit.trials.session import draw_glitches

FREQUENCY = np.linspace(50e6, 6e9, 201)
NOISE = 1e-4
PLACES = [0, 1, 2, 60, 100, 198, 199, 200]


def open_end(connections, seed=3):
    """Readings of an open behind 25 ps that repeats well: phase grows with frequency, |Γ| falls."""
    rng = np.random.default_rng(seed)
    truth = (1.0 - 0.01 * (FREQUENCY / 6e9) ** 2) * np.exp(-4j * np.pi * FREQUENCY * 25e-12)
    shift = np.exp(-4j * np.pi * np.outer(rng.normal(0.0, 0.1e-12, connections), FREQUENCY))
    noise = rng.standard_normal((connections, 201)) + 1j * rng.standard_normal((connections, 201))
    return truth * shift + NOISE * noise


@pytest.mark.parametrize("place", PLACES)
@pytest.mark.parametrize("connections", [2, 3, 5])
def test_a_glitch_in_one_connection_is_found_and_bridged(connections, place):
    sound = open_end(connections)
    readings = sound.copy()
    readings[1, place] += 0.03 * np.exp(1.1j)
    screened = screen_points(FREQUENCY, readings)
    assert np.argwhere(screened.replaced).tolist() == [[1, place]]
    # A straight line between two noisy neighbours; at an end the neighbour itself, one step of phase away.
    step = np.abs(np.diff(sound[1])).max() if place in (0, 200) else 0.0
    assert abs(screened.readings[1, place] - sound[1, place]) < step + 6.0 * NOISE
    untouched = ~screened.replaced
    assert (screened.readings[untouched] == readings[untouched]).all()


def test_two_glitches_side_by_side_are_bridged_together():
    readings = open_end(4)
    readings[2, 80:82] += 0.05
    screened = screen_points(FREQUENCY, readings)
    assert np.argwhere(screened.replaced).tolist() == [[2, 80], [2, 81]]
    assert np.abs(screened.readings[2, 80:82] - open_end(4)[2, 80:82]).max() < 6.0 * NOISE


def test_glitches_at_one_band_edge_in_different_connections():
    """Three connections of five are off at the same point, each in its own way."""
    readings = open_end(5)
    readings[[0, 2, 4], 120] += 0.04 * np.exp(2j * np.pi * np.array([0.1, 0.45, 0.8]))
    screened = screen_points(FREQUENCY, readings)
    assert np.argwhere(screened.replaced).tolist() == [[0, 120], [2, 120], [4, 120]]


@pytest.mark.parametrize("width", [1, 2])
@pytest.mark.parametrize("place", [0, 100, 198])
def test_a_resonance_that_all_connections_show_is_left_alone(width, place):
    readings = open_end(4)
    readings[:, place : place + width] -= 0.1
    screened = screen_points(FREQUENCY, readings)
    assert not screened.replaced.any()
    assert (screened.readings == readings).all()


@pytest.mark.parametrize("width", [LONGEST_RUN + 1, 6, 20])
@pytest.mark.parametrize("place", [0, 100, "end"])
def test_long_runs_are_left_alone(width, place):
    readings = open_end(4)
    first = 201 - width if place == "end" else place
    readings[0, first : first + width] += 0.05
    assert not screen_points(FREQUENCY, readings).replaced.any()


def test_both_ends_of_the_sweep_are_not_neighbours():
    """Two points at the low end and one at the top do not make a run of three."""
    readings = open_end(4)
    places = [0, 1, 200]
    readings[3, places] += 0.05
    assert np.argwhere(screen_points(FREQUENCY, readings).replaced).tolist() == [[3, k] for k in places]


@pytest.mark.parametrize("first", [20, 100, 180])
def test_a_connection_that_jumps_and_stays_there_is_left_alone(first):
    """The points beside the jump belong to one of its sides."""
    readings = open_end(4)
    readings[1, first:] += 0.05
    assert not screen_points(FREQUENCY, readings).replaced.any()


def test_one_connection_is_left_alone():
    readings = open_end(1)
    readings[0, 100] += 0.1
    screened = screen_points(FREQUENCY, readings)
    assert not screened.replaced.any()
    assert (screened.readings == readings).all()


def test_of_two_connections_the_one_that_is_off_is_named():
    for off in (0, 1):
        readings = open_end(2)
        readings[off, 50] += 0.02j
        assert np.argwhere(screen_points(FREQUENCY, readings).replaced).tolist() == [[off, 50]]


def test_what_is_small_or_usual_is_left_alone():
    """Below SMALLEST nothing is touched, however quiet the rest; nor is what a noisy analyser does all the time."""
    readings = open_end(4)
    readings[1, 100] += 0.5 * SMALLEST
    assert not screen_points(FREQUENCY, readings).replaced.any()
    rng = np.random.default_rng(4)
    noisy = open_end(4) + 0.01 * (rng.standard_normal((4, 201)) + 1j * rng.standard_normal((4, 201)))
    noisy[1, 100] += 0.03
    assert not screen_points(FREQUENCY, noisy).replaced.any()


def test_too_few_points_to_foretell_one():
    readings = open_end(3)[:, :8].copy()
    readings[0, 4] += 0.1
    assert not screen_points(FREQUENCY[:8], readings).replaced.any()


def simulated(family, count):
    """Draw benches of a family."""
    for number in range(count):
        rng = np.random.default_rng([zlib.crc32(family.encode()), 61, number])
        yield draw_bench(families()[family](rng), rng)


@pytest.mark.parametrize("family", ["plain", "resonance", "drift"])
def test_no_false_alarm_on_simulated_benches(family):
    """100 benches of three standards: not one reading of some million is touched."""
    touched = [
        (number, name)
        for number, bench in enumerate(simulated(family, 100))
        for name, readings in bench.readings.items()
        if screen_points(bench.frequency_hz, readings).replaced.any()
    ]
    assert touched == []


def test_glitches_of_simulated_benches_are_found():
    """Glitches of 0.01 … 0.1 in two readings of three: all of them where fewer than half of the connections are off.

    Where more are, the median of the connections lies among the glitches, and one of them can pass for usual.
    """
    rng = np.random.default_rng(62)
    found = {True: [], False: []}
    wrong = 0
    for bench in simulated("plain", 60):
        points = bench.frequency_hz.size
        edges = tuple(int(i) for i in rng.choice(np.arange(8, points - 8), 3, replace=False))
        for readings in bench.readings.values():
            glitches = draw_glitches(readings, edges, rng)
            replaced = screen_points(bench.frequency_hz, readings + glitches).replaced
            few = np.mean(glitches != 0.0, axis=0) < 0.5
            for minority in (True, False):
                found[minority] += replaced[:, few == minority][glitches[:, few == minority] != 0.0].tolist()
            wrong += int(np.count_nonzero(replaced & (glitches == 0.0)))
    assert min(len(found[True]), len(found[False])) > 100
    assert np.mean(found[True]) >= 0.98
    assert np.mean(found[False]) >= 0.75
    assert wrong == 0
