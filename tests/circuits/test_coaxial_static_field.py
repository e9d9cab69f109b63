"""Static capacitances by finite differences on a grid of r and z: another method, good to about a thousandth."""

from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import trapezoid
from scipy.sparse import coo_array
from scipy.sparse.linalg import spsolve

from stdfit.circuits.coaxial.flush_open import finite_flange_share, flush_open
from stdfit.circuits.coaxial.shielded_open import shielded_open
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M
from stdfit.circuits.coaxial.step import step_capacitance

STILL = np.zeros(1)


def cells(start, end, fine, fine_at, growth=1.09):
    """Return grid lines from `start` to `end`, finest at the ends named ('start', 'end', 'both')."""
    if fine_at == "both":
        middle = 0.5 * (start + end)
        return np.r_[cells(start, middle, fine, "start"), cells(middle, end, fine, "end")[1:]]
    lines, step = [0.0], fine
    while lines[-1] < end - start:
        lines.append(lines[-1] + step)
        step *= growth
    lines = np.array(lines) * (end - start) / lines[-1]
    placed = start + lines if fine_at == "start" else end - lines[::-1]
    # Rounding must not move a conductor's surface off the grid.
    placed[0], placed[-1] = start, end
    return placed


def energy_capacitance(r, z, pin, wall, er):
    """Return the capacitance between pin (1 V) and wall (0 V), and the potential; other borders let no flux through."""
    between_r, between_z = 0.5 * (r[1:] + r[:-1]), 0.5 * (z[1:] + z[:-1])
    filling = np.broadcast_to(er(between_r[:, None], between_z), (r.size - 1, z.size - 1))
    high = np.zeros((r.size - 1, z.size))
    high[:, :-1] += filling * np.diff(z) / 2
    high[:, 1:] += filling * np.diff(z) / 2
    ring = np.zeros((r.size, z.size - 1))
    ring[:-1] += filling * (between_r**2 - r[:-1] ** 2)[:, None]
    ring[1:] += filling * (r[1:] ** 2 - between_r**2)[:, None]
    along_r = 2 * np.pi * between_r[:, None] * high / np.diff(r)[:, None]
    along_z = np.pi * ring / np.diff(z)
    number = np.arange(r.size * z.size).reshape(r.size, z.size)
    one = np.r_[number[:-1].ravel(), number[:, :-1].ravel()]
    other = np.r_[number[1:].ravel(), number[:, 1:].ravel()]
    g = np.r_[along_r.ravel(), along_z.ravel()]
    matrix = coo_array(
        (np.r_[g, g, -g, -g], (np.r_[one, other, one, other], np.r_[one, other, other, one]))
    ).tocsr()
    at_r, at_z = np.meshgrid(r, z, indexing="ij")
    on_pin, on_wall = pin(at_r, at_z).ravel(), wall(at_r, at_z).ravel()
    free = ~(on_pin | on_wall)
    potential = on_pin.astype(float)
    potential[free] = spsolve(matrix[free][:, free].tocsc(), -(matrix[free][:, on_pin].sum(axis=1)))
    return VACUUM_F_PER_M * potential @ (matrix @ potential), potential.reshape(r.size, z.size)


def line_farad_per_m(r, a, b):
    """Return the capacitance per metre of the line on the same grid."""
    inside = r[(r >= a - 1e-9) & (r <= b + 1e-9)]
    return 2 * np.pi * VACUUM_F_PER_M / np.sum(np.diff(inside) / (0.5 * (inside[1:] + inside[:-1])))


def extrapolated(of_fineness, fine):
    """Return the value for a grid without end: the field of a square edge costs the power 4/3."""
    coarse, finer = of_fineness(fine), of_fineness(fine / 2)
    return finer + (finer - coarse) / (2 ** (4 / 3) - 1)


def shielded_by_grid(a, b, er, beyond, wall, fine):
    before = 3 * (b - a)
    r = np.r_[cells(0, a, fine, "end"), cells(a, b, fine, "start")[1:]]
    z = np.r_[cells(-before, 0, fine, "end"), cells(0, wall, fine, "start")[1:]]
    total, _ = energy_capacitance(
        r,
        z,
        lambda x, y: (x <= a) & (y <= 0),
        lambda x, y: (x >= b) | (y >= wall),
        lambda x, y: np.where(y < 0, er, beyond),
    )
    return total - er * before * line_farad_per_m(r, a, b)


@pytest.mark.parametrize(
    "ratio, er, beyond, wall", [(2.3023, 1, 1, 4.0), (4.0, 2.0, 1, 4.0), (1.5, 1, 3, 4.0), (2.0, 1, 1, 0.3)]
)
def test_shielded_open(ratio, er, beyond, wall):
    a, b = 1.0 / ratio, 1.0
    known = extrapolated(lambda fine: shielded_by_grid(a, b, er, beyond, wall, fine), 0.03 * (b - a))
    end = shielded_open(2 * a, 2 * b, STILL, er=er, er_beyond=beyond, wall_m=wall)
    assert end.capacitance_f[0] == pytest.approx(known, rel=2e-3, abs=0)


