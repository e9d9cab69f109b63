"""The readings that a kit file keeps: written, read back, and refused at their key where they cannot be."""

import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import KitError
from stdfit.trials.wear_pair import draw_pair
from stdfit.trials.wear_study import quick_kit, wear_scenario
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit


@pytest.fixture(scope="module")
def kit():
    scenario = replace(wear_scenario(), frequency_hz=np.linspace(50e6, 6e9, 60))
    first, _ = draw_pair(scenario, np.random.default_rng(4), same_calibration=True)
    return replace(quick_kit(first), calibration="lab kit, first of May")


def test_what_is_written_comes_back(kit):
    text = kit_text(kit)
    again = parse_kit(text, "kit.toml")
    assert kit_text(again) == text
    assert again.calibration == "lab kit, first of May"
    for one, two in zip(kit.session.means, again.session.means, strict=True):
        assert (one.standard, one.connections, one.noise_sd) == (two.standard, two.connections, two.noise_sd)
        for name in ("frequency_hz", "gamma", "calibration_sd", "session_sd", "connection_hz", "deviations"):
            assert np.array_equal(getattr(one, name), getattr(two, name))
    assert np.array_equal(kit.session.scatter_sd, again.session.scatter_sd)


def test_without_readings_and_calibration_no_word_of_them_is_written(kit):
    text = kit_text(replace(kit, session=None, calibration=""))
    assert "[session" not in text
    assert "\ncalibration" not in text
    assert parse_kit(text, "kit.toml").session is None


def test_each_connection_is_kept_on_a_coarse_grid(workshop):
    made = workshop(frequency_hz=np.linspace(50e6, 6e9, 1001))
    kit, sweeps = made.kit(), made.readings()
    text = kit_text(kit)
    again = parse_kit(text, "kit.toml")
    assert kit_text(again) == text
    for one in again.session.means:
        assert 40 <= one.connection_hz.size <= 60
        assert set(one.connection_hz) <= set(one.frequency_hz)
        stack = np.array([sweep.gamma for sweep in sweeps[one.standard]])
        places = np.searchsorted(sweeps[one.standard][0].frequency_hz, one.connection_hz)
        away = (stack - stack.mean(axis=0))[:, places]
        assert np.abs(one.deviations - away).max() < 1e-7


def test_one_connection_deviates_from_nothing_and_older_files_still_read(kit, workshop):
    single = workshop(connections=1).kit()
    assert all(one.connection_hz is None and one.deviations is None for one in single.session.means)
    assert "deviations" not in kit_text(single)
    older = re.sub(r"connection_hz = .*\n|deviations_.. = \[\n(    .*\n)*\]\n", "", kit_text(kit))
    again = parse_kit(older, "kit.toml")
    assert all(one.connection_hz is None and one.deviations is None for one in again.session.means)
    assert kit_text(again) == older


def test_a_minus_before_a_zero_comes_back_as_it_was_written(kit):
    first, *others = kit.session.means
    signs = np.where(np.arange(first.deviations.shape[1]) % 2, -0.0, 0.0)
    zeros = np.empty(first.deviations.shape, dtype=complex)
    zeros.real, zeros.imag = signs, -signs
    gamma = first.gamma.copy()
    gamma.real[:2] = -0.0
    turned = replace(first, deviations=zeros, gamma=gamma)
    text = kit_text(replace(kit, session=replace(kit.session, means=(turned, *others))))
    assert "-0.0, " in text
    assert kit_text(parse_kit(text, "kit.toml")) == text


def test_the_mean_reading_is_the_model_and_what_the_fit_left(kit):
    """The readings are kept to 7 decimals, and follow the model within its misfit and the analyser's errors."""
    from stdfit.validity.kit import curve

    for one in kit.session.means:
        gamma, _ = curve(kit, kit.definition(one.standard), one.frequency_hz)
        assert np.abs(one.gamma - gamma).max() < 0.05


