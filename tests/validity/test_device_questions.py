"""Up to where a question about devices is answered, and what holds it back."""

import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.validity.device.bound import device_bound, device_map, residual_terms, three_of
from stdfit.validity.device.questions import answers, impedance_within, phase_within, return_loss_within

ROUND = np.exp(2j * np.pi * np.arange(720) / 720)
LINE = 1.959963984540054  # 95 % of a normal variable on a line
NEEDED = [(10.0, 29.3), (20.0, 39.3), (30.0, 49.3)]
"""Directivity needed for these return losses within ± 1 dB, directivity alone, worst case (derived)."""


def one(kit, question, names=()):
    (answer,) = answers(kit, [question], names)
    return answer


def terms_at(kit, hertz):
    """Directivity and source match at one frequency, as magnitudes."""
    terms = residual_terms(device_map(kit, three_of(kit), np.array([hertz])))
    return terms.directivity[0], terms.source_match[0]


def decibels(magnitude):
    return -20.0 * np.log10(magnitude)


def pure_directivity(by_hand):
    """Errors of C0, L0 and L that move all three standards alike, by jωκ: dΓ = −2jωZ0·dC, 2jω·dL/Z0, jω·dL/(2Z0)."""
    per_hertz = 0.05 / LINE / (2.0 * np.pi * 6e9)  # 0.05 at 6 GHz
    sizes = {
        "open.c0": -per_hertz / (2.0 * 50.0) * 1e15,
        "short.l0": per_hertz * 50.0 / 2.0 * 1e12,
        "load.inductance_ph": per_hertz * 2.0 * 50.0 * 1e12,
    }
    return by_hand({"directivity": sizes})


@pytest.mark.parametrize(("loss", "needed"), NEEDED)
def test_directivity_needed_for_one_decibel(by_hand, loss, needed):
    kit = pure_directivity(by_hand)
    answer = one(kit, return_loss_within(loss, 1.0))
    assert 0.0 < answer.limit_hz < 6e9
    directivity, match = terms_at(kit, answer.limit_hz)
    assert decibels(directivity) == pytest.approx(needed, abs=0.1)
    assert match < 1e-6


@pytest.mark.parametrize(("loss", "needed"), NEEDED)
def test_an_error_of_the_load_is_a_match_error_too(by_hand, loss, needed):
    """q = ε_L·(1 − Γ²), so that at the worst phase 1 + |Γ|² times less is allowed (derived)."""
    kit = by_hand({"scale": {"load.inductance_ph": 60.0}})
    answer = one(kit, return_loss_within(loss, 1.0))
    assert 0.0 < answer.limit_hz < 6e9
    more = 20.0 * np.log10(1.0 + 10.0 ** (-loss / 10.0))
    directivity, match = terms_at(kit, answer.limit_hz)
    assert decibels(directivity) == pytest.approx(needed + more, abs=0.1)
    assert match == pytest.approx(directivity, rel=1e-9)
    assert answer.holds_back == "load"
    assert answer.reason == "load: scale, 100 % of its bound"


@pytest.mark.parametrize(("loss", "within"), [(0.0, 0.5), (10.0, 1.0), (20.0, 1.0), (20.0, 6.0), (40.0, 0.1)])
def test_the_error_that_a_return_loss_allows(loss, within):
    question = return_loss_within(loss, within)
    np.testing.assert_allclose(np.abs(question.devices), 10.0 ** (-loss / 20.0))
    off = away(question, lambda gamma: -20.0 * np.log10(np.abs(gamma)) - loss)
    assert off == pytest.approx(within, rel=1e-3)
    assert question.label == f"return loss of {loss:g} dB within {within:g} dB"


@pytest.mark.parametrize(
    ("ohm", "percent", "reference"),
    [(5, 2, 50), (50, 2, 50), (75, 2, 50), (75, 1, 75), (600, 20, 50), (50, 90, 50)],
)
def test_the_error_that_an_impedance_allows(ohm, percent, reference):
    question = impedance_within(ohm, percent, reference)
    off = away(question, lambda gamma: np.abs((1.0 + gamma) / (1.0 - gamma)) * reference / ohm - 1.0)
    assert off == pytest.approx(0.01 * percent, rel=1e-3)


