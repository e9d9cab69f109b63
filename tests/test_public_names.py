"""The few names of the library itself, and how a kit looks where it is shown."""

from importlib import import_module

import pytest

import stdfit
from stdfit.base.errors import RequestError
from stdfit.validity.kit import curve


def test_names_lead_to_what_they_say():
    assert 10 <= len(stdfit.__all__) <= 15
    assert len(set(stdfit.__all__)) == len(stdfit.__all__)
    assert dir(stdfit) == sorted(stdfit.__all__)
    for name in stdfit.__all__:
        assert callable(getattr(stdfit, name))
    assert stdfit.read is import_module("stdfit.writing.kit_reading").read_kit
    assert stdfit.fit is import_module("stdfit.pipeline").fit_bench
    with pytest.raises(AttributeError, match="no attribute 'read_kit'"):
        _ = stdfit.read_kit


def test_every_name_is_explained():
    for name in stdfit.__all__:
        assert getattr(stdfit, name).__doc__.strip(), name


def test_a_kit_is_one_line(usual_kit):
    assert repr(usual_kit) == "<Kit 'Simulated bench': open, short, load; within 0.02 good to 6 GHz>"
    assert repr(usual_kit.definition("load")).startswith("<Definition 'load': load, order R")


def test_a_curve_by_name(usual_kit):
    by_name = stdfit.curve(usual_kit, "open", [1e9, 2e9])
    by_itself = curve(usual_kit, usual_kit.definition("open"), [1e9, 2e9])
    for one, other in zip(by_name, by_itself, strict=True):
        assert one.tolist() == other.tolist()
    with pytest.raises(RequestError, match="no standard named 'thru'"):
        stdfit.curve(usual_kit, "thru", [1e9])
