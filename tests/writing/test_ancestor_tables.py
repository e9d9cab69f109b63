"""Ancestors in kit files: written, read back, shown, and checked; files without any stay as they were."""

from dataclasses import replace
from pathlib import Path

import pytest

from stdfit.base.errors import KitError
from stdfit.validity.kit import Ancestor
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit
from stdfit.writing.plain_data import kit_data
from stdfit.writing.summary import summary

KITS = Path(__file__).parents[1] / "files" / "valid" / "kit"
A, B, C = "a" * 64, "b" * 64, "c" * 64
CHAIN = (
    Ancestor("Reference set (invented)", "1999-12-31", A),
    Ancestor("Set of a calibration house (invented)", "1999-01-01", B, A),
)


def test_the_text_is_the_reference_text(small_kit):
    text = kit_text(replace(small_kit, ancestors=CHAIN))
    assert text == (KITS / "with-ancestors.toml").read_text(encoding="utf-8")


def test_ancestors_come_back_and_the_bytes_are_the_same():
    kit = read_kit(KITS / "with-ancestors.toml")
    assert kit.ancestors == CHAIN
    assert kit_text(kit).encode() == (KITS / "with-ancestors.toml").read_bytes()


def test_a_file_without_ancestors_has_none_and_gets_none():
    kit = read_kit(KITS / "small.toml")
    assert kit.ancestors == ()
    assert "ancestor" not in kit_text(kit)


def test_each_is_shown_below_the_one_that_it_was_a_reference_of(small_kit):
    both = replace(small_kit, ancestors=(*CHAIN, Ancestor("Another", "2000-01-01", C)))
    assert (
        "\nIts references, and theirs\n"
        "  Reference set (invented), 1999-12-31 (SHA-256 aaaaaaaa…)\n"
        "    Set of a calibration house (invented), 1999-01-01 (SHA-256 bbbbbbbb…)\n"
        "  Another, 2000-01-01 (SHA-256 cccccccc…)\n"
    ) in summary(both)
    assert "Its references" not in summary(small_kit)


def test_as_data(small_kit):
    assert kit_data(small_kit)["ancestors"] == []
    assert kit_data(replace(small_kit, ancestors=CHAIN))["ancestors"][1] == {
        "name": "Set of a calibration house (invented)",
        "created": "1999-01-01",
        "sha256": B,
        "of": A,
    }


@pytest.mark.parametrize(
    "old, new, key",
    [
        (f'sha256 = "{B}"', f'sha256 = "{B[:-1]}"', "ancestor[1].sha256"),
        (f'sha256 = "{B}"', f'sha256 = "{B.upper()}"', "ancestor[1].sha256"),
        (f'of = "{A}"', f'of = "{B}"', "ancestor[1].of"),
        ('of = ""', f'of = "{B}"', "ancestor[0].of"),
        ('of = ""', 'off = ""', "ancestor[0].off"),
        ('of = ""', "of = 1", "ancestor[0].of"),
        ('of = ""\n', "", "ancestor[0]"),
        ('name = "Reference set (invented)"', 'name = "Reference\\u001bset"', "ancestor[0].name"),
    ],
)
def test_what_cannot_be_is_refused_with_its_key(old, new, key):
    text = (KITS / "with-ancestors.toml").read_text(encoding="utf-8")
    assert old in text
    with pytest.raises(KitError) as refused:
        parse_kit(text.replace(old, new, 1), "kit.toml")
    assert refused.value.key == key
    assert len(str(refused.value).splitlines()) <= 2
