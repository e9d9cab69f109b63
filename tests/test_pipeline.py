"""From a bench to a kit: known truth inside the model family, and how bounds answer to what is known."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import InputError, PhysicsError, ReadingError
from stdfit.base.records import Sweep
from stdfit.pipeline import characterise
from stdfit.uncertainty.budget import radius
from stdfit.validity.kit import curve, model, total_covariance
from stdfit.validity.limits import limits
from stdfit.writing.kit_file import kit_text

FIXED = {
    "open": {"offset_loss_gohm_per_s": (1.0,), "c0": (45.0,)},
    "short": {"offset_loss_gohm_per_s": (1.0,), "l0": (5.0,)},
}
"""Everything but the delays is known: no assumed evidence mixes in."""


def parameter(kit, standard, name):
    return next(one for one in kit.definition(standard).parameters if one.name == name)


def check_truth(bench, kit):
    """Every curve must lie inside its bound, and every fitted value inside its interval."""
    for definition in kit.definitions:
        grid = np.linspace(definition.read_low_hz, definition.fit_top_hz, 200)
        gamma, bound = curve(kit, definition, grid)
        error = np.abs(gamma - bench.truth(definition.name, grid))
        assert (error <= bound).all(), definition.name
        assert (bound < 0.03).all(), definition.name
        for one, true in zip(definition.parameters, bench.values[definition.name][1], strict=True):
            if one.role not in ("unused", "held"):
                assert one.low <= true <= one.high, f"{definition.name}.{one.name}"


@pytest.mark.parametrize("seed", range(3))
def test_a_known_truth_is_recovered(workshop, seed):
    """Connections repeat to the noise: what is left of the error is far below the stated residuals."""
    bench = workshop(seed=seed, shift_ps=0.0)
    kit = bench.kit()
    check_truth(bench, kit)
    for definition in kit.definitions:
        grid = np.linspace(definition.read_low_hz, definition.read_top_hz, 200)
        gamma, _ = curve(kit, definition, grid)
        assert np.abs(gamma - bench.truth(definition.name, grid)).max() < 5e-4
    assert kit.warnings == ()
    assert kit.limit.limit_hz > 5e9
    assert parameter(kit, "load", "resistance_ohm").value == pytest.approx(50.3, abs=0.02)
    assert kit.definition("open").combinations[0].value == pytest.approx(27.25, abs=0.2)


@pytest.mark.parametrize("connector, reference_ohm", [("N 75", 75.0), ("SMA", 50.0)])
def test_other_reference_impedances(workshop, connector, reference_ohm):
    bench = workshop(reference_ohm=reference_ohm, connector=connector, shift_ps=0.0)
    kit = bench.kit()
    check_truth(bench, kit)
    assert kit.reference_ohm == reference_ohm
    assert parameter(kit, "load", "resistance_ohm").value == pytest.approx(1.006 * reference_ohm, rel=1e-3)
    assert parameter(kit, "open", "offset_z0_ohm").value == pytest.approx(reference_ohm, rel=0.03)


def test_what_an_order_leaves_out_is_bounded_even_where_a_source_could_explain_it(workshop):
    """20 pH in a load are 0.005 at 6 GHz. Where BNC's repeatability may have made them, they still may be real."""
    bench = workshop(reference_ohm=75.0, connector="BNC")
    kit = bench.kit()
    load = kit.definition("load")
    grid = np.linspace(load.read_low_hz, load.fit_top_hz, 200)
    gamma, bound = curve(kit, load, grid)
    assert (np.abs(gamma - bench.truth("load", grid)) <= bound).all()


def test_the_connector_family_sets_the_top(workshop):
    kit = workshop(connector="BNC").kit()
    assert kit.top_hz == 4e9
    assert kit.limit.limit_hz <= 4e9


def test_a_row_at_zero_frequency_changes_nothing(workshop, usual_kit):
    bench = workshop()
    ends = {"open": 1.0, "short": -1.0, "load": 0.003}
    with_zero = {
        name: [
            Sweep(np.append(0.0, sweep.frequency_hz), np.append(ends[name], sweep.gamma), 50.0, sweep.name)
            for sweep in sweeps
        ]
        for name, sweeps in bench.readings().items()
    }
    kit = characterise(bench.bench(), with_zero, created="2000-01-01")
    assert kit_text(kit) == kit_text(usual_kit)


def test_one_body_for_all(workshop):
    bench = workshop(same_offset_as={"open": "short"}, shift_ps=0.0)
    kit = bench.kit()
    check_truth(bench, kit)
    for name in ("offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm"):
        shared, own = parameter(kit, "open", name), parameter(kit, "short", name)
        assert (shared.value, shared.u, shared.of) == (own.value, own.u, own.of)
    assert parameter(kit, "open", "offset_delay_ps").of == "short.offset_delay_ps"
    assert "open.offset_delay_ps" not in kit.order


