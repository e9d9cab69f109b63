"""Whatever is done to a kit file: out comes a kit that every command can use, or a KitError."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from stdfit.base.errors import KitError
from stdfit.validity.kit import Kit, curve
from stdfit.validity.limits import limits
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit
from stdfit.writing.plain_data import kit_data
from stdfit.writing.summary import summary

PATH = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"
TEXT = PATH.read_text(encoding="utf-8")
LINES = TEXT.splitlines()
WITH_VALUE = [k for k, line in enumerate(LINES) if " = " in line and not line.endswith("[")]
NUMBERS = [
    (k, word)
    for k, line in enumerate(LINES)
    for word in line.replace("[", " ").replace("]", " ").replace(",", " ").split()
    if word.lstrip("-")[:1].isdigit()
]
FEW = settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])

MARKS = r"""= | [ | ] | [[ | ]] | { | } | " | ''' | nan | -inf | 1e999 | true | # | . | [kit] | [[standard]]
| \u001b | 1979-05-27 | misfit | open.c0 | - | 99999999999999999999999999"""
PIECES = st.one_of(
    st.text(max_size=4),
    st.sampled_from([mark.strip() for mark in MARKS.split(" | ")]),
    st.sampled_from("\0\n\x1b"),
)


def check(text):
    """Return whether the text is a kit; if so, everything must be possible with it."""
    try:
        kit = parse_kit(text, "kit.toml")
    except KitError as fault:
        assert fault.what
        assert str(fault).count("\n") <= 1
        assert all(letter.isprintable() for letter in str(fault).replace("\n", ""))
        return False
    assert isinstance(kit, Kit)
    assert all(letter.isprintable() for letter in summary(kit).replace("\n", ""))
    kit_data(kit)
    for whole, each in limits(kit, [0.02]):
        assert whole.limit_hz == min(one.limit_hz for one in each)
        assert np.isfinite(whole.limit_hz)
    for definition in kit.definitions:
        _, bound = curve(kit, definition, np.array([definition.read_low_hz, definition.read_top_hz]))
        assert np.isfinite(bound).all()
    again = kit_text(kit)
    assert kit_text(parse_kit(again, "kit.toml")) == again
    return True


def test_the_file_itself_is_a_kit():
    assert check(TEXT)


@FEW
@given(st.data(), st.lists(PIECES, min_size=1, max_size=3))
def test_pieces_put_in_and_cut_out(data, pieces):
    text = TEXT
    for piece in pieces:
        start = data.draw(st.integers(0, len(text)))
        text = text[:start] + piece + text[start + data.draw(st.sampled_from([0, 1, 3, 30])) :]
    check(text)


WORDS = r"""nan inf -inf 0 -1 0.0 1e308 -1e308 5e-324 1e-12 true 1979-05-27 07:32:00 {} [] "" "open" "load" "free"
"open.c0" "\u0007" 99999999999999999999999999"""
VALUES = st.recursive(
    st.sampled_from(WORDS.split()),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: "[" + ", ".join(items) + "]"),
        inner.map(lambda item: "{ value = " + item + " }"),
    ),
    max_leaves=4,
)


@FEW
@given(st.sampled_from(WITH_VALUE), VALUES)
def test_any_value_at_any_key(line, value):
    changed = LINES.copy()
    changed[line] = changed[line].split(" = ")[0] + " = " + value
    check("\n".join(changed))


@FEW
@given(
    st.sampled_from(NUMBERS),
    st.one_of(
        st.floats(allow_nan=True, allow_infinity=True).map(repr), st.integers(-(10**25), 10**25).map(str)
    ),
)
@example(NUMBERS[0], "1e300")
@example((166, "50.375"), "1.75e+308")  # two digits of it are more than a float holds
def test_any_number_in_place_of_any_number(place, number):
    line, word = place
    changed = LINES.copy()
    changed[line] = changed[line].replace(word, number, 1)
    check("\n".join(changed))


@FEW
@given(st.lists(st.integers(0, len(LINES) - 1), min_size=1, max_size=3), st.booleans())
def test_lines_left_out_and_lines_twice(lines, twice):
    changed = []
    for k, line in enumerate(LINES):
        changed += ([line, line] if twice else []) if k in lines else [line]
    check("\n".join(changed))


@FEW
@given(st.binary(max_size=200))
def test_random_bytes(tmp_path_factory, raw):
    path = tmp_path_factory.getbasetemp() / "random-kit.toml"
    path.write_bytes(raw)
    with pytest.raises(KitError):
        read_kit(path)