@pytest.mark.parametrize("degrees", [0.5, 2.0, 30.0, 80.0])
def test_the_error_that_a_phase_allows(degrees):
    question = phase_within(degrees)
    first = replace(question, devices=question.devices[:1])
    assert np.degrees(away(first, np.angle)) == pytest.approx(degrees, rel=1e-3)
    np.testing.assert_allclose(np.abs(question.devices), 1.0)


def away(question, quantity):
    """How far off a quantity is at the worst direction of an error that is just allowed."""
    return np.abs(quantity(question.devices[:, None] + question.allowed * ROUND * (1.0 - 1e-9))).max()


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (lambda: return_loss_within(-1.0, 1.0), "a return loss of -1 dB within 1 dB"),
        (lambda: return_loss_within(20.0, 0.0), "within 0 dB"),
        (lambda: return_loss_within(np.nan, 1.0), "nan dB"),
        (lambda: return_loss_within(20.0, np.inf), "within inf dB"),
        (lambda: impedance_within(0.0, 2.0, 50.0), "0 Ω"),
        (lambda: impedance_within(50.0, 100.0, 50.0), "100 %"),
        (lambda: impedance_within(np.inf, 2.0, 50.0), "inf"),
        (lambda: phase_within(0.0), "0°"),
        (lambda: phase_within(90.0), "90°"),
        (lambda: phase_within(np.nan), "nan°"),
    ],
)
def test_what_makes_no_question(ask, words):
    with pytest.raises(RequestError) as refused:
        ask()
    assert words in str(refused.value)
    assert refused.value.mend.startswith("name ")


def test_the_bound_keeps_what_is_allowed_up_to_the_limit(modest_kit):
    asked = [return_loss_within(20.0, 1.0), impedance_within(75.0, 4.0, 50.0), phase_within(3.0)]
    for answer in answers(modest_kit, asked):
        assert 50e6 < answer.limit_hz < 6e9
        question = answer.question
        below = device_map(modest_kit, three_of(modest_kit), np.linspace(50e6, answer.limit_hz, 333))
        assert (device_bound(below, question.devices).max(axis=1) <= question.allowed * 1.002).all()
        above = device_map(modest_kit, three_of(modest_kit), np.array([answer.limit_hz * 1.01]))
        assert device_bound(above, question.devices).max() > question.allowed


def test_a_misfit_at_one_point_alone_is_not_stepped_over(by_hand):
    kit = by_hand({"load": {"load.resistance_ohm": 0.01}})
    short = replace(
        kit.definition("short"),
        misfit_hz=np.array([50e6, 3e9, 3.001e9, 3.002e9, 6e9]),
        misfit=np.array([0.0, 0.0, 0.5, 0.0, 0.0]),
    )
    kit = replace(kit, definitions=(kit.definition("open"), short, kit.definition("load")))
    answer = one(kit, phase_within(2.0))
    assert 3e9 < answer.limit_hz < 3.001e9
    assert answer.holds_back == "short"
    assert answer.reason.startswith("short: the readings leave the model here (misfit), ")


WORSE = {
    "open": ({"open.c0": 20.0}, "contact"),
    "short": ({"short.l0": 50.0}, "contact"),
    "load": ({"load.inductance_ph": 80.0}, "contact"),
}


@pytest.mark.parametrize("name", WORSE)
@pytest.mark.parametrize(
    "ask", [phase_within(2.0), return_loss_within(3.0, 1.0)], ids=["phase", "return loss"]
)
def test_the_standard_that_is_much_worse_holds_it_back(by_hand, name, ask):
    sizes, source = WORSE[name]
    small = {"open.c0": 0.3, "short.l0": 1.0, "load.resistance_ohm": 0.01}
    kit = by_hand({source: sizes, **{f"own {key}": {key: u} for key, u in small.items()}})
    answer = one(kit, ask)
    assert 0.0 < answer.limit_hz < 6e9
    assert answer.holds_back == name
    assert answer.reason.startswith(f"{name}: contact, ")


@pytest.mark.parametrize("name", WORSE)
def test_a_misfit_that_is_much_worse_is_named(by_hand, name):
    kit = by_hand({"load": {"load.resistance_ohm": 0.01}}, misfits={name: (0.0, 0.1)})
    answer = one(kit, phase_within(2.0))
    assert 0.0 < answer.limit_hz < 6e9
    assert answer.holds_back == name
    assert re.fullmatch(
        f"{name}: the readings leave the model here \\(misfit\\), (99|100) % of its bound", answer.reason
    )


