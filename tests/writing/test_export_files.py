"""The files of an export: what they say is what the kit says."""

import csv
import io
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.error_box import corrected, seen_raw, solve_error_box
from stdfit.data.readings import read_reading
from stdfit.uncertainty.budget import Share
from stdfit.uncertainty.region import radius_95
from stdfit.validity.device.bound import device_map, three_of
from stdfit.validity.device.joint import joint_covariance, own_covariance
from stdfit.validity.kit import curve, misfit_at, model
from stdfit.writing.export import (
    FIRST_LINE,
    JOINT,
    JOINT_COLUMNS,
    STANDARD_COLUMNS,
    STANDARDS,
    export_files,
    export_grid,
    rounded_up,
)

LINE_TO_CIRCLE = 1.959963984540054 / (2.4477468307 / np.sqrt(2.0))
"""Largest ratio of 95 % radii of equal total variance: an error on a line against a circular one."""


@pytest.fixture(scope="module")
def shared_kit(workshop):
    """A kit whose standards share most of their errors, those of the analyser."""
    return workshop(residual_db=38.0).kit()


def written(folder, files):
    for name, text in files.items():
        (folder / name).write_text(text, encoding="utf-8", newline="\n")
    return folder


def table(text):
    return list(csv.DictReader(io.StringIO(text)))


def without_shares(kit):
    """A kit of which only values and misfits are known."""
    parts = [
        replace(one, parameters=tuple(replace(p, of="") for p in one.parameters)) for one in kit.definitions
    ]
    return replace(kit, definitions=tuple(parts), order=(), shares=())


def test_touchstone_files_are_read_back_as_the_model(usual_kit, tmp_path):
    grid = export_grid(usual_kit)
    written(tmp_path, export_files(usual_kit, grid))
    assert grid.size == 201
    for one in usual_kit.definitions:
        sweep = read_reading(tmp_path / f"{one.name}.s1p", exported=True)
        np.testing.assert_array_equal(sweep.frequency_hz, grid)
        np.testing.assert_allclose(sweep.gamma, curve(usual_kit, one, grid)[0], rtol=0, atol=1e-15)
        assert sweep.reference_ohm == 50.0


def test_another_library_reads_the_same(usual_kit, tmp_path):
    rf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    grid = export_grid(usual_kit, logarithmic=True)
    written(tmp_path, export_files(usual_kit, grid))
    for one in usual_kit.definitions:
        network = rf.Network(str(tmp_path / f"{one.name}.s1p"))
        np.testing.assert_allclose(network.f, grid, rtol=1e-15)
        np.testing.assert_allclose(network.s[:, 0, 0], curve(usual_kit, one, grid)[0], rtol=0, atol=1e-15)
        assert (network.z0 == 50.0).all()


def test_a_correction_by_another_library_is_our_own(usual_kit, tmp_path):
    """The three-term solution has one answer: scikit-rf from the exported files, error_box from the model."""
    rf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    grid = export_grid(usual_kit)
    written(tmp_path, export_files(usual_kit, grid))
    frequency = rf.Frequency.from_f(grid, unit="hz")
    rng = np.random.default_rng(11)
    box = np.array([0.05, 0.9, 0.1]) + 0.05 * (
        rng.normal(size=(grid.size, 3)) + 1j * rng.normal(size=(grid.size, 3))
    )
    known = np.stack([curve(usual_kit, one, grid)[0] for one in usual_kit.definitions], axis=-1)
    read = seen_raw(box[:, None], known)
    device = 0.7 * np.exp(2j * np.pi * rng.random(grid.size))
    raw = seen_raw(box, device)

    def network(gamma):
        return rf.Network(frequency=frequency, s=gamma.reshape(-1, 1, 1), z0=50)

    ideals = [rf.Network(str(tmp_path / f"{one.name}.s1p")) for one in usual_kit.definitions]
    calibration = rf.calibration.OnePort(
        ideals=ideals, measured=[network(one) for one in read.T], is_reciprocal=False
    )
    theirs = calibration.apply_cal(network(raw)).s[:, 0, 0]
    np.testing.assert_allclose(theirs, corrected(solve_error_box(known, read), raw), rtol=0, atol=1e-9)
    np.testing.assert_allclose(theirs, device, rtol=0, atol=1e-9)


def test_the_head_gives_bound_limit_and_origin(small_kit):
    text = export_files(small_kit, np.linspace(1e9, 5e9, 5))["open.s1p"]
    lines = text.splitlines()
    assert text.isascii()
    assert lines[0] == FIRST_LINE
    assert "! kit: Garden shed set (invented)" in lines
    assert "! standard: open (open)" in lines
    assert "! kit made: 2000-01-01, stdfit 0.0.0" in lines
    assert "! limit: 3500000000 Hz within 0.02: the readings leave the model here (misfit)" in lines
    assert "! warning: one connection only of nothing" in lines
    _, bound = curve(small_kit, small_kit.definitions[0], np.array([3e9]))
    (told,) = [line.split()[2] for line in lines if line.startswith("! 3000000000 ")]
    assert bound[0] <= float(told) < bound[0] * 1.01
    assert "# Hz S RI R 50" in lines
    rows = lines[lines.index("# Hz S RI R 50") + 1 :]
    assert [row.split()[0] for row in rows] == [
        "1000000000",
        "2000000000",
        "3000000000",
        "4000000000",
        "5000000000",
    ]
    assert all(len(row.split()) == 3 for row in rows)


