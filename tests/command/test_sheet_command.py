"""`stdfit sheet`, and every command that takes a kit on what it prints as JSON."""

import csv
import io
import json

import pytest

from stdfit.writing.kit_reading import read_kit


def test_text_csv_and_json_say_the_same(command, kit_file, tmp_path):
    asked = ("sheet", kit_file, "--accepts", "delay", "cubic", "resistance", "--digits", "3", "resistance=5")
    text, table, data = (command(tmp_path, *asked, *more) for more in ([], ["--csv"], ["--json"]))
    assert (text.returncode, table.returncode, data.returncode) == (0, 0, 0)
    sheet = json.loads(data.stdout)
    rows = list(csv.DictReader(io.StringIO(table.stdout)))
    for standard in sheet["standards"]:
        for one in standard["typed"]:
            (row,) = [r for r in rows if (r["standard"], r["item"]) == (standard["name"], one["term"])]
            assert (row["value"], row["unit"]) == (one["number"], one["unit"])
            assert one["number"] == "0" or f" {one['number']} " in text.stdout
    assert text.stdout.splitlines()[-1].startswith("within 0.02 the kit as typed is good to ")
    (load,) = [one for one in sheet["standards"] if one["kind"] == "load"]
    assert len(load["typed"][1]["number"].replace(".", "")) == 5


def test_every_command_takes_the_json(command, kit_file, tmp_path):
    done = command(tmp_path, "sheet", kit_file, "--accepts", "delay", "--within", "0.03", "--json")
    (tmp_path / "typed.json").write_text(done.stdout, encoding="utf-8")
    promised = json.loads(done.stdout)
    found = json.loads(command(tmp_path, "limit", "typed.json", "--json").stdout)["limits"][0]
    assert (found["within"], found["kit"]["limit_hz"]) == (0.03, promised["limit_left"]["limit_hz"])
    assert [one["limit_hz"] for one in found["standards"]] == [
        one["limit_left"]["limit_hz"] for one in promised["standards"]
    ]
    for rest in (["show"], ["curve"], ["limit"], ["sheet"], ["sheet", "--json"]):
        again = command(tmp_path, rest[0], "typed.json", *rest[1:])
        assert (again.returncode, again.stderr) == (0, ""), rest
    kit = read_kit(tmp_path / "typed.json")
    assert kit.definitions[0].values.tolist()[1:] == [0.0, 50.0, 0.0, 0.0, 0.0, 0.0]


@pytest.mark.parametrize(
    ("more", "told"),
    [
        (["--accepts", "dealy"], "did you mean 'delay'?"),
        (["--units", "delay=inch"], "no unit 'inch' of delay"),
        (["--digits", "20"], "is no number of significant digits"),
        (["--velocity-factor", "0.7"], "says nothing of a delay in time"),
        (["--csv", "--json"], "are asked for at once"),
    ],
)
def test_wrong_usage(command, kit_file, tmp_path, more, told):
    done = command(tmp_path, "sheet", kit_file, *more)
    assert (done.returncode, done.stdout) == (2, "")
    assert told in done.stderr
    assert done.stderr.count("\n") <= 2


def test_a_spoilt_sheet(command, tmp_path):
    (tmp_path / "x.json").write_text('{"format": "stdfit-sheet/1", "standards": []}', encoding="utf-8")
    for name in ("show", "curve", "limit", "sheet"):
        done = command(tmp_path, name, "x.json")
        assert (done.returncode, done.stdout) == (2, "")
        assert 1 <= done.stderr.count("\n") <= 2
