"""The JSON of an entry sheet: read back it is the kit as typed; what is wrong with it is said in two lines."""

import json
import re
from pathlib import Path

import numpy as np
import pytest
from typed_kit import typed_kit

from stdfit.base.errors import KitError
from stdfit.validity.entry.sheet import Wanted, entry_sheet
from stdfit.validity.entry.units import units_from
from stdfit.validity.kit import curve
from stdfit.validity.limits import limits
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit
from stdfit.writing.plain_data import kit_data, limit_data
from stdfit.writing.sheet_data import sheet_data
from stdfit.writing.sheet_reading import parse_sheet
from stdfit.writing.summary import limit_lines, summary

FILES = Path(__file__).parents[2] / "docs" / "files.md"
ACCEPTS = ("delay", "loss", "c0", "resistance")
UNITS = ["delay=two-way-mm", "loss=dB", "capacitance=F"]


@pytest.fixture
def sheet(small_kit):
    return entry_sheet(small_kit, Wanted(ACCEPTS, units_from(UNITS, 0.7), ("3",)))


@pytest.fixture
def data(sheet):
    return json.loads(json.dumps(sheet_data(sheet), ensure_ascii=False, allow_nan=False))


def test_read_back_it_is_the_typed_kit(sheet, data):
    read, typed = parse_sheet(json.dumps(data), "sheet.json"), typed_kit(sheet)
    assert kit_text(read) == kit_text(typed)
    ((whole, each),) = limits(read, [sheet.within])
    assert whole.limit_hz == sheet.left.limit_hz
    assert [one.limit_hz for one in each] == [entry.left.limit_hz for entry in sheet.entries]
    for definition, entry in zip(read.definitions, sheet.entries, strict=True):
        _, bound = curve(read, definition, entry.frequency_hz)
        np.testing.assert_array_equal(bound, entry.bound_and_extra)
        np.testing.assert_array_equal(definition.values, entry.values)
        assert {(one.role, one.u) for one in definition.parameters} == {("held", 0.0)}


def test_every_command_that_shows_a_kit_can_show_it(data):
    kit = parse_sheet(json.dumps(data), "sheet.json")
    assert "as typed" in summary(kit)
    found = limits(kit, [0.001, 0.02, 0.05])
    assert "the stated bound reaches it here" in limit_lines(kit, found)
    json.dumps([kit_data(kit), limit_data(kit, found)], allow_nan=False)


def test_a_kit_without_sources_is_a_kit_file_too(data):
    kit = parse_sheet(json.dumps(data), "sheet.json")
    assert kit_text(parse_kit(kit_text(kit), "kit.toml")) == kit_text(kit)


def test_kit_files_and_sheets_are_told_apart_by_what_they_hold(tmp_path, small_kit, data):
    for name in ("a.toml", "b.json"):
        path = tmp_path / name
        path.write_text("\n  " + json.dumps(data), encoding="utf-8")
        assert read_kit(path).definitions[0].shape == "as typed"
        path.write_text(kit_text(small_kit), encoding="utf-8")
        assert read_kit(path).definitions[0].shape == "constant"


def test_numbers_may_be_numbers(data):
    as_text = parse_sheet(json.dumps(data), "sheet.json")
    for standard in data["standards"]:
        for one in standard["typed"]:
            one["number"] = float(one["number"])
    assert kit_text(parse_sheet(json.dumps(data), "sheet.json")) == kit_text(as_text)


def test_all_units_are_read_back(small_kit):
    for words, factor in (
        ([], None),
        (["delay=s", "loss=Ω/s", "capacitance=pF", "inductance=H"], None),
        (["delay=two-way-m", "loss=two-way-dB", "capacitance=fF", "inductance=nH"], 0.66),
    ):
        sheet = entry_sheet(small_kit, Wanted(None, units_from(words, factor)))
        read = parse_sheet(json.dumps(sheet_data(sheet)), "sheet.json")
        for definition, entry in zip(read.definitions, sheet.entries, strict=True):
            np.testing.assert_array_equal(definition.values, entry.values)
            np.testing.assert_allclose(definition.values, entry.definition.values, rtol=2e-2, atol=1e-6)


