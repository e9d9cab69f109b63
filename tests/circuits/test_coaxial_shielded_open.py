"""A shielded open: symmetries, limits, another way of matching its waves, and what its uncertainty is worth."""

import numpy as np
import pytest
from scipy.special import j0, j1, jn_zeros, y0, y1

from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import aperture_of, edge_exponent
from stdfit.circuits.coaxial.modes import SPEED_M_PER_S, line_te11_hz, line_tm_roots, pipe_tm_roots
from stdfit.circuits.coaxial.shielded_open import shielded_open
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M, wave_numbers

INNER, OUTER = 3.04e-3, 7.0e-3
SWEEP = np.linspace(0.0, 30e9, 16)


def reflection_by_amplitudes(inner_m, outer_m, frequency_hz, line_count):
    """Return Γ at the end by matching complex amplitudes of all waves, TEM among them, one frequency at a time.

    The field in the opening is made of the waves of the line, coupled to those of the pipe by Lommel's integrals;
    nothing is shared with the program but the roots.
    """
    a, b = inner_m / 2, outer_m / 2
    k = wave_numbers(np.array([frequency_hz]))[0]
    pipe_count = round(line_count * b / (b - a) * 4)
    kappa, p = line_tm_roots(b / a, line_count) / a, pipe_tm_roots(pipe_count) / b

    def wave(r):
        return j1(kappa * r) * y0(kappa * a) - j0(kappa * a) * y1(kappa * r)

    norm = np.sqrt(np.r_[np.log(b / a), 0.5 * (b**2 * wave(b) ** 2 - a**2 * wave(a) ** 2)])
    pipe_norm = np.sqrt(0.5) * b * np.abs(j1(p * b))
    coupling = np.empty((pipe_count, line_count + 1))
    coupling[:, 0] = j0(p * a) / p
    coupling[:, 1:] = a * p[:, None] * j0(p * a)[:, None] * wave(a) / (p[:, None] ** 2 - kappa**2)
    coupling /= norm * pipe_norm[:, None]
    # Admittances against that of a TEM wave: jk/γ, with γ = jk for TEM itself.
    gamma = np.sqrt(np.r_[0.0, kappa].astype(complex) ** 2 - k**2)
    line = np.diag(1j * k / gamma)
    pipe = coupling.T @ ((1j * k / np.sqrt(p.astype(complex) ** 2 - k**2))[:, None] * coupling)
    sent = np.zeros(line_count + 1, dtype=complex)
    sent[0] = 1.0
    # Magnetic fields: line·(sent − returned) = pipe·(sent + returned).
    returned = np.linalg.solve(line + pipe, (line - pipe) @ sent)
    return returned[0]


@pytest.mark.parametrize("frequency_hz", [1e9, 10e9, 24e9])
def test_matching_of_amplitudes_agrees_and_loses_no_energy(frequency_hz):
    per_ohm = 2 * np.pi * VACUUM_F_PER_M * 299792458.0 / np.log(OUTER / INNER)
    end = shielded_open(INNER, OUTER, np.array([frequency_hz]))
    found = []
    for count in (40, 80):
        gamma = reflection_by_amplitudes(INNER, OUTER, frequency_hz, count)
        assert abs(abs(gamma) - 1.0) < 1e-9
        found.append(((1 - gamma) / (1 + gamma)).imag * per_ohm / (2 * np.pi * frequency_hz))
    # Plain waves approach the field at the edge as the power 4/3 of their number.
    extrapolated = found[1] + (found[1] - found[0]) / (2 ** (4 / 3) - 1)
    assert extrapolated == pytest.approx(end.capacitance_f[0], rel=1e-4, abs=0)
    assert found[0] > found[1] > end.capacitance_f[0]


