"""Whatever the bytes: out comes a record or an input error, never another exception."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stdfit.base.errors import InputError
from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, parse_bench
from stdfit.data.columns import parse_columns
from stdfit.data.touchstone import parse_touchstone

VALID = Path(__file__).parents[1] / "files" / "valid"
READINGS = {
    path.name: path.read_bytes() for path in sorted(VALID.iterdir()) if path.is_file() and path.name[0] != "."
}
TOUCHSTONE = [name for name in READINGS if not name.endswith(("csv", "tsv"))]
COLUMNS = [name for name in READINGS if name.endswith(("csv", "tsv"))]
BENCH = (VALID / "bench" / "corrected.toml").read_text(encoding="utf-8")
FEW = settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.too_slow])

# Pieces that upset parsers: numbers of odd spelling, marks, keywords, line ends, zero bytes.
PIECES = st.one_of(
    st.binary(max_size=6),
    st.sampled_from(
        b'!|#|[|]|\0|\r|\n|\r\n|\t|  |,|;|"|nan|inf|-|1e999|1D3|0x1|True|[End]|[Version] 2.0|'
        b"[Noise Data]|[Reference]|# |# Hz|R|R 0|S Z|\xff\xfe|\xef\xbb\xbf|\x1a|"
        b"99999999999999999999|.|1_0|1e|\x0b|\x0c|\xc2\x85".split(b"|")
    ),
)


@st.composite
def mutated(draw, originals):
    """A file with some pieces cut out, put in, or exchanged."""
    data = draw(st.sampled_from(originals))
    for _ in range(draw(st.integers(1, 4))):
        start = draw(st.integers(0, len(data)))
        length = draw(st.sampled_from([0, 0, 1, 2, 7, 40]))
        data = data[:start] + draw(PIECES) + data[start + length :]
    return data


def read(parse, *arguments):
    try:
        return parse(*arguments)
    except InputError as fault:
        assert fault.what
        assert str(fault).count("\n") <= 1
        return None


def check_sweep(sweep):
    if sweep is not None:
        assert isinstance(sweep, Sweep)
        assert np.isfinite(sweep.gamma).all()
        assert (np.diff(sweep.frequency_hz) > 0).all()
        assert sweep.frequency_hz.size >= 8


@FEW
@given(st.binary(max_size=300), st.sampled_from(["x.s1p", "x.s2p", "x.ts", "x"]), st.sampled_from([1, 2]))
def test_random_bytes(raw, name, port):
    check_sweep(read(parse_touchstone, raw, name, port))
    check_sweep(read(parse_touchstone, b"# Hz S RI R 50\n" + raw, name, port))
    check_sweep(read(parse_columns, raw, name))
    check_sweep(read(parse_columns, b"frequency_hz,gamma_re,gamma_im\n" + raw, name))


@FEW
@given(
    mutated([READINGS[name] for name in TOUCHSTONE]),
    st.sampled_from(["x.s1p", "x.s2p", "x"]),
    st.sampled_from([1, 2]),
)
def test_mutated_touchstone(raw, name, port):
    check_sweep(read(parse_touchstone, raw, name, port))


@FEW
@given(mutated([READINGS[name] for name in COLUMNS]))
def test_mutated_columns(raw):
    check_sweep(read(parse_columns, raw, "x.csv"))


@FEW
@given(st.text(max_size=200))
def test_random_text_is_no_bench(text):
    assert read(parse_bench, text, VALID / "bench" / "x.toml") is None


@FEW
@given(
    st.data(),
    st.lists(
        st.one_of(
            st.text(max_size=5),
            st.sampled_from(
                [
                    "= ",
                    "[",
                    "]",
                    "{",
                    "}",
                    '"',
                    "'''",
                    "nan",
                    "inf",
                    "-1",
                    "true",
                    "1979-05-27",
                    "\0",
                    "\n",
                    "[[",
                    "]]",
                    ".",
                ]
            ),
        ),
        min_size=1,
        max_size=4,
    ),
)
def test_mutated_bench(data, pieces):
    text = BENCH
    for piece in pieces:
        start = data.draw(st.integers(0, len(text)))
        text = text[:start] + piece + text[start + data.draw(st.sampled_from([0, 1, 3, 20])) :]
    bench = read(parse_bench, text, VALID / "bench" / "x.toml")
    assert bench is None or isinstance(bench, Bench)


VALUES = st.recursive(
    st.one_of(
        st.sampled_from(
            ["true", "nan", "-inf", "0", "-1", "1e400", "9" * 30, "1979-05-27", "07:32:00", '""', '"\\u0000"']
        ),
        st.sampled_from(
            [
                '"open"',
                '"raw"',
                '"../../.."',
                '"*"',
                '"../**/plain-ri.s1p"',
                '"/"',
                '"~"',
                '"."',
                '"[a"',
                '"?"',
            ]
        ),
    ),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: "[" + ", ".join(items) + "]"),
        inner.map(lambda item: "{ value = " + item + " }"),
    ),
    max_leaves=4,
)


@FEW
@given(st.sampled_from([i for i, line in enumerate(BENCH.splitlines()) if " = " in line]), VALUES)
def test_any_value_at_any_key(line, value):
    lines = BENCH.splitlines()
    lines[line] = lines[line].split(" = ")[0] + " = " + value
    bench = read(parse_bench, "\n".join(lines), VALID / "bench" / "x.toml")
    assert bench is None or isinstance(bench, Bench)


@pytest.mark.parametrize("name", TOUCHSTONE)
def test_a_file_cut_anywhere(name):
    raw = READINGS[name]
    for end in range(0, len(raw), 17):
        check_sweep(read(parse_touchstone, raw[:end], name))
