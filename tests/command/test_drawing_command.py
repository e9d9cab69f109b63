"""The command that takes a drawing: what it prints can be pasted, and what is wrong is said in words."""

import json
import tomllib
from pathlib import Path

import pytest

from stdfit.cli import main
from stdfit.data.bench import parse_bench

ROOT = Path(__file__).parents[2]
EXAMPLE = ROOT / "docs" / "parts.drawing.toml"
BENCH = """format = "stdfit-bench/1"
kit = { name = "Pasted", connector = "3.5 mm" }
analyser = { state = "corrected" }
plan = { from_hz = 50e6, to_hz = 6e9 }
"""


def printed(capsys, *arguments):
    code = main(["drawing", *map(str, arguments)])
    told = capsys.readouterr()
    return code, told.out, told.err


@pytest.fixture(scope="module")
def example_data():
    """What the example's drawing says as JSON."""
    import contextlib
    import io

    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        assert main(["drawing", str(EXAMPLE), "--json"]) == 0
    return json.loads(out.getvalue())


def test_the_table_names_value_bound_and_where_it_comes_from(capsys):
    code, out, _ = printed(capsys, EXAMPLE, "--part", "open")
    assert code == 0
    rows = {line.split("  ")[1]: line for line in out.splitlines() if line.startswith("  ") and "±" in line}
    assert rows.keys() == {"what", "offset delay", "offset loss", "offset Z0", "C0", "C2"}
    assert "20.02 ± 0.22" in rows["offset delay"] and "length_mm of section 1" in rows["offset delay"]
    assert "39.87 ± 1.6" in rows["C0"] and "edge of the pin" in rows["C0"]
    assert "C1, C3" in out and "next mode (TE11) from 38.8 GHz on; 3.5 mm is recommended up to 33 GHz" in out
    assert "short" not in out


def test_its_lines_are_those_of_a_bench_file(capsys, example_data):
    bench = BENCH
    for part in example_data["parts"]:
        _, out, _ = printed(capsys, EXAMPLE, "--part", part["name"])
        lines = [line for line in out.splitlines() if line.startswith("given.")]
        bench += "\n".join(
            ["[[standard]]", f'name = "{part["name"]}"', f'kind = "{part["kind"]}"', *lines, ""]
        )
    read = parse_bench(bench, Path("bench.toml"))
    for entry, part in zip(read.standards, example_data["parts"], strict=True):
        assert set(entry.given) == {one["name"] for one in part["values"]} | set(part["held_at_zero"])
        for one in part["values"]:
            pasted = entry.given[one["name"]]
            assert abs(pasted.value - one["value"]) < 0.01 * one["u"]
            assert pasted.u == pytest.approx(one["u"], rel=0.01)


def test_json_tells_the_parts_of_the_uncertainty(example_data):
    first = example_data["parts"][0]
    assert (example_data["connector"], example_data["connector_top_hz"]) == ("3.5 mm", 38.8e9)
    assert (first["kind"], first["end"], first["to_hz"]) == ("open", "shielded", 6e9)
    for one in first["values"]:
        assert sum(u**2 for u in one["u_parts"].values()) == pytest.approx(one["u"] ** 2)
        assert one["high_95"] - one["low_95"] == pytest.approx(3.92 * one["u"])
    assert example_data["parts"][2]["next_mode_hz"] is None


def test_the_band_matters(capsys):
    _, low, _ = printed(capsys, EXAMPLE, "--part", "open", "--to", "1e9", "--json")
    _, high, _ = printed(capsys, EXAMPLE, "--part", "open", "--to", "60e9", "--json")
    c0 = [
        next(one for one in json.loads(text)["parts"][0]["values"] if one["name"] == "c0")
        for text in (low, high)
    ]
    assert c0[1]["u_parts"]["higher orders"] > 100.0 * c0[0]["u_parts"]["higher orders"]
    assert "next mode begins" in json.loads(high)["parts"][0]["notes"][0]


@pytest.mark.parametrize(
    ("arguments", "what", "mend"),
    [
        (["--part", "opne"], "holds no part named 'opne'", "did you mean 'open'?"),
        (["--to", "nan"], "nan Hz is no top of a band", "such as 6e9"),
        (["--to", "-1"], "is no top of a band", "such as 6e9"),
    ],
)
def test_what_makes_no_sense_is_refused(capsys, arguments, what, mend):
    code, out, err = printed(capsys, EXAMPLE, *arguments)
    assert (code, out) == (2, "")
    assert what in err and mend in err


@pytest.mark.parametrize("file", ["nowhere.toml", ROOT / "docs", ROOT / "README.md"])
def test_what_is_no_drawing_is_refused(capsys, file):
    code, out, err = printed(capsys, file)
    assert (code, out) == (2, "")
    assert 1 <= len(err.strip().splitlines()) <= 2


def test_the_page_shows_the_example_as_it_is():
    page = (ROOT / "docs" / "files.md").read_text(encoding="utf-8")
    text = EXAMPLE.read_text(encoding="utf-8")
    assert f"```text\n{text}```\n" in page
    assert tomllib.loads(text)["format"] == "stdfit-drawing/1"


def test_every_key_of_a_drawing_is_described():
    """The lists of known keys, taken from the answers to keys that no table has."""
    from stdfit.base.errors import BenchError
    from stdfit.data.drawing import parse_drawing

    text = EXAMPLE.read_text(encoding="utf-8")
    page = (ROOT / "docs" / "files.md").read_text(encoding="utf-8")
    section = page.partition("## Drawing file\n")[2].partition("\n## ")[0]
    for before in ("format =", 'name = "open"', "length_mm", "form ="):
        with pytest.raises(BenchError) as refused:
            parse_drawing(text.replace(before, "qqqqqqqq = 1\n" + before, 1), EXAMPLE)
        keys = refused.value.mend.removeprefix("use one of: ").split(", ")
        assert len(keys) >= 4
        for key in set(keys) - {"part", "section", "end"}:
            assert f".{key}`" in section or f"`{key}`" in section, key


def test_every_material_is_described():
    from stdfit.data.drawing_materials import CHIP_SIZES, DIELECTRICS, METALS

    section = (ROOT / "docs" / "files.md").read_text(encoding="utf-8").partition("## Drawing file\n")[2]
    for name in (*METALS, *DIELECTRICS, *CHIP_SIZES):
        assert name in section, name