def test_capacitance_is_even_and_rises_with_frequency():
    end = shielded_open(INNER, OUTER, SWEEP)
    assert np.all(np.diff(end.capacitance_f) > 0.0)
    assert np.array_equal(shielded_open(INNER, OUTER, -SWEEP).capacitance_f, end.capacitance_f)
    # Straight in f² near zero: (C(2f) − C0)/(C(f) − C0) = 4.
    low = shielded_open(INNER, OUTER, np.array([0.0, 0.2e9, 0.4e9])).capacitance_f
    assert (low[2] - low[0]) / (low[1] - low[0]) == pytest.approx(4.0, abs=0.01)


def test_nothing_diverges_up_to_the_next_wave_of_full_symmetry():
    """At its cut-off the field is free of that wave: C is finite, reached as the root of the distance."""
    top = SPEED_M_PER_S * jn_zeros(0, 1)[0] / (np.pi * OUTER)
    near = shielded_open(INNER, OUTER, top * (1.0 - np.array([1e-6, 1e-8, 1e-10]))).capacitance_f
    assert np.all(np.diff(near) > 0.0)
    assert (near[2] - near[1]) / (near[1] - near[0]) == pytest.approx(0.1, abs=0.01)
    below = np.linspace(0.0, line_te11_hz(INNER, OUTER), 40)
    smooth = shielded_open(INNER, OUTER, below).capacitance_f
    assert smooth[-1] < 1.25 * smooth[0]
    assert np.all(np.diff(smooth, 2) > 0.0)
    with pytest.raises(RequestError, match=r"from 32\.78 GHz on a wave spreads"):
        shielded_open(INNER, OUTER, np.array([1.0001 * top]))


def test_size_and_frequency_scale():
    small = shielded_open(INNER / 7, OUTER / 7, 7 * SWEEP)
    assert small.capacitance_f * 7 == pytest.approx(
        shielded_open(INNER, OUTER, SWEEP).capacitance_f, rel=1e-10, abs=0
    )


def test_one_filling_everywhere_multiplies_and_slows():
    filled = shielded_open(INNER, OUTER, SWEEP / 2, er=4.0)
    assert filled.capacitance_f == pytest.approx(
        4 * shielded_open(INNER, OUTER, SWEEP).capacitance_f, rel=1e-10, abs=0
    )


def test_a_bead_lies_between_the_fillings():
    still = np.zeros(1)
    least, most = (shielded_open(INNER, OUTER, still, er=er).capacitance_f[0] for er in (1.0, 2.0))
    behind = shielded_open(INNER, OUTER, still, er=1.0, er_beyond=2.0).capacitance_f[0]
    before = shielded_open(INNER, OUTER, still, er=2.0, er_beyond=1.0).capacitance_f[0]
    assert least < before < behind < most
    assert before + behind < 3 * least * 1.05


def test_a_far_wall_is_none_and_a_near_one_is_a_plate():
    still = np.zeros(1)
    alone = shielded_open(INNER, OUTER, still).capacitance_f[0]
    assert shielded_open(INNER, OUTER, still, wall_m=20e-3).capacitance_f[0] == pytest.approx(
        alone, rel=1e-6, abs=0
    )
    plates = [VACUUM_F_PER_M * np.pi * INNER**2 / 4 / wall for wall in (0.1e-3, 0.2e-3)]
    near = [shielded_open(INNER, OUTER, still, wall_m=wall).capacitance_f[0] for wall in (0.1e-3, 0.2e-3)]
    # Field lines from the side of the pin to the wall are quarter circles: (2ε/π)·ln 2 per metre of edge (derived,
    # for small distances).
    fringe = 2 * VACUUM_F_PER_M * np.log(2) * INNER
    assert near[0] - near[1] == pytest.approx(plates[0] - plates[1] + fringe, rel=0.03, abs=0)
    assert near[0] > plates[0] + 0.3 * alone


