"""However readings are spelt, the numbers are those that were written; whatever is spoilt is refused with its line."""

import re

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from stdfit.base.errors import ReadingError
from stdfit.data.columns import parse_columns
from stdfit.data.touchstone import parse_touchstone

SOME = settings(max_examples=120, deadline=None, suppress_health_check=[HealthCheck.too_slow])
FEW = settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])
UNITS = {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9}
ENDS = st.sampled_from(["\n", "\r\n", "\r"])
SPELLINGS = [
    repr,
    lambda x: f"{x:.16e}",
    lambda x: f"{x:+.16E}",
    lambda x: f"{x:.17g}",
    lambda x: f"{x:.16e}".replace("e", "D"),
    lambda x: re.sub(r"^(-?)0\.", r"\1.", repr(x)) if 1e-4 < abs(x) < 1 else repr(x),
]


@st.composite
def sweeps(draw):
    """Frequencies in Hz that rise, and Γ of passive parts."""
    n = draw(st.integers(8, 12))
    start, step = draw(st.floats(1e6, 1e8)), draw(st.floats(1e5, 1e9))
    f = start + step * np.arange(n)
    size = np.array(draw(st.lists(st.floats(0.01, 1.0), min_size=n, max_size=n)))
    turn = np.array(draw(st.lists(st.floats(-180.0, 180.0), min_size=n, max_size=n)))
    return f, size * np.exp(1j * np.deg2rad(turn))


def pairs(gamma, kind):
    if kind == "RI":
        return gamma.real, gamma.imag
    size = np.abs(gamma)
    return (20 * np.log10(size) if kind == "DB" else size), np.rad2deg(np.angle(gamma))


def same(read, f, gamma):
    np.testing.assert_allclose(read.frequency_hz, f, rtol=1e-12)
    np.testing.assert_allclose(read.gamma, gamma, rtol=1e-11, atol=1e-14)


@st.composite
def encodings(draw):
    return draw(st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "latin-1"]))


@SOME
@given(
    st.data(), sweeps(), st.sampled_from(["RI", "MA", "DB"]), st.sampled_from(list(UNITS)), ENDS, encodings()
)
def test_touchstone_in_any_spelling(data, sweep, kind, unit, end, code):
    f, gamma = sweep
    first, second = pairs(gamma, kind)
    spell = data.draw(st.sampled_from(SPELLINGS))
    gap = data.draw(st.sampled_from([" ", "  ", "\t", " \t"]))
    words = [unit, "S", kind, "R 50"]
    option = "# " + gap.join(data.draw(st.permutations(words)))
    lines = [
        data.draw(st.sampled_from(["", "! straße, é", "!"])),
        option.upper() if data.draw(st.booleans()) else option,
    ]
    for row in zip((f / UNITS[unit]).tolist(), first.tolist(), second.tolist(), strict=True):
        lead, tail = data.draw(st.sampled_from([("", ""), (" ", " "), ("", " ! 7 8 9"), ("\t", "!x")]))
        lines.append(lead + gap.join(map(spell, row)) + tail)
        lines += data.draw(st.sampled_from([[], [], [], [""], ["! 1 2 3"], ["   "]]))
    text = end.join(lines) + data.draw(st.sampled_from(["", end, end + "\x1a"]))
    same(parse_touchstone(text.encode(code, "replace"), "x.s1p"), f, gamma)


@SOME
@given(st.data(), sweeps(), st.sampled_from([",", ";", "\t"]), ENDS, encodings())
def test_columns_in_any_spelling(data, sweep, mark, end, code):
    f, gamma = sweep
    names = ["frequency_hz", "gamma_re", "gamma_im", "note", "u"]
    values = [f.tolist(), gamma.real.tolist(), gamma.imag.tolist()]
    order = data.draw(st.permutations(range(data.draw(st.integers(3, 5)))))
    spell = data.draw(st.sampled_from(SPELLINGS))
    blank = data.draw(st.sampled_from(["", " "]))
    quote = data.draw(st.sampled_from(["", '"']))
    lines = data.draw(st.sampled_from([[], ["# a comment, with; marks"], [""]]))
    lines.append(mark.join(quote + names[k].upper() + quote for k in order))
    for row in range(f.size):
        fields = [
            spell(values[k][row]) if k < 3 else data.draw(st.sampled_from(["", "1", "x y", "é"]))
            for k in order
        ]
        if order[0] < 3 and order[-1] < 3:
            fields = [quote + field + quote for field in fields]
        lines.append(mark.join(blank + field + blank for field in fields))
        lines += data.draw(st.sampled_from([[], [], [], [""], ["# 1,2,3"]]))
    text = end.join(lines) + data.draw(st.sampled_from(["", end]))
    assume(not text.isspace())
    same(parse_columns(text.encode(code, "replace"), "x.csv"), f, gamma)


