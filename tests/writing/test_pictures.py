"""Pictures of kits: whole and separate pieces of a page, the same bytes twice, told in words with figures."""

import re
import time
import xml.etree.ElementTree as ET
from dataclasses import replace

import numpy as np
import pytest

from stdfit.validity.evidence.kept import Connections
from stdfit.validity.evidence.sharing import STATED
from stdfit.validity.evidence.standard import standard_evidence
from stdfit.validity.evidence.whole import kit_evidence
from stdfit.validity.limit import Limit
from stdfit.validity.session import Session
from stdfit.writing.pictures import PALETTE, kit_pictures
from stdfit.writing.pictures.bound import OTHERS, colours_of, draw_bound, stacked
from stdfit.writing.pictures.frame import panels, ruled
from stdfit.writing.pictures.labels import LONGEST, drawable, pushed_apart, width_of
from stdfit.writing.pictures.leftover import draw_residuals
from stdfit.writing.pictures.smith import marked_frequencies
from stdfit.writing.pictures.vector import drawing_rules, svg_element
from stdfit.writing.pictures.words import connection_words, largest_part

SVG = "{http://www.w3.org/2000/svg}"
NAMES = ('<svg onload="x">&amp;--', "$x_1$ короткозамыкатель номер один", "_負荷 \\alpha{")


@pytest.fixture(scope="module")
def kit(workshop):
    return workshop(residual_db=38.0, frequency_hz=np.linspace(50e6, 6e9, 201), connections=5).kit()


@pytest.fixture(scope="module")
def pictures(kit):
    return kit_pictures(kit)


@pytest.fixture(scope="module")
def odd(kit):
    """The same with names that mean something to XML or to formulas, or that no letters are at hand for."""
    old = [one.name for one in kit.definitions]
    means = tuple(replace(one, standard=NAMES[old.index(one.standard)]) for one in kit.session.means)
    definitions = tuple(replace(one, name=name) for one, name in zip(kit.definitions, NAMES, strict=True))
    return replace(kit, definitions=definitions, session=replace(kit.session, means=means))


def test_those_of_the_kit_come_first_then_each_standard(kit, pictures):
    assert [one.standard for one in pictures[:3]] == [None] * 3
    assert list(dict.fromkeys(one.standard for one in pictures[3:])) == [one.name for one in kit.definitions]
    assert [one.name for one in pictures] == [
        "kit-devices",
        "kit-chart",
        "kit-separation",
        *(
            f"standard-{place}-{what}"
            for place in (1, 2, 3)
            for what in ("bound", "deviation", "residuals", "connections", "element")
        ),
    ]


def test_each_is_one_element_with_identifiers_of_its_own(pictures):
    seen = set()
    for one in pictures:
        assert re.fullmatch(r"[a-z0-9-]+", one.name)
        root = ET.fromstring(one.svg)
        assert root.tag == f"{SVG}svg"
        own = [item.get("id") for item in root.iter() if item.get("id")]
        assert len(set(own)) == len(own)
        assert all(identifier.startswith(f"{one.name}-") for identifier in own)
        assert not seen & set(own)
        seen |= set(own)
        wanted = re.findall(r'href="#([^"]+)"|url\(#([^)]+)\)', one.svg)
        assert {a or b for a, b in wanted} == set(own)


def test_nothing_in_them_reaches_outside_or_over_the_page(pictures):
    for one in pictures:
        for word in (
            "<metadata",
            "<style",
            "<script",
            "<?xml",
            "<!",
            "<title",
            "@import",
            "<image",
            "nan",
            "inf",
        ):
            assert word not in one.svg, (one.name, word)
        assert re.findall(r"https?://[^\"]*", one.svg) == ["http://www.w3.org/2000/svg"]
        assert all(found.startswith("#") for found in re.findall(r'href="([^"]*)"', one.svg))


def test_every_colour_is_a_variable(pictures):
    names = set()
    for one in pictures:
        names |= {name for name, _ in re.findall(r"var\(--([a-z0-9-]+), (#[0-9a-f]{6})\)", one.svg)}
        bare = re.sub(r"var\(--[a-z0-9-]+, #[0-9a-f]{6}\)", "", one.svg)
        assert not re.search(
            r"#[0-9a-fA-F]{3,8}\b(?![^<]*href)", re.sub(r'href="[^"]*"|url\([^)]*\)', "", bare)
        )
        assert "rgb" not in bare
        for item in ET.fromstring(one.svg).iter():
            assert item.get("fill") is None
            assert item.get("stroke") is None
            told = dict(part.split(": ", 1) for part in (item.get("style") or "").split("; ") if part)
            for key in ("fill", "stroke"):
                assert told.get(key, "none") == "none" or told[key].startswith("var(--")
    assert names <= set(PALETTE)
    assert names >= {"ink", "quiet", "grid", "series-1", "series-2", "series-3"}


