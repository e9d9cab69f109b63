"""What a kit rests on of the analyser: stated or assumed, kept in its file, and told."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import KitError
from stdfit.data.bench_records import StatedResidual
from stdfit.validity.analyser import Analyser, analyser_of, same_residuals
from stdfit.writing.analyser_text import residual_rows, residuals_said
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit
from stdfit.writing.summary import summary

STATED = Analyser("stated", [5e7, 6e9], [46.0, 40.0], [46.0, 34.0], [0.01, 0.18])


def test_decibels_come_out_as_they_were_stated():
    size = StatedResidual(np.array([1e9]), np.array([0.01]), np.array([0.1]), np.array([10**0.01 - 1.0]))
    told = analyser_of(size, assumed=True)
    assert (told.directivity_db[0], told.source_match_db[0], told.reflection_tracking_db[0]) == (40, 20, 0.2)
    assert told.residuals == "assumed"
    assert same_residuals(size, size)
    assert not same_residuals(size, replace(size, directivity=np.array([0.02])))
    two = [np.repeat(getattr(size, name), 2) for name in ("frequency_hz", "directivity")]
    assert not same_residuals(size, replace(size, frequency_hz=two[0], directivity=two[1]))


def test_a_kit_file_keeps_them(small_kit):
    kit = replace(small_kit, analyser=STATED)
    text = kit_text(kit)
    read = parse_kit(text, "kit.toml")
    assert kit_text(read) == text
    assert read.analyser.residuals == "stated"
    assert read.analyser.source_match_db.tolist() == [46.0, 34.0]
    line = "Analyser residuals, stated: directivity 46 … 40 dB, source match 46 … 34 dB, "
    assert f"\n{line}reflection tracking ± 0.01 … 0.18 dB (50 MHz … 6 GHz)\n" in summary(read)
    assert residual_rows(STATED)[1] == ("6 GHz", "40 dB", "34 dB", "± 0.18 dB")


def test_an_older_file_says_nothing_of_them(small_kit):
    read = parse_kit(kit_text(small_kit), "kit.toml")
    assert read.analyser is None
    assert "Analyser residuals" not in summary(read)


def test_one_frequency_holds_for_all():
    told = residuals_said(Analyser("assumed", [1e9], [40.0], [40.0], [0.1]))
    assert told.endswith("reflection tracking ± 0.1 dB (at all frequencies)")


@pytest.mark.parametrize(
    ("change", "key"),
    [
        ({"source_match_db": np.array([46.0])}, "analyser.source_match_db"),
        ({"directivity_db": np.array([46.0, np.inf])}, "analyser.directivity_db"),
        ({"directivity_db": np.array([46.0, -1.0])}, "analyser.directivity_db"),
        ({"frequency_hz": np.array([6e9, 5e7])}, "analyser.frequency_hz"),
    ],
)
def test_what_cannot_be_is_refused(small_kit, change, key):
    text = kit_text(replace(small_kit, analyser=replace(STATED, **change)))
    with pytest.raises(KitError) as caught:
        parse_kit(text, "kit.toml")
    assert caught.value.key == key