def plain(sweep, mark):
    f, gamma = sweep
    rows = zip(f.tolist(), gamma.real.tolist(), gamma.imag.tolist(), strict=True)
    return [mark.join(map(repr, row)) for row in rows]


def refused(parse, lines, name, line=None):
    with pytest.raises(ReadingError) as caught:
        parse(("\n".join(lines) + "\n").encode(), name)
    assert str(caught.value.file) == name
    assert str(caught.value).count("\n") == 1
    if line is not None:
        assert caught.value.line == line, str(caught.value)
    return caught.value


HEADS = {
    "x.s1p": (parse_touchstone, "# Hz S RI R 50", " "),
    "x.csv": (parse_columns, "frequency_hz,gamma_re,gamma_im", ","),
}
HEADS["semicolons.csv"] = (parse_columns, "frequency_hz;gamma_re;gamma_im", ";")
KINDS = st.sampled_from(list(HEADS))


@FEW
@given(sweeps(), KINDS, st.data())
def test_a_decimal_comma_is_never_taken_for_anything_else(sweep, name, data):
    parse, head, mark = HEADS[name]
    rows = plain(sweep, mark)
    k = data.draw(st.integers(0, len(rows) - 1))
    place = data.draw(st.integers(0, 2))
    fields = rows[k].split(mark)
    assume("." in fields[place])
    fields[place] = fields[place].replace(".", ",")
    rows[k] = mark.join(fields)
    refused(parse, [head, *rows], name, k + 2)


@FEW
@given(sweeps(), KINDS, st.data())
def test_decimal_commas_everywhere(sweep, name, data):
    parse, head, mark = HEADS[name]
    rows = [row.replace(".", ",") for row in plain(sweep, mark)]
    refused(parse, [head, *rows], name, 2)


@FEW
@given(sweeps(), KINDS, st.data())
def test_rows_out_of_order_or_twice(sweep, name, data):
    parse, head, mark = HEADS[name]
    rows = plain(sweep, mark)
    order = data.draw(st.permutations(range(len(rows))))
    assume(order != sorted(order))
    first = next(k for k in range(1, len(order)) if order[k] < order[k - 1])
    refused(parse, [head, *(rows[k] for k in order)], name, first + 2)
    refused(parse, [head, *rows, *rows], name, len(rows) + 2)
    k = data.draw(st.integers(0, len(rows) - 1))
    refused(parse, [head, *rows[: k + 1], *rows[k:]], name, k + 3)


@FEW
@given(
    sweeps(),
    KINDS,
    st.data(),
    st.sampled_from(["nan", "inf", "-inf", "x", "1_0", "0x1", "1e999", "--1", "1.2.3", "é"]),
)
def test_what_is_no_number_is_refused_with_its_line(sweep, name, data, word):
    parse, head, mark = HEADS[name]
    rows = plain(sweep, mark)
    k = data.draw(st.integers(0, len(rows) - 1))
    fields = rows[k].split(mark)
    fields[data.draw(st.integers(0, 2))] = word
    rows[k] = mark.join(fields)
    refused(parse, [head, *rows], name, k + 2)


@FEW
@given(sweeps(), KINDS, st.data())
def test_a_row_with_a_field_too_many_or_too_few_is_refused_with_its_line(sweep, name, data):
    parse, head, mark = HEADS[name]
    rows = plain(sweep, mark)
    k = data.draw(st.integers(0, len(rows) - 1))
    fields = rows[k].split(mark)
    if data.draw(st.booleans()):
        fields.insert(data.draw(st.integers(0, 3)), "0.5")
    else:
        del fields[data.draw(st.integers(0, 2))]
    rows[k] = mark.join(fields)
    refused(parse, [head, *rows], name, k + 2)


@FEW
@given(sweeps(), KINDS, st.data())
def test_a_file_that_is_cut_gives_the_rows_before_the_cut(sweep, name, data):
    """The cut may go through the last number, and no reader can know; all before it is right."""
    parse, head, mark = HEADS[name]
    whole = "\n".join([head, *plain(sweep, mark)]) + "\n"
    cut = whole[: data.draw(st.integers(len(head) + 2, len(whole)))]
    try:
        read = parse(cut.encode(), name)
    except ReadingError as fault:
        assert str(fault).count("\n") == 1
        return
    n = read.frequency_hz.size - (not cut.endswith("\n"))
    f, gamma = sweep
    same_rows = slice(0, n)
    np.testing.assert_allclose(read.frequency_hz[same_rows], f[same_rows], rtol=1e-12)
    np.testing.assert_allclose(read.gamma[same_rows], gamma[same_rows], rtol=1e-11, atol=1e-14)