FAULTS = {
    "two parts": (r"connection_sd = \[[^,]*, ", "connection_sd = [", "session.connection_sd"),
    "endless scatter": (r"connection_sd = \[[^,]*", "connection_sd = [inf", "session.connection_sd"),
    "negative scatter": (r"connection_sd = \[", "connection_sd = [-", "session.connection_sd[0]"),
    "no freedom": (r"session_freedom = [^\n]*", "session_freedom = 0.0", "session.session_freedom"),
    "two freedoms": (
        r"connection_freedom = \[[^,]*, ",
        "connection_freedom = [",
        "session.connection_freedom",
    ),
    "unknown standard": (r'standard = "open"\nconn', 'standard = "opan"\nconn', "session.mean[0].standard"),
    "same standard": (r'standard = "short"\nconn', 'standard = "open"\nconn', "session.mean"),
    "shorter list": (r"mean_re = \[[^,]*, ", "mean_re = [", "session.mean[0].mean_re"),
    "shorter sizes": (r"session_sd = \[[^,]*, ", "session_sd = [", "session.mean[0].session_sd"),
    "reading nan": (r"mean_im = \[[^,]*", "mean_im = [nan", "session.mean[0].mean_re"),
    "reading too large": (r"mean_re = \[[^,]*", "mean_re = [40.0", "session.mean[0].mean_re"),
    "size inf": (r"calibration_sd = \[[^,]*", "calibration_sd = [inf", "session.mean[0].calibration_sd"),
    "noise negative": (r"noise_sd = ", "noise_sd = -", "session.mean[0].noise_sd"),
    "falling": (r"(noise_sd[^\n]*\nfrequency_hz = \[)[^,]*", r"\g<1>5e9", "session.mean[0].frequency_hz"),
    "scatter too large": (r"connection_sd = \[[^,]*", "connection_sd = [1e200", "session.connection_sd"),
    "hardly a freedom": (
        r"connection_freedom = \[[^,]*",
        "connection_freedom = [1e-300",
        "session.connection_freedom",
    ),
    "hardly any freedom": (
        r"session_freedom = [^\n]*",
        "session_freedom = 1e-300",
        "session.session_freedom",
    ),
    "noise too large": (r"noise_sd = [^\n]*", "noise_sd = 1e200", "session.mean[0].noise_sd"),
    "size too large": (
        r"calibration_sd = \[[^,]*",
        "calibration_sd = [1e200",
        "session.mean[0].calibration_sd",
    ),
    "day too large": (r"session_sd = \[[^,]*", "session_sd = [1e200", "session.mean[0].session_sd"),
    "at 0 Hz": (r"(noise_sd[^\n]*\nfrequency_hz = \[)[^,]*", r"\g<1>0.0", "session.mean[0].frequency_hz"),
    "places nan": (r"connection_hz = \[[^,]*", "connection_hz = [nan", "session.mean[0].connection_hz[0]"),
    "places at 0 Hz": (r"connection_hz = \[[^,]*", "connection_hz = [0.0", "session.mean[0].connection_hz"),
    "places falling": (r"connection_hz = \[[^,]*", "connection_hz = [9e9", "session.mean[0].connection_hz"),
    "no places": (r"connection_hz = .*\n", "", "session.mean[0].connection_hz"),
    "fewer places": (r"connection_hz = \[[^,]*, ", "connection_hz = [", "session.mean[0].deviations_re"),
    "shorter row": (r"(deviations_im = \[\n    \[)[^,]*, ", r"\g<1>", "session.mean[0].deviations_re"),
    "a row less": (r"(deviations_re = \[\n)    .*\n", r"\g<1>", "session.mean[0].deviations_re"),
    "no imaginary parts": (
        r"deviations_im = \[\n(    .*\n)*\]\n",
        "",
        "session.mean[0].deviations_re",
    ),
    "another count": (
        r"(session.mean\]\]\nstandard = .*\nconnections = )\d+",
        r"\g<1>9",
        "session.mean[0].deviations_re",
    ),
    "deviation inf": (r"(deviations_re = \[\n    \[)[^,]*", r"\g<1>inf", "session.mean[0].deviations_re"),
    "deviation too large": (
        r"(deviations_im = \[\n    \[)[^,]*",
        r"\g<1>4.0",
        "session.mean[0].deviations_re",
    ),
    "deviation no number": (
        r"(deviations_re = \[\n    \[)[^,]*",
        r'\g<1>"a"',
        "session.mean[0].deviations_re[0][0]",
    ),
    "unknown key": (r"noise_sd = ", "noise = 1\nnoise_sd = ", "session.mean[0].noise"),
    "control character": ("first of May", "first\\\\tof May", "kit.calibration"),
}


@pytest.mark.parametrize(("pattern", "new", "key"), FAULTS.values(), ids=FAULTS)
def test_what_cannot_be_is_refused_at_its_key(kit, pattern, new, key):
    text, count = re.subn(pattern, new, kit_text(kit), count=1)
    assert count == 1
    with pytest.raises(KitError) as caught:
        parse_kit(text, "kit.toml")
    assert caught.value.key == key


def test_a_limit_that_the_bounds_do_not_allow_is_refused(kit):
    for pattern, key in ((r"\nlimit_hz = [^\n]*", "kit.limit_hz"), (None, "standard[0].limit_hz")):
        text = kit_text(kit)
        if pattern is None:
            at = text.index("[[standard]]")
            text = text[:at] + re.sub(r"\nlimit_hz = [^\n]*", "\nlimit_hz = 5.9e9", text[at:], count=1)
        else:
            text = re.sub(pattern, "\nlimit_hz = 5.9e9", text, count=1)
        with pytest.raises(KitError, match="no limit above") as caught:
            parse_kit(text, "kit.toml")
        assert caught.value.key == key


def test_a_covariance_that_is_none_is_refused_at_its_key(kit):
    text = re.sub(r"(lower_triangles = \[\n    \[)", r"\g<1>-", kit_text(kit), count=1)
    with pytest.raises(KitError, match="not positive") as caught:
        parse_kit(text, "kit.toml")
    assert caught.value.key == "source[0].lower_triangles"
