"""Every command that writes: a file that is the user's own is never touched, and neither is anything elsewhere."""

import os
import shutil

import pytest
from fuzz_judge import snapshot
from fuzz_seeds import make_scenes

from stdfit.cli import main

MINE = "mine, and not to be lost\n"
WRITERS = {
    "fit": ("bench", ["fit", ".", "-o", "out.toml"], "out.toml"),
    "fit, usual name": ("bench", ["fit", "."], "kit.toml"),
    "new": ("new", ["new", "."], "bench.toml"),
    "adapter": ("through", ["adapter", ".", "-o", "out.toml"], "out.toml"),
    "adapter, usual name": ("through", ["adapter", "."], "adapter.toml"),
    "adapter, file beside it": ("through", ["adapter", ".", "-o", "out.toml"], "out.s2p"),
    "export, Touchstone": ("kits", ["export", "kit.toml", "out", "--points", "9"], "out/open.s1p"),
    "export, table": ("kits", ["export", "kit.toml", "out", "--points", "9"], "out/standards.csv"),
    "export, joint table": (
        "kits",
        ["export", "kit.toml", "out", "--points", "9"],
        "out/joint-covariance.csv",
    ),
    "history": ("shelf", ["history", ".", "--plot", "out.svg"], "out.svg"),
    "demo, reading": ("demo", ["demo", "--out", "out"], "out/short-2.s1p"),
    "demo, bench": ("demo", ["demo", "--out", "out"], "out/bench.toml"),
    "demo, kit": ("demo", ["demo", "--out", "out"], "out/kit.toml"),
    "demo, page": ("demo", ["demo", "--out", "out"], "out/report.html"),
    "report": ("kits", ["report", "kit.toml", "-o", "out.html"], "out.html"),
    "report, usual name": ("kits", ["report", "kit.toml"], "kit.html"),
    "fit, report": ("bench", ["fit", ".", "--report", "out.html"], "out.html"),
}


@pytest.fixture(scope="module")
def scenes(tmp_path_factory):
    root = tmp_path_factory.mktemp("scenes")
    make_scenes(root)
    (root / "demo").mkdir()
    return root


@pytest.fixture(params=WRITERS.values(), ids=WRITERS)
def writer(request, scenes, tmp_path, monkeypatch):
    scene, call, target = request.param
    folder = tmp_path / "case"
    shutil.copytree(scenes / scene, folder)
    (folder / target).parent.mkdir(exist_ok=True)
    monkeypatch.chdir(folder)
    return call, folder / target, folder


def refused(call, capsys):
    assert main(call) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert 1 <= err.count("\n") <= 2
    return err


def test_a_file_of_the_users_own_is_kept(writer, capsys):
    call, target, folder = writer
    target.write_text(MINE, encoding="utf-8")
    before = snapshot(folder)
    assert target.name in refused(call, capsys)
    assert snapshot(folder) == before


def test_a_link_to_such_a_file_is_kept(writer, capsys, tmp_path):
    call, target, _ = writer
    (tmp_path / "elsewhere.txt").write_text(MINE, encoding="utf-8")
    target.symlink_to(tmp_path / "elsewhere.txt")
    before = snapshot(tmp_path)
    refused(call, capsys)
    assert snapshot(tmp_path) == before


@pytest.mark.parametrize("what", ["folder", "pipe", "device"])
def test_what_is_no_file_is_kept_and_not_waited_for(writer, capsys, what):
    call, target, folder = writer
    if what == "folder":
        target.mkdir()
    elif what == "pipe":
        os.mkfifo(target)
    else:
        target.symlink_to("/dev/zero")
    before = snapshot(folder)
    refused(call, capsys)
    assert snapshot(folder) == before


@pytest.mark.parametrize("target", ["kit.toml", "link.toml", "./kit.toml"])
def test_the_reference_kit_of_a_bench_is_not_overwritten_by_its_new_kit(
    scenes, tmp_path, monkeypatch, capsys, target
):
    folder = tmp_path / "case"
    shutil.copytree(scenes / "raw", folder)
    (folder / "reference.toml").rename(folder / "kit.toml")
    (folder / "link.toml").symlink_to("kit.toml")
    bench = folder / "bench.toml"
    bench.write_text(
        bench.read_text(encoding="utf-8").replace("reference.toml", "kit.toml"), encoding="utf-8"
    )
    monkeypatch.chdir(folder)
    before = snapshot(folder)
    assert "is read by the bench" in refused(["fit", ".", "-o", target], capsys)
    assert "is read by the bench" in refused(["fit", "."], capsys)
    assert snapshot(folder) == before
    assert main(["fit", ".", "-o", "new.toml"]) == 0
    capsys.readouterr()


AGAIN = [name for name, (scene, _, _) in WRITERS.items() if name != "new" and scene != "demo"]


@pytest.mark.parametrize("name", AGAIN)
def test_its_own_files_are_written_anew(name, scenes, tmp_path, monkeypatch, capsys):
    scene, call, target = WRITERS[name]
    folder = tmp_path / "case"
    shutil.copytree(scenes / scene, folder)
    monkeypatch.chdir(folder)
    assert main(call) == 0
    first = snapshot(folder)
    assert main(call) == 0
    assert snapshot(folder).keys() == first.keys()
    assert (folder / target).is_file()
    capsys.readouterr()


@pytest.mark.parametrize(
    "name", ["../../escaped", "/tmp/stdfit-escaped", "..", "a/b", "con", "\\\\server\\x"]
)
def test_names_of_standards_never_lead_out_of_the_folder(name, scenes, tmp_path, monkeypatch, capsys):
    folder = tmp_path / "a" / "b"
    folder.mkdir(parents=True)
    text = (scenes / "kits" / "kit.toml").read_text(encoding="utf-8")
    escaped = name.replace("\\", "\\\\")
    for key in ("name", "standard"):
        text = text.replace(f'{key} = "open"', f'{key} = "{escaped}"')
    (folder / "kit.toml").write_text(text, encoding="utf-8")
    monkeypatch.chdir(folder)
    before = snapshot(tmp_path)
    assert main(["export", "kit.toml", "out", "--points", "9"]) == 0
    capsys.readouterr()
    made = snapshot(tmp_path).keys() - before.keys()
    assert all(one == "a/b/out" or one.startswith("a/b/out/") for one in made)
    assert len(made) == 6
