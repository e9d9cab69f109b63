"""What is nearly right is understood, or the right word is named: options, commands, folders of kits, too few draws."""

import json
import re
import shutil
from pathlib import Path

import pytest

from stdfit.cli import main
from stdfit.trials.study import family_names

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"
COMMANDS = Path(__file__).parents[2] / "docs" / "commands.md"


def usage(capsys, *arguments):
    """Run what is wrong usage; return its two lines."""
    with pytest.raises(SystemExit) as ended:
        main([str(one) for one in arguments])
    assert ended.value.code == 2
    return capsys.readouterr().err.splitlines()


@pytest.mark.parametrize(
    "arguments, what, mend",
    [
        (["fti", "x"], "no command 'fti'", "did you mean 'fit'? see 'stdfit --help'"),
        (
            ["limit", "k", "--witin", "0.02"],
            "unrecognized arguments: --witin 0.02",
            "did you mean '--within'? see 'stdfit limit --help'",
        ),
        (["limit", "k", "--witin=1"], "unrecognized", "did you mean '--within'? see 'stdfit limit --help'"),
        (["show", "k", "--colour"], "unrecognized arguments: --colour", "see 'stdfit show --help'"),
        (["show", "k", "more"], "unrecognized arguments: more", "see 'stdfit show --help'"),
        (["--jsn", "show", "k"], "unrecognized arguments: --jsn", "see 'stdfit --help'"),
        (
            ["export", "k", "d", "--spacing", "evn"],
            "no choice of --spacing 'evn'",
            "did you mean 'even'? see 'stdfit export --help'",
        ),
    ],
)
def test_the_nearest_word_and_the_right_help(capsys, arguments, what, mend):
    lines = usage(capsys, *arguments)
    assert lines[0].startswith(f"stdfit: {what}")
    assert lines[1:] == [mend]


def test_a_word_like_none_names_all(capsys):
    what, mend = usage(capsys, "qqq")
    assert what == "stdfit: no command 'qqq'"
    assert mend.startswith("use one of: demo, new, fit, ") and mend.endswith("; see 'stdfit --help'")


def test_the_fewest_draws_are_one_number(capsys):
    what, _ = usage(capsys, "fit", "b", "--monte-carlo", "99")
    (said,) = re.findall(r"take (\d+) or more", what)
    page = COMMANDS.read_text(encoding="utf-8")
    (told,) = re.findall(r"^\| `--monte-carlo N` .* at least (\d+),", page, re.MULTILINE)
    assert said == told == "100"
    assert main(["fit", "no-such-bench.toml", "--monte-carlo", said]) == 2
    assert "no such bench file" in capsys.readouterr().err


def test_families_are_told_apart_by_their_quotes(capsys):
    assert main(["trials", "--family", "dirft"]) == 2
    what, mend = capsys.readouterr().err.splitlines()
    assert what == "stdfit: no family 'dirft'"
    assert mend.startswith("did you mean 'drift'? choose among: 'plain', ")
    assert set(re.findall("'([^']*)'", mend.partition("choose")[2])) == set(family_names())


@pytest.fixture
def shelf(tmp_path):
    (tmp_path / "shelf").mkdir()
    shutil.copy(SMALL, tmp_path / "shelf" / "kit.toml")
    return tmp_path / "shelf"


@pytest.mark.parametrize(
    "arguments",
    [("show",), ("limit",), ("curve", "--points", "3"), ("sheet",), ("compare", "ideal")],
)
def test_a_folder_stands_for_its_kit(shelf, capsys, arguments):
    said = []
    for kit in (shelf, shelf / "kit.toml"):
        assert main([arguments[0], str(kit), *arguments[1:]]) == 0
        said.append(capsys.readouterr().out)
    assert said[0] == said[1] != ""


def test_a_folder_stands_for_its_kit_where_files_are_written(shelf, capsys):
    assert main(["report", str(shelf), "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["report_file"] == str(shelf / "kit.html")
    assert main(["compare", str(shelf), str(shelf)]) == 0
    assert main(["wear", str(shelf), str(shelf)]) == 2
    assert "both are the same kit file" in capsys.readouterr().err


def test_a_folder_without_its_kit(tmp_path, capsys):
    assert main(["show", str(tmp_path)]) == 2
    assert capsys.readouterr().err == (
        f"stdfit: {tmp_path}: the folder holds no kit.toml\nname a kit file: 'stdfit fit BENCH' writes one\n"
    )
    shutil.copy(SMALL, tmp_path / "autumn.kit.toml")
    assert main(["show", str(tmp_path)]) == 2
    assert (
        capsys.readouterr().err.splitlines()[1]
        == f"name the kit file, such as {tmp_path / 'autumn.kit.toml'}"
    )
