"""`stdfit adapter` and what follows: an adapter determined, written, used for a kit, and named as its thru."""

import json
from pathlib import Path

import numpy as np
import pytest

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.two_port import box_of
from stdfit.cli import main
from stdfit.trials.adapters import draw_adapter, s_parameters
from stdfit.validity.kit import curve
from stdfit.writing.adapter_reading import read_adapter
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit

KINDS = ("open", "short", "load")
F = np.linspace(50e6, 4e9, 101)
RESIDUAL = """[analyser.residual]
frequency_hz = [1e9]
directivity_db = [80]
source_match_db = [80]
reflection_tracking_db = [0.001]
"""


def bench(text, standards, adapters):
    tables = [
        f'[[standard]]\nname = "{name}"\nkind = "{name}"\nreadings = ["{name}-*.s1p"]\n{more.format(name=name)}\n'
        for name, more in standards.items()
    ]
    head = 'format = "stdfit-bench/1"\nkit = { name = "Invented", connector = "SMA" }\n'
    return "\n".join([head, f'[analyser]\nstate = "corrected"\n{text}', RESIDUAL, *tables, adapters])


def write_readings(folder, shop, s, f=F):
    folder.mkdir()
    rng = np.random.default_rng(4)
    for name in KINDS:
        for k in range(3):
            turn = np.exp(-4e-13j * np.pi * f * rng.standard_normal())
            gamma = seen_raw(box_of(s), shop.truth(name, f) * turn)
            gamma = gamma + 1e-4 * (rng.standard_normal(f.size) + 1j * rng.standard_normal(f.size))
            rows = [f"{hz!r} {g.real!r} {g.imag!r}" for hz, g in zip(f.tolist(), gamma.tolist(), strict=True)]
            (folder / f"{name}-{k + 1}.s1p").write_text("# Hz S RI R 50\n" + "\n".join(rows) + "\n")


@pytest.fixture(scope="module")
def shop(workshop):
    return workshop(noise=1e-5, residual_db=100.0)


@pytest.fixture(scope="module")
def s():
    return s_parameters(draw_adapter(np.random.default_rng(1)), F)


@pytest.fixture(scope="module")
def determined(shop, s, tmp_path_factory):
    """A folder in which an adapter was determined with the kit of a workshop."""
    folder = tmp_path_factory.mktemp("barrel")
    (folder / "reference.toml").write_text(kit_text(shop.kit()), encoding="utf-8")
    write_readings(folder / "known", shop, s)
    known = 'from_kit = "../reference.toml"\nstandard = "{name}"\nbehind = "barrel"'
    text = bench("", dict.fromkeys(KINDS, known), '[[adapter]]\nname = "barrel"\n')
    (folder / "known" / "bench.toml").write_text(text, encoding="utf-8")
    return folder


@pytest.fixture(scope="module")
def adapter_file(determined):
    target = determined / "barrel.adapter.toml"
    assert main(["adapter", str(determined / "known"), "-o", str(target)]) == 0
    return target


