"""Orders of the polynomial on the computed 7 mm shielded open, read to 9 GHz; and what they would do at 18 GHz.

The truth is C(f) from the fields of a 7.00/3.04 mm line (79.70 fF at low frequency: P. I. Somlo, Proc. IREE Australia
28(1), 1967, 7–9; published, quoted second-hand) behind 20 ps of line.
"""

from functools import cache
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.coaxial.shielded_open import AIR_ER, shielded_open
from stdfit.circuits.line import see_through_line
from stdfit.circuits.standard import reflection
from stdfit.data.bench_records import Bench, Given, StandardEntry, StatedResidual
from stdfit.pipeline import characterise
from stdfit.validity.kit import curve

TOP_HZ = 9e9
GRID = np.linspace(50e6, TOP_HZ, 180)
AT_18 = np.array([18e9])


@cache
def capacitance(frequency_hz):
    return shielded_open(3.04e-3, 7e-3, np.array(frequency_hz), er=AIR_ER).capacitance_f


def truth(frequency_hz):
    x = 2j * np.pi * frequency_hz * capacitance(tuple(frequency_hz.tolist())) * 50.0
    seen = see_through_line(
        (1.0 - x) / (1.0 + x),
        frequency_hz,
        delay_s=20e-12,
        loss_ohm_per_s=0.8e9,
        z0_ohm=50.0,
        reference_ohm=50.0,
    )
    return seen.gamma


@cache
def fitted(polynomial, within=0.005):
    """Return the definition of a good analyser's five readings, 60 dB and 1e-4 of noise."""
    rng = np.random.default_rng(1)
    sixty = [1e-3]
    entry = StandardEntry(
        "open",
        "open",
        (),
        {"offset_delay_ps": Given(20.0, 0.02), "offset_z0_ohm": Given(50.0)},
        polynomial=polynomial,
    )
    bench = Bench(
        Path("bench.toml"),
        "Computed open",
        "7 mm",
        50.0,
        within,
        None,
        "corrected",
        StatedResidual([1e9], sixty, sixty, sixty),
        (entry,),
    )
    sweeps = []
    for number in range(5):
        noise = 1e-4 * rng.standard_normal((2, GRID.size))
        shift = np.exp(-4j * np.pi * GRID * 2e-15 * rng.standard_normal())
        sweeps.append(Sweep(GRID, truth(GRID) * shift + noise[0] + 1j * noise[1], 50.0, f"open-{number}"))
    kit = characterise(bench, {"open": sweeps}, created="2024-05-01")
    return kit, kit.definition("open")


def error(definition, frequency_hz):
    return np.abs(reflection("open", definition.values, frequency_hz, 50.0)[0] - truth(frequency_hz))


def test_even_is_chosen_it_beats_constant_and_odd_terms_are_not_needed():
    _, chosen = fitted("chosen")
    tried = dict(chosen.tried)
    assert chosen.shape == "even"
    assert tried["even"] > 1.05 * tried["constant"]
    assert tried["full"] == tried["even"]
    within = np.linspace(0.1e9, TOP_HZ, 50)
    worst = {name: error(fitted(name)[1], within).max() for name in ("constant", "even", "full")}
    assert worst["even"] < 0.1 * worst["constant"]
    assert worst["even"] < 1.5 * worst["full"]


def test_the_fields_are_recovered():
    kit, definition = fitted("even")
    c0, c2 = (next(one for one in definition.parameters if one.name == name) for name in ("c0", "c2"))
    computed = capacitance((0.0,))[0] * 1e15
    assert c0.low < computed < c0.high
    assert computed == pytest.approx(79.70 * AIR_ER, rel=1e-3)
    rise = (capacitance((0.0, 3e9))[1] - capacitance((0.0, 3e9))[0]) * 1e36 / 9e18
    assert c2.low < rise < c2.high
    grid = np.linspace(0.1e9, TOP_HZ, 50)
    gamma, bound = curve(kit, definition, grid)
    assert np.all(np.abs(gamma - truth(grid)) <= bound)


@pytest.mark.parametrize("polynomial", ["constant", "even", "full"])
@pytest.mark.parametrize("within", [0.005, 0.3])
def test_no_limit_lies_beyond_the_last_reading(polynomial, within):
    kit, definition = fitted(polynomial, within)
    assert kit.limit.limit_hz <= TOP_HZ
    assert definition.limit.limit_hz <= TOP_HZ
    with pytest.raises(RequestError, match="lies outside the readings"):
        curve(kit, definition, AT_18)


def test_what_a_definition_to_9_ghz_would_do_at_18():
    """Far more than its bound at 9 GHz: what holds there tells nothing of twice the frequency."""
    at_18 = {}
    for name in ("constant", "even"):
        kit, definition = fitted(name)
        _, bound = curve(kit, definition, np.array([TOP_HZ]))
        at_18[name] = float(error(definition, AT_18)[0])
        assert at_18[name] > 5.0 * bound[0]
    assert at_18["constant"] > 0.1 > 0.02 < at_18["even"]
    # The full polynomial hits by chance: its odd terms are unsure by more than their size at 18 GHz.
    _, full = fitted("full")
    c1, c3 = (next(one for one in full.parameters if one.name == name) for name in ("c1", "c3"))
    assert c1.low < 0.0 < c1.high and c3.low < 0.0 < c3.high
