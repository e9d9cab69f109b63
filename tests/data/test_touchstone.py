"""What the museum cannot show: sizes, speed, agreement of the two parsing passes, renormalisation."""

import io
import time

import numpy as np
import pandas as pd
import pytest

from stdfit.base.errors import ReadingError, RequestError
from stdfit.data.readings import renormalise
from stdfit.data.rows import Block, _fast, _slow, line_of_row
from stdfit.data.touchstone import parse_touchstone


def numbers(n, columns=3, seed=1):
    rng = np.random.default_rng(seed)
    table = rng.uniform(-0.7, 0.7, size=(n, columns))
    table[:, 0] = np.round(np.linspace(1e6, 6e9, n))
    return table


def as_text(table, head="# Hz S RI R 50\n"):
    lines = (f"{row[0]:.0f} " + " ".join(f"{x:.12g}" for x in row[1:]) for row in table)
    return (head + "\n".join(lines) + "\n").encode()


def test_large_files_keep_their_digits():
    table = numbers(20_000)
    sweep = parse_touchstone(as_text(table), "x.s1p")
    np.testing.assert_array_equal(sweep.frequency_hz, table[:, 0])
    np.testing.assert_allclose(sweep.gamma, table[:, 1] + 1j * table[:, 2], rtol=0, atol=1e-12)


@pytest.mark.parametrize(
    "spell", [lambda t: t, lambda t: t.replace(b" ", b"\t"), lambda t: b" " + t.replace(b" ", b"   ")]
)
def test_fast_and_slow_pass_agree(spell):
    text = spell(as_text(numbers(50), head=""))
    block = Block(text=text, start=0, name="x", first_line=1, columns=3)
    fast, slow = _fast(block), _slow(block)
    assert fast is not None
    np.testing.assert_allclose(fast, slow.values, rtol=1e-15)


@pytest.mark.parametrize(
    "token", [b"nan", b"inf", b"True", b"1e", b"0x10", b"1_0", b'"1"', b"1,5", b"--1", b"1e999", b"e5", b"."]
)
@pytest.mark.parametrize("every_row", [False, True])
def test_the_fast_pass_takes_plain_numbers_only(token, every_row):
    rows = [b"%d 0.5 0.5" % i for i in range(10)]
    for i in range(10) if every_row else [7]:
        rows[i] = b"%d 0.5 %s" % (i, token)
    block = Block(text=b"\n".join(rows), start=0, name="x", first_line=1, columns=3)
    assert _fast(block) is None
    with pytest.raises(ReadingError) as caught:
        _slow(block)
    assert caught.value.line == (1 if every_row else 8)


def test_line_numbers_skip_what_holds_no_numbers():
    block = Block(
        text=b"! a\n\n1 2 3\r\n  \r\n! b\r4 5 6 ! c\n7 8 9", start=0, name="x", first_line=10, columns=3
    )
    assert [line_of_row(block, row) for row in range(4)] == [12, 15, 16, None]


def test_port_2_of_a_one_port_file_is_refused():
    with pytest.raises(ReadingError, match="one port, and port 2"):
        parse_touchstone(as_text(numbers(10)), "x.s1p", port=2)
    with pytest.raises(RequestError, match="port 3"):
        parse_touchstone(as_text(numbers(10)), "x.s1p", port=3)


def test_the_magnitude_limit_can_be_raised_for_raw_readings():
    table = numbers(10)
    table[4, 1] = 2.0
    with pytest.raises(ReadingError, match="far above 1") as caught:
        parse_touchstone(as_text(table), "x.s1p")
    assert caught.value.line == 6
    assert parse_touchstone(as_text(table), "x.s1p", highest_magnitude=10.0).gamma[4].real == 2.0


def test_an_unmeasured_port_2_is_refused():
    table = numbers(10, columns=9)
    table[:, 7:] = 0
    assert len(parse_touchstone(as_text(table), "x.s2p").gamma) == 10
    with pytest.raises(ReadingError, match="every reflection is zero"):
        parse_touchstone(as_text(table), "x.s2p", port=2)


def test_renormalise_known_values_and_round_trip():
    gamma = np.array([0, 1, -1, 0.3 - 0.4j])
    changed = renormalise(gamma, 75.0, 50.0)
    # 75 Ω seen in 50 Ω is 25/125; open and short stay what they are.
    np.testing.assert_allclose(changed[:3], [0.2, 1, -1], atol=1e-15)
    np.testing.assert_allclose(renormalise(changed, 50.0, 75.0), gamma, atol=1e-15)
    through = renormalise(renormalise(gamma, 50.0, 40 + 7j), 40 + 7j, 50.0)
    np.testing.assert_allclose(through, gamma, atol=1e-15)
    # Γ = (Z − Zr)/(Z + Zr), also for a complex Zr: a part of exactly Zr does not reflect.
    np.testing.assert_allclose(renormalise(np.array([0.0]), 40 + 7j, 40 + 7j), [0], atol=1e-15)


def fastest(work, rounds=7):
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def test_a_large_file_is_read_nearly_as_fast_as_its_bare_numbers():
    text = as_text(numbers(100_000))
    bare = text[text.index(b"\n") + 1 :]
    # Interleaved and repeated, because other work on the machine disturbs single timings.
    ratios = []
    for _ in range(4):
        whole = fastest(lambda: parse_touchstone(text, "x.s1p"), 3)
        plain = fastest(lambda: pd.read_csv(io.BytesIO(bare), sep=r"\s+", header=None, engine="c"), 3)
        ratios.append(whole / plain)
    assert min(ratios) < 1.5, ratios


def test_a_small_file_takes_milliseconds():
    text = as_text(numbers(1000))
    assert fastest(lambda: parse_touchstone(text, "x.s1p"), 20) < 3e-3
