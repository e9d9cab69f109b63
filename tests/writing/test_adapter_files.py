"""Adapter files: the same bytes after reading, strict reading, a two-port file that others read; the thru of a kit."""

import re
from dataclasses import replace

import numpy as np
import pytest
import skrf

from stdfit.base.errors import KitError
from stdfit.validity.adapter import Adapter
from stdfit.validity.kit import Ancestor, SourceFile
from stdfit.validity.thru import LineTerm, Thru
from stdfit.writing.adapter_file import adapter_text, is_adapter_file
from stdfit.writing.adapter_reading import parse_adapter, read_adapter
from stdfit.writing.adapter_touchstone import adapter_touchstone, is_adapter_touchstone
from stdfit.writing.adapter_words import adapter_data, adapter_summary
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit
from stdfit.writing.plain_data import kit_data
from stdfit.writing.summary import summary

F = np.array([0.5e9, 1e9, 1.5e9, 2e9])
LINE = (LineTerm(95.25, 0.1, 95.0, 95.5), LineTerm(1.5, 0.5, 0.5, 2.5), LineTerm(50.5, 0.25, 50.0, 51.0))


@pytest.fixture
def adapter():
    """Invented figures."""
    root = 1e-3 * np.random.default_rng(1).standard_normal((2, 6, 6))
    turn = np.exp(-2j * np.pi * F * 95e-12)
    return Adapter(
        name="barrel, Größe 2 Ω",
        reference_ohm=50.0,
        created="2000-01-01",
        version="0.0.0",
        frequency_hz=F,
        s=np.stack([0.02 * turn, 0.99 * turn, -0.01j * turn**2], axis=-1),
        known_hz=F[[0, -1]],
        covariance=root @ np.swapaxes(root, 1, 2),
        freedom=np.inf,
        line=LINE,
        files=(SourceFile("open", "open-1.s1p", "0" * 64),),
        ancestors=(
            Ancestor("Old kit", "2000-01-01", "a" * 64),
            Ancestor("Older kit", "1999", "b" * 64, "a" * 64),
        ),
        warnings=("two were dirty",),
    )


def test_reading_and_writing_gives_the_same_bytes(adapter):
    text = adapter_text(adapter)
    again = parse_adapter(text, "barrel.adapter.toml")
    assert adapter_text(again) == text
    np.testing.assert_array_equal(again.s, adapter.s)
    np.testing.assert_allclose(again.covariance, adapter.covariance, rtol=0, atol=1e-20)
    assert (again.line, again.files, again.ancestors) == (adapter.line, adapter.files, adapter.ancestors)
    finite = replace(adapter, freedom=7.5)
    assert parse_adapter(adapter_text(finite), "x").freedom == 7.5
    assert (finite.s_bounds > adapter.s_bounds).all()


def test_files_that_call_themselves_so(adapter, tmp_path):
    text, other = tmp_path / "a.toml", tmp_path / "a.s2p"
    text.write_text(adapter_text(adapter), encoding="utf-8")
    other.write_text(adapter_touchstone(adapter), encoding="utf-8")
    assert is_adapter_file(text) and not is_adapter_file(other) and not is_adapter_file(tmp_path / "none")
    assert is_adapter_touchstone(other) and not is_adapter_touchstone(text)
    assert not is_adapter_touchstone(tmp_path)
    assert read_adapter(text).name == adapter.name


def test_an_independent_library_reads_the_two_port_file(adapter, tmp_path):
    file = tmp_path / "barrel.s2p"
    file.write_text(adapter_touchstone(adapter), encoding="ascii")
    network = skrf.Network(str(file))
    np.testing.assert_array_equal(network.f, F)
    for k, (row, column) in enumerate([(0, 0), (1, 0), (1, 1)]):
        np.testing.assert_allclose(network.s[:, row, column], adapter.s[:, k], rtol=0, atol=1e-15)
    np.testing.assert_array_equal(network.s[:, 0, 1], network.s[:, 1, 0])
    assert network.z0[0, 0] == 50


def test_the_head_of_the_two_port_file_says_what_matters(adapter):
    text = adapter_touchstone(adapter)
    assert "! adapter: barrel, Grosse 2 ohm" in text
    assert "! most like a line: delay_ps 95.25 +/- 0.25" in text
    assert "! warning: two were dirty" in text
    assert re.search(r"^# Hz S RI R 50$", text, re.MULTILINE)