def put(path, value):
    """Return a function that puts a value at a place of the document."""

    def change(data):
        for key in path[:-1]:
            data = data[key]
        data[path[-1]] = value

    return change


def drop(*path):
    def change(data):
        for key in path[:-1]:
            data = data[key]
        del data[path[-1]]

    return change


FIRST = ("standards", 0)
CURVE = (*FIRST, "bound_and_extra")


def z0_of(number):
    """Type an offset Z0 as well."""

    def change(data):
        first = data["standards"][0]
        first["typed"].append({"term": "z0", "number": number, "unit": "Ω"})
        first["left_out"] = [one for one in first["left_out"] if one != "z0"]

    return change


@pytest.mark.parametrize(
    ("change", "what", "key"),
    [
        (put(["format"], "stdfit-sheet/2"), "no entry sheet of this version", "format"),
        (drop("format"), "no entry sheet of this version", "format"),
        (put(["colour"], 1), "unknown key", "colour"),
        (put([*FIRST, "limit_lft"], 1), "unknown key", "standards[0].limit_lft"),
        (drop(*FIRST, "typed"), "object missing required field `typed`", "standards[0]"),
        (put(["within"], 0), "expected", "within"),
        (put(["reference_impedance_ohm"], -50), "expected", "reference_impedance_ohm"),
        (put(["units", "delay"], "miles"), "no unit 'miles' of delay", "units.delay"),
        (put(["units", "colour"], "red"), "unknown key", "units.colour"),
        (drop("units", "loss"), "no unit is named", "units.loss"),
        (put(["velocity_factor"], 2.0), "expected", "velocity_factor"),
        (put([*FIRST, "kind"], "thru"), "no kind of standard", "standards[0].kind"),
        (put([*FIRST, "typed", 0, "term"], "l0"), "no term 'l0' of this kind", "standards[0].typed[0].term"),
        (put([*FIRST, "typed", 1, "term"], "delay"), "delay is typed twice", "standards[0].typed[1]"),
        (put([*FIRST, "typed", 0, "unit"], "ps"), "the unit is not the stated", "standards[0].typed[0].unit"),
        (put([*FIRST, "typed", 0, "number"], "1,5"), "'1,5' is not a number", "standards[0].typed[0].number"),
        (put([*FIRST, "typed", 0, "number"], "nan"), "'nan' is not a number", "standards[0].typed[0].number"),
        (put([*FIRST, "typed", 0, "number"], "1e999"), "not a finite number", "standards[0].typed[0]"),
        (put([*FIRST, "typed", 0, "number"], True), "expected", "standards[0].typed[0].number"),
        (
            put([*FIRST, "typed", 0, "number"], "1e30"),
            "an offset delay of ",
            "standards[0].typed[0].number",
        ),
        (
            put([*FIRST, "typed", 0, "number"], "-1e300"),
            "must be below 1e+06 ps",
            "standards[0].typed[0].number",
        ),
        (z0_of("-50"), "an offset Z0 of -50 Ω", "standards[0].typed[3].number"),
        (z0_of("0"), "must be above 0", "standards[0].typed[3].number"),
        (put([*FIRST, "typed", 2, "number"], "1e290"), "no finite reflection", "standards[0].typed"),
        (put([*CURVE, "value"], [0.1]), "equally long", "standards[0].bound_and_extra"),
        (put([*CURVE, "value", 0], -0.1), "expected", "standards[0].bound_and_extra.value[0]"),
        (put([*CURVE, "frequency_hz", 3], 1.0), "do not rise", "standards[0].bound_and_extra.frequency_hz"),
        (put([*FIRST, "read_to_hz"], 1.0), "the band of the readings", "standards[0].read_to_hz"),
        (
            put([*FIRST, "limit_left", "limit_hz"], 1e12),
            "the limit lies above",
            "standards[0].limit_left.limit_hz",
        ),
        (put(["limit_left", "limit_hz"], 1e12), "the limit lies above", "limit_left.limit_hz"),
        (put([*FIRST, "name"], "load"), "two standards have the same name", "standards"),
        (put([*FIRST, "name"], "\x1b[2J"), "control character", "standards[0].name"),
        (put(["standards"], []), "holds no standard", "standards"),
        (put(["standards"], {}), "expected a list", "standards"),
    ],
)
def test_what_is_wrong_is_said(data, change, what, key):
    change(data)
    with pytest.raises(KitError) as refused:
        parse_sheet(json.dumps(data), "sheet.json")
    assert what in refused.value.what
    assert refused.value.key == key
    assert str(refused.value).count("\n") <= 1


