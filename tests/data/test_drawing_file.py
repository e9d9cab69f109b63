"""Drawing files: what they say, and what is refused with the key that is wrong."""

import copy
from math import sqrt
from pathlib import Path

import pytest
import tomlkit
from hypothesis import given, settings
from hypothesis import strategies as st

from stdfit.base.errors import BenchError
from stdfit.data.drawing import parse_drawing, part_for, read_drawing

HERE = Path("parts.drawing.toml")
SECTION = {
    "length_mm": {"value": 6.0, "tolerance": 0.05},
    "inner_mm": {"value": 1.52, "u": 0.01},
    "outer_mm": 3.5,
}
PARTS = {
    "open": {"name": "lid", "kind": "open", "section": [SECTION], "end": {"form": "shielded"}},
    "short": {"name": "plug", "kind": "short", "section": [SECTION], "end": {"form": "flat"}},
    "load": {
        "name": "chips",
        "kind": "load",
        "end": {"form": "chip", "size": "0603", "count": 2, "resistance_ohm": 100.0},
    },
}


def text_of(*parts, **more):
    return tomlkit.dumps({"format": "stdfit-drawing/1", **more, "part": list(parts)})


def changed(kind, *path_and_value):
    """Return a part with one value changed; None takes the key out."""
    *path, key, value = path_and_value
    part = copy.deepcopy(PARTS[kind])
    table = part
    for step in path:
        table = table[step]
    if value is None:
        del table[key]
    else:
        table[key] = value
    return part


def parsed(*parts, **more):
    return parse_drawing(text_of(*parts, **more), HERE)


def test_limits_are_a_rectangle_and_u_is_taken_as_it_is():
    """± t with nothing more known is u = t/√3: JCGM 100:2008, 4.3.7."""
    (section,) = parsed(PARTS["open"]).parts[0].sections
    assert (section.length_m.value, section.length_m.u) == pytest.approx((6e-3, 0.05e-3 / sqrt(3.0)))
    assert (section.inner_m.value, section.inner_m.u) == pytest.approx((1.52e-3, 0.01e-3))
    assert (section.outer_m.value, section.outer_m.u) == (3.5e-3, 0.0)
    assert section.permittivity.value == 1.000635


def test_the_file_may_be_named_and_parts_may_be_of_named_metal(tmp_path):
    drawing = parsed(changed("open", "conductor", "Brass"), connector="SMA")
    assert (drawing.name, drawing.connector) == ("parts.drawing", "SMA")
    assert (drawing.parts[0].conductor, drawing.parts[0].conductivity) == ("brass", 1.5e7)
    assert parsed(changed("short", "conductor", 1.3e7)).parts[0].conductivity == 1.3e7
    file = tmp_path / "a.toml"
    file.write_text(text_of(PARTS["load"], name="Loads"), encoding="utf-8")
    assert read_drawing(file).name == "Loads"


