"""Kit files: reference text, and the same bytes after reading and writing again."""

import os
import tomllib
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.pipeline.finished import with_limits
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import SourceFile
from stdfit.validity.limits import limits
from stdfit.writing.kit_file import is_kit_file, kit_text, rows_of, triangle_size
from stdfit.writing.kit_reading import parse_kit, read_kit

TESTS = Path(__file__).parents[1]
SMALL = TESTS / "files" / "valid" / "kit" / "small.toml"
FILES_PAGE = TESTS.parent / "docs" / "files.md"


def same(one, other):
    """Compare two records field by field, arrays by their values."""
    if isinstance(one, np.ndarray):
        return np.array_equal(one, other)
    if isinstance(one, tuple):
        return len(one) == len(other) and all(same(a, b) for a, b in zip(one, other, strict=True))
    if hasattr(one, "__dataclass_fields__"):
        return type(one) is type(other) and all(
            same(getattr(one, f.name), getattr(other, f.name)) for f in fields(one)
        )
    return one == other


def again(kit):
    """Write, read, write; return the kit read and whether the bytes are the same."""
    text = kit_text(kit)
    read = parse_kit(text, "kit.toml")
    assert kit_text(read).encode() == text.encode()
    return read


def test_the_text_is_the_reference_text(small_kit):
    assert kit_text(small_kit) == SMALL.read_text(encoding="utf-8")


def test_a_kit_comes_back_with_every_field(small_kit):
    assert same(again(small_kit), small_kit)


def test_a_file_comes_back_with_the_same_bytes():
    assert kit_text(read_kit(SMALL)).encode() == SMALL.read_bytes()


def test_the_comparison_of_these_tests_sees_a_difference(small_kit):
    shares = (replace(small_kit.shares[0], covariances=2 * small_kit.shares[0].covariances),)
    assert not same(replace(small_kit, shares=shares + small_kit.shares[1:]), small_kit)


@pytest.mark.parametrize("freedom", [np.inf, 1.0, 7.3])
def test_degrees_of_freedom(small_kit, freedom):
    shares = tuple(replace(share, freedom=freedom) for share in small_kit.shares)
    kit = with_limits(replace(small_kit, shares=shares))  # fewer of them, wider bounds, lower limits
    assert [share.freedom for share in again(kit).shares] == [freedom] * 3


def test_a_connector_without_a_top(small_kit):
    assert again(replace(small_kit, top_hz=np.inf)).top_hz == np.inf


@pytest.mark.parametrize(
    "number", [0.1 + 0.2, 1 / 3, 5e-324, 1.7976931348623157e308, 1e22, 123456789012345680.0]
)
def test_numbers_keep_all_their_digits(small_kit, number):
    definition = small_kit.definitions[0]
    wide = replace(definition.combinations[0], low=-number, value=0.0, high=number)
    kit = replace(
        small_kit, definitions=(replace(definition, combinations=(wide,)), small_kit.definitions[1])
    )
    read = again(kit).definitions[0].combinations[0]
    assert (read.low, read.high) == (-number, number)


def test_numbers_of_numpy_are_written_as_plain_numbers(small_kit):
    kit = replace(small_kit, within=np.float64(0.02), reference_ohm=np.float64(50.0))
    assert kit_text(kit) == kit_text(small_kit)


NAMES = [
    '12" rack',
    "back\\slash\\",
    "'single'",
    "Über-Werkstatt, 3½ mm, Ω",
    "日本",
    "a = [1] # no",
    '"""',
    "'''",
]


@pytest.mark.parametrize("name", NAMES)
def test_names_with_quotes_unicode_and_backslashes(small_kit, name):
    opened = replace(
        small_kit.definitions[0],
        name=name,
        notes=(name,),
        parameters=tuple(
            replace(p, of=p.of.replace("open.", f"{name}.")) for p in small_kit.definitions[0].parameters
        ),
    )
    kit = replace(
        small_kit,
        name=name,
        connector=name,
        definitions=(opened, small_kit.definitions[1]),
        order=tuple(one.replace("open.", f"{name}.") for one in small_kit.order),
        files=(SourceFile(name, f"{name}.s1p", "0" * 64),),
        warnings=(name, name),
    )
    read = again(kit)
    assert same(read, kit)
    assert limits(read, [0.02])[0][0].limit_hz == limits(small_kit, [0.02])[0][0].limit_hz


def test_a_file_name_that_cannot_be_printed_is_written_so_that_it_can_be_read(small_kit):
    """A file of readings may be called anything; the kit must still be readable, and harmless on a terminal."""
    kit = replace(small_kit, files=(SourceFile("open", "open\x1b[31m\n\udc80.s1p", "0" * 64),))
    assert again(kit).files[0].file == "open�[31m��.s1p"


def test_a_kit_of_nothing_but_held_values(small_kit):
    """Nothing was fitted: the covariance has no quantities, and the bound is the misfit alone."""
    definitions = tuple(
        replace(one, parameters=tuple(replace(p, of="") for p in one.parameters), combinations=())
        for one in small_kit.definitions
    )
    kit = replace(
        small_kit, definitions=definitions, order=(), shares=(Share("noise", np.inf, np.zeros((1, 0, 0))),)
    )
    read = again(kit)
    assert read.shares[0].covariances.shape == (1, 0, 0)
    assert limits(read, [0.02])[0][1][1].limit_hz == 6e9


def test_without_combinations_and_without_files(small_kit):
    definitions = tuple(replace(one, combinations=(), tried=()) for one in small_kit.definitions)
    read = again(replace(small_kit, definitions=definitions, files=(), ladder=(), warnings=()))
    assert read.files == ()
    assert read.ladder == ()
    assert read.definitions[0].combinations == ()


def test_lower_triangles():
    assert [triangle_size(n) for n in range(4)] == [0, 1, 3, 6]
    assert rows_of([1, 2, 3, 4, 5, 6], 3) == [[1, 2, 4], [2, 3, 5], [4, 5, 6]]


def test_a_kit_file_is_known_by_its_head(tmp_path):
    assert is_kit_file(SMALL)
    other = tmp_path / "bench.toml"
    other.write_text('format = "stdfit-bench/1"\n')
    assert not is_kit_file(other)
    assert not is_kit_file(tmp_path)
    assert not is_kit_file(tmp_path / "none")
    os.mkfifo(tmp_path / "pipe")
    assert not is_kit_file(tmp_path / "pipe")


def keys_of(values):
    """Every key of every table, however deep."""
    if isinstance(values, dict):
        return set(values) | {key for value in values.values() for key in keys_of(value)}
    if isinstance(values, list):
        return {key for value in values for key in keys_of(value)}
    return set()


def test_every_key_is_documented():
    if not FILES_PAGE.exists():
        pytest.skip("docs/files.md is not there")
    page = FILES_PAGE.read_text(encoding="utf-8")
    keys = keys_of(tomllib.loads(SMALL.read_text(encoding="utf-8")))
    assert len(keys) > 40
    missing = sorted(key for key in keys if f"`{key}`" not in page and f"{key} =" not in page)
    assert missing == []
