"""Drawings among the given values of a bench: what they change, what goes before them, and what contradicts them."""

import hashlib
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import BenchError
from stdfit.data.bench import read_bench
from stdfit.data.drawing_records import DrawnFrom
from stdfit.pipeline import characterise, fit_bench
from stdfit.pipeline.drawn import with_drawings
from stdfit.trials.drawn_parts import draw_drawn_bench
from stdfit.trials.files import write_bench
from stdfit.trials.five_parts import Workshop, draw_five_parts
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit

MM_PER_PS = 0.299792458
FROM = 'given.from_drawing = "parts.drawing.toml"'


def write_drawn(folder, made):
    """Write a simulated bench with its drawing; return the bench file, in which nothing names the drawing yet."""
    path = write_bench(made.simulated, folder)
    (folder / "parts.drawing.toml").write_text(made.text, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    folder = tmp_path_factory.mktemp("drawn")
    write_drawn(folder, draw_drawn_bench(np.random.default_rng(5)))
    return folder


@pytest.fixture(scope="module")
def plain(folder):
    return (folder / "bench.toml").read_text(encoding="utf-8")


def with_lines(text, **lines):
    """Return a bench text with a line more in the table of a standard."""
    for name, line in lines.items():
        text = text.replace(f'kind = "{name}"\n', f'kind = "{name}"\n{line}\n')
    return text


def written(folder, text, name="drawn.toml"):
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def kits(folder, plain):
    """The kit without the drawing, and with it."""
    path = written(folder, with_lines(plain, open=FROM, short=FROM, load=FROM))
    return fit_bench(folder / "bench.toml", created="2024-05-01"), fit_bench(path, created="2024-05-01")


def parameter(kit, standard, name):
    return next(one for one in kit.definition(standard).parameters if one.name == name)


def test_a_drawing_makes_c0_at_least_five_times_surer(kits):
    without, drawn = (parameter(kit, "open", "c0") for kit in kits)
    assert without.u > 5.0 * drawn.u
    assert (without.role, drawn.role) == ("assumed", "given")


def test_roles_of_drawn_and_held_parameters(kits):
    _, kit = kits
    told = {one.name: one.role for one in kit.definition("open").parameters}
    assert {told[name] for name in ("offset_delay_ps", "offset_z0_ohm", "c0", "c2")} == {"given"}
    assert (told["c1"], told["c3"]) == ("held", "held")
    assert {parameter(kit, "short", name).role for name in ("l1", "l2", "l3")} == {"held"}
    assert parameter(kit, "load", "resistance_ohm").given[0] == pytest.approx(50.0)


def test_a_right_drawing_is_not_contradicted(kits):
    assert not [warning for warning in kits[1].warnings if "drawn" in warning]


def test_the_kit_names_the_drawing_with_its_digest(kits, folder):
    _, kit = kits
    digest = hashlib.sha256((folder / "parts.drawing.toml").read_bytes()).hexdigest()
    named = [one for one in kit.files if one.standard.startswith("drawing of ")]
    assert [(one.standard, one.file, one.sha256) for one in named] == [
        (f"drawing of {kind}", "parts.drawing.toml", digest) for kind in ("open", "short", "load")
    ]
    text = kit_text(kit)
    assert kit_text(parse_kit(text, "kit.toml")) == text


def expanded(folder, text):
    bench = read_bench(written(folder, text, "asked.toml"))
    grid = np.linspace(1e8, 6e9, 20)
    sweep = [type("Read", (), {"frequency_hz": grid})()]
    return with_drawings(bench, {entry.name: sweep for entry in bench.standards})


def test_an_explicit_value_goes_first(folder, plain):
    given = "given.c0 = { value = 41.0, u = 3.0 }\n"
    bench = expanded(folder, with_lines(plain, open=given + FROM))
    entry = bench.standards[0]
    assert (entry.given["c0"].value, entry.given["c0"].u) == (41.0, 3.0)
    assert "c0" not in entry.drawn and {"c1", "c2", "c3", "offset_delay_ps"} <= set(entry.drawn)


def test_the_full_polynomial_frees_the_odd_orders(folder, plain):
    entry = expanded(folder, with_lines(plain, open=FROM + '\npolynomial = "full"')).standards[0]
    assert not {"c1", "c3"} & set(entry.given)
    assert {"c0", "c2"} <= set(entry.given)


def test_a_shared_line_takes_nothing_of_its_own_drawing(folder, plain):
    entry = expanded(folder, with_lines(plain, open=FROM + '\nsame_offset_as = "short"')).standards[0]
    assert {name for name in entry.drawn if name.startswith("offset_")} == set()
    assert "c0" in entry.drawn


def test_a_part_may_be_named(folder, plain):
    text = with_lines(plain, open='given.from_drawing = { file = "parts.drawing.toml", part = "open" }')
    assert "c0" in expanded(folder, text).standards[0].drawn


@pytest.mark.parametrize(
    ("line", "key", "what"),
    [
        ('given.from_drawing = "nowhere.toml"', "standard[open].given.from_drawing", "no such drawing"),
        (
            "given.from_drawing = 3",
            "standard[open].given.from_drawing",
            "a whole number where a table belongs",
        ),
        ('given.from_drawing = ""', "standard[open].given.from_drawing", "empty"),
        ('given.from_drawing = { part = "open" }', "standard[open].given.from_drawing.file", "missing"),
        ('given.from_drawing = { fiel = "x" }', "standard[open].given.from_drawing.fiel", "unknown key"),
        ('given.form_drawing = "parts.drawing.toml"', "standard[open].given.form_drawing", "unknown key"),
        (
            'given.from_drawing = { file = "parts.drawing.toml", part = "short" }',
            "part[short].kind",
            "it is a short",
        ),
        ('given.from_drawing = "bench.toml"', "format", "not a drawing"),
    ],
)
def test_refusals_name_the_key(folder, plain, line, key, what):
    with pytest.raises(BenchError) as refused:
        expanded(folder, with_lines(plain, open=line))
    assert refused.value.key == key
    assert what in refused.value.what


def test_a_wrong_length_is_told_in_ps_and_mm(tmp_path):
    made = draw_drawn_bench(np.random.default_rng(5), longer_mm=0.5)
    path = write_drawn(tmp_path, made)
    path.write_text(
        with_lines(path.read_text(encoding="utf-8"), open=FROM, short=FROM, load=FROM), encoding="utf-8"
    )
    told = [warning for warning in fit_bench(path).warnings if "than drawn" in warning]
    assert len(told) == 1
    assert told[0].startswith("open: by the readings it is 1.")
    assert "longer than drawn" in told[0]
    assert "check length_mm" in told[0]


@pytest.mark.parametrize("told_as", ["{ value = 105.0, tolerance = 0.5 }", "105.0"], ids=["limits", "exact"])
def test_a_wrong_resistance_is_told_in_ohm(folder, plain, told_as):
    drawing = (folder / "parts.drawing.toml").read_text(encoding="utf-8")
    (folder / "wrong.drawing.toml").write_text(
        drawing.replace("{ value = 100.0, tolerance = 1.0 }", told_as), encoding="utf-8"
    )
    path = written(folder, with_lines(plain, load='given.from_drawing = "wrong.drawing.toml"'), "wrong.toml")
    told = [warning for warning in fit_bench(path).warnings if "is drawn" in warning]
    assert len(told) == 1
    assert "Ω where 52.5 Ω is drawn" in told[0]


def test_a_drawing_that_tells_nothing_adds_nothing(folder, plain):
    (folder / "weak.drawing.toml").write_text(
        'format = "stdfit-drawing/1"\n[[part]]\nname = "open"\nkind = "open"\n', encoding="utf-8"
    )
    path = written(folder, with_lines(plain, open='given.from_drawing = "weak.drawing.toml"'), "weak.toml")
    weak, without = fit_bench(path), fit_bench(folder / "bench.toml")
    for name in ("open", "short", "load"):
        assert weak.definition(name).values.tolist() == without.definition(name).values.tolist()
    assert replace(weak, files=()).limit == without.limit


def test_raw_readings_without_references_take_lengths_from_drawings(tmp_path):
    """Lengths by a drawing are the same evidence as the delays that they make."""
    made = draw_five_parts(Workshop(), np.random.default_rng(3))
    lines = ['format = "stdfit-drawing/1"']
    standards = []
    for entry in made.bench.standards:
        told = entry.given.get("offset_delay_ps")
        if entry.kind != "short" or told is None or told.value == 0.0:
            standards.append(entry)
            continue
        mm = {"value": told.value * MM_PER_PS, "u": told.u * MM_PER_PS}
        lines += ["[[part]]", f'name = "{entry.name}"', 'kind = "short"', "[[part.section]]"]
        lines += [f"length_mm = {{ value = {mm['value']!r}, u = {mm['u']!r} }}", 'dielectric = "vacuum"']
        standards.append(replace(entry, given={}, from_drawing=DrawnFrom(tmp_path / "lengths.toml")))
    assert lines.count("[[part]]") == 2
    (tmp_path / "lengths.toml").write_text("\n".join(lines) + "\n", encoding="utf-8")
    given = characterise(made.bench, made.sweeps, created="2024-05-01")
    by_drawing = characterise(
        replace(made.bench, standards=tuple(standards)), made.sweeps, created="2024-05-01"
    )
    for one, other in zip(given.definitions, by_drawing.definitions, strict=True):
        assert other.values == pytest.approx(one.values, rel=1e-6, abs=1e-6)


def test_the_next_mode_of_what_is_drawn_is_the_ceiling(folder, plain):
    """A bore of 40 mm holds TE11 from some 3 GHz on: c/[π(a + b)] is 3.3 GHz, 2 % low (see the published onsets)."""
    bore = """format = "stdfit-drawing/1"
[[part]]
name = "open"
kind = "open"
[[part.section]]
length_mm = { value = 4.0, tolerance = 0.1 }
inner_mm = { value = 17.4, tolerance = 0.1 }
outer_mm = { value = 40.0, tolerance = 0.1 }
[part.end]
form = "shielded"
pin_mm = { value = 0.0, tolerance = 0.1 }
pipe_mm = 60.0
"""
    (folder / "wide.drawing.toml").write_text(bore, encoding="utf-8")
    text = with_lines(plain, open='given.from_drawing = "wide.drawing.toml"')
    kit = fit_bench(written(folder, text, "wide.toml"))
    assert kit.top_hz == pytest.approx(3.4e9, rel=0.03)
    assert kit.limit.limit_hz <= kit.top_hz
    assert any("open, as drawn: the next mode begins at 3." in line for line in kit.warnings)
