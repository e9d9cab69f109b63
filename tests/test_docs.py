"""The pages: their code runs, their files parse, their commands exist, their links lead somewhere."""

import re
import shlex
import shutil
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from printed import alike, missing

from stdfit import cli, kit_text, limits
from stdfit.base.errors import BenchError
from stdfit.cli import main
from stdfit.data.bench import parse_bench
from stdfit.data.repeat_file import parse_repeat_file
from stdfit.fitting.roles import ASSUMED
from stdfit.writing.kit_reading import parse_kit

ROOT = Path(__file__).parents[1]
FILES = ROOT / "docs" / "files.md"
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md", ROOT / "kits" / "README.md"]
PAGES += sorted((ROOT / "docs").glob("*.md"))
FENCE = re.compile(r"^```([a-z]*)[^\n]*\n(.*?)^```\s*$", re.MULTILINE | re.DOTALL)
SHELLS = ("sh", "bash", "console")


@pytest.fixture(params=PAGES, ids=lambda path: path.relative_to(ROOT).as_posix())
def page(request):
    return request.param


def blocks(path, *languages):
    """Return (line, text) of the fenced blocks in these languages."""
    text = path.read_text(encoding="utf-8")
    return [
        (text.count("\n", 0, found.start()) + 1, found[2])
        for found in FENCE.finditer(text)
        if found[1] in languages
    ]


def test_python_blocks_run_in_order(page, tmp_path, monkeypatch):
    shutil.copytree(ROOT / "kits", tmp_path / "kits")
    monkeypatch.chdir(tmp_path)
    names = {"__name__": "page"}
    for line, text in blocks(page, "python"):
        # Padding makes the line of a fault the line of the page.
        exec(compile("\n" * line + text, str(page), "exec"), names)


def bench_folder(folder, text):
    """Make every file that a bench text names, so that it can be parsed."""
    values = tomllib.loads(text)
    for part in [*values["standard"], *values.get("device", []), *values.get("adapter", [])]:
        wanted = [name.replace("*", "1") for name in part.get("readings", [])]
        for name in [*wanted, *(part[key] for key in ("from_kit", "value_file", "file") if key in part)]:
            (folder / name).touch()
    return folder / "bench.toml"


def test_toml_blocks_are_what_they_call_themselves(page, tmp_path):
    for number, (line, text) in enumerate(blocks(page, "toml")):
        values = tomllib.loads(text)
        if str(values.get("format", "")).startswith("stdfit-kit/"):
            parse_kit(text, f"{page.name}, line {line}")
        elif "repeatability" in values:
            folder = tmp_path / str(number)
            folder.mkdir()
            for part in values["repeatability"]:
                for name in (
                    one
                    for entry in part["connections"]
                    for one in ([entry] if isinstance(entry, str) else entry)
                ):
                    (folder / name.replace("*", "1")).touch()
            parse_repeat_file(text, folder / "repeatability.toml")
        elif "format" in values:
            folder = tmp_path / str(number)
            folder.mkdir()
            parse_bench(text, bench_folder(folder, text))
        else:
            assert set(values) <= {"kit", "goal", "analyser", "standard", "device", "adapter"}, (
                f"{page.name}, line {line}"
            )


def command_lines(text):
    """Return the typed lines: those after '$ ' where there are any, else all."""
    lines = text.replace("\\\n", " ").splitlines()
    typed = [line.removeprefix("$ ") for line in lines if line.startswith("$ ")]
    return typed or lines


def stdfit_calls(line):
    """Return the arguments of each call of stdfit in a line."""
    scanner = shlex.shlex(line, posix=True, punctuation_chars=True)
    scanner.whitespace_split = True
    calls, words = [], []
    for word in [*scanner, ";"]:
        if set(word) <= set(";&|()<>"):
            if words and Path(words[0]).name == "stdfit":
                calls.append(words[1:])
            words = []
        else:
            words.append(word)
    return calls


def help_of(capsys, *command):
    with pytest.raises(SystemExit) as stop:
        main([*command, "--help"])
    assert stop.value.code == 0, f"no such command: stdfit {' '.join(command)}"
    return capsys.readouterr().out


