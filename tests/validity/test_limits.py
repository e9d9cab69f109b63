"""Limits of kits and standards: each cause has its words, and every route gives the same limit."""

import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.uncertainty.budget import Share, parts_of_variance, radius
from stdfit.validity.evidence.causes import cause
from stdfit.validity.evidence.sharing import shared_out
from stdfit.validity.kit import curve, misfit_at, model, total_covariance
from stdfit.validity.limits import TOLERANCES, ladder, limits
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit


def of(kit, name, within):
    ((_, each),) = limits(kit, [within])
    return each[[one.name for one in kit.definitions].index(name)]


def test_the_readings_end(modest_kit):
    limit = of(modest_kit, "load", 0.1)
    assert limit.limit_hz == modest_kit.definition("load").read_top_hz
    assert limit.reason == "the readings end here"


def test_the_connector_ends_first(modest_kit):
    limit = of(replace(modest_kit, top_hz=4e9), "load", 0.1)
    assert limit.limit_hz == 4e9
    assert "the next mode begins, or the connector family ends" in limit.reason


def test_a_connector_that_ends_above_the_readings_does_not_matter(modest_kit):
    for top_hz in (6e9, 18e9, np.inf):
        assert of(replace(modest_kit, top_hz=top_hz), "load", 0.1).reason == "the readings end here"


def test_a_connector_that_ends_below_the_readings(modest_kit):
    """Nothing may be said above the connector's top, not even at the first reading."""
    limit = of(replace(modest_kit, top_hz=10e6), "load", 0.1)
    assert limit.limit_hz <= 50e6


def test_a_source_is_named_with_its_part(modest_kit):
    limit = of(modest_kit, "short", 0.015)
    assert 0.0 < limit.limit_hz < 6e9
    name, part, *_ = limit.reason.split(", ")
    assert name in {share.name.partition(" (")[0] for share in modest_kit.shares}
    assert 0 < float(part.split(" %")[0]) <= 100


def with_misfit(kit, bound):
    first = kit.definitions[0]
    misfit = replace(first, misfit_hz=np.array([50e6, 3e9, 3.1e9, 6e9]), misfit=np.array(bound))
    return replace(kit, definitions=(misfit, *kit.definitions[1:]))


def test_the_misfit_ends_it(modest_kit):
    limit = of(with_misfit(modest_kit, [0.0, 0.0, 0.5, 0.5]), "open", 0.05)
    assert 3e9 < limit.limit_hz < 3.1e9
    assert re.fullmatch(
        r"the readings leave the model (here|just above) \(misfit\)(; at the limit)?.* % of the bound.*",
        limit.reason,
    )


def test_a_misfit_at_one_point_alone_is_not_stepped_over(modest_kit):
    kit = with_misfit(modest_kit, [0.0, 0.0, 0.5, 0.0])
    assert of(kit, "open", 0.05).limit_hz < 3.1e9


def test_the_kit_ends_with_its_worst_standard(modest_kit):
    for whole, each in limits(modest_kit, TOLERANCES):
        assert whole.limit_hz == min(one.limit_hz for one in each)
        names = [
            d.name
            for d, one in zip(modest_kit.definitions, each, strict=True)
            if one.limit_hz == whole.limit_hz
        ]
        assert whole.reason.split(": ")[0] in names


def test_the_bound_keeps_the_tolerance_up_to_the_limit(modest_kit):
    for definition in modest_kit.definitions:
        limit = of(modest_kit, definition.name, 0.02)
        below = np.linspace(definition.read_low_hz, limit.limit_hz, 777)
        assert (curve(modest_kit, definition, below)[1] <= 0.02 * (1 + 1e-3)).all()
        if limit.limit_hz < definition.read_top_hz:
            above = curve(modest_kit, definition, np.array([limit.limit_hz * 1.01]))[1]
            assert above[0] > 0.02


def test_a_bound_that_fails_from_the_first_reading_on_gives_0(modest_kit):
    limit = of(modest_kit, "open", 1e-9)
    assert limit.limit_hz == 0.0
    assert limit.reason


def test_the_ladder_rises_with_the_tolerance_and_holds_the_one_asked_for(modest_kit):
    rungs = ladder(replace(modest_kit, within=0.017))
    tolerances = [rung.within for rung in rungs]
    assert tolerances == sorted({*TOLERANCES, 0.017})
    for column in [[rung.kit_hz for rung in rungs], *np.array([rung.standards_hz for rung in rungs]).T]:
        assert (np.diff(column) >= 0.0).all()
    assert rungs[0].kit_hz < rungs[-1].kit_hz


def test_the_kit_carries_its_own_limits(modest_kit):
    ((whole, each),) = limits(modest_kit, [modest_kit.within])
    assert modest_kit.limit == whole
    assert [definition.limit for definition in modest_kit.definitions] == each
    assert modest_kit.ladder == ladder(modest_kit)


def test_a_kit_file_gives_the_limits_of_the_fit(modest_kit):
    """No command goes back to the readings: the file must hold all that a limit needs, to the last digit."""
    read = parse_kit(kit_text(modest_kit), "kit.toml")
    assert limits(read, TOLERANCES) == limits(modest_kit, TOLERANCES)
    for definition, other in zip(read.definitions, modest_kit.definitions, strict=True):
        grid = np.linspace(10e6, 6e9, 99)
        for one, two in zip(curve(read, definition, grid), curve(modest_kit, other, grid), strict=True):
            np.testing.assert_array_equal(one, two)