def test_another_reference_impedance_stands_in_the_option_line(workshop, tmp_path):
    kit = workshop(reference_ohm=75.0, connections=2).kit()
    written(tmp_path, export_files(kit, export_grid(kit)))
    sweep = read_reading(tmp_path / "load.s1p", reference_ohm=75.0, exported=True)
    assert "# Hz S RI R 75\n" in (tmp_path / "load.s1p").read_text(encoding="utf-8")
    expected, _ = curve(kit, kit.definition("load"), sweep.frequency_hz)
    np.testing.assert_allclose(sweep.gamma, expected, rtol=0, atol=1e-15)


def test_the_table_of_standards(shared_kit):
    grid = export_grid(shared_kit, points=31)
    rows = table(export_files(shared_kit, grid)[STANDARDS])
    assert tuple(rows[0]) == STANDARD_COLUMNS
    for one in shared_kit.definitions:
        own = [{k: v if k == "standard" else float(v) for k, v in row.items()} for row in rows]
        own = [row for row in own if row["standard"] == one.name]
        covariance = np.array([[row["var_re"], row["var_im"], row["cov_re_im"]] for row in own])
        gamma, bound = curve(shared_kit, one, grid)
        assert [row["gamma_re"] + 1j * row["gamma_im"] for row in own] == gamma.tolist()
        assert [row["bound"] for row in own] == bound.tolist()
        assert [row["misfit"] for row in own] == misfit_at(one, grid).tolist()
        assert (covariance[:, 0] * covariance[:, 1] >= covariance[:, 2] ** 2 * (1 - 1e-9)).all()
        # The bound takes the length with the largest radius, the table the one with the largest total.
        radius = radius_95(covariance, np.array([row["degrees_of_freedom"] for row in own]))
        spread = bound - misfit_at(one, grid)
        assert (radius <= spread * (1 + 1e-9)).all()
        assert (radius >= spread / LINE_TO_CIRCLE / 1.05).all()
        assert np.median(radius / spread) > 0.98


def test_the_covariance_of_one_length_gives_the_bound_itself(small_kit):
    """With a single correlation length there is nothing to choose."""
    kit = replace(
        small_kit, shares=tuple(replace(one, covariances=one.covariances[:1]) for one in small_kit.shares)
    )
    grid = np.linspace(1e8, 6e9, 23)
    for one in kit.definitions:
        covariance, freedom = own_covariance(kit, one, grid)
        _, bound = curve(kit, one, grid)
        np.testing.assert_allclose(radius_95(covariance, freedom), bound - misfit_at(one, grid), rtol=1e-9)


def test_the_length_with_the_largest_total_is_taken(small_kit):
    grid = np.linspace(1e8, 6e9, 23)
    own, _ = own_covariance(small_kit, small_kit.definitions[0], grid)
    _, design = model(small_kit, small_kit.definitions[0], grid)
    totals = []
    for place in (0, 1):
        matrix = sum(one.covariances[min(place, len(one.covariances) - 1)] for one in small_kit.shares)
        totals.append(np.einsum("np,pq,nq->n", design, matrix, design.conj()).real)
    np.testing.assert_allclose(own[:, 0] + own[:, 1], np.max(totals, axis=0), rtol=1e-12)


def test_the_joint_table_is_positive_and_of_one_length(shared_kit):
    grid = export_grid(shared_kit, points=7)
    rows = table(export_files(shared_kit, grid)[JOINT])
    labels = [(one.name, part) for one in shared_kit.definitions for part in ("re", "im")]
    assert tuple(rows[0]) == JOINT_COLUMNS
    assert len(rows) == grid.size * 21
    stack = np.zeros((grid.size, 6, 6))
    for row in rows:
        n = grid.tolist().index(float(row["frequency_hz"]))
        i, j = (
            labels.index((row["standard"], row["part"])),
            labels.index((row["other_standard"], row["other_part"])),
        )
        stack[n, i, j] = stack[n, j, i] = float(row["covariance"])
    np.testing.assert_array_equal(stack, joint_covariance(shared_kit, grid))
    assert (np.linalg.eigvalsh(stack).min(axis=1) >= -1e-12 * np.trace(stack, axis1=1, axis2=2)).all()
    for k, one in enumerate(shared_kit.definitions):
        own, _ = own_covariance(shared_kit, one, grid)
        block = stack[:, 2 * k : 2 * k + 2, 2 * k : 2 * k + 2]
        # Never above the standard's own, which may be of another length.
        assert (np.trace(block, axis1=1, axis2=2) <= own[:, :2].sum(axis=1) * (1 + 1e-9)).all()
    assert np.abs(stack[:, 0:2, 2:4]).max() > 0.1 * np.abs(stack[:, 0:2, 0:2]).max(), "residuals are common"