def test_commands_and_options_exist(page, capsys):
    for line, text in blocks(page, *SHELLS):
        for typed in command_lines(text):
            for call in stdfit_calls(typed):
                where = f"{page.name}, block at line {line}: {typed}"
                command = [word for word in call[:1] if not word.startswith("-")]
                known = set(re.findall(r"(?<![\w-])--?[a-z][a-z-]*", help_of(capsys, *command)))
                options = {word.partition("=")[0] for word in call if re.match(r"--?[a-z]", word)}
                assert options <= known, where


ELSEWHERE = ("check", "wear", "history", "repeat", "adapter", "fit spring/")
"""What these examples are of takes too long to make, or is read in other tests."""


def examples(text):
    """Return (line, command, what it prints) of the console blocks, a line "$ stdfit …" each."""
    for line, block in text:
        for command, printed in re.findall(r"^\$ stdfit (.*)\n((?:(?!\$ ).*\n?)*)", block, re.MULTILINE):
            yield line, command, printed


def test_examples_of_the_commands_are_what_the_demo_prints(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    page = ROOT / "docs" / "commands.md"
    shutil.copy(ROOT / "docs" / "parts.drawing.toml", tmp_path)
    ran, stale = set(), []
    for line, command, shown in examples(blocks(page, "console")):
        if command.startswith(ELSEWHERE):
            continue
        arguments, _, target = command.partition(" > ")
        assert main(shlex.split(arguments)) == 0
        printed = capsys.readouterr().out
        if target:
            (tmp_path / target).write_text(printed, encoding="utf-8")
            continue
        gap = missing(shown, printed)
        if gap is not None:
            stale.append(f"commands.md, block at line {line}, {command}: {gap}")
        if command.startswith("demo"):
            (tmp_path / "readings").mkdir()
            for file in (tmp_path / "stdfit-demo").glob("*.s1p"):
                shutil.copy(file, tmp_path / "readings")
        ran.add(command.split()[0])
    assert stale == []
    assert ran >= set(commands_of(help_of(capsys))) - {*ELSEWHERE}


def test_the_verdict_of_the_front_page_is_the_demos(tmp_path, capsys):
    (shown,) = [text for _, text in blocks(ROOT / "README.md", "") if text.startswith("within ")]
    assert main(["demo", "--out", str(tmp_path / "demo")]) == 0
    assert any(alike(shown, line) for line in capsys.readouterr().out.splitlines())


@pytest.mark.parametrize(
    "typed, calls",
    [
        ("stdfit fit . -o kit.toml  # why", [["fit", ".", "-o", "kit.toml"]]),
        (".venv/bin/stdfit show 'a b' | less", [["show", "a b"]]),
        ("cd x && stdfit demo; stdfit new x > out", [["demo"], ["new", "x"]]),
        ("pip install stdfit", []),
    ],
)
def test_calls_are_found(typed, calls):
    assert stdfit_calls(typed) == calls


def anchors(path):
    """Return the anchors of a page's headings."""
    text = FENCE.sub("", path.read_text(encoding="utf-8"))
    titles = re.findall(r"^#+ +(.+?)\s*$", text, re.MULTILINE)
    return {re.sub(r"[^\w\- ]", "", title.lower()).replace(" ", "-") for title in titles}


def test_links_lead_to_files_and_headings(page):
    text = FENCE.sub("", page.read_text(encoding="utf-8"))
    for target in re.findall(r"\]\(([^)\s]+)\)", text):
        if re.match(r"[a-z]+:", target):
            continue
        path, _, anchor = target.partition("#")
        file = page.parent / path if path else page
        assert file.exists(), target
        if anchor:
            assert anchor in anchors(file), target


FULL, SMALLEST, KNOWN = (text for _, text in blocks(FILES, "toml")[:3])


def known_keys(text, before, folder):
    """Return the keys of a table, from the answer to one that no table has."""
    with pytest.raises(BenchError) as refused:
        parse_bench(text.replace(before, "qqqqqqqq = 1\n" + before, 1), bench_folder(folder, text))
    assert refused.value.mend.startswith("use one of: ")
    return refused.value.mend.removeprefix("use one of: ").split(", ")


@pytest.mark.parametrize(
    "before",
    ["[kit]", "name =", "within =", "state =", "directivity_db", "kind =", "given.offset_delay_ps"],
)
def test_every_key_of_a_bench_file_is_described(before, tmp_path):
    text = FULL
    if before.startswith("given."):
        text = FULL.replace(before, "given.qqqqqqqq = 1\n" + before)
        with pytest.raises(BenchError) as refused:
            parse_bench(text, bench_folder(tmp_path, text))
        keys = refused.value.mend.removeprefix("use one of: ").split(", ")
    else:
        keys = known_keys(FULL, before, tmp_path)
    page = FILES.read_text(encoding="utf-8")
    assert len(keys) >= 2
    for key in keys:
        assert re.search(rf"[`.\[]{key}[`\].]", page), key


def test_every_key_of_a_kit_file_is_described():
    kit = ROOT / "kits" / "boathouse-loft-sma" / "kit.toml"
    page = FILES.read_text(encoding="utf-8")

    def walk(value):
        for item in value if isinstance(value, list) else [value]:
            if isinstance(item, dict):
                for key, inner in item.items():
                    yield key
                    yield from walk(inner)

    keys = set(walk(tomllib.loads(kit.read_text(encoding="utf-8"))))
    assert {"format", "correlation_of_parts", "lower_triangles", "sha256"} <= keys
    for key in keys:
        assert re.search(rf"[`.]{key}`", page), key


def test_every_key_of_a_plan_is_described(tmp_path):
    (text,) = [text for _, text in blocks(FILES, "toml") if "\nplan = " in text]
    bench = parse_bench(text, tmp_path / "bench.toml")
    assert (bench.plan.points, bench.plan.connections) == (201, 4)
    assert all(entry.files == () for entry in bench.standards)
    with pytest.raises(BenchError) as refused:
        parse_bench(text.replace("plan = {", "plan = { qqqqqqqq = 1,"), tmp_path / "bench.toml")
    keys = refused.value.mend.removeprefix("use one of: ").split(", ")
    assert keys == ["from_hz", "to_hz", "points", "connections"]
    section = FILES.read_text(encoding="utf-8").partition("### `[plan]`")[2].partition("###")[0]
    assert all(f"`{key}`" in section for key in keys)


def test_every_key_of_a_device_is_described(tmp_path):
    (text,) = [text for _, text in blocks(FILES, "toml") if "[[device]]" in text]
    bench = parse_bench(text, bench_folder(tmp_path, text))
    short, mismatch, cap, piece = bench.devices
    assert (short.given["l0"].u, mismatch.port, cap.standard, piece.expect) == (None, 2, "open", "line")
    with pytest.raises(BenchError) as refused:
        parse_bench(text.replace("[[device]]", "[[device]]\nqqqqqqqq = 1", 1), tmp_path / "bench.toml")
    keys = refused.value.mend.removeprefix("use one of: ").split(", ")
    assert {"value_u95", "expect"} <= set(keys)
    section = FILES.read_text(encoding="utf-8").partition("### `[[device]]`")[2].partition("\n### ")[0]
    assert all(re.search(rf"^\| .*`{key}`", section, re.MULTILINE) for key in keys)


def test_every_key_of_an_adapter_is_described(tmp_path):
    determined, used = [text for _, text in blocks(FILES, "toml") if "[[adapter]]" in text]
    bench = parse_bench(used, bench_folder(tmp_path, used))
    assert (bench.thru, bench.standards[0].behind) == ("barrel", "barrel")
    assert parse_bench(determined, bench_folder(tmp_path, determined)).adapters[0].file is None
    with pytest.raises(BenchError) as refused:
        parse_bench(used.replace("[[adapter]]", "[[adapter]]\nqqqqqqqq = 1", 1), tmp_path / "bench.toml")
    keys = refused.value.mend.removeprefix("use one of: ").split(", ")
    assert {"file", "delay_ps"} <= set(keys)
    section = FILES.read_text(encoding="utf-8").partition("### `[[adapter]]`")[2].partition("\n### ")[0]
    assert all(re.search(rf"^\| `{key}`", section, re.MULTILINE) for key in keys)


def test_the_key_of_a_check_is_described():
    text = blocks(FILES, "toml")[-1][1]
    checked = replace(parse_kit(text, FILES), checks=("load: agree",))
    assert tomllib.loads(kit_text(checked))["kit"]["checks"] == ["load: agree"]
    assert "\n| `checks` |" in FILES.read_text(encoding="utf-8")


def commands_of(text):
    """Return the commands that the help of the program names."""
    return re.findall(r"^    ([a-z]+) ", text, re.MULTILINE)


def test_every_command_and_option_is_described(capsys):
    page = (ROOT / "docs" / "commands.md").read_text(encoding="utf-8")
    commands = commands_of(help_of(capsys))
    assert {"demo", "fit", "plan", "trials"} <= set(commands)
    for command in commands:
        section = page.partition(f"## `stdfit {command}`\n")[2].partition("\n## ")[0]
        assert f"$ stdfit {command}" in section, command
        options = set(re.findall(r"(?<![\w-])--[a-z][a-z-]*", help_of(capsys, command)))
        for option in options - {"--help", "--json", "--quiet"}:
            assert re.search(rf"`{option}(`| [A-Z])", section) or f", `{option} " in section, (
                command,
                option,
            )


def test_what_every_command_takes_is_described_once():
    page = (ROOT / "docs" / "commands.md").read_text(encoding="utf-8")
    for option in ("--json", "--quiet"):
        assert page.count(f"Every command takes `{option}`") == 1


def test_exit_codes_are_described():
    page = (ROOT / "docs" / "commands.md").read_text(encoding="utf-8")
    told = {int(code) for code in re.findall(r"^\| (\d+) \|", page, re.MULTILINE)}
    assert told == {cli.DONE, cli.ANSWER_IS_NO, cli.WRONG_INPUT, cli.OWN_FAULT, cli.STOPPED_BY_USER}


def test_defaults_of_a_bench_file(tmp_path):
    bench = parse_bench(SMALLEST, bench_folder(tmp_path, SMALLEST))
    assert (bench.reference_ohm, bench.within, bench.highest_hz, bench.residual) == (50.0, 0.02, None, None)
    (only,) = bench.standards
    assert (only.port, only.polynomial, dict(only.given), only.same_offset_as) == (1, "chosen", {}, None)


def test_the_full_example_says_what_it_looks_like(tmp_path):
    bench = parse_bench(FULL, bench_folder(tmp_path, FULL))
    first, short, load = bench.standards
    assert (bench.highest_hz, bench.date, first.polynomial, load.port) == (4e9, "2024-05-01", "even", 2)
    assert (first.given["offset_z0_ohm"].u, short.given["offset_delay_ps"].u) == (None, 0.5)
    known = parse_bench(KNOWN, bench_folder(tmp_path, KNOWN)).standards[0]
    assert (known.from_kit, known.standard) == (tmp_path / "reference.toml", "open")


def test_assumed_evidence_stands_in_the_table_of_given():
    rows = re.findall(
        r"^\| `(\w+)` \|[^|]*\|[^|]*\|([^|]*)\|$", FILES.read_text(encoding="utf-8"), re.MULTILINE
    )
    told = {name: found.groups() for name, text in rows if (found := re.search(r"(\d+) ± (\d+)(?! %)", text))}
    names = {"load delay": "offset_delay_ps"}
    assumed = {names.get(name, name): values for name, values in ASSUMED.items()}
    assert {name: tuple(map(float, values)) for name, values in told.items()} == assumed


def test_the_whole_kit_file_is_consistent():
    text = blocks(FILES, "toml")[-1][1]
    kit = parse_kit(text, FILES)
    assert kit_text(kit) == text
    for rung in kit.ladder:
        ((whole, each),) = limits(kit, [rung.within])
        assert (whole.limit_hz, tuple(one.limit_hz for one in each)) == (rung.kit_hz, rung.standards_hz)
    assert kit.limit.reason == limits(kit, [kit.within])[0][0].reason
    # V11, V21, V22: variance of R, covariance, variance of L.
    assert kit.shares[1].covariances.tolist() == [[[0.0004, 0.02], [0.02, 4.0]]]
    # Largest over the lengths: √(0.04 + 0.0004) Ω and √(225 + 4) pH.
    assert [p.u for p in kit.definitions[0].parameters if p.of] == pytest.approx([0.2010, 15.1327], abs=1e-4)