FAULTS = {
    "format": ("stdfit-adapter/1", "stdfit-adapter/9", "format", "not an adapter file of this version"),
    "key": ("[bound]\n", "[bound]\ns12 = [1.0]\n", "bound.s12", "unknown key"),
    "length": (
        "[s_parameters]\nfrequency_hz = [", "[s_parameters]\nfrequency_hz = [1.0, ", "s_parameters.s11_re",
        "4 values for 5",
    ),
    "falls": ("1000000000.0, 1500000000.0", "1500000000.0, 1000000000.0", "s_parameters.frequency_hz", "do not rise"),
    "ends": (
        "[bound]\nfrequency_hz = [500000000.0,", "[bound]\nfrequency_hz = [600000000.0,", "bound.frequency_hz",
        "does not begin and end",
    ),
    "nan": ("s11_re = [", "s11_re = [nan, ", "s_parameters.s11_re", "5 values for 4"),
    "line": ("low_95 = 95.0", "low_95 = 96.0", "line.delay_ps", "outside its own 95 % interval"),
    "freedom": ("degrees_of_freedom = inf", "degrees_of_freedom = 0.0", "adapter.degrees_of_freedom", "expected"),
    "sha": ("a" * 64, "a" * 63, "ancestor[0].sha256", "no SHA-256"),
    "control": ("two were dirty", "two were \\u001b dirty", "adapter.warnings[0]", "control character"),
}  # fmt: skip


@pytest.mark.parametrize(("old", "new", "key", "what"), FAULTS.values(), ids=FAULTS)
def test_what_cannot_be_is_refused_with_its_key(adapter, old, new, key, what):
    text = adapter_text(adapter)
    assert old in text
    with pytest.raises(KitError, match=what) as refused:
        parse_adapter(text.replace(old, new, 1), "barrel.adapter.toml")
    assert refused.value.key == key
    assert str(refused.value).count("\n") == 1


def changed(adapter, key, change):
    """Change the first number of a list in the text."""
    found = re.search(rf"^{key} = \[([^,]+),", adapter_text(adapter), re.MULTILINE)
    start, stop = found.span(1)
    text = adapter_text(adapter)
    return text[:start] + repr(change(float(found[1]))) + text[stop:]


def test_bounds_that_are_not_those_of_the_covariance_are_refused(adapter):
    with pytest.raises(KitError, match="not the bound that the covariance gives") as refused:
        parse_adapter(changed(adapter, "s21", lambda bound: 0.9 * bound), "x")
    assert refused.value.key == "bound.s21"


def test_an_adapter_that_amplifies_or_blocks_is_refused(adapter):
    with pytest.raises(KitError, match="far above 1"):
        parse_adapter(changed(adapter, "s22_re", lambda _: 1.6), "x")
    blocked = replace(adapter, s=adapter.s * np.array([1.0, 1e-5, 1.0]))
    with pytest.raises(KitError, match="lets next to nothing through"):
        parse_adapter(adapter_text(blocked), "x")


def test_a_covariance_that_is_none_is_refused(adapter):
    wrong = adapter.covariance.copy()
    wrong[0, 0, 0] = -wrong[0, 0, 0]
    with np.errstate(invalid="ignore"), pytest.raises(KitError, match="a covariance is not positive"):
        parse_adapter(adapter_text(replace(adapter, covariance=wrong)), "x")


@pytest.mark.parametrize("text", ["", "[", "format = 3", "format = 'stdfit-adapter/1'", "a = " + "[" * 3000])
def test_what_is_no_adapter_file_is_refused(text, tmp_path):
    file = tmp_path / "a.toml"
    file.write_text(text)
    with pytest.raises(KitError) as refused:
        read_adapter(file)
    assert str(refused.value).count("\n") <= 1
    for path in (tmp_path, tmp_path / "none", "\0"):
        with pytest.raises(KitError):
            read_adapter(path)


def test_words_and_data(adapter):
    text = adapter_summary(adapter)
    assert "500 MHz to 2 GHz, 50 Ω" in text
    assert re.search(r"delay +95\.25 ± 0\.25 +ps", text)
    data = adapter_data(adapter)
    assert data["delay_ps"] == {"value": 95.25, "u": 0.1, "low_95": 95.0, "high_95": 95.5}
    assert len(data["frequency_hz"]) == len(data["s21_bound"]) == len(data["term_2_bound"]) == 2


def test_the_thru_of_a_kit(small_kit):
    kit = replace(small_kit, thru=Thru("barrel", LINE, "c" * 64))
    text = kit_text(kit)
    again = parse_kit(text, "kit.toml")
    assert again.thru == kit.thru
    assert kit_text(again) == text
    assert parse_kit(kit_text(small_kit), "kit.toml").thru is None
    assert "Thru: barrel (± 95 %)\n  delay      95.25 ± 0.25  ps" in summary(kit)
    assert kit_data(kit)["thru"]["z0_ohm"]["high_95"] == 51.0
    for old, new, key in (
        ("c" * 64, "c" * 63, "thru.sha256"),
        ("low_95 = 50.0\n", "low_95 = 60.0\n", "thru.z0_ohm"),
        ("[thru]\n", "[thru]\nlenght = 1\n", "thru.lenght"),
    ):
        at = text.index("[thru]")
        with pytest.raises(KitError) as refused:
            parse_kit(text[:at] + text[at:].replace(old, new, 1), "kit.toml")
        assert refused.value.key == key
