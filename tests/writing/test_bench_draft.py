"""A bench file drafted from what lies in a folder. All readings are simulated, invented data."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.data.bench import parse_bench
from stdfit.writing.adapter_touchstone import FIRST_LINE as ADAPTER_LINE
from stdfit.writing.bench_draft import Found, draft, find_standards, kind_by_name, kind_by_reading
from stdfit.writing.export import export_files

GRID = np.linspace(50e6, 3e9, 41)
VALUES = {
    "open": [20.0, 1.0, 50.0, 40.0, 0.0, 0.0, 0.0],
    "short": [20.0, 1.0, 50.0, 3.0, 0.0, 0.0, 0.0],
    "load": [0.0, 0.0, 50.0, 50.5, 30.0, 0.0],
}


def gamma_of(kind):
    return reflection(kind, VALUES[kind], GRID, 50.0)[0]


def put(folder, name, gamma):
    rows = "\n".join(f"{f:.0f} {g.real:.9f} {g.imag:.9f}" for f, g in zip(GRID, gamma, strict=True))
    (folder / name).write_text(f"! simulated, invented data\n# HZ S RI R 50\n{rows}\n")


@pytest.mark.parametrize(
    "stem, kind",
    [
        ("open-1", "open"),
        ("SHORT_2", "short"),
        ("my load 3", "load"),
        ("match-a", "load"),
        ("termination", "load"),
        ("open-short", None),
        ("opened", None),
        ("reading-7", None),
        ("load-match", "load"),
        ("", None),
    ],
)
def test_kinds_by_name(stem, kind):
    assert kind_by_name(stem) == kind


@pytest.mark.parametrize("kind", ["open", "short", "load"])
def test_kinds_by_reading(kind):
    assert kind_by_reading(Sweep(GRID, gamma_of(kind))) == kind


def test_a_reading_that_is_like_nothing():
    assert kind_by_reading(Sweep(GRID, np.full(41, 0.5))) is None
    assert kind_by_reading(Sweep(GRID, np.full(41, 1j))) is None


def test_standards_are_found_and_doubtful_files_left_out(tmp_path):
    for k in (1, 2, 10):
        put(tmp_path, f"open-{k}.s1p", gamma_of("open"))
    put(tmp_path, "a.s1p", gamma_of("short"))
    put(tmp_path, "b.S1P", gamma_of("load"))
    put(tmp_path, "between.s1p", np.full(41, 0.5))
    put(tmp_path, ".hidden-open.s1p", gamma_of("open"))
    put(tmp_path, "load\x1b[31m.s1p", gamma_of("load"))
    (tmp_path / "load.s1p").mkdir()
    (tmp_path / "short.s1p").write_text("no readings")
    (tmp_path / "open.txt").write_text("no readings")
    found, left_out = find_standards(tmp_path)
    assert found == [
        Found("open", ("open-1.s1p", "open-2.s1p", "open-10.s1p"), True, "open"),
        Found("short", ("a.s1p",), False, "short"),
        Found("load", ("b.S1P",), False, "load"),
    ]
    told = dict(line.split(": ", 1) for line in left_out)
    assert sorted(told) == ["between.s1p", "load.s1p", "load�[31m.s1p", "short.s1p"]
    assert told["between.s1p"] == "reflects neither like an open, a short nor a load"
    assert "control character" in told["load�[31m.s1p"]


def test_exports_and_adapters_are_no_readings(tmp_path, usual_kit):
    put(tmp_path, "open-1.s1p", gamma_of("open"))
    texts = export_files(usual_kit, np.linspace(1e8, 5e9, 21))
    for name, text in texts.items():
        (tmp_path / name).write_text(text, encoding="utf-8")
    # Somebody has written a line above the mark.
    (tmp_path / "short-1.s1p").write_text("! of May\n" + texts["short.s1p"], encoding="utf-8")
    put(tmp_path, "barrel.s1p", gamma_of("load"))
    barrel = (tmp_path / "barrel.s1p").read_text(encoding="utf-8")
    (tmp_path / "barrel.s1p").write_text(f"{ADAPTER_LINE}\n{barrel}", encoding="utf-8")
    found, left_out = find_standards(tmp_path)
    assert [(one.name, one.files) for one in found] == [("open", ("open-1.s1p",))]
    told = dict(line.split(": ", 1) for line in left_out)
    exported = "written by 'stdfit export', and no reading"
    assert told == {
        **dict.fromkeys(texts, exported),
        "short-1.s1p": "a definition that 'stdfit export' wrote, and no reading",
        "barrel.s1p": "written by 'stdfit adapter', and no reading",
    }


def test_the_draft_says_how_to_go_on(tmp_path):
    put(tmp_path, "open.s1p", gamma_of("open"))
    found, _ = find_standards(tmp_path)
    assert draft("Shed", found, "stdfit fit 'a b'").splitlines()[1] == "# stdfit fit 'a b'"
    assert "# stdfit fit a\\nb" in draft("Shed", found, "stdfit fit a\nb")


def test_a_folder_with_nothing_in_it(tmp_path):
    with pytest.raises(RequestError, match="no readings of standards found"):
        find_standards(tmp_path)
    with pytest.raises(RequestError, match="no such folder"):
        find_standards(tmp_path / "none")
    (tmp_path / "open.s1p").write_text("no readings")
    with pytest.raises(RequestError, match=r"no readings of standards found; open\.s1p: "):
        find_standards(tmp_path)


NAMES = [
    "open[1].s1p",
    "open-*?.s1p",
    'short "a".s1p',
    "short 'b'.s1p",
    "back\\load.s1p",
    " load .s1p",
    "öpen.s1p",
]


def test_the_draft_parses_and_names_the_files_that_were_found(tmp_path):
    for name in NAMES:
        kind = next((kind for kind in VALUES if kind in name), "open")
        put(tmp_path, name, gamma_of(kind))
    found, left_out = find_standards(tmp_path)
    assert left_out == []
    bench = parse_bench(draft("Shed", found), tmp_path / "bench.toml")
    assert {file.name for entry in bench.standards for file in entry.files} == set(NAMES)
    assert [(entry.name, entry.kind) for entry in bench.standards] == [
        ("open", "open"),
        ("open 2", "open"),
        ("short", "short"),
        ("load", "load"),
    ]
    assert bench.name == "Shed"
    assert bench.within == 0.02
    assert bench.residual is not None


@pytest.mark.parametrize(
    "folder, name",
    [
        ("", "My standards"),
        ("   ", "My standards"),
        ('a"b\\c', 'a"b\\c'),
        ("a\nb\x1b", "ab"),
        ("x" * 255, "x" * 200),
        ("Ω 工房", "Ω 工房"),
    ],
)
def test_any_folder_name_gives_a_kit_name(tmp_path, folder, name):
    put(tmp_path, "open.s1p", gamma_of("open"))
    found, _ = find_standards(tmp_path)
    assert parse_bench(draft(folder, found), tmp_path / "bench.toml").name == name


def test_what_was_guessed_is_marked(tmp_path):
    put(tmp_path, "a.s1p", gamma_of("load"))
    found, _ = find_standards(tmp_path)
    text = draft("Shed", found)
    assert 'kind = "load"               # <-- guessed from the readings' in text
    assert "given.resistance_ohm" in text
    assert "given.offset_delay_ps" not in text


def test_the_offers_in_the_comments_are_good_bench_lines(tmp_path):
    """A user who takes the comment sign away and puts in a number must get a bench that is read.

    No number stands there: one that looks likely would be left in, and contradict the readings.
    """
    for kind in VALUES:
        put(tmp_path, f"{kind}.s1p", gamma_of(kind))
    found, _ = find_standards(tmp_path)
    text = draft("Shed", found).replace("# given.", "given.").replace("value = …", "value = 20.0")
    bench = parse_bench(text, tmp_path / "bench.toml")
    assert [list(entry.given) for entry in bench.standards] == [
        ["offset_delay_ps"],
        ["offset_delay_ps"],
        ["resistance_ohm"],
    ]


def test_standards_of_one_kind_are_told_apart_by_what_their_files_are_called(tmp_path):
    names = [f"{stem}-{k}.s1p" for stem in ("short", "offset-short-1", "offset-short-2") for k in (1, 2)]
    for name in names:
        put(tmp_path, name, gamma_of("short"))
    found, _ = find_standards(tmp_path)
    assert {one.name: one.files for one in found} == {
        "offset short 1": ("offset-short-1-1.s1p", "offset-short-1-2.s1p"),
        "offset short 2": ("offset-short-2-1.s1p", "offset-short-2-2.s1p"),
        "short": ("short-1.s1p", "short-2.s1p"),
    }
    bench = parse_bench(draft("Shed", found), tmp_path / "bench.toml")
    assert sorted(entry.name for entry in bench.standards) == ["offset short 1", "offset short 2", "short"]