def test_a_kit_of_which_only_bounds_are_stated(by_hand):
    answer = one(by_hand({}, misfits={"short": (0.0, 0.1)}), phase_within(2.0))
    assert (answer.holds_back, answer.reason) == ("short", "short: the stated bound reaches it here")


def test_standards_that_draw_together_end_it(by_hand):
    """A flush open and a short 50 ps away meet at 5 GHz: there no error is small enough."""
    offset = {"short": ("short", [50.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])}
    sources = {"open": {"open.c0": 1.0}, "short": {"short.l0": 2.0}, "load": {"load.resistance_ohm": 0.1}}
    answer = one(by_hand(sources, offset), phase_within(2.0))
    assert 3e9 < answer.limit_hz < 5e9
    assert answer.holds_back == "open and short"
    apart, told_ghz = re.findall(r"too close on the Smith chart, (.*) apart at (.*) GHz", answer.reason)[0]
    assert float(told_ghz) == pytest.approx(answer.limit_hz / 1e9, rel=0.02)
    assert float(apart) == pytest.approx(2.0 * np.cos(np.pi * float(told_ghz) / 10.0), abs=0.01)
    # The same errors on standards that stay apart reach the end of the readings.
    assert one(by_hand(sources), phase_within(2.0)).limit_hz == 6e9


def test_a_load_that_draws_near_an_open(by_hand):
    """A large inductance takes a load towards +1; whichever pair it is has its name in the answer."""
    far = {"load": ("load", [0.0, 0.0, 50.0, 50.0, 20000.0, 0.0])}
    sources = {"open": {"open.c0": 0.5}, "load": {"load.resistance_ohm": 0.2}}
    answer = one(by_hand(sources, far), phase_within(1.0))
    assert 0.0 < answer.limit_hz < 6e9
    assert answer.holds_back == "open and load"


def test_two_standards_that_are_the_same_answer_nothing(by_hand):
    twin = {"short": None, "second": ("open", [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])}
    answer = one(by_hand({"load": {"load.resistance_ohm": 0.1}}, twin), phase_within(2.0))
    assert answer.limit_hz == 0.0
    assert answer.holds_back == "open and second"


def test_a_bad_standard_near_the_device_is_no_closeness(by_hand):
    """Behind a line that all share, the open's place is taken by the short at 6 GHz: what counts is its error, and
    the three are as far apart as ever."""
    line = [1e3 / 24.0, 1.0, 50.0]
    turned = {
        "open": ("open", [*line, 0.0, 0.0, 0.0, 0.0]),
        "short": ("short", [*line, 0.0, 0.0, 0.0, 0.0]),
    }
    sources = {"open": {"open.c0": 0.05}, "short": {"short.l0": 10.0}, "load": {"load.resistance_ohm": 0.01}}
    answer = one(by_hand(sources, turned), impedance_within(2000.0, 20.0, 50.0))
    assert 2e9 < answer.limit_hz < 6e9
    assert answer.holds_back == "short"
    assert answer.reason == "short: short, 100 % of its bound"


def test_the_readings_end(by_hand):
    kit = by_hand({"load": {"load.resistance_ohm": 0.01}})
    answer = one(kit, phase_within(2.0))
    assert (answer.limit_hz, answer.holds_back, answer.reason) == (6e9, "", "the readings end here")
    answer = one(replace(kit, top_hz=4e9), phase_within(2.0))
    assert (answer.limit_hz, answer.holds_back, answer.reason) == (4e9, "", "the connector family ends here")
    answer = one(replace(kit, top_hz=1e7), phase_within(2.0))
    assert (answer.limit_hz, answer.holds_back) == (0.0, "")
    assert "no frequency in common" in answer.reason


def test_a_question_that_fails_from_the_first_reading_on(by_hand):
    answer = one(by_hand({"scale": {"load.resistance_ohm": 5.0}}), return_loss_within(40.0, 0.1))
    assert (answer.limit_hz, answer.holds_back) == (0.0, "load")


def test_the_named_standards_are_used(by_hand):
    """A second short without error answers what the first one cannot."""
    second = {"short two": ("short", [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])}
    kit = by_hand({"contact": {"short.l0": 100.0}}, second)
    assert one(kit, phase_within(2.0)).holds_back == "short"
    assert one(kit, phase_within(2.0), ["open", "short two", "load"]).limit_hz == 6e9
    with pytest.raises(RequestError, match="no standard named"):
        answers(kit, [phase_within(2.0)], ["open", "short", "laod"])
