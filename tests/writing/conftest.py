"""A kit small enough to be written by hand; all its numbers are invented."""

import numpy as np
import pytest
from report_reader import LOFT, Reader

from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Combination, Definition, Fitted, Kit, Rung, SourceFile
from stdfit.validity.limit import Limit
from stdfit.writing.kit_file import rows_of
from stdfit.writing.kit_reading import read_kit
from stdfit.writing.report.html import report_html

ORDER = ("open.offset_delay_ps", "open.c0", "load.resistance_ohm")


def parameters(kind, name, fitted, fixed):
    """Parameters of a kind: fitted ones as (value, u, role), fixed ones as (value, role), the rest unused."""
    made = []
    for one in PARAMETERS[kind]:
        if one.name in fitted:
            value, u, role = fitted[one.name]
            half = 2.0 * u
            of = f"{name}.{one.name}"
            made.append(Fitted(one.name, one.unit, value, u, value - half, value + half, role, of))
        else:
            value, role = fixed.get(one.name, (0.0, "unused"))
            made.append(Fitted(one.name, one.unit, value, 0.0, value, value, role, ""))
    return tuple(made)


@pytest.fixture
def small_kit():
    """An open and a load with three fitted quantities and three sources."""
    opened = Definition(
        name="open",
        kind="open",
        shape="constant",
        connections=3,
        read_low_hz=50e6,
        read_top_hz=6e9,
        fit_low_hz=50e6,
        fit_top_hz=5e9,
        parameters=parameters(
            "open",
            "open",
            {"offset_delay_ps": (20.25, 0.25, "free"), "c0": (45.5, 4.0, "given")},
            {"offset_loss_gohm_per_s": (1.0, "held"), "offset_z0_ohm": (50.0, "held")},
        ),
        combinations=(Combination("offset delay + Z0·C0", "ps", 22.525, 0.125, 22.275, 22.775, -0.875),),
        misfit_hz=np.array([50e6, 3e9, 6e9]),
        misfit=np.array([0.0, 0.001, 0.0625]),
        limit=Limit(0.02, 3.5e9, "the readings leave the model here (misfit)"),
        notes=("delay and C0 trade off",),
        tried=(("constant", 3.5e9), ("even", 3.25e9)),
    )
    load = Definition(
        name="load",
        kind="load",
        shape="R",
        connections=3,
        read_low_hz=50e6,
        read_top_hz=6e9,
        fit_low_hz=50e6,
        fit_top_hz=6e9,
        parameters=parameters(
            "load", "load", {"resistance_ohm": (50.25, 0.0625, "free")}, {"offset_z0_ohm": (50.0, "held")}
        ),
        combinations=(),
        misfit_hz=np.array([50e6, 6e9]),
        misfit=np.array([0.0, 0.0]),
        limit=Limit(0.02, 6e9, "the readings end here"),
        notes=(),
    )
    triangles = {
        "directivity": [
            [0.0625, -0.7, 16.0, 0.001, -0.02, 0.0004],
            [0.01, -0.1, 4.0, 0.0, 0.0, 0.0009],
        ],
        "contact resistance": [[0.0, 0.0, 0.0, 0.0, 0.0, 0.0025]],
        "noise": [[0.0004, 0.0, 0.01, 0.0, 0.0, 1e-6]],
    }
    shares = tuple(
        Share(
            name, 4.0 if name.startswith("contact") else np.inf, np.array([rows_of(one, 3) for one in many])
        )
        for name, many in triangles.items()
    )
    return Kit(
        name="Garden shed set (invented)",
        connector="SMA",
        reference_ohm=50.0,
        within=0.02,
        top_hz=18e9,
        created="2000-01-01",
        version="0.0.0",
        limit=Limit(0.02, 3.5e9, "open: the readings leave the model here (misfit)"),
        definitions=(opened, load),
        order=ORDER,
        shares=shares,
        ladder=(Rung(0.01, 2.5e9, (2.5e9, 6e9)), Rung(0.02, 3.5e9, (3.5e9, 6e9))),
        files=(SourceFile("open", "open-1.s1p", "0" * 64), SourceFile("load", "load-1.s1p", "f" * 64)),
        warnings=("one connection only of nothing",),
        checks=("nothing was drawn at random",),
    )


@pytest.fixture(scope="module")
def loft():
    return read_kit(LOFT)


@pytest.fixture(scope="module")
def html(loft):
    return report_html(loft)


@pytest.fixture(scope="module")
def page(html):
    return Reader(html)


@pytest.fixture
def plain(monkeypatch):
    """Leave out the pictures, which take most of the time, where a test does not look at them."""
    monkeypatch.setattr("stdfit.writing.report.html.kit_pictures", lambda kit: ())