def test_the_joint_matrix_is_that_of_the_device_map(shared_kit):
    """At each frequency it is the sum of the sources' joint matrices at the place with the largest trace: at the
    first place resistance is poorly known, which counts at low frequency, at the second one delays are."""
    size = len(shared_kit.order)
    poorly = np.array(
        [["resistance" in name for name in shared_kit.order], ["delay" in name for name in shared_kit.order]]
    )
    mixing = np.random.default_rng(3).normal(size=(2, size, size)) * (0.05 + poorly)[:, :, None] * 1e-2
    share = Share("invented", np.inf, mixing @ np.swapaxes(mixing, 1, 2))
    kit = replace(shared_kit, shares=(*shared_kit.shares[3:4], share))
    assert kit.shares[0].covariances.shape[0] == 1
    grid = export_grid(kit, points=25)
    sources = device_map(kit, three_of(kit), grid).covariances
    lengths = max(len(one) for one in sources)
    totals = sum(np.broadcast_to(one, (lengths, *one.shape[1:])) for one in sources)
    chosen = np.argmax(np.einsum("anii->an", totals), axis=0)
    assert np.unique(chosen).size > 1, "else the choice is not tested"
    expected = totals[chosen, np.arange(grid.size)]
    np.testing.assert_allclose(
        joint_covariance(kit, grid), expected, rtol=0, atol=1e-12 * np.abs(expected).max()
    )


def test_a_kit_without_sources_has_zero_covariance(small_kit):
    kit = without_shares(small_kit)
    files = export_files(kit, np.array([1e9, 3e9]))
    rows = table(files[STANDARDS])
    assert {row["var_re"] for row in rows} == {"0.0"}
    assert all(row["bound"] == row["misfit"] for row in rows)
    assert {row["covariance"] for row in table(files[JOINT])} == {"0.0"}


def test_frequencies_come_out_rising_and_once(small_kit):
    files = export_files(small_kit, np.array([2e9, 1e9, 2e9]))
    assert [float(row["frequency_hz"]) for row in table(files[STANDARDS])][:2] == [1e9, 2e9]
    assert len(table(files[STANDARDS])) == 4


@pytest.mark.parametrize("frequency", [6.1e9, 0.0, -1.0, np.nan, np.inf])
def test_beyond_the_readings_there_is_no_export(small_kit, frequency):
    with pytest.raises(RequestError, match="lies outside the readings of 'open'"):
        export_files(small_kit, np.array([1e9, frequency]))
    with pytest.raises(RequestError, match="there is no frequency"):
        export_files(small_kit, np.array([]))


def test_too_close_to_zero_nothing_is_computed(usual_kit):
    """The line impedance grows as 1/√f, and overflows there."""
    with pytest.raises(RequestError, match="cannot be computed at 1e-300 Hz"):
        export_files(usual_kit, np.array([1e-300, 1e9]))
    assert "nan" not in "".join(export_files(usual_kit, np.array([1e-3, 1e9])).values())


def test_the_grid(small_kit):
    even = export_grid(small_kit, points=5)
    np.testing.assert_allclose(even, [50e6, 1537.5e6, 3025e6, 4512.5e6, 6e9])
    log = export_grid(small_kit, low_hz=1e8, top_hz=1e9, points=3, logarithmic=True)
    np.testing.assert_allclose(log, [1e8, 10**8.5, 1e9])
    assert (log[0], log[-1]) == (1e8, 1e9)
    for points in range(2, 300):  # the ends are what was asked for, without rounding
        for logarithmic in (False, True):
            grid = export_grid(small_kit, points=points, logarithmic=logarithmic)
            assert (grid[0], grid[-1], grid.size) == (50e6, 6e9, points)


@pytest.mark.parametrize(
    "ends, words",
    [
        ({"low_hz": 7e9}, "no band from 7000000000 to 6000000000"),
        ({"top_hz": 7e9}, "7000000000 Hz lies outside the readings of 'open'"),
        ({"low_hz": 0.0}, "no band from 0"),
        ({"top_hz": np.nan}, "no band"),
        ({"top_hz": np.inf}, "no band"),
        ({"points": 1}, "at least two points"),
        ({"low_hz": 1e9, "top_hz": np.nextafter(1e9, 2e9), "points": 9}, "too narrow for 9 points"),
    ],
)
def test_grids_that_are_none(small_kit, ends, words):
    with pytest.raises(RequestError, match=words):
        export_grid(small_kit, **ends)


def test_standards_without_a_common_band(small_kit):
    first, second = small_kit.definitions
    apart = replace(small_kit, definitions=(first, replace(second, read_low_hz=6e9, read_top_hz=8e9)))
    with pytest.raises(RequestError, match="no band in common"):
        export_grid(apart)


@pytest.mark.parametrize("value", [0.0123401, 0.02, 1e-9, 0.999999, 1.0, 123456.0, 0.0999501])
def test_a_bound_is_never_rounded_down(value):
    assert value * (1 - 1e-9) <= float(rounded_up(value)) <= value * 1.0101
