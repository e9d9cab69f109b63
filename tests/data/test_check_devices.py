"""The [[device]] tables of a bench file: what is read, and what is refused with which words."""

import numpy as np
import pytest

from stdfit.base.errors import BenchError
from stdfit.data.bench import parse_bench, read_bench

HEAD = """format = "stdfit-bench/1"
kit = { name = "Day", connector = "SMA" }
analyser = { state = "raw" }
"""
STANDARD = '[[standard]]\nname = "open"\nkind = "open"\nreadings = ["open.s1p"]\n'
DEVICE = '[[device]]\nname = "x"\nreadings = ["x-*.s1p"]\n'


@pytest.fixture
def bench(tmp_path):
    for name in ("open.s1p", "x-1.s1p", "x-2.s1p", "value.s1p", "other.toml"):
        (tmp_path / name).touch()

    def parse(*lines, text=HEAD + STANDARD, **options):
        return parse_bench(text + DEVICE + "\n".join(lines), tmp_path / "bench.toml", **options)

    return parse


def test_a_device_without_a_value(bench):
    (device,) = bench("port = 2").devices
    assert (device.name, len(device.files), device.port, device.expect) == ("x", 2, 2, None)
    assert (device.kind, device.from_kit, device.value_file) == (None, None, None)
    assert bench('expect = "line"').devices[0].expect == "line"


def test_a_device_with_given_values(bench):
    lines = ['kind = "short"', "given.offset_delay_ps = { value = 33.3, u = 0.1 }", "given.l0 = 2.0"]
    (device,) = bench(*lines).devices
    assert device.kind == "short"
    assert (device.given["offset_delay_ps"].u, device.given["l0"].u) == (0.1, None)


def test_a_device_with_a_value_from_elsewhere(bench, tmp_path):
    (device,) = bench('from_kit = "other.toml"', 'standard = "cap"').devices
    assert (device.from_kit, device.standard) == (tmp_path / "other.toml", "cap")
    (device,) = bench('value_file = "value.s1p"', "value_u95 = 0.005").devices
    assert device.value_file == tmp_path / "value.s1p"
    assert device.value_u95.bound.tolist() == [0.005]
    lines = ['value_file = "value.s1p"', "value_u95 = { frequency_hz = [1e9, 6e9], bound = [0.002, 0.006] }"]
    stated = bench(*lines).devices[0].value_u95
    assert np.interp(3.5e9, stated.frequency_hz, stated.bound) == pytest.approx(0.004)


@pytest.mark.parametrize("stated", ["2.1", "1e9", "{ frequency_hz = [1e9, 2e9], bound = [0.01, 40] }"])
def test_a_bound_that_no_reflections_reach(bench, stated):
    with pytest.raises(BenchError, match="above 2, by which no two reflections differ"):
        bench('value_file = "value.s1p"', f"value_u95 = {stated}")


def test_devices_alone(bench):
    assert bench(text=HEAD, devices_alone=True).standards == ()
    with pytest.raises(BenchError, match="missing"):
        bench(text=HEAD)


def test_a_bench_without_devices_has_none(tmp_path):
    (tmp_path / "open.s1p").touch()
    (tmp_path / "bench.toml").write_text(HEAD + STANDARD, encoding="utf-8")
    assert read_bench(tmp_path).devices == ()