def test_nothing_is_painted_black_for_want_of_a_colour(pictures):
    """What names no fill would be black on any background: all that is painted has a fill of its own or from above."""

    def look(item, inherited, name):
        style = item.get("style") or ""
        known = inherited or "fill: " in style
        if item.tag in (f"{SVG}use", f"{SVG}path", f"{SVG}rect"):
            assert known, (name, ET.tostring(item)[:200])
        if item.tag not in (f"{SVG}defs", f"{SVG}clipPath"):
            for child in item:
                look(child, known, name)

    for one in pictures:
        look(ET.fromstring(one.svg), False, one.name)


def test_the_same_bytes_twice(kit, pictures):
    assert kit_pictures(kit) == pictures


def test_they_are_small_and_quick(kit, pictures):
    start = time.process_time()
    kit_pictures(kit)
    assert time.process_time() - start < 3.0  # half of it is the aim on an idle machine
    assert sum(len(one.svg.encode()) for one in pictures) < 1.2e6


def test_words_tell_figures(kit, pictures):
    for one in pictures:
        assert one.title
        assert one.caption.endswith(".")
        assert one.alt.endswith(".")
        assert re.search(r"\d", one.caption), one.caption
        assert re.search(r"\d", one.alt)
        assert not re.search(r"nan|inf|None|\{|(?<!\w)-\d", one.caption + one.alt), one.caption
        assert one.standard is None or one.standard in one.title
    bound = next(one for one in pictures if one.name == "standard-1-bound")
    assert f"up to {kit.definitions[0].limit.limit_hz / 1e9:.2f} GHz" in bound.caption
    assert kit.definitions[0].limit.reason in bound.caption
    assert "analyser residuals make the largest part of it there" in bound.alt
    evidence = standard_evidence(kit, kit.definitions[0])
    assert largest_part(evidence)[0] == "analyser residuals"
    assert f"{evidence.bound[0]:.2g} at 50 MHz" in bound.alt


def test_a_connection_that_lies_clearly_apart_is_named():
    f = np.linspace(1e9, 6e9, 11)
    expected = np.full(f.size, 0.001)
    near = 1e-4 * np.ones(f.size)
    far = np.where(f >= 3e9, 2e-3, 0.0)
    slightly = np.full(f.size, 1.2e-3)
    assert Connections(f, np.array([near, far]) + 0j, expected).above() == (2, 3e9, 6e9)
    assert Connections(f, np.array([near, slightly]) + 0j, expected).above() is None
    assert Connections(f, np.array([near, np.where(f == 3e9, 0.1, 0.0)]) + 0j, expected).above() is None


def test_the_caption_of_connections_gives_a_verdict(kit):
    one = standard_evidence(kit, kit.definitions[0])
    known = one.readings.connections
    for factor, said in (
        (0.1, "All stay within"),
        (10.0, "lies clearly above what is expected, the dotted line, from "),
    ):
        changed = Connections(known.frequency_hz, factor * known.deviations, known.expected)
        _, caption, _ = connection_words(one, changed)
        assert said in caption
        assert ("look at it" in caption) == (factor > 1.0)


def test_keys_name_only_what_is_drawn(kit):
    one = standard_evidence(kit, kit.definitions[0])
    for misfit, told in ((0.0 * one.misfit, False), (one.misfit + 0.001, True)):
        changed = replace(one, misfit=misfit)
        with drawing_rules("t"):
            _, (axes,) = panels([1.8])
            _, labels = draw_residuals(axes, changed, one.readings)
        assert ("misfit" in labels) == told
    tiny = np.array([one.bound, 1e-4 * one.bound])
    with drawing_rules("t"):
        _, (axes,) = panels([1.8])
        _, labels = draw_bound(
            axes,
            replace(one, kinds=("connections", "noise"), parts=tiny),
            {"connections": "series-1", "noise": "series-3"},
        )
    assert labels[0] == "connections"
    assert "noise" not in labels


def test_names_of_any_kind_break_nothing(odd):
    pictures = kit_pictures(odd)
    assert [one.standard for one in pictures[3::5]] == list(NAMES)
    for one in pictures:
        ET.fromstring(one.svg)
        assert "onload" not in one.svg
    assert len({one.name for one in pictures}) == len(pictures)


