"""Kit files that are not what they should be: the key, what is wrong, and exit code 2."""

import os
from pathlib import Path

import pytest

from stdfit.base.errors import KitError
from stdfit.cli import main
from stdfit.writing.kit_reading import LARGEST_BYTES, parse_kit, read_kit

SMALL = (Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml").read_text(encoding="utf-8")

# (what is put into the small kit, in place of what, key of the message, words of the message)
FAULTS = {
    "key of the head": ("conector", "connector =", "kit.conector", "did you mean 'connector'?"),
    "key of a standard": (
        "conections",
        "connections",
        "standard[0].conections",
        "did you mean 'connections'?",
    ),
    "key of a parameter": (
        "covariance_nam",
        "covariance_name",
        "standard[0].parameter[0].covariance_nam",
        "did you mean 'covariance_name'?",
    ),
    "key of a combination": (
        "correlation",
        "correlation_of_parts",
        "standard[0].combination[0].correlation",
        "did you mean 'correlation_of_parts'?",
    ),
    "key of the misfit": ("bounds", "bound", "standard[0].misfit.bounds", "did you mean 'bound'?"),
    "key of the ladder": ("kit_limit", "kit_limit_hz", "ladder[0].kit_limit", "did you mean 'kit_limit_hz'?"),
    "key of the covariance": ("orders =", "order = [", "covariance.orders", "did you mean 'order'?"),
    "key of a source": (
        "lower_triangle",
        "lower_triangles",
        "source[0].lower_triangle",
        "did you mean 'lower_triangles'?",
    ),
    "key of a file": ("sha265", "sha256", "file[0].sha265", "did you mean 'sha256'?"),
    "key of nothing": ("[covarianz]", "[covariance]", "covarianz", "did you mean 'covariance'?"),
}


def with_key(new, old):
    """Add a key whose name is misspelt beside the right one."""
    at = SMALL.index(old)
    if old.startswith("["):
        return SMALL[:at] + f"{new}\n{SMALL[at:]}"
    line_start = SMALL.rindex("\n", 0, at) + 1
    return SMALL[:line_start] + f"{new.removesuffix(' =')} = 1\n" + SMALL[line_start:]


def refused(text, capsys, tmp_path):
    """Return the error; the command must say the same on stderr and end with 2."""
    with pytest.raises(KitError) as caught:
        parse_kit(text, tmp_path / "kit.toml")
    (tmp_path / "kit.toml").write_text(text, encoding="utf-8", newline="")
    assert main(["show", str(tmp_path / "kit.toml")]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err == f"stdfit: {caught.value}\n"
    assert err.count("\n") == 2
    assert all(letter.isprintable() for letter in err.replace("\n", ""))
    assert str(caught.value.file) == str(tmp_path / "kit.toml")
    return caught.value


@pytest.mark.parametrize("new, old, key, words", FAULTS.values(), ids=FAULTS)
def test_an_unknown_key_is_named_with_the_nearest_known_one(new, old, key, words, capsys, tmp_path):
    fault = refused(with_key(new, old), capsys, tmp_path)
    assert fault.key == key
    assert fault.what == "unknown key"
    assert fault.mend == words


VALUES = {
    "other format": ("stdfit-kit/1", "stdfit-kit/2", "format", "not a kit file of this version"),
    "bench file": ("stdfit-kit/1", "stdfit-bench/1", None, "a bench file, where a kit file is wanted"),
    "no format": ('format = "stdfit-kit/1"\n', "", "format", "not a kit file"),
    "text for a number": (
        "within = 0.02\nl",
        'within = "0.02"\nl',
        "kit.within",
        "expected a number, got text",
    ),
    "number for a text": ('name = "Garden', 'name = 1 # "', "kit.name", "expected text, got a whole number"),
    "half a connection": (
        "connections = 3",
        "connections = 2.5",
        "standard[0].connections",
        "a whole number",
    ),
    "no connection": ("connections = 3", "connections = 0", "standard[0].connections", "a whole number"),
    "date": ('created = "2000-01-01"', "created = 2000-01-01", "kit.created", "expected text, got a date"),
    "text for a list": (
        'warnings = ["one connection only of nothing"]',
        'warnings = "w"',
        "kit.warnings",
        "expected a list",
    ),
    "true": ("within = 0.02\nl", "within = true\nl", "kit.within", "expected a number, got true or false"),
    "key left out": ("read_to_hz = 6000000000.0\n", "", "standard[0]", "missing required field `read_to_hz`"),
    "within 0": ("within = 0.02\nl", "within = 0.0\nl", "kit.within", "a number > 0"),
    "within nan": ("within = 0.02\nl", "within = nan\nl", "kit.within", "a number > 0"),
    "endless number": ("_ohm = 50.0", f"_ohm = {'9' * 5000}", None, "not TOML"),
    "number too large": ("_ohm = 50.0", f"_ohm = {'9' * 500}", "kit.reference_impedance_ohm", "out of range"),
    "reference inf": ("_ohm = 50.0", "_ohm = inf", "kit.reference_impedance_ohm", "not a finite number"),
    "reference nan": ("_ohm = 50.0", "_ohm = nan", "kit.reference_impedance_ohm", "a number > 0"),
    "reference negative": ("_ohm = 50.0", "_ohm = -50.0", "kit.reference_impedance_ohm", "a number > 0"),
    "top nan": ("top_hz = 18000000000.0", "top_hz = nan", "kit.connector_top_hz", "a number >= 0"),
    "value nan": ("value = 20.25", "value = nan", "standard[0].parameter[0]", "not a finite number"),
    "value inf": ("value = 20.25", "value = -inf", "standard[0].parameter[0]", "not a finite number"),
    "u nan": ("u = 0.25", "u = nan", "standard[0].parameter[0].u", "a number >= 0"),
    "u inf": ("u = 0.25", "u = inf", "standard[0].parameter[0]", "not a finite number"),
    "u negative": ("u = 0.25", "u = -0.25", "standard[0].parameter[0].u", "a number >= 0"),
    "high inf": ("high_95 = 20.75", "high_95 = inf", "standard[0].parameter[0]", "not a finite number"),
    "value above its bounds": (
        "value = 20.25",
        "value = 20.76",
        "standard[0].parameter[0]",
        "offset_delay_ps lies outside its own 95 % interval",
    ),
    "value below its bounds": ("value = 20.25", "value = 19.7", "standard[0].parameter[0]", "lies outside"),
    "combination outside": ("value = 22.525", "value = 22.8", "standard[0].combination[0]", "lies outside"),
    "combination inf": ("high_95 = 22.775", "high_95 = inf", "standard[0].combination[0]", "not a finite"),
    "correlation of two": (
        "parts = -0.875",
        "parts = -2.0",
        "standard[0].combination[0].correlation_of_parts",
        "a number >= -1.0001",
    ),
    "kind": ('kind = "open"', 'kind = "thru"', "standard[0].kind", "there are open, short and load"),
    "kind of another": ('kind = "open"', 'kind = "short"', "standard[0].parameter", "are offset_delay_ps"),
    "unit": ('unit = "ps"', 'unit = "ns"', "standard[0].parameter[0].unit", "offset_delay_ps is in ps"),
    "role": ('role = "free"', 'role = "fre"', "standard[0].parameter[0].role", "there are free, given"),
    "covariance name": (
        'name = "open.c0"',
        'name = "open.c9"',
        "standard[0].parameter[3].covariance_name",
        "not named in covariance.order",
    ),
    "quantity twice": ('"open.c0", "load', '"load.resistance_ohm", "load', "covariance.order", "named twice"),
    "same name": ('name = "load"', 'name = "open"', "standard", "two standards have the same name"),
    "empty band": ("read_to_hz = 6000000000.0", "read_to_hz = 0.0", "standard[0].read_to_hz", "empty"),
    "endless band": ("read_to_hz = 6000000000.0", "read_to_hz = inf", "standard[0].read_to_hz", "not finite"),
    "fit above the readings": (
        "fit_to_hz = 5000000000.0",
        "fit_to_hz = 6000000001.0",
        "standard[0].fit_to_hz",
        "does not lie within the readings",
    ),
    "limit above the data": (
        'limit_hz = 3500000000.0\nlimit_reason = "the',
        'limit_hz = 6000000001.0\nlimit_reason = "the',
        "standard[0].limit_hz",
        "the limit lies above the last reading",
    ),
    "kit's limit above the data": (
        'limit_hz = 3500000000.0\nlimit_reason = "open',
        'limit_hz = inf\nlimit_reason = "open',
        "kit.limit_hz",
        "the limit lies above the last reading of a standard",
    ),
    "limit nan": ("limit_hz = 6000000000.0\nl", "limit_hz = nan\nl", "standard[1].limit_hz", "a number >= 0"),
    "limits tried": (
        "[3500000000.0, 3250000000.0]",
        "[3500000000.0, inf]",
        "standard[0].orders_limit_hz",
        "finite",
    ),
    "orders tried": (
        "[3500000000.0, 3250000000.0]",
        "[3500000000.0]",
        "standard 'open'.orders_tried",
        "long",
    ),
    "misfit nan": (
        "bound = [0.0, 0.001,",
        "bound = [0.0, nan,",
        "standard[0].misfit.bound[1]",
        "a number >= 0",
    ),
    "misfit inf": ("bound = [0.0, 0.001,", "bound = [0.0, inf,", "standard[0].misfit", "finite"),
    "misfit too short": ("bound = [0.0, 0.001,", "bound = [0.001,", "standard[0].misfit", "equally long"),
    "misfit falling": (
        "[50000000.0, 3000000000.0,",
        "[50000000.0, 40000000.0,",
        "standard[0].misfit.frequency_hz",
        "do not rise",
    ),
    "triangle too short": (
        "16.0, 0.001, -0.02, 0.0004]",
        "16.0]",
        "source[0].lower_triangles",
        "a lower triangle of 3 quantities has 6 numbers",
    ),
    "no triangle": (
        "[\n    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0025],\n]",
        "[]",
        "source[1].lower_triangles",
        "has 6 numbers",
    ),
    "odd number of triangles": (
        "[0.0, 0.0, 0.0, 0.0, 0.0, 0.0025],",
        "[0.0, 0.0, 0.0, 0.0, 0.0, 0.0025]," * 3,
        "source[0].lower_triangles",
        "one lower triangle, or all the same number",
    ),
    "covariance nan": ("0.0004], ".strip(), "nan],", "source[0].lower_triangles", "not a finite number"),
    "negative variance": ("[0.0625, -0.7", "[-0.0625, -0.7", "source[0].lower_triangles", "not positive"),
    "correlation above 1": ("[0.0625, -0.7", "[0.0625, -1.1", "source[0].lower_triangles", "not positive"),
    "covariance not positive": (
        "[0.0625, -0.7, 16.0, 0.001, -0.02, 0.0004]",
        "[1.0, 0.9, 1.0, -0.9, 0.9, 1.0]",
        "source[0].lower_triangles",
        "not positive",
    ),
    "covariance out of nothing": (
        "[0.0004, 0.0, 0.01,",
        "[0.0, 1e300, 0.01,",
        "source[2].lower_triangles",
        "not positive",
    ),
    "bound beyond all sense": (
        "[0.0004, 0.0, 0.01,",
        "[1e308, 0.0, 1e308,",
        "standard[0].limit_hz",
        "the bound allows no limit above 0 Hz",
    ),
    "value out of range": (
        'value = 45.5\nunit = "1e-15 F"\nu = 4.0\nlow_95 = 37.5\nhigh_95 = 53.5',
        'value = 1e300\nunit = "1e-15 F"\nu = 4.0\nlow_95 = 1e300\nhigh_95 = 1e300',
        "standard[0].parameter",
        "no finite reflection and bound",
    ),
    "freedom 0": ("freedom = 4.0", "freedom = 0.0", "source[1].degrees_of_freedom", "a number > 0"),
    "freedom nan": ("freedom = 4.0", "freedom = nan", "source[1].degrees_of_freedom", "a number > 0"),
    "ladder too short": (
        "[2500000000.0, 6000000000.0]",
        "[1.0]",
        "ladder[0].standard_limits_hz",
        "each standard",
    ),
    "ladder inf": ("kit_limit_hz = 2500000000.0", "kit_limit_hz = inf", "ladder[0]", "not a finite number"),
    "escape in a name": ('"Garden shed', '"\\u001b[31mGarden', "kit.name", "control character"),
    "bell in a reason": (
        'reason = "the readings',
        'reason = "\\u0007the',
        "standard[0].limit_reason",
        "control",
    ),
    "line end in a note": ('"delay and C0', '"delay\\nand C0', "standard[0].notes[0]", "control character"),
    "right to left": ('"one connection', '"\\u202eone', "kit.warnings[0]", "control character"),
    "escape in a file name": ('"open-1.s1p"', '"\\u009b31m"', "file[0].name", "control character"),
    "escape in a source": ('name = "noise"', 'name = "\\u001bnoise"', "source[2].name", "control character"),
    "escape in a unit": (
        'unit = "ps"',
        'unit = "\\u001b"',
        "standard[0].parameter[0].unit",
        "control character",
    ),
}


@pytest.mark.parametrize("old, new, key, words", VALUES.values(), ids=VALUES)
def test_a_value_that_cannot_be_is_refused_at_its_key(old, new, key, words, capsys, tmp_path):
    assert old in SMALL
    fault = refused(SMALL.replace(old, new, 1), capsys, tmp_path)
    assert fault.key == key
    assert words in fault.what


def test_a_hostile_key_is_shown_without_its_escape_sequence(capsys, tmp_path):
    fault = refused(with_key('"\\u001b[2J`x - at `$.kit`"', "connections"), capsys, tmp_path)
    assert fault.what == "unknown key"
    assert fault.key.startswith("standard[0].�[2J")


def test_a_raw_escape_in_the_text_is_shown_without_its_effect(capsys, tmp_path):
    assert "not TOML" in refused(SMALL.replace('"Garden', '"\x1b[31mGarden', 1), capsys, tmp_path).what


def test_a_kit_without_sources_says_so(capsys, tmp_path):
    head, _, rest = SMALL.partition("[[source]]")
    files = rest[rest.index("[[file]]") :]
    assert refused(head + files, capsys, tmp_path).key == "source"


def test_a_kit_without_standards_says_so(capsys, tmp_path):
    head, _, rest = SMALL.partition("[[standard]]")
    text = head.replace("[kit]", "standard = []\n[kit]") + rest[rest.index("[[ladder]]") :]
    assert refused(text, capsys, tmp_path).what == "the kit holds no standard"


def test_too_deep(capsys, tmp_path):
    text = SMALL.replace("notes = []", "notes = " + "[" * 5000 + "]" * 5000, 1)
    assert refused(text, capsys, tmp_path).what == "too deeply nested"


def test_a_file_cut_anywhere_is_refused_or_whole():
    """Cut in the list of files at the end, the rest is a whole kit; cut before the sources it is none."""
    sources = SMALL.index("[[source]]")
    for end in range(0, sources, 13):
        with pytest.raises(KitError):
            parse_kit(SMALL[:end], "kit.toml")


def command_refuses(path, capsys):
    """Return what read_kit says; the command must say the same, with 2."""
    with pytest.raises(KitError) as caught:
        read_kit(path)
    for command in ("show", "curve", "limit"):
        assert main([command, str(path)]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert err == f"stdfit: {caught.value}\n"
    return caught.value.what


def test_files_that_are_no_files(tmp_path, capsys):
    assert command_refuses(tmp_path / "none.toml", capsys) == "no such kit file"
    assert command_refuses(tmp_path, capsys) == "the folder holds no kit.toml"
    os.mkfifo(tmp_path / "pipe")
    assert command_refuses(tmp_path / "pipe", capsys) == "not an ordinary file"
    assert "cannot be read" in command_refuses(tmp_path / ("x" * 300), capsys)


def test_files_of_other_things(tmp_path, capsys):
    path = tmp_path / "kit.toml"
    path.write_bytes(bytes(range(256)))
    assert command_refuses(path, capsys) == "not UTF-8 text"
    path.write_bytes(b"")
    assert "not a kit file" in command_refuses(path, capsys)
    path.write_bytes(b"\0" * 100)
    assert "not TOML" in command_refuses(path, capsys)


def test_a_huge_file_is_not_read(tmp_path, capsys):
    path = tmp_path / "kit.toml"
    with path.open("wb") as file:
        file.truncate(LARGEST_BYTES + 1)
    assert command_refuses(path, capsys) == "larger than 16 MB"