@pytest.mark.parametrize(
    "ratio, er, er_beyond, wall",
    [
        (1.2, 1.0, 1.0, None),
        (2.3023, 1.0, 1.0, None),
        (2.3023, 1.0, 1.0, 0.3),
        (9.4, 1.93, 5.6, None),
        # Half as many waves differ by hardly anything here, by accident; and there half of those.
        (6.5, 1.0, 3.0, None),
        (8.25, 1.0, 3.0, None),
        (10.0, 1.0, 1.0, None),
        (3.2, 2.07, 1.0, None),
        (2.0, 1.0, 9.8, None),
    ],
)
def test_the_uncertainty_covers_a_far_finer_computation(ratio, er, er_beyond, wall):
    frequency = np.array([0.0, 4e9])
    given = {"er": er, "er_beyond": er_beyond, "wall_m": None if wall is None else wall * OUTER / 2}
    usual = shielded_open(OUTER / ratio, OUTER, frequency, **given)
    finer = shielded_open(OUTER / ratio, OUTER, frequency, waves=640, degree=7, **given)
    assert np.all(np.abs(usual.capacitance_f - finer.capacitance_f) < usual.u_numeric_f)
    assert np.all(usual.u_numeric_f < 1e-4 * usual.capacitance_f)
    assert np.all(finer.u_numeric_f < 0.5 * usual.u_numeric_f)


def test_results_have_the_shape_of_the_sweep_and_are_read_only():
    end = shielded_open(INNER, OUTER, np.linspace(0, 20e9, 200))
    assert end.capacitance_f.shape == end.u_numeric_f.shape == (200,)
    assert end.modes > 400
    with pytest.raises(ValueError, match="read-only"):
        end.capacitance_f[0] = 0.0


@pytest.mark.parametrize(
    "changed, told",
    [
        ({"inner_m": 7e-3}, "is no line"),
        ({"inner_m": -1e-3}, "is no line"),
        ({"outer_m": float("nan")}, "is no line"),
        ({"outer_m": 3.0400001e-3}, "too narrow"),
        ({"er": 0.5}, "no relative permittivity"),
        ({"er_beyond": float("inf")}, "no relative permittivity"),
        ({"wall_m": 0.0}, "closing wall 0 mm"),
        ({"wall_m": 0.05e-3}, "plate capacitor"),
    ],
)
def test_what_cannot_be_is_refused(changed, told):
    with pytest.raises(RequestError, match=told):
        shielded_open(**{"inner_m": INNER, "outer_m": OUTER, "frequency_hz": np.zeros(1), **changed})


def test_no_frequency_and_none_that_is_a_number():
    assert shielded_open(INNER, OUTER, np.zeros(0)).capacitance_f.shape == (0,)
    with pytest.raises(RequestError, match="not a number"):
        shielded_open(INNER, OUTER, np.array([1e9, np.nan]))


@pytest.mark.parametrize("narrow, wide", [(1.0, 1.0), (2.0, 1.0), (1.0, 9.0)])
def test_the_exponent_solves_the_field_of_a_wedge(narrow, wide):
    at = edge_exponent(narrow, wide)
    for power in (at, 2.0 - at, 2.0 + at):
        angle = power * np.pi / 2
        # Potentials sin(λφ) from the narrow wall and sin(λ(3π/2 − φ)) from the wide one meet at φ = π/2.
        flux = narrow / np.tan(angle) + wide / np.tan(2 * angle)
        assert flux == pytest.approx(0.0, abs=1e-9)
    assert edge_exponent(1.0, 1.0) == pytest.approx(2 / 3, rel=1e-6, abs=0)


def test_voltage_of_the_fields_is_their_integral():
    """r·E = ρ^p·P_0 with one edge: ∫E dr by a substitution that takes the singularity away."""
    opening = aperture_of(1.0, 2.0, (2 / 3, None), 1, 8)
    t = (np.arange(200000) + 0.5) / 200000
    for family, power in enumerate((-1 / 3, 1 / 3)):
        # ρ = t³, dρ = 3t²dt; (1+x)^p = (2ρ)^p.
        known = np.mean((2 * t**3) ** power / (1 + t**3) * 3 * t**2)
        assert opening.voltage()[family] == pytest.approx(known, rel=1e-8, abs=0)