@pytest.mark.parametrize(
    "text",
    [
        *("{", '{"format": "stdfit-sheet/1"}', '{"format": "stdfit-sheet/1", "standards": 1e999}', "{}"),
        *(
            '{"a": ' * 100_000,
            '{"format": ' + "[" * 100_000,
            '{"format": "stdfit-kit/1"}',
            '{"a": "\\ud800"}',
        ),
        '{"format": "stdfit-sheet/1", "within": ' + "9" * 5000 + "}",
    ],
)
def test_hostile_texts(tmp_path, text):
    path = tmp_path / "x.json"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(KitError) as refused:
        read_kit(path)
    assert str(refused.value).count("\n") <= 1
    assert len(str(refused.value)) < 400


def test_any_value_at_any_place(data):
    """A kit that can be used, or a KitError: 400 random changes."""
    rng = np.random.default_rng(4)
    text = json.dumps(data)
    strange = [None, True, -1, 0, 1e300, -1e-300, "", "nan", "\x07", [], {}, [[]], 10**30, "open", "delay"]
    used = 0
    for _ in range(400):
        changed = json.loads(text)
        place, depth = changed, 0
        while True:
            keys = list(place) if isinstance(place, dict) else list(range(len(place)))
            key = keys[rng.integers(len(keys))]
            inner = place[key]
            if not isinstance(inner, (dict, list)) or not inner or (depth and rng.random() < 0.1):
                break
            place, depth = inner, depth + 1
        place[key] = strange[rng.integers(len(strange))]
        try:
            kit = parse_sheet(json.dumps(changed), "sheet.json")
        except KitError as fault:
            assert str(fault).count("\n") <= 1
            continue
        used += 1
        summary(kit)
        limits(kit, [0.02])
    assert 0 < used < 200


@pytest.mark.parametrize("place", ['"within": ', '"largest": ', '"term": '])
def test_a_key_that_stands_twice_is_refused(data, place):
    """A decoder would take the last of the two, and a sheet that was mended by hand would not mean what it shows."""
    text = json.dumps(data)
    twice = text.replace(place, f"{place}0.5, {place}", 1)
    with pytest.raises(KitError, match="the key stands twice") as caught:
        parse_sheet(twice, "sheet.json")
    assert caught.value.key == place.strip('": ')


@pytest.mark.parametrize("value", ["[" * 990 + "]" * 990, "9" * 5000, "{" * 100_000])
def test_depth_and_digits_without_an_end(data, value):
    text = json.dumps(data).replace('"within": ', f'"within": {value}, "x": ', 1)
    with pytest.raises(KitError):
        parse_sheet(text, "sheet.json")


def test_every_key_is_described(data):
    page = FILES.read_text(encoding="utf-8").partition("## Entry sheet as JSON")[2].partition("\n## ")[0]

    def walk(value):
        for item in value if isinstance(value, list) else [value]:
            if isinstance(item, dict):
                for key, inner in item.items():
                    yield key
                    yield from walk(inner)

    keys = {*walk(data), "frequency_hz", "extra", "standard"}
    assert {"format", "typed", "bound_and_extra", "velocity_factor"} <= keys
    for key in keys:
        assert re.search(rf"[`.]{key}`", page), key


def test_the_example_of_the_page_is_a_sheet():
    page = FILES.read_text(encoding="utf-8").partition("## Entry sheet as JSON")[2]
    (text,) = re.findall(r"^```json\n(.*?)^```", page, re.MULTILINE | re.DOTALL)
    kit = parse_sheet(text, FILES)
    assert kit.definitions[0].values.tolist() == pytest.approx([0.0, 0.0, 50.0, 50.2, 30.0, 0.0])
    ((whole, _),) = limits(kit, [kit.within])
    assert whole.limit_hz == kit.limit.limit_hz