def test_a_shared_body_makes_standards_move_together(workshop):
    """Where lines are shared the joint covariance must tie the curves: dΓ of the open follows the short's line."""
    kit = workshop(same_offset_as={"open": "short"}).kit()
    place = kit.order.index("short.offset_delay_ps")
    for name in ("open", "short"):
        _, design = model(kit, kit.definition(name), np.array([3e9]))
        assert abs(design[0, place]) > 0.01
    assert abs(model(kit, kit.definition("load"), np.array([3e9]))[1][0, place]) == 0.0


def test_one_connection_is_warned_of_with_the_figures_assumed(workshop, usual_kit):
    one = workshop(connections=1).kit()
    (warning,) = one.warnings
    assert "one connection" in warning
    assert "20 mΩ" in warning
    assert "0.2 ps" in warning
    several = usual_kit
    grid = np.array([3e9])
    for name in ("open", "short"):
        assert (
            curve(one, one.definition(name), grid)[1]
            > 1.5 * curve(several, several.definition(name), grid)[1]
        )


def test_no_stated_residual_is_warned_of_with_the_figures_assumed(workshop):
    (warning,) = workshop(residual_db=None).kit().warnings
    assert "36 … 32 dB directivity" in warning
    assert "34 … 28 dB source match" in warning
    assert "[analyser.residual]" in warning


def test_an_unknown_connector_is_warned_of(workshop):
    kit = workshop(connector="banana").kit()
    (warning,) = kit.warnings
    assert "'banana'" in warning
    assert kit.top_hz == np.inf


def test_the_same_bench_gives_the_same_bytes(workshop, usual_kit):
    assert kit_text(workshop().kit()) == kit_text(usual_kit)


def test_another_seed_gives_another_kit(workshop, usual_kit):
    assert kit_text(workshop(seed=5).kit()) != kit_text(usual_kit)


def test_doubled_residuals_double_the_bound(workshop):
    """With everything else held the bound is the analyser's alone, and linear in what is stated of it."""
    values = workshop().values
    values["open"] = ("open", [25.0, 1.0, 50.0, 45.0, 0.0, 0.0, 0.0])
    fields = {"values": values, "connections": 16, "noise": 2e-5, "shift_ps": 0.0, "given": FIXED}
    small, large = (
        workshop(polynomial="constant", residual_db=db, **fields).kit()
        for db in (46.0, 46.0 - 20 * np.log10(2))
    )
    grid = np.array([0.3e9, 1e9, 3e9, 5e9])
    for one, two in zip(small.definitions, large.definitions, strict=True):
        assert (one.shape, one.fit_top_hz) == (two.shape, two.fit_top_hz)
        ratio = curve(large, two, grid)[1] / curve(small, one, grid)[1]
        # Far down the assumed evidence on the terms that the order leaves out has a part in the bound too.
        assert ((ratio > 1.5) & (ratio < 2.02)).all()
        np.testing.assert_allclose(ratio[3:], 2.0, rtol=0.02)
    assert small.limit.limit_hz >= large.limit.limit_hz


def test_evidence_on_the_delay_narrows_the_parts_and_not_the_sum(workshop, usual_kit):
    without = usual_kit
    ruler, drawing = (
        workshop(given={"open": {"offset_delay_ps": given}}).kit() for given in ((25.0, 0.5), (25.0, 0.05))
    )
    u = [parameter(kit, "open", "offset_delay_ps").u for kit in (without, ruler, drawing)]
    assert u[0] > 2.0 * u[1] > 4.0 * u[2]
    assert u[2] == pytest.approx(0.05, rel=0.05)
    u = [parameter(kit, "open", "c0").u for kit in (without, ruler, drawing)]
    assert u[0] > 2.0 * u[1] > 4.0 * u[2]
    sums = [kit.definition("open").combinations[0].u for kit in (without, ruler, drawing)]
    np.testing.assert_allclose(sums, sums[0], rtol=0.05)


def test_evidence_on_the_resistance_narrows_the_curve_at_the_low_end(workshop):
    bounds = []
    for given in (None, (50.3, 0.05), (50.3, 0.005)):
        kit = workshop(residual_db=46.0, given={"load": {"resistance_ohm": given}} if given else {}).kit()
        bounds.append(curve(kit, kit.definition("load"), np.array([0.2e9]))[1][0])
    assert bounds[0] > 2.0 * bounds[1] > 4.0 * bounds[2]


def test_held_values_stay_as_they_were_given(workshop):
    kit = workshop(given=FIXED).kit()
    c0 = parameter(kit, "open", "c0")
    assert (c0.value, c0.u, c0.role, c0.of) == (45.0, 0.0, "held", "")
    assert "open.c0" not in kit.order


def test_a_standard_of_which_everything_is_held(workshop):
    values = workshop().values["load"][1]
    names = ("offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm", "resistance_ohm")
    held = dict(zip((*names, "inductance_ph", "capacitance_ff"), [(value,) for value in values], strict=True))
    kit = workshop(given={"load": held}).kit()
    assert [one.value for one in kit.definition("load").parameters] == values


