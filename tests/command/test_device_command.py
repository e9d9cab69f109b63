"""What a kit does to devices, asked on the command line."""

import csv
import io
import json
import re
from pathlib import Path

import pytest

from stdfit import kit_text
from stdfit.cli import main

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"


@pytest.fixture(scope="module")
def kit(usual_kit, tmp_path_factory):
    path = tmp_path_factory.mktemp("device") / "kit.toml"
    path.write_text(kit_text(usual_kit), encoding="utf-8")
    return str(path)


def out_of(capsys, *arguments):
    assert main([*map(str, arguments)]) == 0
    told = capsys.readouterr()
    assert told.err == ""
    return told.out


def test_the_table(kit, capsys):
    out = out_of(capsys, "device", kit)
    assert out.startswith("Simulated bench: an analyser corrected with open, short, load, 95 %\n")
    assert re.search(r"frequency +\|Γ\| = 0 +\|Γ\| = 0.1 +\|Γ\| = 0.3 +\|Γ\| = 1$", out, re.MULTILINE)
    told = [line.split()[:2] for line in out.splitlines() if line.endswith(" dB")]
    assert told == [["100", "MHz"], ["300", "MHz"], *([f"{n}", "GHz"] for n in range(1, 7))]


def test_csv_json_and_text_hold_the_same(kit, capsys):
    asked = ("device", kit, "--at", 1e9, 2.5e9, "--magnitude", 0.2, 0.9)
    data = json.loads(out_of(capsys, *asked, "--json"))
    rows = list(csv.DictReader(io.StringIO(out_of(capsys, *asked, "--csv"))))
    assert data["standards"] == ["open", "short", "load"]
    assert [{name: float(value) for name, value in row.items()} for row in rows] == data["device"]
    assert [row["frequency_hz"] for row in data["device"]] == [1e9, 2.5e9]
    assert list(rows[0])[4:] == ["worst_at_0.2", "typical_at_0.2", "worst_at_0.9", "typical_at_0.9"]
    text = out_of(capsys, *asked)
    for row in data["device"]:
        assert f"{row['directivity_db']:.1f} dB" in text
        assert f"{row['worst_at_0.9']:.2g} ({row['typical_at_0.9']:.2g})" in text


def test_points_are_spread_over_the_readings(kit, capsys):
    data = json.loads(out_of(capsys, "device", kit, "--points", 3, "--json"))
    assert [row["frequency_hz"] for row in data["device"]] == [50e6, 3.025e9, 6e9]
    data = json.loads(out_of(capsys, "device", kit, "--points", 1, "--json"))
    assert [row["frequency_hz"] for row in data["device"]] == [6e9]


def test_the_order_of_named_standards_does_not_matter(kit, capsys):
    plain = json.loads(out_of(capsys, "device", kit, "--json"))
    turned = json.loads(out_of(capsys, "device", kit, "--standards", "load", "open", "short", "--json"))
    assert turned["standards"] == ["load", "open", "short"]
    for one, other in zip(plain["device"], turned["device"], strict=True):
        assert one == pytest.approx(other)


def test_questions_about_devices(kit, capsys):
    asked = (
        "limit",
        kit,
        "--return-loss",
        20,
        1,
        "--return-loss",
        30,
        3,
        "--impedance",
        75,
        2,
        "--phase",
        1.5,
    )
    data = json.loads(out_of(capsys, *asked, "--json"))
    assert data["limits"] == []
    assert [one["asked"] for one in data["devices"]] == [
        "return loss of 20 dB within 1 dB",
        "return loss of 30 dB within 3 dB",
        "|Z| near 75 Ω within 2 %",
        "phase of a full reflection within 1.5°",
    ]
    assert all(set(one) == {"asked", "limit_hz", "held_back_by", "reason"} for one in data["devices"])
    lines = out_of(capsys, *asked).splitlines()
    assert lines[0].split("  ")[0] == "asked"
    assert [line.split("  ")[0] for line in lines[1:]] == [one["asked"] for one in data["devices"]]
    assert all(line.endswith(one["reason"]) for line, one in zip(lines[1:], data["devices"], strict=True))


def test_tolerances_and_questions_together(kit, capsys):
    asked = ("limit", kit, "--within", 0.02, "--phase", 2)
    data = json.loads(out_of(capsys, *asked, "--json"))
    assert [one["within"] for one in data["limits"]] == [0.02]
    assert len(data["devices"]) == 1
    first, _, second = out_of(capsys, *asked).partition("\n\n")
    assert first.startswith("within  what")
    assert second.startswith("asked ")


def test_without_a_question_the_answer_is_what_it_was(kit, capsys):
    data = json.loads(out_of(capsys, "limit", kit, "--json"))
    assert set(data) == {"limits"}
    assert [one["name"] for one in data["limits"][0]["standards"]] == ["open", "short", "load"]


REQUESTS = {
    "at and points": (["device", "KIT", "--at", "1e9", "--points", "3"], "--at and --points"),
    "csv and json": (["device", "KIT", "--csv", "--json"], "--csv and --json"),
    "beyond the readings": (["device", "KIT", "--at", "7e9"], "7000000000 Hz lies outside"),
    "no number": (["device", "KIT", "--at", "nan"], "nan Hz lies outside"),
    "no such standard": (
        ["device", "KIT", "--standards", "open", "short", "laod"],
        "no standard named 'laod'",
    ),
    "one standard twice": (["device", "KIT", "--standards", "open", "open", "load"], "2 different standards"),
    "two standards only": (["device", str(SMALL)], "has no open, short and load"),
    "a question to two": (["limit", str(SMALL), "--phase", "2"], "has no open, short and load"),
    "no question": (["limit", "KIT", "--standards", "open", "short", "load"], "without a question"),
    "return loss below 0": (["limit", "KIT", "--return-loss", "-20", "1"], "a return loss of -20 dB"),
    "impedance of 0": (["limit", "KIT", "--impedance", "0", "1"], "0 Ω"),
    "phase of a quarter turn": (["limit", "KIT", "--phase", "90"], "within 90°"),
}


@pytest.mark.parametrize("arguments, words", REQUESTS.values(), ids=REQUESTS)
def test_requests_that_cannot_be_met(kit, arguments, words, capsys):
    assert main([kit if one == "KIT" else one for one in arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("stdfit: ")
    assert words in err.splitlines()[0]
    assert err.count("\n") == 2


USAGE = {
    "magnitude above 1": (["device", "KIT", "--magnitude", "1.1"], "'1.1' is not |Γ| of a passive device"),
    "magnitude nan": (["device", "KIT", "--magnitude", "nan"], "'nan' is not |Γ| of a passive device"),
    "two of three": (["device", "KIT", "--standards", "open", "load"], "expected 3 arguments"),
    "no tolerance": (["limit", "KIT", "--return-loss", "20"], "expected 2 arguments"),
    "words": (["limit", "KIT", "--impedance", "50", "two"], "'two' is not a number"),
    "no points": (["device", "KIT", "--points", "0"], "no whole number"),
}


@pytest.mark.parametrize("arguments, words", USAGE.values(), ids=USAGE)
def test_wrong_usage_of_device_options(arguments, words, capsys):
    with pytest.raises(SystemExit) as ended:
        main(arguments)
    assert ended.value.code == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert err.count("\n") == 2