REFUSED = [
    (changed("open", "hue", "red"), "part[lid].hue", "unknown key"),
    (changed("open", "kind", "opne"), "part[lid].kind", "not known"),
    (changed("open", "name", None), "part[#1].name", "missing"),
    (changed("open", "section", 0, "length_mm", "6"), "part[lid].section[1].length_mm", "where a number"),
    (changed("open", "section", 0, "length_mm", -1.0), "part[lid].section[1].length_mm", "-1 mm cannot be"),
    (changed("open", "section", 0, "length_mm", 6000), "part[lid].section[1].length_mm", "cannot be"),
    (
        changed("open", "section", 0, "length_mm", {"value": 6.0, "u": 1e8}),
        "part[lid].section[1].length_mm",
        "too large to be meant",
    ),
    # In metres, and a bore of 3.5 mm in inches.
    (changed("open", "section", 0, "outer_mm", 0.0035), "part[lid].section[1].outer_mm", "too narrow"),
    (changed("open", "section", 0, "outer_mm", 0.1378), "part[lid].section[1].outer_mm", "too narrow"),
    (changed("open", "section", 0, "inner_mm", None), "part[lid].section[1].inner_mm", "missing"),
    (changed("open", "section", 0, "outer_mm", 1.6), "part[lid].section[1].outer_mm", "is 1.05 times"),
    (changed("open", "section", 0, "outer_mm", 35.0), "part[lid].section[1].outer_mm", "times inner_mm"),
    (
        changed("open", "section", 0, "inner_mm", "tolerance", 0.1),
        "part[lid].section[1].inner_mm.u",
        "beside tolerance",
    ),
    (
        changed("open", "section", 0, "inner_mm", {"value": 1.52, "tolerance": 0.0}),
        "part[lid].section[1].inner_mm.tolerance",
        "not above 0",
    ),
    (
        changed("open", "section", 0, "inner_mm", {"value": 1.52, "tolerance": 0.5}),
        "part[lid].section[1].inner_mm",
        "not known to 10 %",
    ),
    (
        changed("open", "section", 0, "dielectric", "tfe"),
        "part[lid].section[1].dielectric",
        "not in the table",
    ),
    (
        changed("open", "section", 0, "dielectric", {"value": 2.0, "tolerance": 1.0}),
        "part[lid].section[1].dielectric",
        "not known to 20 %",
    ),
    (changed("open", "section", 0, "dielectric", 0.9), "part[lid].section[1].dielectric", "not usual"),
    (changed("open", "section", 0, {}), "part[lid].section[1].length_mm", "says nothing"),
    (changed("open", "section", None), "part[lid].end", "diameters of the line"),
    (changed("open", "end", "form", "flat"), "part[lid].end.form", "not known"),
    (changed("open", "end", "size", "0603"), "part[lid].end.size", "does not belong to a shielded end"),
    (changed("open", "end", "closed", True), "part[lid].end.pipe_mm", "missing"),
    (changed("open", "end", "closed", "yes"), "part[lid].end.closed", "true or false"),
    (changed("open", "conductor", "bras"), "part[lid].conductor", "not in the table of metals"),
    (changed("open", "conductor", 12.0), "part[lid].conductor", "no metal"),
    (changed("open", "roughness_um", 1.0), "part[lid].roughness_um", "without a conductor"),
    (changed("load", "end", "size", "0604"), "part[chips].end.size", "not known"),
    (changed("load", "end", "count", 0), "part[chips].end.count", "whole number"),
    (changed("load", "end", "resistance_ohm", -1.0), "part[chips].end.resistance_ohm", "cannot be"),
    (changed("load", "end", "resistance_ohm", None), "part[chips].end.resistance_ohm", "missing"),
]


@pytest.mark.parametrize(
    ("part", "key", "what"), REFUSED, ids=[f"{key}-{n}" for n, (_, key, _) in enumerate(REFUSED)]
)
def test_what_cannot_be_is_refused_with_its_key(part, key, what):
    with pytest.raises(BenchError) as refused:
        parsed(part)
    assert refused.value.key == key
    assert what in refused.value.what
    assert refused.value.mend
    assert refused.value.file == HERE


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("format = ", "not valid TOML"),
        ("", "not a drawing"),
        ('format = "stdfit-bench/1"', "not a drawing"),
        ('format = "stdfit-drawing/1"', "missing"),
        ('format = "stdfit-drawing/1"\npart = []', "the list is empty"),
        ("a = " + "[" * 5000, "too deeply nested"),
    ],
)
def test_other_texts_are_refused(text, what):
    with pytest.raises(BenchError) as refused:
        parse_drawing(text, HERE)
    assert what in refused.value.what


def test_a_flush_short_has_no_length():
    part = changed("short", "section", 0, "length_mm", {"value": 0.0, "tolerance": 0.02})
    (section,) = parsed(part).parts[0].sections
    assert (section.length_m.value, section.length_m.u > 0.0) == (0.0, True)


