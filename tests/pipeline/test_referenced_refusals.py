"""Raw readings and references used wrongly: one or two lines that say what to do, whatever it is."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.data.bench import read_bench
from stdfit.pipeline.path import too_few_references
from stdfit.pipeline.raw.references import count_references
from stdfit.trials.files import touchstone_text

USUAL = (("known open", "open", ""), ("known short", "short", ""), ("known load", "load", ""))
BEFORE = tuple((f"before {kind}", kind, "before") for kind in ("open", "short", "load"))


def refused(capsys, path):
    """Return what the command says on standard error, after making sure that it is an error as it should be."""
    assert main(["fit", str(path)]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert 1 <= len(said.err.strip().splitlines()) <= 2
    assert "Traceback" not in said.err
    return said.err


def edited(path, *changes):
    text = path.read_text(encoding="utf-8")
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")
    return path


def test_a_set_of_two(raw_bench, capsys):
    known = (*BEFORE, *((f"after {kind}", kind, "after") for kind in ("open", "short")))
    said = refused(capsys, raw_bench(known=known).write())
    assert "key 'standard[after open].set': the set 'after' holds 2 of the 3 known standards" in said


def test_a_set_is_missing(raw_bench, capsys):
    said = refused(capsys, raw_bench(known=(*BEFORE, *USUAL)).write())
    assert "key 'standard[known open].set': missing, while other known standards name their set" in said


def test_one_reference_twice_in_a_set(raw_bench, capsys):
    said = refused(capsys, raw_bench(known=(*USUAL, ("open again", "open", ""))).write())
    assert "the same known standard as 'known open', in the same set" in said


def test_a_standard_that_the_kit_does_not_hold(raw_bench, capsys):
    path = edited(raw_bench().write(), ('standard = "load"', 'standard = "lod"'))
    said = refused(capsys, path)
    assert "key 'standard[known load].standard': the kit holds no standard 'lod'" in said
    assert "did you mean 'load'?" in said


def test_a_standard_of_another_kind(raw_bench, capsys):
    path = edited(raw_bench().write(), ('standard = "load"', 'standard = "short"'))
    assert "key 'standard[known load].kind': 'short' is a short in the kit" in refused(capsys, path)


def test_a_kit_of_another_reference_impedance(raw_bench, workshop, capsys):
    other = workshop(reference_ohm=75.0, connector="N 75").kit()
    said = refused(capsys, raw_bench(kit=other).write())
    assert "the kit is of 75 Ω, and the bench of 50 Ω" in said


def test_a_broken_kit_file(raw_bench, capsys):
    bench = raw_bench()
    path = bench.write()
    (bench.folder / "reference.toml").write_text("no kit", encoding="utf-8")
    assert "reference.toml" in refused(capsys, path)
    (bench.folder / "reference.toml").unlink()
    assert "no such kit file" in refused(capsys, path)


def test_two_known_standards_only(raw_bench):
    """What is said where nothing else can be done with them."""
    bench = read_bench(raw_bench(known=USUAL[:2]).write())
    assert count_references(bench) == 2
    assert (
        str(too_few_references(bench))
        .splitlines()[0]
        .endswith("key 'standard': fewer than three known standards (2) among raw readings")
    )


def test_nothing_to_characterise(raw_bench, capsys):
    said = refused(capsys, raw_bench(new={}).write())
    assert "all standards are known ones" in said


def test_another_grid(raw_bench, capsys):
    bench = raw_bench()
    path = bench.write()
    f = np.linspace(60e6, 5e9, 101)
    text = touchstone_text(f, 0.1 * np.exp(-1e-9j * f), 50.0, "another sweep")
    (bench.folder / "load-2.s1p").write_text(text, encoding="utf-8")
    said = refused(capsys, path)
    assert "load-2.s1p" in said
    assert "frequencies" in said


def test_no_band_in_common(raw_bench, exact_kit, capsys):
    low = [
        replace(
            one,
            read_low_hz=1e6,
            fit_low_hz=1e6,
            read_top_hz=5e7,
            fit_top_hz=5e7,
            limit=replace(one.limit, limit_hz=5e7),
        )
        for one in exact_kit.definitions
    ]
    kit = replace(exact_kit, definitions=tuple(low), limit=replace(exact_kit.limit, limit_hz=5e7))
    said = refused(capsys, raw_bench(kit=kit).write())
    assert (
        "fewer than 8 readings lie in the band that is asked for and in which all references are known"
        in said
    )
    assert "known up to 0.05 GHz" in said


def test_references_that_are_all_alike(raw_bench, exact_kit, capsys):
    first = exact_kit.definitions[0]
    kit = replace(
        exact_kit, definitions=tuple(replace(first, name=name) for name in ("open", "short", "load"))
    )
    said = refused(capsys, raw_bench(kit=kit, noise=1e-4).write())
    assert "two of them reflect nearly the same" in said


def test_swapped_new_standards(raw_bench, capsys):
    """Corrected readings are asked what corrected readings are asked."""
    bench = raw_bench()
    path = bench.write()
    one, other = bench.folder / "open-1.s1p", bench.folder / "short-1.s1p"
    texts = one.read_text(encoding="utf-8"), other.read_text(encoding="utf-8")
    for k in (1, 2, 3):
        texts = [(bench.folder / f"{name}-{k}.s1p").read_text(encoding="utf-8") for name in ("open", "short")]
        (bench.folder / f"open-{k}.s1p").write_text(texts[1], encoding="utf-8")
        (bench.folder / f"short-{k}.s1p").write_text(texts[0], encoding="utf-8")
    assert "are swapped: each reads like the other kind" in refused(capsys, path)


def test_an_entry_sheet_as_reference(raw_bench, usual_kit, capsys):
    bench = raw_bench()
    path = bench.write()
    kit = bench.folder / "reference.toml"
    capsys.readouterr()
    assert main(["sheet", str(kit), "--json"]) == 0
    (bench.folder / "sheet.json").write_text(capsys.readouterr().out, encoding="utf-8")
    said = refused(capsys, edited(path, ("reference.toml", "sheet.json")))
    assert "an entry sheet does not hold how the errors of its standards go together" in said


def test_a_set_without_a_kit(raw_bench, capsys):
    path = edited(raw_bench().write(), ('name = "open"', 'name = "open"\nset = "before"'))
    assert "key 'standard[open].set': stands without from_kit" in refused(capsys, path)


def test_a_plan_of_readings_not_taken(raw_bench, capsys):
    bench = raw_bench()
    path = bench.write()
    text = path.read_text(encoding="utf-8").splitlines()
    bare = [line for line in text if not line.startswith("readings")]
    bare.insert(3, "plan = { from_hz = 1e8, to_hz = 3e9 }")
    path.write_text("\n".join(bare) + "\n", encoding="utf-8")
    assert main(["plan", str(path)]) == 2
    said = capsys.readouterr().err
    assert "a bench of raw readings cannot be planned before it is read" in said
    assert len(said.strip().splitlines()) <= 2


@pytest.mark.parametrize("scale", [0.0, 1e-300, 5.0])
def test_raw_readings_of_any_size_end_in_words(raw_bench, capsys, scale):
    """Dead, tiny and oversized raw readings: an answer or a message, never a traceback."""
    bench = raw_bench(connections=1)
    path = bench.write()
    for file in bench.folder.glob("*.s1p"):
        f, re, im = np.loadtxt(file, comments=("!", "#")).T
        file.write_text(touchstone_text(f, scale * (re + 1j * im), 50.0, "x"), encoding="utf-8")
    code = main(["fit", str(path)])
    assert code in (0, 2)
    assert "Traceback" not in capsys.readouterr().err
