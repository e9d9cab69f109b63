"""Tables and plots for notebooks: the figures of a kit, and every drawing on axes of one's own."""

import warnings
from dataclasses import replace

import numpy as np
import pytest
from matplotlib import rc_context
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

import stdfit
from stdfit.base.errors import RequestError
from stdfit.validity.kit import curve, misfit_at
from stdfit.writing.plots import plot_bound, plot_deviation, plot_devices, plot_element, plot_smith


def test_parameters(usual_kit):
    table = stdfit.parameters(usual_kit)
    for one in usual_kit.definitions:
        for parameter in one.parameters:
            if parameter.name == "offset_delay_ps":
                row = table.loc[(one.name, "offset delay")]
                assert (row["value"], row["u"], row["role"]) == (parameter.value, parameter.u, parameter.role)
                assert (row["low"], row["high"], row["unit"]) == (parameter.low, parameter.high, "ps")
    sums = table[table["role"] == "sum"]
    assert list(sums.index.get_level_values("standard")) == [
        one.name for one in usual_kit.definitions for _ in one.combinations
    ]
    assert table.index.is_unique


@pytest.mark.parametrize("at_hz", [None, 1e9])
def test_budget(modest, at_hz):
    table = stdfit.budget(modest, at_hz)
    assert table.index.is_unique
    assert table["part"].groupby("standard").sum().to_numpy() == pytest.approx([1.0, 1.0, 1.0], abs=1e-12)
    for one in modest.definitions:
        own = table.loc[one.name]
        hertz = one.limit.limit_hz if at_hz is None else at_hz
        assert set(own["frequency_hz"]) == {hertz}
        at = np.array([hertz])
        assert own.loc["bound", "alone"] == curve(modest, one, at)[1][0]
        assert own.loc["misfit", "alone"] == misfit_at(one, at)[0]
        parts = own["part"].dropna()
        assert set(parts.index) == {"misfit", *(share.name for share in modest.shares)}
        assert parts["misfit"] * own.loc["bound", "alone"] == pytest.approx(
            own.loc["misfit", "alone"], rel=1e-12
        )
        parts = parts.drop("misfit")
        assert (np.diff(parts) <= 0.0).all()
        # Root sum of squares of what each source has alone; degrees of freedom and shape make it differ a little.
        joined = np.sqrt((own.loc[parts.index, "alone"] ** 2).sum()) + own.loc["misfit", "alone"]
        assert joined == pytest.approx(own.loc["bound", "alone"], rel=0.2)


@pytest.fixture(scope="module")
def modest(workshop):
    return workshop(residual_db=38.0).kit()


def test_a_kit_without_sources_has_its_bound_as_misfit(usual_kit):
    table = stdfit.budget(replace(usual_kit, shares=()), 1e9)
    for one in usual_kit.definitions:
        assert list(table.loc[one.name].index) == ["misfit", "bound"]


def test_a_budget_beyond_the_readings_is_refused(usual_kit):
    with pytest.raises(RequestError, match="outside the readings"):
        stdfit.budget(usual_kit, 7e9)


def pixels_of(figure):
    """Return red, green and blue of a figure, shape (rows, columns, 3)."""
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    return np.asarray(canvas.buffer_rgba())[..., :3].astype(int)


def drawn(*plots):
    """Draw on axes of an ordinary figure, and return them."""
    figure = Figure(figsize=(5, 3 * len(plots)), layout="constrained")
    panels = figure.subplots(len(plots), squeeze=False)[:, 0]
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for axes, plot in zip(panels, plots, strict=True):
            plot(axes)
        assert pixels_of(figure).std() > 1.0
    return panels


def test_every_plot_draws(modest):
    panels = drawn(
        lambda axes: plot_bound(axes, modest, "open"),
        lambda axes: plot_element(axes, modest, "short"),
        lambda axes: plot_devices(axes, modest),
        lambda axes: plot_smith(axes, modest),
    )
    assert [bool(axes.get_legend()) for axes in panels] == [True, True, False, True]
    assert not any(axes.axison for axes in panels)


@pytest.mark.parametrize("name", ["open", "short", "load"])
def test_deviations_of_each_kind(modest, name):
    figure = Figure(figsize=(5, 6), layout="constrained")
    pair = figure.subplots(2)
    assert plot_deviation(pair, modest, name) is pair
    assert pixels_of(figure).std() > 1.0
    assert pair[1].get_legend() is not None


def test_elements_take_a_panel_for_each_part(modest):
    figure = Figure()
    assert len(plot_element(figure.subplots(2), modest, "load")) == 2
    with pytest.raises(RequestError, match="1 axes for 2 panels"):
        plot_element(figure.subplots(), modest, "load")
    with pytest.raises(RequestError, match="1 axes for 2 panels"):
        plot_deviation([figure.subplots()], modest, "open")


@pytest.mark.parametrize("usetex", [False, True])
def test_names_and_kinds_are_no_formulas(modest, usetex):
    """A name with a dollar sign is drawn as it is, and formulas in the user's own texts stay formulas."""
    names = [f"$\\frac{{$ {k}_" for k in range(3)]
    kit = replace(
        modest,
        definitions=tuple(
            replace(one, name=name) for one, name in zip(modest.definitions, names, strict=True)
        ),
        shares=tuple(replace(one, name=f"$\\frac{{$ {k}") for k, one in enumerate(modest.shares)),
    )
    figure = Figure(figsize=(5, 20))
    bound, above, below, element, devices, smith = figure.subplots(6)
    own = bound.set_title("$x^2$")
    with rc_context({"text.usetex": usetex}):
        plot_bound(bound, kit, names[0])
        plot_deviation([above, below], kit, names[1])
        plot_element(element, kit, names[0])
        plot_devices(devices, kit)
        plot_smith(smith, kit)
    assert pixels_of(figure).std() > 1.0
    assert names[0] in [text.get_text() for text in smith.get_legend().get_texts()]
    assert own.get_parse_math()


def test_what_cannot_be_plotted_is_said(modest):
    axes = Figure().subplots()
    with pytest.raises(RequestError, match="no standard named 'thru'"):
        plot_bound(axes, modest, "thru")
    alone = replace(modest, definitions=modest.definitions[:1])
    for plot in (plot_devices, plot_smith):
        with pytest.raises(RequestError, match="three standards"):
            plot(axes, alone)


def test_points_are_not_lost_in_pixels(modest):
    """Readings are strokes of no length, which pixels lose where paths are simplified: each column shows a few."""
    figure = Figure(figsize=(5, 6), dpi=100)
    pair = figure.subplots(2)
    plot_deviation(pair, modest, "open")
    pixels = pixels_of(figure)
    reddish = (pixels[..., 0] - pixels[..., 2]) > 60
    box = pair[0].get_window_extent()
    columns = reddish[: pixels.shape[0] // 2, int(box.x0) + 3 : int(box.x1) - 3].any(axis=0)
    assert columns.mean() > 0.2
