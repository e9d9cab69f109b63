"""The bench key that names the correction of the analyser."""

import pytest

from stdfit.base.errors import BenchError
from stdfit.data.bench import parse_bench

TEXT = """format = "stdfit-bench/1"
kit = {{ name = "Set", connector = "SMA" }}
analyser = {{ state = "{state}"{more} }}
[[standard]]
name = "short"
kind = "short"
readings = ["short.s1p"]
"""


def parsed(folder, more="", state="corrected"):
    (folder / "short.s1p").touch()
    return parse_bench(TEXT.format(state=state, more=more), folder / "bench.toml")


def test_the_name_of_the_calibration_is_kept(tmp_path):
    assert parsed(tmp_path, ', calibration = "lab kit, first of May"').calibration == "lab kit, first of May"
    assert parsed(tmp_path).calibration is None


@pytest.mark.parametrize(
    ("more", "state", "words"),
    [
        (', calibration = ""', "corrected", "empty"),
        (", calibration = 3", "corrected", "a whole number where text belongs"),
        (', calibration = "x"', "raw", "belongs to corrected readings"),
    ],
)
def test_what_is_no_name_is_refused(tmp_path, more, state, words):
    with pytest.raises(BenchError, match=words) as caught:
        parsed(tmp_path, more, state)
    assert caught.value.key == "analyser.calibration"
