"""Date, counts of matings and given values: from the bench file to the kit file and back."""

from dataclasses import replace

import pytest

from stdfit.base.errors import BenchError, KitError
from stdfit.data.bench import parse_bench
from stdfit.pipeline import characterise
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit

TEXT = """format = "stdfit-bench/1"
kit = { name = "set", connector = "SMA", date = 2024-05-01 }
analyser = { state = "corrected" }
plan = { from_hz = 1e9, to_hz = 2e9 }
[[standard]]
name = "open"
kind = "open"
"""


def test_matings_of_a_bench(tmp_path):
    bench = parse_bench(TEXT + "matings = 120\n", tmp_path / "bench.toml")
    assert bench.standards[0].matings == 120
    assert parse_bench(TEXT, tmp_path / "bench.toml").standards[0].matings is None


@pytest.mark.parametrize("value", ["-1", "1.5", "true", '"many"', "10000000000"])
def test_counts_that_are_none(tmp_path, value):
    with pytest.raises(BenchError, match="whole number") as refused:
        parse_bench(f"{TEXT}matings = {value}\n", tmp_path / "bench.toml")
    assert refused.value.key == "standard[open].matings"


@pytest.fixture(scope="module")
def kit(workshop):
    shop = workshop(given={"load": {"resistance_ohm": (50.3, 0.02)}})
    bench = shop.bench()
    entries = tuple(
        replace(entry, matings=count) for entry, count in zip(bench.standards, (120, None, 0), strict=True)
    )
    dated = replace(bench, date="2024-05-01", standards=entries)
    return characterise(dated, shop.readings(), created="2024-06-01")


def test_a_kit_keeps_them(kit):
    assert kit.measured == "2024-05-01"
    assert [one.matings for one in kit.definitions] == [120, None, 0]
    (given,) = [one.given for one in kit.definition("load").parameters if one.role == "given"]
    assert given == (50.3, 0.02)
    assert all(one.given is None for one in kit.definition("open").parameters)


def test_a_kit_file_keeps_them(kit):
    text = kit_text(kit)
    assert 'measured = "2024-05-01"\n' in text
    assert text.count("matings = ") == 2
    assert text.count("given_value = 50.3\ngiven_u = 0.02\n") == 1
    again = parse_kit(text, "kit.toml")
    assert kit_text(again) == text
    assert (again.measured, again.definition("open").matings) == ("2024-05-01", 120)


def test_kit_files_without_them_stay_as_they_are(usual_kit):
    text = kit_text(usual_kit)
    assert not any(key in text for key in ("measured", "matings", "given_value"))
    assert kit_text(parse_kit(text, "kit.toml")) == text


@pytest.mark.parametrize(
    "old, new, said",
    [
        ("matings = 120", "matings = -1", "matings"),
        ("matings = 120", "matings = 1.5", "matings"),
        ("given_u = 0.02\n", "", "given_value"),
        ("given_u = 0.02", "given_u = 0.0", "given_u"),
        ("given_value = 50.3", "given_value = inf", "given_value"),
    ],
)
def test_nonsense_in_a_kit_file(kit, old, new, said):
    text = kit_text(kit)
    assert old in text
    with pytest.raises(KitError) as refused:
        parse_kit(text.replace(old, new, 1), "kit.toml")
    assert said in refused.value.key
