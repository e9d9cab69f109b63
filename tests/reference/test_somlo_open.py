"""The capacitance of a shielded open, recovered from simulated readings.

36.242 fF per cm of outer circumference at 50 Ω in vacuum: P. I. Somlo, "The discontinuity capacitance and the
effective position of a shielded open circuit in a coaxial line", Proc. IREE Australia 28(1), 1967, 7–9
(published, quoted second-hand). 79.70 fF for a 7.00/3.04 mm line, 39.85 fF for 3.50/1.52 mm.
"""

import numpy as np
import pytest

from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import Wish, build_problem
from stdfit.fitting.solve import least_squares
from stdfit.uncertainty.budget import inverse_of

FF_PER_CM = 36.242
FREQUENCY = np.linspace(10e6, 9e9, 300)
DELAY_PS = 10.0
NOISE = 1e-3


def fitted_c0(outer_mm, told_u_ps):
    """Return C0 and its uncertainty from readings by the closed formula of C behind a lossless line."""
    farad = FF_PER_CM * np.pi * outer_mm / 10.0 * 1e-15
    omega = 2 * np.pi * FREQUENCY
    end = (1 - 1j * omega * farad * 50.0) / (1 + 1j * omega * farad * 50.0)
    gamma = np.exp(-2j * omega * DELAY_PS * 1e-12) * end
    observed = Observed.from_readings("open", "open", FREQUENCY, [gamma])
    wish = Wish({"offset_delay_ps": (DELAY_PS, told_u_ps)})
    weight = np.full(FREQUENCY.size, 1 / NOISE**2)
    problem = build_problem([observed], [wish], ["constant"], [weight], {}, 50.0)
    start, _ = problem.evidence()
    solution = least_squares(problem.residual, problem.jacobian, start)
    assert solution.converged
    place = problem.fitted.index(problem.names().index("open.c0"))
    u = np.sqrt(
        inverse_of(problem.jacobian(solution.values).T @ problem.jacobian(solution.values))[place, place]
    )
    return problem.expand(solution.values)[problem.names().index("open.c0")], u


@pytest.mark.parametrize(("outer_mm", "known_ff"), [(7.00, 79.70), (3.50, 39.85)])
def test_capacitance_is_recovered_where_the_delay_is_told(outer_mm, known_ff):
    c0, u = fitted_c0(outer_mm, 0.001)
    assert c0 == pytest.approx(known_ff, abs=0.1)
    assert u < 0.05


@pytest.mark.parametrize(("outer_mm", "known_ff"), [(7.00, 79.70), (3.50, 39.85)])
def test_a_delay_hardly_told_leaves_the_capacitance_uncertain_and_says_so(outer_mm, known_ff):
    """1 ps is 20 fF at 50 Ω; only the curvature of the phase, (ωC·Z0)³, still tells the two apart."""
    c0, u = fitted_c0(outer_mm, 1.0)
    _, sure = fitted_c0(outer_mm, 0.001)
    assert u > 30 * sure
    assert abs(c0 - known_ff) < 2 * u