def test_it_writes_both_files_and_says_so(determined, capsys, s):
    target = determined / "first.adapter.toml"
    assert main(["adapter", str(determined / "known"), "-o", str(target)]) == 0
    out, err = capsys.readouterr()
    assert "As a line (± 95 %)" in out and f"adapter file: {target}" in out
    assert (determined / "first.s2p").exists()
    assert "Traceback" not in err
    adapter = read_adapter(target)
    at = np.isin(adapter.frequency_hz, adapter.known_hz)
    assert ((np.abs(adapter.s - s)[at] <= adapter.s_bounds).mean(axis=0) > 0.9).all()
    assert {one.standard for one in adapter.files} == set(KINDS)
    before = target.read_bytes(), (determined / "first.s2p").read_bytes()
    assert main(["adapter", str(determined / "known"), "-o", str(target), "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert (data["name"], data["adapter_file"]) == ("barrel", str(target))
    assert (target.read_bytes(), (determined / "first.s2p").read_bytes()) == before


@pytest.mark.parametrize("way", ["behind", "calibrated_with"])
def test_a_kit_is_made_with_it_and_has_it_as_thru(adapter_file, shop, s, way, capsys):
    folder = adapter_file.parent / way
    box = s if way == "behind" else inverse_of(s)
    write_readings(folder, shop, box)
    adapters = '[[adapter]]\nname = "barrel"\nfile = "../barrel.adapter.toml"\n[thru]\nadapter = "barrel"\n'
    text = bench(
        'calibrated_with = "barrel"\n' if way == "calibrated_with" else "",
        dict.fromkeys(KINDS, 'behind = "barrel"' if way == "behind" else ""),
        adapters,
    )
    (folder / "bench.toml").write_text(text, encoding="utf-8")
    assert main(["fit", str(folder)]) == 0
    kit = read_kit(folder / "kit.toml")
    for one in kit.definitions:
        gamma, bound = curve(kit, one, F)
        assert (np.abs(gamma - shop.truth(one.name, F)) <= bound).mean() > 0.9, one.name
        assert bound.max() < 0.05
    adapter = read_adapter(adapter_file)
    assert kit.thru is not None and kit.thru.line == adapter.line
    assert kit.ancestors == adapter.ancestors
    assert ("adapter barrel", "barrel.adapter.toml") in {(one.standard, one.file) for one in kit.files}
    capsys.readouterr()
    assert main(["show", str(folder / "kit.toml")]) == 0
    assert "Thru: barrel" in capsys.readouterr().out
    assert main(["plan", str(folder)]) == 0
    assert main(["fit", str(folder), "--monte-carlo", "100"]) == 0


def inverse_of(s):
    """The two-port whose removal is the insertion of another: its wave matrix inverted (derived)."""
    s11, s21, s22 = s.T
    # m = (Γ − a)/(b + cΓ), written as S11' + P'·Γ/(1 − S22'·Γ).
    b = s21**2 - s11 * s22
    return np.stack([-s11 / b, s21 / b, -s22 / b], axis=-1)


def refused(capsys, *arguments, code=2):
    assert main([str(one) for one in arguments]) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") <= 2 and err.startswith("stdfit: ")
    return err


def test_only_its_own_files_are_overwritten(determined, capsys, tmp_path):
    for name in ("notes.toml", "other.adapter.toml"):
        (tmp_path / name).write_text("mine")
    assert "is no adapter file" in refused(
        capsys, "adapter", determined / "known", "-o", tmp_path / "notes.toml"
    )
    (tmp_path / "barrel.s2p").write_text("mine")
    told = refused(capsys, "adapter", determined / "known", "-o", tmp_path / "barrel.adapter.toml")
    assert "is no Touchstone file of an adapter" in told
    assert (tmp_path / "barrel.s2p").read_text() == "mine"
    assert not (tmp_path / "barrel.adapter.toml").exists()
    assert "no such folder" in refused(
        capsys, "adapter", determined / "known", "-o", tmp_path / "none" / "a.toml"
    )
    assert "a folder stands" in refused(capsys, "adapter", determined / "known", "-o", tmp_path)


def test_a_sign_that_cannot_be_told_ends_with_1(shop, determined, capsys, tmp_path):
    f = np.linspace(3.9e9, 3.905e9, 31)
    write_readings(tmp_path / "high", shop, s_parameters(draw_adapter(np.random.default_rng(1)), f), f)
    text = (determined / "known" / "bench.toml").read_text(encoding="utf-8")
    text = text.replace("../reference.toml", Path(determined / "reference.toml").as_posix())
    (tmp_path / "high" / "bench.toml").write_text(text, encoding="utf-8")
    told = refused(capsys, "adapter", tmp_path / "high", code=1)
    assert "the sign of S21 of 'barrel' cannot be told" in told and "give delay_ps" in told
    assert not (tmp_path / "high" / "adapter.toml").exists()
    text = text.replace(
        '[[adapter]]\nname = "barrel"', '[[adapter]]\nname = "barrel"\ndelay_ps = { value = 95, u = 3 }'
    )
    (tmp_path / "high" / "bench.toml").write_text(text, encoding="utf-8")
    assert main(["adapter", str(tmp_path / "high")]) == 0
    assert (tmp_path / "high" / "adapter.s2p").exists()


def test_a_bench_that_determines_nothing(determined, capsys):
    assert "determine the adapter 'barrel'" in refused(capsys, "fit", determined / "known")
