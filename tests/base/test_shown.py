"""What comes from outside is shown on one line, and cannot act on a terminal."""

import pytest

from stdfit.base.errors import KitError
from stdfit.base.shown import shown


@pytest.mark.parametrize(
    "text, expected",
    [
        ("kit.toml", "kit.toml"),
        ("Öffner 50 Ω – größer.toml", "Öffner 50 Ω – größer.toml"),
        ("a\x1b[31mb", "a\\x1b[31mb"),
        ("a\nb\r", "a\\nb\\r"),
        ("\x9b31m", "\\x9b31m"),
        ("\u202eevil\u2066", "\\u202eevil\\u2066"),
        ("x\udcff", "x\\udcff"),
        ("\u2028\U000e0001", "\\u2028\\U000e0001"),
        ("C:\\new", "C:\\new"),
    ],
)
def test_what_cannot_be_printed_is_written_out(text, expected):
    assert shown(text) == expected
    assert shown(text).isprintable()
    shown(text).encode("utf-8")


def test_long_texts_are_cut_in_the_middle():
    said = shown("a" * 5000 + "b" * 5000)
    assert len(said) == 501
    assert said.startswith("aaa") and said.endswith("bbb") and "…" in said


def test_an_error_is_two_lines_whatever_is_in_it():
    fault = KitError("no\nsuch\x1b[2J", "mend\n\nit", file="a\nb\x1b[31m", line=3, key="k\x07")
    assert str(fault) == "a\\nb\\x1b[31m, line 3, key 'k\\x07': no\\nsuch\\x1b[2J\nmend\\n\\nit"
    long = str(KitError("x" * 10**6, "y" * 10**6, file="z" * 10**6))
    assert len(long) < 6000
    assert long.count("\n") == 1