def step_by_grid(inner, outer, fine):
    """Return C of a step; inner and outer are the radii before and after."""
    edges = sorted({*inner, *outer})
    reach = 3 * (outer[1] - inner[1])
    parts = [cells(low, high, fine, "both") for low, high in pairwise(edges)]
    r = np.r_[parts[0], *(part[1:] for part in parts[1:])]
    z = np.r_[cells(-reach, 0, fine, "end"), cells(0, reach, fine, "start")[1:]]

    def both(x, y, at):
        return np.where(y < 0, at[0], np.where(y > 0, at[1], 0.0))

    total, _ = energy_capacitance(
        r,
        z,
        lambda x, y: (x <= both(x, y, inner)) | ((y == 0) & (x <= max(inner))),
        lambda x, y: np.where(y == 0, x >= min(outer), x >= both(x, y, outer)),
        lambda x, y: np.ones_like(x + y),
    )
    return total - reach * sum(line_farad_per_m(r, a, b) for a, b in zip(inner, outer, strict=True))


@pytest.mark.parametrize(
    "inner, outer",
    [((1.5, 1.0), (3.0, 3.0)), ((1.0, 1.0), (2.0, 3.0)), ((1.5, 1.0), (2.5, 3.0)), ((1.5, 1.0), (3.0, 2.5))],
)
def test_steps(inner, outer):
    known = extrapolated(lambda fine: step_by_grid(inner, outer, fine), 0.03)
    a, b = 2 * np.array(inner), 2 * np.array(outer)
    assert step_capacitance(a[0], b[0], a[1], b[1], STILL).capacitance_f[0] == pytest.approx(
        known, rel=4e-3, abs=0
    )


def flush_by_grid(a, b, flange, er, fine):
    """Return C of a flush open in a flange that ends at a radius, with open space around its body, and ∫E·r² dr."""
    far = 40.0
    endless = flange >= far
    r = np.r_[cells(0, a, fine, "end"), cells(a, b, fine, "both")[1:]]
    if endless:
        r = np.r_[r, cells(b, far, fine, "start")[1:]]
    else:
        rim = min(fine, (flange - b) / 6)
        r = np.r_[r, cells(b, flange, rim, "both")[1:], cells(flange, far, rim, "start")[1:]]
    before = 3 * (b - a) if endless else far
    z = np.r_[cells(-before, 0, fine, "end"), cells(0, far, fine, "start")[1:]]
    total, potential = energy_capacitance(
        r,
        z,
        lambda x, y: (x <= a) & (y <= 0),
        lambda x, y: ((x >= b) & (x <= flange) & (y <= 0)) | (x >= far) | (y >= far),
        lambda x, y: np.where((x < b) & (y < 0), er, 1.0),
    )
    across = (r >= a) & (r <= b)
    # By parts, so that the field at the edges needs no difference.
    moment = a**2 + 2 * trapezoid((r * potential[:, np.flatnonzero(z == 0)[0]])[across], r[across])
    return np.array([total - er * before * line_farad_per_m(r, a, b), moment])


@pytest.mark.parametrize("ratio, er", [(2.3023, 1.0), (4.1 / 1.27, 2.07)])
def test_flush_open(ratio, er):
    a = 1.0 / ratio
    known, moment = extrapolated(lambda fine: flush_by_grid(a, 1.0, np.inf, er, fine), 0.03 * (1 - a))
    k = 0.01
    found = flush_open(2 * a, 2.0, np.array([0.0, k * 299792458.0 / (2 * np.pi)]), er=er, er_outside=1.0)
    assert found.capacitance_f[0] == pytest.approx(known, rel=2e-3, abs=0)
    # The opening radiates as a ring of magnetic current: G = (π/3)·k⁴·(∫E·r² dr)²/η at low frequency (derived).
    assert found.conductance_s[1] == pytest.approx(np.pi / 3 * k**4 * moment**2 / 376.730313, rel=3e-3, abs=0)


@pytest.mark.parametrize(
    "ratio, er, flange", [(2.3023, 1.0, 1.2), (4.1 / 1.27, 2.07, 1.05), (1.3, 1.0, 1.05)]
)
def test_a_flange_that_ends_lowers_the_capacitance_by_less_than_its_bound(ratio, er, flange):
    a = 1.0 / ratio
    endless, ends = (flush_by_grid(a, 1.0, radius, er, 0.03 * (1 - a))[0] for radius in (np.inf, flange))
    share = 1.0 - ends / endless
    bound = finite_flange_share(2 * a, 2.0, 2 * flange)
    assert 0.4 * bound < share < bound