@pytest.mark.parametrize("hertz", [0.0, -1e9, 6e9 + 1.0, np.nan, np.inf])
def test_no_bound_is_given_where_nothing_is_known(modest_kit, hertz):
    with pytest.raises(RequestError, match="lies outside the readings of 'open'") as caught:
        curve(modest_kit, modest_kit.definition("open"), np.array([1e9, hertz]))
    assert "up to 6000000000 Hz" in caught.value.mend


def test_an_unknown_standard(modest_kit):
    with pytest.raises(RequestError, match="no standard named 'thru'") as caught:
        modest_kit.definition("thru")
    assert caught.value.mend == "it holds: open, short, load"


def test_a_step_of_the_misfit_is_told_although_it_is_no_part_yet(modest_kit):
    steep = replace(
        modest_kit.definitions[0],
        misfit_hz=np.array([50e6, 3e9, 3.0000001e9, 6e9]),
        misfit=np.array([0.0, 0.0, 0.5, 0.5]),
    )
    kit = replace(modest_kit, definitions=(steep, *modest_kit.definitions[1:]))
    bound = float(curve(kit, steep, np.array([3e9]))[1][0])
    limit = of(kit, "open", 1.2 * bound)
    assert limit.limit_hz == pytest.approx(3e9, rel=1e-6)
    begins = "the readings leave the model just above (misfit); at the limit analyser residuals, "
    assert limit.reason.startswith(begins)
    assert limit.reason.endswith("; misfit 17 %")  # 0.2/1.2


def test_the_parts_of_a_reason_are_those_of_the_bound_at_the_limit(modest_kit):
    """As pictures and tables share it out; the second is told from a tenth on."""
    kit = with_misfit(modest_kit, [0.005, 0.005, 0.005, 0.005])
    limit = of(kit, "open", 0.02)
    assert 0.0 < limit.limit_hz < 6e9
    at, opened = np.array([limit.limit_hz]), kit.definition("open")
    _, design = model(kit, opened, at)
    kinds, parts = shared_out(design, kit.shares, radius(design, kit.shares), misfit_at(opened, at))
    known = dict(zip(kinds, 100.0 * parts[:, 0] / parts.sum(), strict=True))
    first, second = limit.reason.split("; ")
    assert first.startswith(f"analyser residuals, {known['analyser residuals']:.0f} % of the bound, ")
    assert second == f"misfit {known['misfit']:.0f} %" == "misfit 25 %"


def test_the_largest_part_is_the_reason_even_where_the_sources_together_are_more(modest_kit):
    shares = tuple(
        Share(name, np.inf, np.eye(2)[None]) for name in ("connections (plane)", "noise", "drift (a)")
    )
    kit = replace(modest_kit, shares=shares)
    assert cause(kit, np.array([1.0, 1.0j]), 0.012, 0.008).startswith(
        "the readings leave the model here (misfit), 40 % of the bound; connections 20 %"
    )
    assert cause(kit, np.array([1.0, 1.0j]), 0.018, 0.001) == ("connections, 32 % of the bound; noise 32 %")


def test_parts_of_the_variance(modest_kit):
    """By hand: one quantity acts on the real part, the other on the imaginary part."""
    design = np.array([1.0, 1.0j])
    one = Share("one", np.inf, np.array([[[3.0, 0.0], [0.0, 0.0]]]))
    other = Share("other", np.inf, np.array([[[0.0, 0.0], [0.0, 0.5]], [[0.0, 0.0], [0.0, 1.0]]]))
    np.testing.assert_allclose(parts_of_variance(design[None], [one, other])[:, 0], [0.75, 0.25])
    kit = replace(modest_kit, shares=(other, one))
    assert cause(kit, design, 0.02, 0.0) == "one, 75 % of the bound; other 25 %"
    half = Share("pair (a)", np.inf, np.array([[[2.0, 0.0], [0.0, 0.0]]]))
    rest = Share("pair (b)", np.inf, np.array([[[1.5, 0.0], [0.0, 0.0]]]))
    # Neither half of the pair is the largest source, but together they are.
    kit = replace(modest_kit, shares=(one, half, rest))
    assert cause(kit, design, 0.02, 0.0) == "pair, 54 % of the bound, most of it a; one 46 %"
    three = [
        Share(f"set ({k})", np.inf, np.array([[[v, 0.0], [0.0, 0.0]]]))
        for k, v in (("a", 3.0), ("b", 4.0), ("c", 3.0))
    ]
    said = cause(replace(modest_kit, shares=tuple(three)), design, 0.02, 0.0)
    assert said == "set, 100 % of the bound, above all b"
    assert total_covariance([one, other]).tolist() == [[3.0, 0.0], [0.0, 1.0]]
    assert parts_of_variance(np.zeros((1, 2)), [one, other]).tolist() == [[0.0], [0.0]]


def test_given_values_are_told_by_name(workshop):
    """By residuals of 20 dB the readings tell a resistance to 5 Ω; 0.5 Ω are given, and a delay that is sure."""
    given = {"load": {"resistance_ohm": (50.3, 0.5)}}
    shop = workshop(given=given, residual_db=20.0)
    for extra, said in (
        ({}, "given values (resistance of load), "),
        ({"short": {"offset_delay_ps": (25.0, 0.01)}}, "given values, "),
    ):
        kit = replace(shop, given={**given, **extra}).kit()
        _, design = model(kit, kit.definition("load"), np.array([1e8]))
        reason = cause(kit, design[0], 0.02, 0.001)
        assert reason.startswith(said)
        assert ("most of it resistance of load" in reason) == bool(extra)
