"""Wrong calls from a notebook are refused in one clear line, like wrong files."""

import numpy as np
import pytest
from matplotlib.figure import Figure

import stdfit


@pytest.mark.parametrize(
    "tolerances, what",
    [
        (0.02, "tolerances are a list of numbers"),
        (np.array(0.02), "tolerances are a list of numbers"),
        ("0.02", "tolerances are a list of numbers"),
        ([None], "tolerances are a list of numbers"),
        ([0.02, 0.0], "the tolerance 0 does not lie between 0 and 1"),
        ([1.0], "the tolerance 1 does not lie between 0 and 1"),
        ([-0.02], "the tolerance -0.02 does not lie between 0 and 1"),
        ([float("nan")], "the tolerance nan does not lie between 0 and 1"),
    ],
)
def test_tolerances(usual_kit, tolerances, what):
    with pytest.raises(stdfit.StdfitError) as refused:
        stdfit.limits(usual_kit, tolerances)
    assert refused.value.what == what
    assert refused.value.mend in ("write limits(kit, [0.02])", "try 0.02")


def test_tolerances_of_numpy_are_as_good(usual_kit):
    assert len(stdfit.limits(usual_kit, np.array([0.01, 0.02]))) == 2


def panels(count):
    return [*np.atleast_1d(Figure().subplots(count))]


@pytest.mark.parametrize(
    "draw",
    [
        lambda kit, axes: stdfit.plot_bound(axes, kit, "open"),
        lambda kit, axes: stdfit.plot_devices(axes, kit),
        lambda kit, axes: stdfit.plot_smith(axes, kit),
    ],
)
@pytest.mark.parametrize("wrong", [lambda: panels(2), lambda: np.array(panels(2)), lambda: None, Figure])
def test_one_panel(usual_kit, draw, wrong):
    with pytest.raises(stdfit.StdfitError, match=r"where the Axes of one panel is wanted"):
        draw(usual_kit, wrong())


@pytest.mark.parametrize(
    "draw, count",
    [
        (lambda kit, axes: stdfit.plot_deviation(axes, kit, "open"), 2),
        (lambda kit, axes: stdfit.plot_element(axes, kit, "open"), 1),
        (lambda kit, axes: stdfit.plot_element(axes, kit, "load"), 2),
    ],
)
def test_several_panels(usual_kit, draw, count):
    wanted = "one panel" if count == 1 else f"{count} panels"
    for wrong, given in ((panels(3), 3), (panels(1), 1), (panels(1)[0], 1), (7, 0), (None, 0)):
        if given != count:
            with pytest.raises(stdfit.StdfitError, match=f"^{given} axes for {wanted}"):
                draw(usual_kit, wrong)
    with pytest.raises(stdfit.StdfitError, match="where the Axes of one panel is wanted"):
        draw(usual_kit, ["axes"] * count)
    draw(usual_kit, panels(count))
