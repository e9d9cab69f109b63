"""Adapter, repeatability and bench files with anything in them: a record, or an input error of two printable lines."""

import os
import sys
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stdfit.base.errors import InputError
from stdfit.data.bench import parse_bench
from stdfit.data.bench_files import matching_files
from stdfit.data.repeat_file import parse_repeat_file
from stdfit.validity.adapter import Adapter
from stdfit.writing.adapter_reading import parse_adapter
from stdfit.writing.kit_reading import parse_kit

FUZZ = str(Path(__file__).parents[1] / "fuzz")
FEW = settings(max_examples=50, deadline=None, suppress_health_check=[HealthCheck.too_slow])
RANDOM = st.randoms(use_true_random=False)


@pytest.fixture(scope="module")
def changes():
    """The changes of the fuzz program to tables and bytes."""
    sys.path.insert(0, FUZZ)
    try:
        from fuzz_bytes import BYTE_CHANGES
        from fuzz_tables import TABLE_CHANGES
    finally:
        sys.path.remove(FUZZ)
    return [*TABLE_CHANGES, *BYTE_CHANGES]


@pytest.fixture(scope="module")
def sound(tmp_path_factory):
    """A folder with one sound file of each kind."""
    sys.path.insert(0, FUZZ)
    try:
        from fuzz_seeds import make_scenes
    finally:
        sys.path.remove(FUZZ)
    root = tmp_path_factory.mktemp("scenes")
    make_scenes(root)
    return root


FILES = {
    "adapter": ("behind/barrel.adapter.toml", parse_adapter),
    "repeatability": ("repeats/repeatability.toml", parse_repeat_file),
    "bench": ("bench/bench.toml", parse_bench),
    "raw bench": ("raw/bench.toml", parse_bench),
    "devices": ("day/bench.toml", parse_bench),
    "bench with adapter": ("behind/bench.toml", parse_bench),
    "plan": ("planned/bench.toml", parse_bench),
    "kit": ("kits/kit.toml", parse_kit),
    "sheet": ("sheets/kit.toml", None),
}


def read_any(path, text):
    from stdfit.writing.sheet_reading import parse_sheet

    return parse_sheet(text, path)


@pytest.mark.parametrize("kind", FILES)
def test_spoilt_tables(kind, sound, changes):
    name, parse = FILES[kind]
    path = sound / name
    original = path.read_bytes()

    @FEW
    @given(st.lists(st.sampled_from(changes), min_size=1, max_size=2), RANDOM)
    def spoil(drawn, rng):
        data = original
        for change in drawn:
            data = change(data, rng)
        text = data.decode("utf-8", "replace")
        try:
            found = read_any(path, text) if parse is None else parse(text, path)
        except InputError as fault:
            said = str(fault)
            assert said.count("\n") <= 1
            assert all(letter.isprintable() for letter in said.replace("\n", "")), said
            assert str(fault.file) == str(path)
        else:
            assert found is not None

    spoil()


def test_the_sound_ones_are_read(sound):
    for name, parse in FILES.values():
        text = (sound / name).read_text(encoding="utf-8")
        assert (read_any(sound / name, text) if parse is None else parse(text, sound / name)) is not None
    assert isinstance(parse_adapter((sound / FILES["adapter"][0]).read_text(encoding="utf-8"), "x"), Adapter)


TREE = [
    "x.s1p",
    "b/x.s1p",
    "b/c/y.s1p",
    "b/c/d/x.s1p",
    "e/[1].s1p",
    ".h.s1p",
    "e/open-2.s1p",
    "e/open-10.s1p",
]
PARTS = st.sampled_from(
    ["*", "**", "?", "b", "c", "..", ".", "*.s1p", "x*", "[bce]", "[!b]*", "loop", "ring", "e", "le"]
)


@pytest.fixture(scope="module")
def tree(tmp_path_factory):
    root = tmp_path_factory.mktemp("tree")
    for name in TREE:
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        (root / name).write_text("x", encoding="utf-8")
    (root / "loop").symlink_to(".")
    (root / "ring").symlink_to("ring")
    (root / "le").symlink_to("e")
    (root / "nowhere.s1p").symlink_to("none")
    return root


def test_patterns_stand_for_what_the_standard_library_says(tree):
    file = tree / "b" / "bench.toml"

    @FEW
    @given(st.lists(PARTS, min_size=1, max_size=4))
    def compare(parts):
        pattern = "/".join(parts)
        try:
            wanted = {os.path.realpath(path) for path in file.parent.glob(pattern) if not path.is_dir()}
        except (ValueError, IndexError, OSError, RuntimeError):
            wanted = None
        try:
            found = {os.path.realpath(path) for path in matching_files([pattern], file, "readings")}
        except InputError:
            found = set()
        # The library gives up at links in a ring, or at links to nothing; the program passes them over.
        there = {path for path in wanted or () if os.path.exists(path)}  # noqa: PTH110
        assert wanted is None or there <= found <= wanted, pattern

    compare()
