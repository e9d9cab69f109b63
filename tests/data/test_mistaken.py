"""A file of one kind where another is wanted is told in plain words."""

import pytest

from stdfit.base.errors import BenchError, KitError
from stdfit.data.bench import parse_bench, read_bench
from stdfit.data.mistaken import kind_of_text
from stdfit.data.repeat_file import parse_repeat_file
from stdfit.writing.kit_reading import parse_kit


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ('# what\nformat = "stdfit-bench/1"\n', "bench file"),
        ("format='stdfit-kit/7'", "kit file"),
        ('{"format": "stdfit-sheet/1", "kit": 1}', "entry sheet"),
        ('{\n  "format": "stdfit-sheet/1"\n}', "entry sheet"),
        ("! anything\n# MHz S RI R 50\n1 0 0\n", "file of readings"),
        ("\n#S RI\n", "file of readings"),
        ("1e9,0.5,-0.5\n2e9,0.5,-0.5\n", "file of readings"),
        ("frequency;re;im\n1e9; 0.5; -0.5\n", "file of readings"),
        ("# Hertz is the unit\n[kit]\n", None),
        ('format = "another/1"', None),
        ('format = "stdfit-unheard/1"', None),
        ("name = 3\n", None),
        ("1 2\n", None),
        ("", None),
    ],
)
def test_kinds(text, kind):
    assert kind_of_text(text) == kind


def test_long_nonsense_takes_no_time():
    for text in (" " * 10**6, "\n" * 10**6, "1 " * 10**6, "1" + " " * 10**6 + "x", "{" * 10**6):
        kind_of_text(text)


@pytest.mark.parametrize(
    ("parse", "error", "text", "what", "mend"),
    [
        (
            parse_bench,
            BenchError,
            'format = "stdfit-kit/1"',
            "a kit file, where a bench file is",
            "'stdfit show'",
        ),
        (
            parse_bench,
            BenchError,
            "! x\n# Hz S RI R 50",
            "a file of readings, where a bench file is",
            "'stdfit new",
        ),
        (
            parse_kit,
            KitError,
            "! x\n# Hz S RI R 50",
            "a file of readings, where a kit file is",
            "'stdfit fit'",
        ),
        (
            parse_kit,
            KitError,
            'format = "stdfit-bench/1"',
            "a bench file, where a kit file is",
            "'stdfit fit BENCH'",
        ),
        (
            parse_kit,
            KitError,
            'format = "stdfit-adapter/1"',
            "an adapter file, where a kit file is",
            "name a kit",
        ),
        (
            parse_repeat_file,
            BenchError,
            'format = "stdfit-bench/1"',
            "a bench file, where a repeat",
            "name a repeat",
        ),
    ],
)
def test_what_it_is_and_what_to_do(parse, error, text, what, mend, tmp_path):
    with pytest.raises(error) as told:
        parse(text, tmp_path / "file")
    assert told.value.what.startswith(what)
    assert told.value.file == tmp_path / "file"
    assert mend in told.value.mend


@pytest.mark.parametrize("name", ["standard", "device", "adapter"])
def test_single_brackets_at_several_tables(name, tmp_path):
    (tmp_path / "bench.toml").write_text(
        f'format = "stdfit-bench/1"\n[{name}]\nname = "a"\n\n[{name}]  # again\nname = "b"\n'
    )
    with pytest.raises(BenchError, match="stands in single brackets, and there are several") as told:
        read_bench(tmp_path)
    assert (told.value.line, told.value.mend) == (
        5,
        f"write [[{name}]], in two pairs of brackets, at each of them",
    )
