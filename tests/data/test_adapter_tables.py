"""[[adapter]] tables and the keys that name them: what they say, and what is refused with its key."""

import pytest

from stdfit.base.errors import BenchError, RequestError
from stdfit.data.bench import parse_bench
from stdfit.pipeline.adapters.brought import refuse_adapters

HEAD = """format = "stdfit-bench/1"
kit = { name = "Invented set", connector = "SMA" }
"""
ANALYSER = '[analyser]\nstate = "corrected"\n'
BEHIND = """[[standard]]
name = "short"
kind = "short"
readings = ["short-1.s1p"]
behind = "barrel"
"""
PLAIN = BEHIND.replace('behind = "barrel"\n', "")
ADAPTER = '[[adapter]]\nname = "barrel"\n'
ESTIMATE = ADAPTER + "delay_ps = { value = 95.0, u = 3.0 }\n"


@pytest.fixture
def parsed(tmp_path):
    """Return a function that parses a bench whose files are there."""
    for name in ("short-1.s1p", "barrel.adapter.toml", "reference.toml"):
        (tmp_path / name).touch()
    return lambda *parts: parse_bench(HEAD + "".join(parts), tmp_path / "bench.toml")


def test_an_estimate(parsed):
    bench = parsed(
        ANALYSER, BEHIND, ESTIMATE, "loss_db = { value = 0.1 }\nz0_ohm = { value = 49.0, u = 0.5 }\n"
    )
    (one,) = bench.adapters
    assert bench.standards[0].behind == "barrel"
    assert (one.file, one.delay_ps.value, one.delay_ps.u) == (None, 95.0, 3.0)
    # The uncertainty of a loss is half of it where it is not given.
    assert (one.loss_db.value, one.loss_db.u, one.z0_ohm.u) == (0.1, 0.05, 0.5)
    assert parsed(ANALYSER, BEHIND, ESTIMATE, "loss_db = 0.1\n").adapters[0].loss_db.u == 0.05


def test_a_file_and_a_thru(parsed, tmp_path):
    bench = parsed(ANALYSER, PLAIN, ADAPTER, 'file = "barrel.adapter.toml"\n[thru]\nadapter = "barrel"\n')
    assert (bench.adapters[0].file, bench.thru) == (tmp_path / "barrel.adapter.toml", "barrel")


def test_a_calibration_with_an_adapter(parsed):
    bench = parsed(ANALYSER, 'calibrated_with = "barrel"\n', PLAIN, ESTIMATE)
    assert (bench.calibrated_with, bench.standards[0].behind) == ("barrel", None)


def test_a_known_standard_behind_an_adapter(parsed, tmp_path):
    bench = parsed(ANALYSER, BEHIND, 'from_kit = "reference.toml"\nstandard = "short"\n', ADAPTER)
    assert (bench.standards[0].from_kit, bench.standards[0].standard) == (
        tmp_path / "reference.toml",
        "short",
    )


OWN = "adapter[barrel]"
RAW = '[analyser]\nstate = "raw"\n'
FROM_KIT = 'from_kit = "reference.toml"\nstandard = "short"\n'


@pytest.mark.parametrize(
    ("parts", "key", "what"),
    [
        ((ANALYSER, BEHIND), "standard[short].behind", "there is no adapter 'barrel'"),
        ((ANALYSER, BEHIND, ADAPTER.replace("barrel", "barel")), "standard[short].behind", "no adapter 'barrel'"),
        ((ANALYSER, PLAIN, ESTIMATE), "adapter[barrel]", "nothing on the bench names this adapter"),
        ((ANALYSER, BEHIND, ESTIMATE, ESTIMATE), "adapter[barrel].name", "two adapters have this name"),
        ((ANALYSER, BEHIND, ADAPTER, "dely_ps = 95\n"), "adapter[barrel].dely_ps", "unknown key"),
        ((ANALYSER, BEHIND, ADAPTER, "delay_ps = 95\n"), "adapter[barrel].delay_ps", "stands without u"),
        ((ANALYSER, BEHIND, ADAPTER, "delay_ps = { value = -1, u = 1 }\n"), f"{OWN}.delay_ps.value", "above 0"),
        ((ANALYSER, BEHIND, ADAPTER, "delay_ps = { value = 9, u = 0 }\n"), "adapter[barrel].delay_ps.u", "above 0"),
        ((ANALYSER, BEHIND, ADAPTER, "loss_db = 0.1\n"), "adapter[barrel].loss_db", "stands without delay_ps"),
        ((ANALYSER, BEHIND, ESTIMATE, "loss_db = -0.1\n"), "adapter[barrel].loss_db", "below 0"),
        ((ANALYSER, BEHIND, ESTIMATE, "loss_db = 0\n"), "adapter[barrel].loss_db", "0 stands without u"),
        ((ANALYSER, BEHIND, ESTIMATE, "z0_ohm = 50\n"), "adapter[barrel].z0_ohm", "stands without u"),
        ((ANALYSER, BEHIND, ESTIMATE, 'file = "barrel.adapter.toml"\n'), f"{OWN}.delay_ps", "stands beside file"),
        ((ANALYSER, BEHIND, ADAPTER, 'file = "other.toml"\n'), "adapter[barrel].file", "no such adapter file"),
        ((ANALYSER, 'calibrated_with = "barrel"\n', BEHIND, ESTIMATE), "standard[short].behind", "need no adapter"),
        ((RAW, 'calibrated_with = "barrel"\n', PLAIN, ESTIMATE), "analyser.calibrated_with", "belongs to corrected"),
        ((RAW, BEHIND, FROM_KIT, ESTIMATE), "standard[short].behind", "references are read without an adapter"),
        ((ANALYSER, BEHIND, FROM_KIT, 'set = "before"\n', ADAPTER), "standard[short].set", "belongs to raw readings"),
        ((ANALYSER, PLAIN, FROM_KIT), "standard[short].from_kit", "known standards belong to raw readings"),
        ((ANALYSER, BEHIND, ESTIMATE, '[thru]\nadapter = "barrel"\n'), "thru.adapter", "a thru must be determined"),
        ((ANALYSER, PLAIN, '[thru]\nadapter = "barrel"\n'), "thru.adapter", "there is no adapter"),
        ((ANALYSER, PLAIN, '[thru]\nname = "barrel"\n'), "thru.name", "unknown key"),
    ],
)  # fmt: skip
def test_wrong_tables_are_refused_with_their_key(parsed, parts, key, what):
    with pytest.raises(BenchError, match=what) as refused:
        parsed(*parts)
    assert refused.value.key == key
    assert str(refused.value).count("\n") == 1


def test_a_check_takes_no_adapters(parsed):
    bench = parsed(ANALYSER, BEHIND, ESTIMATE)
    with pytest.raises(RequestError, match="a check takes readings without adapters") as refused:
        refuse_adapters(bench)
    assert refused.value.key == "adapter"