def test_what_a_kit_does_not_keep_is_left_out(kit):
    pictures = kit_pictures(replace(kit, session=None))
    names = [one.name for one in pictures]
    assert [name for name in names if "1" in name] == [
        "standard-1-bound",
        "standard-1-deviation",
        "standard-1-element",
    ]
    shown = next(one for one in pictures if one.name == "standard-1-deviation")
    assert "keeps no readings" in shown.caption
    single = replace(kit, definitions=kit.definitions[:1])
    assert [one.standard for one in kit_pictures(single)] == ["open"] * 5
    means = [replace(one, connection_hz=None, deviations=None) for one in kit.session.means]
    session = Session(kit.session.scatter_sd, kit.session.scatter_freedom, np.inf, tuple(means))
    names = [one.name for one in kit_pictures(replace(kit, session=session))]
    assert not any("connections" in name for name in names)
    assert "standard-1-residuals" in names


def test_a_kit_of_stated_bounds(kit):
    stated = replace(kit, shares=(), order=(), session=None)
    pictures = kit_pictures(stated)
    assert "states no uncertainty" in pictures[-1].caption
    evidence = standard_evidence(stated, stated.definitions[0])
    assert [label for label, _, _ in stacked(evidence, colours_of([evidence]))] == [STATED]
    nothing = [replace(one, misfit=np.zeros(one.misfit.size)) for one in stated.definitions]
    assert len(kit_pictures(replace(stated, definitions=tuple(nothing)))) == 12


def test_two_standards_of_the_same_reflection(kit):
    """No correction can tell them apart: the bound has no end there, and the picture does without it."""
    first, second, third = kit.definitions
    twin = replace(first, name="twin")
    whole = kit_evidence(replace(kit, definitions=(first, twin, third)))
    assert whole is not None
    assert np.isinf(whole.bounds).all()
    assert len(kit_pictures(replace(kit, definitions=(first, twin, third)))) > 3
    assert second.name == "short"


def test_a_limit_of_nothing_is_told(kit):
    none = replace(
        kit,
        limit=Limit(0.02, 0.0, "none"),
        definitions=tuple(replace(one, limit=Limit(0.02, 0.0, "none")) for one in kit.definitions),
    )
    pictures = kit_pictures(none)
    bound = next(one for one in pictures if one.name == "standard-1-bound")
    for told in (bound.caption, bound.alt):
        assert "is above the tolerance of 0.02 from the first reading on; " in told
        assert "keeps within" not in told
    assert "nowhere" in next(one for one in pictures if one.name == "kit-chart").caption


def test_areas_upon_each_other_keep_the_whole_bound(kit):
    evidence = [standard_evidence(kit, definition) for definition in kit.definitions]
    colours = colours_of(evidence)
    assert len(set(colours.values())) == len(colours)
    for one in evidence:
        areas = stacked(one, colours)
        assert np.allclose(sum(part for _, _, part in areas), one.bound)
        assert len({label for label, _, _ in areas}) == len(areas)
        assert len({colour for _, colour, _ in areas}) == len(areas)
        many = replace(one, kinds=tuple(f"kind {k}" for k in range(9)), parts=np.tile(one.bound / 9, (9, 1)))
        areas = stacked(many, colours_of([many]))
        assert [label for label, _, _ in areas][-1] == OTHERS
        assert np.allclose(sum(part for _, _, part in areas), one.bound)


def test_labels_are_pushed_apart_and_stay_inside():
    rng = np.random.default_rng(3)
    for _ in range(200):
        wanted = rng.uniform(0.0, 1.0, rng.integers(1, 7)) ** 3
        placed = pushed_apart(wanted, 0.15)
        order = np.argsort(wanted, kind="stable")
        assert (np.diff(placed[order]) > 0.15 - 1e-9).all()
        assert placed.min() > -1e-9
        assert placed.max() < 1.0 + 1e-9
    assert pushed_apart([0.2, 0.9], 0.1).tolist() == [0.2, 0.9]


def test_names_are_drawn_as_far_as_they_can_be():
    assert drawable("Größe 1", "open (1)") == "Größe 1"
    assert drawable("負荷", "load (3)") == "load (3)"
    assert drawable("  ", "load (3)") == "load (3)"
    assert len(drawable("x" * 200, "")) == LONGEST
    assert width_of("ii") < width_of("WW")


def test_marked_frequencies_are_few_and_round():
    for low, top in ((1e3, 9e3), (1e6, 3e8), (5e7, 6e9), (4e7, 2e8), (1e9, 26.5e9), (5.9e9, 6e9)):
        marked = marked_frequencies(np.array([low, top]))
        assert marked.size <= 4
        assert ((marked >= low) & (marked <= top)).all()
    assert marked_frequencies(np.array([1e9, 26.5e9])).tolist() == [10e9, 20e9]


def test_user_text_is_no_formula_and_no_comment():
    with drawing_rules("salt"):
        figure, (axes,) = panels([1.0])
        axes.set_xlim(0.0, 1.0)
        ruled(axes, "$\\frac{1}{$ --> <b>&", (0.0, 1.0), 1e9)
        text = svg_element(figure, "salt")
    ET.fromstring(text)
    assert "-->" not in text
