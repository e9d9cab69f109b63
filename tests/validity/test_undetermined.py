"""What a set read through unknown error terms leaves open is found from the rank of its problem, and told in words."""

import re

import numpy as np
import pytest

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import Wish, build_problem
from stdfit.fitting.unknown_box import RawProblem
from stdfit.validity.undetermined import undetermined

SHAPES = {"short": "constant+Z0", "open": "even+Z0", "load": "R+L+delay+Z0"}
FIVE = {
    "short": ("short", [0.0, 1.5, 50.4, 0.4, 0.0, 0.0, 0.0]),
    "open": ("open", [5.0, 1.4, 49.5, 38.0, 0.0, 120.0, 0.0]),
    "load": ("load", [5.0, 0.0, 50.6, 50.2, 20.0, 0.0]),
    "offset short 1": ("short", [33.3, 1.6, 50.1, 0.2, 0.0, 0.0, 0.0]),
    "offset short 2": ("short", [66.7, 1.5, 49.8, 0.0, 0.0, 0.0, 0.0]),
}
LENGTHS = ("short", "offset short 1", "offset short 2")
KNOWN = {name: {"offset_delay_ps": (FIVE[name][1][0], 0.1)} for name in LENGTHS}
KNOWN["load"] = {"resistance_ohm": (50.2, 0.02)}


def said(parts=FIVE, points=201, **changed):
    """Return what is said of parts of which `KNOWN` is known, except for what is changed."""
    given = {name.replace("_", " "): evidence for name, evidence in {**KNOWN, **changed}.items()}
    f = np.linspace(50e6, 6e9, points)
    gamma = np.stack([reflection(kind, values, f, 50.0)[0] for kind, values in parts.values()], axis=1)
    turn = np.exp(-4j * np.pi * f * 1e-9)
    box = np.stack([0.05 * turn, 0.9 * turn, 0.1 * turn], axis=-1)
    problem = build_problem(
        [
            Observed(name, kind, f, gamma[:, k], np.zeros((1, f.size)))
            for k, (name, (kind, _)) in enumerate(parts.items())
        ],
        [Wish(given.get(name, {})) for name in parts],
        [SHAPES[kind] for kind, _ in parts.values()],
        [np.full(f.size, 1e6) for _ in parts],
        {f"{name}.{what}": 0.0 for name in parts for what in ("offset_delay_ps", "resistance_ohm")},
        50.0,
    )
    names = {name: [one.name for one in _parameters(problem, name)] for name in parts}
    values = np.array(
        [parts[one.standard][1][names[one.standard].index(one.parameter.name)] for one in problem.quantities]
    )
    scaled = values[problem.fitted] / problem.scales
    return undetermined(RawProblem(problem, seen_raw(box[:, None], gamma)), scaled)


def _parameters(problem, name):
    return [one.parameter for one in problem.quantities if one.standard == name]


def plane_ps(lines):
    (line,) = [line for line in lines if "shift of the plane" in line]
    return float(re.search(r"± ([\d.]+) ps", line)[1])


def lengths_known_to(u_ps, names=LENGTHS):
    return {name.replace(" ", "_"): {"offset_delay_ps": (FIVE[name][1][0], u_ps)} for name in names}


def test_nothing_is_said_where_nothing_is_open():
    assert said() == ()


@pytest.mark.parametrize("points", [51, 801])
@pytest.mark.parametrize(("u_ps", "told"), [(2.0, 2.0 / np.sqrt(3.0)), (20.0, 20.0 / np.sqrt(3.0))])
def test_poor_lengths_leave_the_plane_open(points, u_ps, told):
    """Three lengths of ± u fix the plane to u/√3, however many readings there are.

    That lines differ from 50 Ω would show where the plane is, if nothing else could take its place.
    """
    lines = said(points=points, **lengths_known_to(u_ps))
    assert len(lines) == 1
    assert plane_ps(lines) == pytest.approx(told, rel=0.2)


def test_one_good_length_is_enough():
    poor = lengths_known_to(20.0)
    assert len(said(**poor)) == 1
    assert said(**{**poor, "offset_short_2": {"offset_delay_ps": (66.7, 0.1)}}) == ()
    assert said(**{**poor, "short": {"offset_delay_ps": (0.0, None)}}) == ()


def test_no_length_at_all():
    nothing = {name.replace(" ", "_"): {} for name in LENGTHS}
    assert any("shift of the plane" in line for line in said(**nothing))


@pytest.mark.parametrize("load", [{}, {"resistance_ohm": (50.2, 0.5)}])
def test_without_a_resistance_the_scale_of_impedance_is_open(load):
    (line,) = said(load=load)
    assert "a common scale of all impedances" in line
    assert "DC resistance" in line


def test_a_line_of_known_impedance_fixes_the_scale_too():
    fixed = {"offset_delay_ps": (66.7, 0.1), "offset_z0_ohm": (49.8, 0.1)}
    assert said(load={}, offset_short_2=fixed) == ()


def test_both_may_be_open():
    lines = said(load={}, **lengths_known_to(5.0))
    assert len(lines) == 2


def half_a_wave_apart():
    """A flush short, a load and two offset shorts that meet the flush one at 5 GHz, and all at f → 0."""
    parts = {name: FIVE[name] for name in ("short", "load")}
    for name, delay in (("offset short 1", 100.0), ("offset short 2", 200.0)):
        parts[name] = ("short", [delay, 0.5, 50.0, 0.0, 0.0, 0.0, 0.0])
    return parts


def test_bands_in_which_offset_shorts_coincide_are_named():
    lines = [line for line in said(half_a_wave_apart()) if "coincide" in line]
    (line,) = lines
    found = re.findall(r"([\d.]+)(?: … ([\d.]+))? GHz", line)
    bands = [(float(low), float(high or low)) for low, high in found]
    assert any(low < 5.0 < high and high - low < 1.0 for low, high in bands)
    assert bands[0][0] == pytest.approx(0.05)
    assert not any(low < 1.6 < high for low, high in bands)


def test_an_open_tells_them_apart_again():
    parts = {**half_a_wave_apart(), "open": FIVE["open"]}
    assert not [line for line in said(parts) if "coincide" in line]
