"""Raw readings without references used wrongly: one or two lines that say what to do, whatever it is."""

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.trials.files import touchstone_text

NEW = {
    "short": ("short", [0.0, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "open": ("open", [5.2, 1.4, 50.0, 38.0, 0.0, 120.0, 0.0]),
    "load": ("load", [5.4, 0.0, 50.0, 50.3, 20.0, 0.0]),
    "offset short": ("short", [66.7, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
}
FLUSH = {"short": "given.offset_delay_ps = { value = 0.0, u = 0.1 }"}
LENGTHS = {**FLUSH, "offset short": "given.offset_delay_ps = { value = 66.7, u = 0.1 }"}


@pytest.fixture
def written(raw_bench):
    """Return a function that writes a bench without known standards, with what is said of its parts."""

    def make(said=LENGTHS, **fields):
        path = raw_bench(**{"new": NEW, "known": (), "noise": 1e-4, **fields}).write()
        text = path.read_text(encoding="utf-8")
        for name, line in said.items():
            assert f'name = "{name}"\n' in text
            text = text.replace(f'name = "{name}"\n', f'name = "{name}"\n{line}\n')
        path.write_text(text, encoding="utf-8")
        return path

    return make


def refused(capsys, *arguments):
    """Return what the command says on standard error, after making sure that it is an error as it should be."""
    assert main([str(one) for one in arguments]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert 1 <= len(said.err.strip().splitlines()) <= 2
    assert "Traceback" not in said.err
    return said.err


def test_three_standards(written, capsys):
    three = {name: NEW[name] for name in ("short", "open", "load")}
    said = refused(capsys, "fit", written(FLUSH, new=three))
    assert "raw readings of 3 standards, fewer than three of them known" in said
    assert "add two offset shorts of known length" in said


@pytest.mark.parametrize("said", [{}, {"open": "given.offset_z0_ohm = 50.0"}])
def test_no_length(written, capsys, said):
    told = refused(capsys, "fit", written(said))
    assert "at least one length must be given, else the plane could lie anywhere" in told
    assert "given.offset_delay_ps" in told


def test_two_loads_and_one_length(written, capsys):
    """Three standards are roughly known, and two of them reflect alike."""
    loads = {"short": NEW["short"], "open": NEW["open"], "load": NEW["load"], "other load": NEW["load"]}
    loads["other load"] = ("load", [7.0, 0.0, 50.0, 49.6, 80.0, 0.0])
    told = refused(capsys, "fit", written(FLUSH, new=loads))
    assert "reflect alike: short, load, other load" in told


def test_an_adapter(written, capsys):
    others = '[[adapter]]\nname = "between"\ndelay_ps = { value = 60.0, u = 1.0 }\n'
    path = written({**LENGTHS, "open": 'behind = "between"'}, others=others)
    told = refused(capsys, "fit", path)
    assert "key 'standard[open].behind': raw readings behind an adapter need three known standards" in told


def test_a_set_of_one(written, capsys):
    path = written(known=(("known open", "open", "before"),))
    told = refused(capsys, "fit", path)
    assert "key 'standard[known open].set': sets tell the drift only where" in told


def test_a_known_standard_that_its_kit_does_not_hold(written, capsys):
    path = written(known=(("known open", "open", ""),))
    text = path.read_text(encoding="utf-8")
    path.write_text(text.replace('standard = "open"', 'standard = "opn"'), encoding="utf-8")
    assert "the kit holds no standard 'opn'" in refused(capsys, "fit", path)


def test_another_grid(written, capsys):
    path = written()
    f = np.linspace(60e6, 5e9, 101)
    text = touchstone_text(f, 0.1 * np.exp(-1e-9j * f), 50.0, "another sweep")
    (path.parent / "load-2.s1p").write_text(text, encoding="utf-8")
    told = refused(capsys, "fit", path)
    assert "load-2.s1p" in told
    assert "differ from those of" in told


def test_too_few_points_in_the_band(written, capsys):
    path = written()
    text = path.read_text(encoding="utf-8")
    path.write_text(text + "\n[goal]\nhighest_hz = 200e6\n", encoding="utf-8")
    assert "fewer than 8 readings lie in the band" in refused(capsys, "fit", path)


def test_the_same_file_for_two_standards(written, capsys):
    path = written()
    (path.parent / "load-2.s1p").write_bytes((path.parent / "open-1.s1p").read_bytes())
    assert "the same readings as" in refused(capsys, "fit", path)


@pytest.mark.parametrize("command", [("fit", "--monte-carlo", "200"), ("plan",)])
def test_what_needs_corrected_readings(written, capsys, command):
    told = refused(capsys, *command, written())
    assert "fewer than three known standards (0) among raw readings" in told
    assert "'stdfit fit' takes such a bench" in told


def test_an_open_that_is_called_a_load(written, capsys):
    """Its resistance would run off to 10¹⁰⁰ Ω, with ± 0."""
    path = written()
    text = path.read_text(encoding="utf-8")
    assert text.count('kind = "open"') == 1
    path.write_text(text.replace('kind = "open"', 'kind = "load"'), encoding="utf-8")
    told = refused(capsys, "fit", path)
    assert "standard 'open' is called a load but reflects like a short or open (|Γ| = " in told
    assert "check which file belongs to which standard" in told
    assert not (path.parent / "kit.toml").exists()


def test_nothing_is_written_where_something_is_refused(written, capsys):
    path = written({})
    refused(capsys, "fit", path)
    assert not (path.parent / "kit.toml").exists()


def test_nonsense_readings_end_in_words_too(written, capsys):
    """Noise in place of all readings: a kit that is good for nothing, or an error, but never a traceback."""
    path = written()
    rng = np.random.default_rng(3)
    for file in path.parent.glob("*.s1p"):
        f = np.linspace(60e6, 5.9e9, 101)
        noise = 0.3 * (rng.standard_normal((f.size, 2)) @ [1.0, 1j])
        file.write_text(touchstone_text(f, noise, 50.0, "noise"), encoding="utf-8")
    if (code := main(["fit", str(path)])) == 0:
        capsys.readouterr()
        code = main(["limit", str(path.parent / "kit.toml")])
    told = capsys.readouterr()
    assert "Traceback" not in told.err + told.out
    assert code in (0, 1, 2)
    if code == 0:
        assert " none " in told.out.splitlines()[1]


def test_what_to_do_next_is_something_that_can_be_done(written, capsys):
    assert main(["fit", str(written())]) == 0
    told = capsys.readouterr().out
    assert "next: stdfit limit" in told
    assert "stdfit plan" not in told
