"""CSV files: header spellings, and the same numbers in every notation."""

import numpy as np
import pytest

from stdfit.base.errors import ReadingError
from stdfit.data.columns import parse_columns

FREQUENCY = np.arange(1, 11) * 1e8
GAMMA = np.exp(-1j * np.arange(1, 11) / 10) * 0.9


def text(header, *columns, mark=","):
    rows = (mark.join(f"{value:.15g}" for value in row) for row in zip(*columns, strict=True))
    return (header + "\n" + "\n".join(rows) + "\n").encode()


@pytest.mark.parametrize(
    ("header", "columns"),
    [
        ("frequency_hz,gamma_re,gamma_im", (FREQUENCY, GAMMA.real, GAMMA.imag)),
        ("Frequency (Hz),S11 re,S11 im", (FREQUENCY, GAMMA.real, GAMMA.imag)),
        ("frequency_khz,magnitude,phase_deg", (FREQUENCY / 1e3, abs(GAMMA), np.degrees(np.angle(GAMMA)))),
        (
            " FREQUENCY  (MHz) ,Magnitude (dB),Phase [deg]",
            (FREQUENCY / 1e6, 20 * np.log10(abs(GAMMA)), np.degrees(np.angle(GAMMA))),
        ),
        ("gamma_im,frequency_ghz,gamma_re", (GAMMA.imag, FREQUENCY / 1e9, GAMMA.real)),
    ],
)
@pytest.mark.parametrize("mark", [",", ";", "\t"])
def test_every_notation_gives_the_same_sweep(header, columns, mark):
    sweep = parse_columns(text(header.replace(",", mark), *columns, mark=mark), "x.csv")
    np.testing.assert_allclose(sweep.frequency_hz, FREQUENCY, rtol=1e-14)
    np.testing.assert_allclose(sweep.gamma, GAMMA, atol=1e-13)


def test_a_row_after_a_blank_line_keeps_its_empty_first_field():
    """With \\r as the end of a line the fast parser forgets that field, and the others move up."""
    lines = ["note,magnitude,phase_deg,frequency_hz,point"]
    for k, hertz in enumerate(FREQUENCY):
        lines += [f",0.9,{k},{hertz:.15g},{k}", ""]
    for end in ("\n", "\r\n", "\r"):
        sweep = parse_columns(end.join(lines).encode(), "x.csv")
        np.testing.assert_allclose(sweep.frequency_hz, FREQUENCY, rtol=1e-14)
        np.testing.assert_allclose(np.abs(sweep.gamma), 0.9)


def test_soundness_errors_name_the_line():
    falling = FREQUENCY.copy()
    falling[6] = falling[5]
    raw = b"# note\n" + text("frequency_hz,gamma_re,gamma_im", falling, GAMMA.real, GAMMA.imag)
    with pytest.raises(ReadingError, match="is repeated") as caught:
        parse_columns(raw, "x.csv")
    assert caught.value.line == 9


def test_an_unknown_name_suggests_the_nearest():
    with pytest.raises(ReadingError) as caught:
        parse_columns(text("frequency_hz,gama_re,gamma_im", FREQUENCY, GAMMA.real, GAMMA.imag), "x.csv")
    assert caught.value.what == "the header has the unknown column 'gama_re'"
    assert caught.value.mend.startswith("did you mean 'gamma_re'? name a frequency column")
