"""A connection that does not belong with the others: found when it is bad, left alone when it is not."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import nct, t

from stdfit.circuits.connectors import family_of
from stdfit.fitting.observed import Observed
from stdfit.pipeline import characterise
from stdfit.trials import draw_bench
from stdfit.trials.families import draw_plain
from stdfit.trials.scenario import KINDS
from stdfit.trials.score import bench_of
from stdfit.trials.session import Connections, connect
from stdfit.uncertainty.outlying import FEWEST, LEVEL, outlying_connection, without_outlying

ASSUMED_SD = family_of("SMA").repeatability
SIGNS = np.array([[1.0, 1.0, -1.0], [-1.0, 1.0, 1.0], [1.0, 1.0, 1.0]])
BENCHES = 200
"""At the stated level of 0.2 % more than two false alarms, 1 % of these benches, have a chance of 0.8 % (binomial)."""


def simulated(seed, **fields):
    """Draw a plain bench; nothing is wrong with it."""
    rng = np.random.default_rng([63, seed])
    return draw_bench(draw_plain(rng, points=101, **fields), rng)


def observed_of(bench, readings):
    return [Observed.from_readings(name, name, bench.frequency_hz, readings[name]) for name in KINDS]


def with_bad(bench, kind, connection, sigmas):
    """Change one connection by so many times the usual distance: the root mean square of all three parts."""
    scenario, f = bench.scenario, bench.frequency_hz
    sizes = np.array([1e-12 * scenario.scatter_ps, scenario.scatter_ohm, 1e-15 * scenario.scatter_ff])
    one_each = connect(bench.truth[kind], f, Connections(*np.diag(sizes)), 50.0) - bench.truth[kind]
    usual = np.sqrt(np.mean(np.abs(one_each) ** 2, axis=1).sum())
    parts = SIGNS[connection % 3]
    together = np.sqrt(np.mean(np.abs(parts @ one_each) ** 2))
    off = Connections(*(sigmas * usual / together * parts * sizes)[:, None])
    readings = {name: own.copy() for name, own in bench.readings.items()}
    readings[kind][connection] = connect(readings[kind][connection], f, off, 50.0)[0]
    return readings


def left_out(bench, readings):
    """Return (standard, connection) of all that is left out."""
    _, places = without_outlying(observed_of(bench, readings), 50.0, ASSUMED_SD)
    return [(KINDS[s], k) for s, k, _ in places]


def found_at(sigmas, connections, benches):
    """Return for each standard how often its bad connection is found, and all others that are left out."""
    found, others = {kind: [] for kind in KINDS}, 0
    for number in range(benches):
        bench = simulated(1000 + number, connections=connections)
        kind, bad = KINDS[number % 3], number % connections
        places = left_out(bench, with_bad(bench, kind, bad, sigmas))
        found[kind].append((kind, bad) in places)
        others += len(places) - found[kind][-1]
    return {kind: float(np.mean(hits)) for kind, hits in found.items()}, others


@pytest.mark.parametrize("connections", [3, 5])
def test_false_alarms_are_as_rare_as_stated(connections):
    alarms = 0
    for number in range(BENCHES):
        bench = simulated(number, connections=connections)
        alarms += bool(left_out(bench, bench.readings))
    assert LEVEL * BENCHES < 1.0
    assert alarms <= 2


def test_a_connection_that_is_eight_sigma_off_is_found_where_there_are_ten():
    found, others = found_at(8.0, connections=10, benches=90)
    assert np.mean(list(found.values())) >= 0.9
    assert others <= 1


def test_a_connection_that_is_fifteen_sigma_off_is_found_where_there_are_five():
    found, others = found_at(15.0, connections=5, benches=90)
    assert np.mean(list(found.values())) >= 0.9
    assert others <= 1


def test_how_often_eight_sigma_are_found_among_five_connections_is_what_student_lets_hope_for():
    """Few connections tell their own scatter poorly, and a low level of false alarms has its price.

    A deviation of δ standard deviations, from the mean of K − 1 others, over a scatter with ν degrees of
    freedom is noncentral t with δ/√(1 + 1/(K−1)); an open's or a short's plane shift is seen by both of them,
    so ν = 2·4 − 1 = 7, and the bar is Student's at the level shared by 15 connections. The chance is 0.49 where
    one part makes all of the distance, and higher where three do; three binomial standard deviations are
    allowed below.
    """
    bar = t.ppf(1.0 - 0.5 * LEVEL / 15.0, 7)
    hope = nct.sf(bar, 7, 8.0 / np.sqrt(1.25))
    assert 0.45 < hope < 0.55
    found, _ = found_at(8.0, connections=5, benches=90)
    for kind in KINDS:
        assert found[kind] >= hope - 3.0 * np.sqrt(hope * (1.0 - hope) / 30.0)


def test_two_bad_connections_of_one_standard_are_named_by_their_first_numbers():
    """After one is left out the others keep the numbers that their files have."""
    bench = simulated(8, connections=10)
    readings = with_bad(bench, "short", 1, 40.0)
    readings["short"][6] = with_bad(bench, "short", 6, 25.0)["short"][6]
    assert sorted(left_out(bench, readings)) == [("short", 1), ("short", 6)]


@pytest.mark.parametrize("connections", [3, 4, 5])
def test_two_connections_are_always_left(connections):
    """Every connection is a standard of its own, a centimetre apart, beside others that repeat well."""
    bench = simulated(9, connections=connections)
    readings = dict(bench.readings)
    turns = np.exp(-4j * np.pi * np.outer(30e-12 * np.arange(connections) ** 2, bench.frequency_hz))
    readings["open"] = readings["open"] * turns
    kept, places = without_outlying(observed_of(bench, readings), 50.0, ASSUMED_SD)
    assert all(one.connections >= FEWEST - 1 for one in kept)
    assert len(places) == 3 * connections - sum(one.connections for one in kept)


def test_a_standard_with_two_connections_is_not_touched():
    bench = simulated(10, connections={"open": 2, "short": 8, "load": 8})
    readings = with_bad(bench, "open", 1, 50.0)
    kept, places = without_outlying(observed_of(bench, readings), 50.0, ASSUMED_SD)
    assert kept[0].connections == 2
    assert all(s != 0 for s, _, _ in places)


def test_nothing_is_told_of_single_connections():
    bench = simulated(11, connections=1)
    assert outlying_connection(observed_of(bench, bench.readings), 50.0, ASSUMED_SD) is None


def test_the_distance_is_from_the_mean_of_the_others():
    bench = simulated(12, connections=10)
    readings = with_bad(bench, "open", 3, 30.0)
    kept, ((s, k, distance),) = without_outlying(observed_of(bench, readings), 50.0, ASSUMED_SD)
    others = np.delete(readings["open"], 3, axis=0).mean(axis=0)
    assert (s, k) == (0, 3)
    assert distance == pytest.approx(np.sqrt(np.mean(np.abs(readings["open"][3] - others) ** 2)), rel=1e-9)
    np.testing.assert_allclose(kept[0].gamma, others, rtol=1e-12)


def test_the_kit_names_the_file_and_what_to_do():
    bench = simulated(13, connections=8)
    readings = with_bad(bench, "short", 4, 25.0)
    described, sweeps = bench_of(replace(bench, readings=readings))
    kit = characterise(described, sweeps, created="2000-01-01")
    (warning,) = [line for line in kit.warnings if "connection lies" in line]
    assert warning.startswith("short-5: ")
    assert "left out" in warning
    assert "read it again" in warning
    assert kit.definition("short").connections == 7
    assert kit.definition("open").connections == 8
