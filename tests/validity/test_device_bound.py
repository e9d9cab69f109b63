"""The bound on a device, against sums that are written out, and against what is known beforehand."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.residual_map import device_weights
from stdfit.uncertainty.budget import radius
from stdfit.validity.device import bound as device_module
from stdfit.validity.device.bound import (
    all_phases,
    by_magnitude,
    device_bound,
    device_map,
    part_of,
    residual_terms,
    three_of,
)
from stdfit.validity.kit import curve, misfit_at, model

GRID = np.linspace(50e6, 6e9, 23)
LINE = 1.959963984540054  # 95 % of a normal variable on a line


def map_of(kit, grid=GRID, names=()):
    return device_map(kit, three_of(kit, names), grid)


def test_the_bound_is_the_radius_of_the_summed_errors_plus_the_misfits(modest_kit):
    """Σ wᵢ·Jᵢ is the derivative of what a device shows; its radius is taken as that of any one standard."""
    rng = np.random.default_rng(5)
    device = rng.uniform(-0.7, 0.7, (GRID.size, 6)) + 1j * rng.uniform(-0.7, 0.7, (GRID.size, 6))
    found = device_bound(map_of(modest_kit), device)
    three = [modest_kit.definition(name) for name in ("open", "short", "load")]
    gammas, designs = zip(*(model(modest_kit, one, GRID) for one in three), strict=True)
    misfits = [misfit_at(one, GRID) for one in three]
    for k in range(6):
        here = device[:, k]
        spread, own = np.zeros((GRID.size, len(modest_kit.order)), dtype=complex), np.zeros(GRID.size)
        for i in range(3):
            one, two = (gammas[j] for j in range(3) if j != i)
            weight = (here - one) * (here - two) / ((gammas[i] - one) * (gammas[i] - two))
            spread += weight[:, None] * designs[i]
            own += np.abs(weight * misfits[i]) ** 2
        expected = radius(spread, modest_kit.shares) + np.sqrt(own)
        np.testing.assert_allclose(found[:, k], expected, rtol=1e-9)
        assert (own > 0.0).any()


def test_a_device_equal_to_a_standard_has_its_bound(modest_kit):
    errors = map_of(modest_kit)
    bounds = device_bound(errors, errors.standards)
    for place, definition in enumerate(errors.definitions):
        np.testing.assert_allclose(bounds[:, place], curve(modest_kit, definition, GRID)[1], rtol=1e-9)


def test_many_frequencies_are_worked_on_in_blocks(modest_kit, monkeypatch):
    whole = by_magnitude(map_of(modest_kit), (0.3,))
    monkeypatch.setattr(device_module, "BLOCK", 5)
    for one, other in zip(by_magnitude(map_of(modest_kit), (0.3,)), whole, strict=True):
        np.testing.assert_array_equal(one, other)
    assert part_of(map_of(modest_kit), slice(3, 4)).frequency_hz.tolist() == [GRID[3]]


def test_the_worst_phase_is_found(modest_kit):
    """Against twenty times as many phases; and at half of the phases the bound is the typical one."""
    errors = map_of(modest_kit)
    worst, typical = by_magnitude(errors, (0.0, 0.1, 1.0))
    circle = np.exp(2j * np.pi * np.arange(960) / 960)
    for k, magnitude in enumerate((0.0, 0.1, 1.0)):
        fine = device_bound(errors, magnitude * circle)
        assert (fine.max(axis=1) <= worst[:, k] * 1.01).all()
        np.testing.assert_allclose(typical[:, k], np.median(fine, axis=1), rtol=0.02)
    assert (worst >= typical).all()
    assert (worst[:, 2] > 1.05 * typical[:, 2]).any()
    np.testing.assert_allclose(worst[:, 0], residual_terms(errors).directivity)
    np.testing.assert_allclose(worst[:, 0], typical[:, 0])


def test_terms_of_an_error_of_the_load_alone(by_hand):
    """D = ε_L, T = 0, M = −ε_L at +1, −1, 0; 1 Ω at 50 Ω reflects 0.01, on a line (derived)."""
    terms = residual_terms(map_of(by_hand({"scale": {"load.resistance_ohm": 1.0}})))
    np.testing.assert_allclose(terms.directivity, LINE * 0.01, rtol=1e-9)
    np.testing.assert_allclose(terms.source_match, LINE * 0.01, rtol=1e-9)
    np.testing.assert_allclose(terms.reflection_tracking, 0.0, atol=1e-15)


def test_a_shift_of_the_plane_that_all_share_turns_devices_and_distorts_none(by_hand):
    """ε = −2jωτ·Γ for every standard, so that T = 2ωτ and D = M = 0; shifts of their own do distort."""
    standards = {
        "open": ("open", [20.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]),
        "short": ("short", [20.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]),
        "load": ("load", [20.0, 0.0, 50.0, 40.0, 0.0, 0.0]),
    }
    owner = "short.offset_delay_ps"
    same = {"open.offset_delay_ps": owner, "load.offset_delay_ps": owner}
    errors = map_of(by_hand({"plane": {owner: 0.1}}, standards, same=same))
    turn = LINE * 4.0 * np.pi * GRID * 0.1e-12
    terms = residual_terms(errors)
    np.testing.assert_allclose(terms.reflection_tracking, turn, rtol=1e-9)
    # The root of what rounding leaves of a variance of about 1e-4.
    np.testing.assert_allclose(terms.directivity, 0.0, atol=1e-9)
    np.testing.assert_allclose(terms.source_match, 0.0, atol=1e-9)
    for magnitude in (0.1, 1.0):
        found = device_bound(errors, magnitude * all_phases())
        np.testing.assert_allclose(found, magnitude * turn[:, None] * np.ones(48), rtol=1e-9)
    alone = {f"plane of {name}": {f"{name}.offset_delay_ps": 0.1} for name in standards}
    apart = residual_terms(map_of(by_hand(alone, standards)))
    assert (apart.directivity > 0.1 * turn).all()
    assert (apart.source_match > 0.5 * turn).all()


MISFITS = {"open": (0.02, 0.02), "short": (0.04, 0.04), "load": (0.01, 0.01)}


def test_misfits_add_as_root_sum_of_squares(by_hand):
    """At Γ = j the weights at +1, −1, 0 are (j − 1)/2, −(1 + j)/2 and 2 (derived)."""
    kit = by_hand({"next to nothing": {"open.offset_delay_ps": 1e-9}}, misfits=MISFITS)
    expected = np.sqrt(0.5 * 0.02**2 + 0.5 * 0.04**2 + 4.0 * 0.01**2)
    np.testing.assert_allclose(device_bound(map_of(kit), np.array([1j])), expected, rtol=1e-8)


def test_stated_bounds_without_sources_may_share_their_causes_and_add_linearly(by_hand):
    kit = by_hand({}, misfits=MISFITS)
    assert kit.shares == ()
    expected = np.sqrt(0.5) * (0.02 + 0.04) + 2.0 * 0.01
    np.testing.assert_allclose(device_bound(map_of(kit), np.array([1j])), expected, rtol=1e-12)


def test_the_worst_correlation_length_counts_for_all_standards_at_once(modest_kit):
    """Lengths are tried one by one: the bound is the largest of those of each length alone."""
    device = 0.5 * all_phases()
    whole = device_bound(map_of(modest_kit), device)
    each = []
    for length in range(max(share.covariances.shape[0] for share in modest_kit.shares)):
        alone = tuple(
            replace(share, covariances=share.covariances[[min(length, len(share.covariances) - 1)]])
            for share in modest_kit.shares
        )
        each.append(device_bound(map_of(replace(modest_kit, shares=alone)), device))
    assert len(each) > 1
    np.testing.assert_allclose(whole, np.max(each, axis=0), rtol=1e-9)


def test_no_bound_where_standards_are_the_same(by_hand):
    """An offset short meets the open where 2ωτ = π: at 5 GHz for 50 ps."""
    kit = by_hand(
        {"load": {"load.resistance_ohm": 0.1}}, {"short": ("short", [50.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])}
    )
    errors = map_of(kit, np.array([2.5e9, 4.999e9, 5e9]))
    near = replace(errors, standards=np.where([[0], [0], [1]], [[1.0, 1.0, 0.0]], errors.standards))
    worst, typical = by_magnitude(near, (0.0, 1.0))
    assert np.isfinite(worst[:2]).all()
    assert np.isposinf(worst[2]).all() and np.isposinf(typical[2]).all()
    terms = residual_terms(near)
    for one in (terms.directivity, terms.reflection_tracking, terms.source_match):
        assert np.isfinite(one[:2]).all()
        assert np.isposinf(one[2])


def test_nothing_can_be_changed_afterwards(modest_kit):
    errors = map_of(modest_kit)
    arrays = [errors.frequency_hz, errors.standards, errors.designs, errors.misfits, *errors.covariances]
    arrays.append(residual_terms(errors).directivity)
    assert not any(one.flags.writeable for one in arrays)


def test_three_standards_are_chosen_or_named(by_hand):
    second = {"wide open": ("open", [30.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])}
    source = {"load": {"load.resistance_ohm": 0.1}}
    kit = by_hand(source, second)
    names = [one.name for one in three_of(kit)]
    assert names == ["open", "short", "load"]  # the first of two opens
    assert [one.name for one in three_of(kit, ["wide open", "short", "load"])] == [
        "wide open",
        "short",
        "load",
    ]
    opens = by_hand(source, {**second, "short": None})
    assert [one.name for one in three_of(opens)] == ["open", "load", "wide open"]
    with pytest.raises(RequestError, match="2 different standards are named"):
        three_of(kit, ["open", "open", "load"])
    with pytest.raises(RequestError, match="no standard named 'shrot'"):
        three_of(kit, ["open", "shrot", "load"])
    with pytest.raises(RequestError, match="has no open, short and load: open, load") as refused:
        three_of(by_hand(source, {"short": None}))
    assert "three standards" in refused.value.mend
    lost = by_hand(source, {"short": None, "load": None, **second, "third": second["wide open"], "w": FOURTH})
    with pytest.raises(RequestError, match="no open, short and load"):
        three_of(lost)


FOURTH = ("open", [40.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])


@pytest.mark.parametrize("hertz", [0.0, -1e9, 6e9 + 1.0, np.nan, np.inf])
def test_no_bound_beyond_the_readings_of_any_of_the_three(modest_kit, hertz):
    with pytest.raises(RequestError, match="outside the readings of the three standards"):
        map_of(modest_kit, np.array([1e9, hertz]))
    short = replace(modest_kit.definition("short"), read_top_hz=4e9)
    rest = tuple(short if one.name == "short" else one for one in modest_kit.definitions)
    with pytest.raises(RequestError) as refused:
        map_of(replace(modest_kit, definitions=rest), np.array([4.5e9]))
    assert "up to 4000000000 Hz" in refused.value.mend


def test_weights_may_be_given_for_each_frequency(modest_kit):
    errors = map_of(modest_kit)
    own = device_weights(errors.standards, 0.2 * errors.standards[:, [0]])
    np.testing.assert_allclose(
        device_module.weighted_bound(errors, own), device_bound(errors, 0.2 * errors.standards[:, [0]])
    )