def with_pin(pin_mm, *dielectrics, **end):
    """Return an open of a section 6 mm long for each dielectric, its pin not flush."""
    part = changed("open", "end", {"form": "shielded", "pin_mm": pin_mm, **end})
    part["section"] = [{**SECTION, "dielectric": one} for one in dielectrics]
    return part


@pytest.mark.parametrize(
    ("part", "what", "mend"),
    [
        (with_pin(-6.5, "air", "air"), "before the last section begins", "only as far as the pin reaches"),
        (with_pin(0.5, "ptfe"), "where the dielectric changes", "what stands out as a section"),
        (with_pin(-0.5, "ptfe"), "where the dielectric changes", "at the pin's face"),
        (with_pin(0.5, "air", beyond="ptfe"), "where the dielectric changes", "what stands out as a section"),
    ],
)
def test_a_pin_that_ends_in_another_line_is_refused(part, what, mend):
    """Its length would be counted with the filling, or with the diameters, of a line where it is not."""
    with pytest.raises(BenchError) as refused:
        parsed(part)
    assert refused.value.key == "part[lid].end.pin_mm"
    assert what in refused.value.what and mend in refused.value.mend


@pytest.mark.parametrize(
    "part",
    [
        with_pin({"value": 0.0, "tolerance": 0.05}, "ptfe"),
        with_pin(-0.5, "vacuum"),
        with_pin(0.5, "ptfe", beyond="ptfe"),
        with_pin(-5.5, "ptfe", "air"),
    ],
)
def test_a_pin_that_ends_in_the_line_of_the_last_section_is_taken(part):
    assert parsed(part).parts[0].end.form == "shielded"


def test_two_parts_of_one_name_are_refused():
    with pytest.raises(BenchError, match="two parts have this name"):
        parsed(PARTS["open"], PARTS["open"])


def test_the_part_that_is_meant():
    other = changed("open", "name", "cap")
    drawing = parsed(PARTS["open"], other, PARTS["short"])
    assert part_for(drawing, "cap", "open").name == "cap"
    assert part_for(drawing, "anything", "short").name == "plug"
    assert part_for(drawing, "anything", "open", "lid").name == "lid"
    for asked, what in (
        (("anything", "open"), "holds 2 parts of kind 'open'"),
        (("chips", "load"), "no part of kind 'load'"),
        (("cap", "open", "lit"), "there is no part 'lit'"),
        (("cap", "open", "plug"), "it is a short, and 'cap' on the bench is an open"),
    ):
        with pytest.raises(BenchError) as refused:
            part_for(drawing, *asked)
        assert what in refused.value.what


KEYS = ("name", "kind", "section", "end", "conductor", "roughness_um", "length_mm", "inner_mm", "outer_mm")
KEYS += ("dielectric", "form", "pin_mm", "pipe_mm", "closed", "beyond", "flange_mm", "size", "count")
LEAVES = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(-10, 10**30),
    st.floats(),
    st.sampled_from(["shielded", "flush", "flat", "chip", "brass", "ptfe", "0603", "", "\n"]),
    st.fixed_dictionaries({"value": st.floats()}, optional={"u": st.floats(), "tolerance": st.floats()}),
    st.lists(st.integers(), max_size=2),
)


@settings(max_examples=150, deadline=None)
@given(
    kind=st.sampled_from(sorted(PARTS)),
    where=st.sampled_from([(), ("end",), ("section", 0)]),
    key=st.sampled_from(KEYS),
    value=LEAVES,
)
def test_any_value_anywhere_is_taken_or_refused_in_words(kind, where, key, value):
    part = copy.deepcopy(PARTS[kind])
    table = part
    for step in where:
        if step == "section" and "section" not in part:
            return
        table = table[step]
    if value is not None:
        table[key] = value
    try:
        parsed(part)
    except BenchError as refused:
        assert refused.what
