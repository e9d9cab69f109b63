"""Two kits side by side: known differences come out, in the right units, and what cannot be compared is refused."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.circuits.standard import IDEAL
from stdfit.validity.device.bound import by_magnitude, device_map, residual_terms, three_of
from stdfit.validity.device.compare import DEVICE, TERMS, compare, differences_at, kit_differences
from stdfit.validity.device.difference import bands_within, ratio_of
from stdfit.validity.device.pairing import ideal_like, pair_up
from stdfit.validity.kit import curve


def moved(kit, name, parameter, by):
    """The kit with one value of one standard moved."""
    definitions = [
        replace(
            one,
            parameters=tuple(
                replace(p, value=p.value + by, low=p.low + by, high=p.high + by) if p.name == parameter else p
                for p in one.parameters
            ),
        )
        if one.name == name
        else one
        for one in kit.definitions
    ]
    return replace(kit, definitions=tuple(definitions), files=())


def renamed(kit, **names):
    return replace(
        kit, definitions=tuple(replace(one, name=names.get(one.name, one.name)) for one in kit.definitions)
    )


@pytest.fixture(scope="module")
def grid(usual_kit):
    return np.linspace(1e8, 6e9, 60)


def test_a_kit_does_not_differ_from_itself(usual_kit):
    found = compare(usual_kit, usual_kit)
    for one in (*found.standards, *found.as_kits):
        assert one.largest[0] == one.largest_ratio[0] == 0.0
        assert one.bands == ((one.frequency_hz[0], one.frequency_hz[-1]),)
    assert found.exactly < 1e-14
    assert [one.what for one in found.as_kits] == [*TERMS, DEVICE]
    assert (found.pairing.alone_one, found.pairing.alone_two, found.pairing.apart) == ((), (), ())


def test_ideal_standards_are_ideal(usual_kit, grid):
    """Γ is +1, −1 and 0 without a bound, so the difference is the distance from them."""
    ideal = ideal_like(usual_kit)
    found = compare(usual_kit, ideal)
    for own, other, one in zip(
        usual_kit.definitions, ideal.definitions, differences_at(found, grid), strict=False
    ):
        exact, nothing = curve(ideal, other, grid)
        assert (exact == IDEAL[own.kind]).all()
        assert not nothing.any()
        gamma, bound = curve(usual_kit, own, grid)
        np.testing.assert_array_equal(one.difference, np.abs(gamma - IDEAL[own.kind]))
        np.testing.assert_array_equal(one.bound, bound)


def test_ideal_standards_of_another_reference(workshop):
    kit = workshop(reference_ohm=75.0, connections=2).kit()
    ideal = ideal_like(kit)
    for one in ideal.definitions:
        np.testing.assert_allclose(curve(ideal, one, np.array([1e9]))[0], IDEAL[one.kind], rtol=0, atol=1e-15)
    assert compare(kit, ideal).as_kits


def test_a_moved_resistance_is_found(usual_kit, grid):
    """ΔΓ = ΔR/(2·Zr) of a load near Zr: 1 Ω moves it by 0.01, at all frequencies, and no other standard."""
    found = compare(usual_kit, moved(usual_kit, "load", "resistance_ohm", 1.0))
    by_name = {one.what: one for one in found.standards}
    assert by_name["open"].largest[0] == by_name["short"].largest[0] == 0.0
    np.testing.assert_allclose(by_name["load"].difference, 0.01, rtol=0.05)
    _, bound = curve(usual_kit, usual_kit.definition("load"), by_name["load"].frequency_hz)
    np.testing.assert_allclose(by_name["load"].bound, np.sqrt(2.0) * bound, rtol=0.01)
    np.testing.assert_allclose(by_name["load"].ratio, by_name["load"].difference / by_name["load"].bound)
    ratio, hertz = by_name["load"].largest_ratio
    assert ratio == by_name["load"].ratio.max()
    assert by_name["load"].ratio[by_name["load"].frequency_hz == hertz] == ratio


def test_as_kits_to_first_order_is_the_exact_correction(usual_kit, grid):
    """What is left over falls fourfold with half the difference (counterpart of the residual formulas)."""

    def left(by):
        other = moved(moved(usual_kit, "load", "resistance_ohm", by), "open", "offset_delay_ps", 0.2 * by)
        three = pair_up(usual_kit, other).pairs
        *_, device = kit_differences(usual_kit, other, three, grid)
        known = np.stack([curve(other, one, grid)[0] for one in other.definitions], axis=-1)
        read = np.stack([curve(usual_kit, one, grid)[0] for one in usual_kit.definitions], axis=-1)
        circle = np.exp(2j * np.pi * np.arange(48) / 48)
        exact = np.abs(corrected(solve_error_box(known, read)[:, None], circle) - circle).max(axis=1)
        assert compare(usual_kit, other).exactly == pytest.approx(exact.max(), rel=0.02)
        return np.abs(device.difference - exact).max(), exact.max()

    (whole, size), (half, _) = left(0.5), left(0.25)
    assert whole < 0.05 * size
    assert half / whole == pytest.approx(0.25, rel=0.1)


def test_terms_of_a_moved_load(usual_kit):
    """At low frequency, with the standards at +1, −1 and 0: |D| = |M| = |ΔΓ_load| and T = 0 (see residual_map)."""
    low = np.array([60e6])
    other = moved(usual_kit, "load", "resistance_ohm", 0.5)
    d, t, m, device = kit_differences(usual_kit, other, pair_up(usual_kit, other).pairs, low)
    change = np.abs(
        np.diff([curve(kit, kit.definition("load"), low)[0] for kit in (usual_kit, other)], axis=0)
    )
    assert d.difference == pytest.approx(change.item(), rel=0.02)
    assert m.difference == pytest.approx(change.item(), rel=0.02)
    assert t.difference < 0.05 * change.item()
    # At Γ = ±j both act: D + M·Γ² = D − M.
    assert device.difference == pytest.approx(2.0 * change.item(), rel=0.02)


def test_bounds_as_kits_are_those_of_both_kits(usual_kit, modest_kit, grid):
    found = compare(usual_kit, modest_kit)
    told = differences_at(found, grid)[len(found.standards) :]
    maps = [device_map(kit, three_of(kit), grid) for kit in (usual_kit, modest_kit)]
    terms = [residual_terms(one) for one in maps]
    np.testing.assert_allclose(told[0].bound, np.hypot(*(one.directivity for one in terms)))
    np.testing.assert_allclose(told[1].bound, np.hypot(*(one.reflection_tracking for one in terms)))
    np.testing.assert_allclose(told[2].bound, np.hypot(*(one.source_match for one in terms)))
    worst = [by_magnitude(one, [1.0])[0][:, 0] for one in maps]
    assert (told[3].bound <= np.hypot(*worst) * (1 + 1e-12)).all()
    assert (told[3].bound >= np.max(worst, axis=0)).all()
    assert (told[3].ratio >= told[3].difference / told[3].bound * (1 - 1e-12)).all()


def test_ratios():
    ratio = ratio_of(np.array([0.0, 1.0, 1.0, 1.0, np.inf]), np.array([0.0, 0.0, 2.0, np.inf, 1.0]))
    assert ratio.tolist() == [0.0, np.inf, 0.5, 0.0, np.inf]


@pytest.mark.parametrize(
    "ratio, bands",
    [
        ([0.0, 0.5, 1.0, 0.9], ((1.0, 4.0),)),
        ([2.0, 2.0, 2.0, 2.0], ()),
        ([0.5, 1.5, 1.5, 0.5], ((1.0, 1.5), (3.5, 4.0))),
        ([2.0, 0.0, 2.0, 2.0], ((1.5, 2.5),)),
        ([np.inf, 0.0, 0.0, np.inf], ((2.0, 3.0),)),
    ],
)
def test_bands_within_the_bounds(ratio, bands):
    assert bands_within(np.arange(1.0, 5.0), np.array(ratio)) == bands


def test_counterparts_by_name_then_by_kind(usual_kit):
    other = renamed(usual_kit, open="plug with cap", load="load")
    pairs = pair_up(usual_kit, other).pairs
    assert [(pair.label, pair.by) for pair in pairs] == [
        ("open / plug with cap", "kind"),
        ("short", "name"),
        ("load", "name"),
    ]


def test_one_name_for_two_kinds_makes_no_counterparts(usual_kit):
    """An open that is called short in the other kit is matched by its kind."""
    other = renamed(usual_kit, open="short", short="open")
    assert [(pair.one.kind, pair.two.kind) for pair in pair_up(usual_kit, other).pairs] == [
        (kind, kind) for kind in ("open", "short", "load")
    ]


def test_what_is_ambiguous_has_no_counterpart(usual_kit):
    first, second, third = usual_kit.definitions
    one = replace(usual_kit, definitions=(first, replace(first, name="second open"), second, third))
    two = renamed(usual_kit, open="cap")
    pairing = pair_up(one, two)
    assert [pair.one.name for pair in pairing.pairs] == ["short", "load"]
    assert (pairing.alone_one, pairing.alone_two) == (("open", "second open"), ("cap",))
    found = compare(one, two)
    assert (found.three, found.as_kits) == ((), ())
    assert np.isnan(found.exactly)
    assert "not compared as kits" in found.notes[0]


def test_the_common_band(usual_kit):
    narrow = replace(
        usual_kit,
        definitions=tuple(replace(one, read_low_hz=1e9, read_top_hz=4e9) for one in usual_kit.definitions),
    )
    found = compare(usual_kit, narrow)
    for one in (*found.standards, *found.as_kits):
        assert (one.frequency_hz[0], one.frequency_hz[-1]) == (1e9, 4e9)
    with pytest.raises(RequestError, match="lies outside the readings"):
        differences_at(found, np.array([4.1e9]))


def test_a_standard_without_common_band_is_left_out(usual_kit):
    first, *others = usual_kit.definitions
    above = replace(usual_kit, definitions=(replace(first, read_low_hz=7e9, read_top_hz=8e9), *others))
    found = compare(usual_kit, above)
    assert [pair.label for pair in found.pairing.apart] == ["open"]
    assert (found.pairing.alone_one, found.pairing.alone_two) == ((), ())
    assert [one.what for one in found.standards] == ["short", "load"]
    assert found.as_kits == ()


def test_what_cannot_be_compared(usual_kit):
    def refused(other, words):
        with pytest.raises(RequestError, match=words) as fault:
            compare(usual_kit, other)
        assert str(fault.value).count("\n") == 1

    refused(replace(usual_kit, reference_ohm=75.0), "different reference impedances, 50 and 75 Ω")
    refused(replace(usual_kit, connector="type n"), "different connectors, SMA and type N")
    first, *_ = usual_kit.definitions
    refused(
        replace(usual_kit, definitions=(replace(first, read_low_hz=7e9, read_top_hz=8e9),)),
        "no band in common",
    )
    only_open = replace(usual_kit, definitions=(first,))
    with pytest.raises(RequestError, match="no standard of one kit has a counterpart"):
        compare(only_open, replace(usual_kit, definitions=usual_kit.definitions[1:]))


@pytest.mark.parametrize("connector", ["sma", "SMA female", "", "home-made screw"])
def test_connectors_that_are_not_known_to_differ(usual_kit, connector):
    assert compare(usual_kit, replace(usual_kit, connector=connector)).standards


def test_errors_in_common_are_told(usual_kit, modest_kit):
    """Both kits are simulated, without files; their analysers have residuals."""
    (note,) = compare(usual_kit, modest_kit).notes
    assert note.startswith("both kits carry analyser residuals")
    assert "connections" not in note
    assert "noise" not in note
    assert compare(usual_kit, ideal_like(usual_kit)).notes == ()


def test_files_in_common_are_told(usual_kit):
    from stdfit.validity.kit import SourceFile

    file = SourceFile("open", "open-1.s1p", "0" * 64)
    one, two = (
        replace(usual_kit, files=(file, SourceFile("load", "x", sha))) for sha in ("1" * 64, "2" * 64)
    )
    (note,) = compare(one, two).notes
    assert note.startswith("a source file is in both kits")


def test_kits_without_sources_are_compared_by_their_misfits(usual_kit, grid):
    parts = tuple(
        replace(one, parameters=tuple(replace(p, of="") for p in one.parameters))
        for one in usual_kit.definitions
    )
    bare = replace(usual_kit, definitions=parts, order=(), shares=())
    found = compare(bare, moved(bare, "load", "resistance_ohm", 1.0))
    load = differences_at(found, grid)[2]
    np.testing.assert_array_equal(load.bound, np.hypot(*2 * [curve(bare, bare.definition("load"), grid)[1]]))
    assert found.as_kits[-1].largest[0] > 0.01


def test_two_standards_that_are_the_same_give_no_end(usual_kit):
    """A correction with two equal standards does not exist: the bound has no end, and so has the difference."""
    first, _, third = usual_kit.definitions
    twin = replace(first, name="short")
    one = replace(usual_kit, definitions=(first, twin, third))
    found = compare(one, moved(one, "open", "offset_delay_ps", 1.0))
    assert np.isinf(found.as_kits[-1].largest[0])
    assert found.as_kits[-1].largest_ratio[0] == 0.0
    assert compare(one, one).as_kits[-1].largest[0] == 0.0
