"""The same files through scikit-rf, a general-purpose RF library, as an outside check."""

from pathlib import Path

import numpy as np
import pytest

from stdfit.data.immittance import gamma_from_admittance, gamma_from_impedance
from stdfit.data.readings import renormalise
from stdfit.data.touchstone import parse_touchstone

rf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
network_functions = pytest.importorskip("skrf.network", reason="scikit-rf is not installed")

VALID = Path(__file__).parents[1] / "files" / "valid"
# The library does not read these, which the standard allows or which are common sloppiness.
UNREAD = {
    "fortran-exponents.s1p",
    "lower-case-odd-order.s1p",
    "old-end-mark.s1p",
    "one-port-in-s2p.s2p",
    "only-format.s1p",
    "two-port-in-s1p.s1p",
    "utf-16.s1p",
    "version-2-information.ts",
}
# Version 1 admittance: the library multiplies y by R, as it does z; but y = Y·R, so it has to be divided.
OTHER_READING = {"admittance-normalised.s1p", "two-port-admittance.s2p"}
FILES = [
    path
    for path in sorted(VALID.iterdir())
    if path.suffix in (".s1p", ".s2p", ".ts") and path.name not in UNREAD | OTHER_READING
]


def test_enough_files_are_compared():
    assert len(FILES) >= 38
    assert all((VALID / name).exists() for name in UNREAD | OTHER_READING)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.name)
def test_both_read_the_same(path):
    network = rf.Network(str(path))
    for port in range(1, network.nports + 1):
        sweep = parse_touchstone(path.read_bytes(), path.name, port)
        np.testing.assert_allclose(sweep.frequency_hz, network.f, rtol=1e-14)
        np.testing.assert_allclose(sweep.gamma, network.s[:, port - 1, port - 1], atol=1e-12)
        assert sweep.reference_ohm == network.z0[0, port - 1]


def random_s(seed=5, n=20):
    rng = np.random.default_rng(seed)
    return 0.4 * (rng.normal(size=(n, 2, 2)) + 1j * rng.normal(size=(n, 2, 2)))


def test_immittance_conversions():
    s, reference = random_s(), np.array([50.0, 75.0])
    root = np.sqrt(np.outer(reference, reference))
    np.testing.assert_allclose(
        gamma_from_impedance(network_functions.s2z(s, reference) / root), s[:, 0, 0], atol=1e-12
    )
    np.testing.assert_allclose(
        gamma_from_admittance(network_functions.s2y(s, reference) * root), s[:, 0, 0], atol=1e-12
    )
    one = s[:, :1, :1]
    np.testing.assert_allclose(
        gamma_from_impedance(network_functions.s2z(one, 50.0) / 50), one[:, 0, 0], atol=1e-12
    )
    np.testing.assert_allclose(
        gamma_from_admittance(network_functions.s2y(one, 50.0) * 50), one[:, 0, 0], atol=1e-12
    )


def test_version_1_admittance_as_the_library_writes_its_matrix():
    for name in OTHER_READING:
        sweep = parse_touchstone((VALID / name).read_bytes(), name)
        truth = rf.Network(str(VALID / name.replace("admittance", "impedance")))
        np.testing.assert_allclose(sweep.gamma, truth.s[:, 0, 0], atol=3e-8)


@pytest.mark.parametrize("to_ohm", [75.0, 12.5, 40 + 7j])
def test_renormalisation(to_ohm):
    s = random_s()[:, :1, :1]
    # "traveling" is the library's word for Γ = (Z − Zr)/(Z + Zr).
    expected = network_functions.renormalize_s(s, 50.0, to_ohm, s_def="traveling")
    np.testing.assert_allclose(renormalise(s[:, 0, 0], 50.0, to_ohm), expected[:, 0, 0], atol=1e-12)