def test_order_and_shapes_of_the_covariance(usual_kit):
    kit = usual_kit
    fitted = [one.of for definition in kit.definitions for one in definition.parameters if one.of]
    assert sorted(kit.order) == sorted(fitted)
    assert all(one in kit.order for one in fitted)
    lengths = {share.covariances.shape[0] for share in kit.shares}
    assert lengths <= {1, max(lengths)}
    for share in kit.shares:
        assert share.covariances.shape[1:] == (len(kit.order),) * 2
        for matrix in share.covariances:
            np.testing.assert_allclose(matrix, matrix.T, rtol=1e-9, atol=1e-12 * np.abs(matrix).max())
    assert len({share.name for share in kit.shares}) == len(kit.shares)
    names = " ".join(share.name for share in kit.shares)
    for word in ("directivity", "tracking", "source match", "plane shift", "noise", "assumed values"):
        assert word in names


def test_the_uncertainties_of_the_parameters_are_those_of_the_covariance(usual_kit):
    kit = usual_kit
    diagonal = np.sqrt(np.diag(total_covariance(kit.shares)))
    for definition in kit.definitions:
        for one in definition.parameters:
            if one.of:
                assert diagonal[kit.order.index(one.of)] == pytest.approx(one.u, rel=0.25)
                assert diagonal[kit.order.index(one.of)] <= one.u * (1 + 1e-9)


def test_the_bound_is_the_radius_plus_the_misfit(usual_kit):
    kit = usual_kit
    for definition in kit.definitions:
        grid = definition.misfit_hz
        _, design = model(kit, definition, grid)
        np.testing.assert_allclose(
            curve(kit, definition, grid)[1], radius(design, kit.shares) + definition.misfit, rtol=1e-12
        )


def test_each_source_adds_to_the_bound(usual_kit):
    kit = usual_kit
    grid = np.linspace(1e8, 5e9, 9)
    for k, share in enumerate(kit.shares):
        less = replace(kit, shares=kit.shares[:k] + kit.shares[k + 1 :])
        for one, two in zip(kit.definitions, less.definitions, strict=True):
            # Leaving out a source with few degrees of freedom may lower the coverage factor, never raise the sum.
            if np.isinf(share.freedom):
                assert (curve(kit, one, grid)[1] >= 0.9 * curve(less, two, grid)[1]).all()


def test_a_wider_tolerance_never_shortens_the_limit(workshop):
    narrow, wide = (workshop(within=within, residual_db=42.0).kit() for within in (0.01, 0.05))
    assert narrow.within == 0.01
    assert narrow.limit.limit_hz <= wide.limit.limit_hz
    assert limits(narrow, [0.05])[0][0].limit_hz >= narrow.limit.limit_hz


def test_standards_called_what_they_are_not(workshop):
    bench = workshop()
    readings = bench.readings()
    readings["open"], readings["short"] = readings["short"], readings["open"]
    with pytest.raises(PhysicsError, match="swapped"):
        characterise(bench.bench(), readings)


def test_raw_readings_are_refused_or_fitted_but_never_taken_for_corrected_ones(workshop):
    bench = workshop()
    with pytest.raises(InputError):
        characterise(replace(bench.bench(), state="raw"), bench.readings())


def test_too_few_readings_in_the_band(workshop):
    bench = workshop()
    with pytest.raises(ReadingError, match="fewer than 8 readings"):
        characterise(replace(bench.bench(), highest_hz=200e6), bench.readings())


def test_a_highest_frequency_cuts_the_readings(workshop):
    bench = workshop()
    kit = characterise(replace(bench.bench(), highest_hz=3e9), bench.readings())
    assert all(definition.read_top_hz <= 3e9 for definition in kit.definitions)
    assert kit.limit.limit_hz <= 3e9


def test_the_order_of_the_standards_does_not_matter(workshop, usual_kit):
    bench = workshop()
    turned = characterise(
        replace(bench.bench(), standards=bench.bench().standards[::-1]),
        bench.readings(),
        created="2000-01-01",
    )
    for definition in usual_kit.definitions:
        np.testing.assert_allclose(
            turned.definition(definition.name).values, definition.values, rtol=1e-5, atol=1e-6
        )
        assert turned.definition(definition.name).limit.limit_hz == pytest.approx(
            definition.limit.limit_hz, rel=1e-3
        )


def test_readings_stay_as_they_were(workshop):
    bench = workshop()
    readings = bench.readings()
    before = {name: [sweep.gamma.copy() for sweep in sweeps] for name, sweeps in readings.items()}
    characterise(bench.bench(), readings)
    for name, sweeps in readings.items():
        assert all(isinstance(sweep, Sweep) for sweep in sweeps)
        for sweep, old in zip(sweeps, before[name], strict=True):
            np.testing.assert_array_equal(sweep.gamma, old)