KIND = 'kind = "short"'
FILE = 'value_file = "value.s1p"'
REFUSED = {
    "unknown key": (["valeu_file = 'v'"], "device[x].valeu_file", "did you mean 'value_file'?"),
    "unknown kind": (['kind = "lid"'], "device[x].kind", ""),
    "kind alone": ([KIND], "device[x].kind", "write given beside it"),
    "given alone": (["given.l0 = 1"], "device[x].given", "write kind beside it"),
    "no delay": ([KIND, "given.l0 = 1"], "device[x].given", "write given.offset_delay_ps"),
    "no resistance": (
        ['kind = "load"', "given.inductance_ph = 1"],
        "device[x].given",
        "given.resistance_ohm",
    ),
    "other parameter": ([KIND, "given.c0 = 1"], "device[x].given.c0", ""),
    "u of zero": (
        [KIND, "given.offset_delay_ps = { value = 1, u = 0 }"],
        "device[x].given.offset_delay_ps.u",
        "",
    ),
    "two values": (
        [FILE, "value_u95 = 0.1", KIND, "given.offset_delay_ps = 1"],
        "device[x].value_file",
        "leave one",
    ),
    "value without bound": ([FILE], "device[x].value_file", "write value_u95 beside it"),
    "bound alone": (["value_u95 = 0.1"], "device[x].value_u95", "write value_file beside it"),
    "bound of zero": ([FILE, "value_u95 = 0"], "device[x].value_u95", "above 0"),
    "bound in words": ([FILE, 'value_u95 = "small"'], "device[x].value_u95", ""),
    "bound in a list": ([FILE, "value_u95 = [0.1]"], "device[x].value_u95", ""),
    "bound falling": (
        [FILE, "value_u95 = { frequency_hz = [2e9, 1e9], bound = [0.1, 0.1] }"],
        "device[x].value_u95.frequency_hz",
        "rising order",
    ),
    "bound too short": (
        [FILE, "value_u95 = { frequency_hz = [1e9, 2e9], bound = [0.1] }"],
        "device[x].value_u95.bound",
        "one value a frequency",
    ),
    "bound unknown key": ([FILE, "value_u95 = { bond = [0.1] }"], "device[x].value_u95.bond", "'bound'"),
    "no such file": (
        ['value_file = "none.s1p"', "value_u95 = 0.1"],
        "device[x].value_file",
        "check the path",
    ),
    "endless name": ([f'value_file = "{"x" * 199}\\u0000"', "value_u95 = 0.1"], "device[x].value_file", ""),
    "kit without standard": (['from_kit = "other.toml"'], "device[x].from_kit", "write standard beside it"),
    "standard alone": (['standard = "cap"'], "device[x].standard", "write from_kit beside it"),
    "expected and known": ([FILE, "value_u95 = 0.1", 'expect = "line"'], "device[x].expect", "leave it out"),
    "unknown expectation": (['expect = "lines"'], "device[x].expect", "did you mean 'line'?"),
    "port three": (["port = 3"], "device[x].port", ""),
    "two of a name": ([DEVICE], "device[x].name", "give each its own name"),
    "no readings": (["[[device]]", 'name = "y"'], "device[y].readings", "write readings"),
    "no name": (["[[device]]", 'readings = ["x-1.s1p"]'], "device[#2].name", ""),
    "number as reading": (["[[device]]", "readings = [1]"], "device[#2].readings", "in quotes"),
}


@pytest.mark.parametrize("lines, key, mend", REFUSED.values(), ids=REFUSED)
def test_what_is_refused(bench, lines, key, mend):
    with pytest.raises(BenchError) as refused:
        bench(*lines)
    assert refused.value.key == key
    assert mend in refused.value.mend
    assert str(refused.value).count("\n") <= 1


@pytest.mark.parametrize("device", ["1", "[]", '"x"', "[1]", "{}"])
def test_what_is_no_list_of_tables(bench, tmp_path, device):
    with pytest.raises(BenchError) as refused:
        parse_bench(f"device = {device}\n" + HEAD + STANDARD, tmp_path / "bench.toml")
    assert refused.value.key.startswith("device")


@pytest.mark.parametrize("figure", ["{ value = 50.0, u = 1e10 }", "1e11"])
def test_figures_that_no_device_has(bench, figure):
    with pytest.raises(BenchError, match="which no part has") as refused:
        bench('kind = "load"', f"given.resistance_ohm = {figure}")
    assert refused.value.key == "device[x].given.resistance_ohm"
