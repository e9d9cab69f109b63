"""Every command on sound input: no fault, no connection, and nothing written but what was named."""

import os
import socket

import pytest
from fuzz_judge import judge, snapshot
from fuzz_loop import Case, may_write
from fuzz_seeds import SCENES, make_scenes

CALLS = [(scene.name, call) for scene in SCENES for call in scene.calls]


@pytest.fixture(scope="module")
def scenes(tmp_path_factory):
    root = tmp_path_factory.mktemp("scenes")
    make_scenes(root)
    return root


@pytest.fixture
def no_network(monkeypatch):
    def refuse(*_, **__):
        pytest.fail("a connection was opened")

    for name in ("socket", "create_connection", "getaddrinfo", "create_server", "socketpair"):
        monkeypatch.setattr(socket, name, refuse)


@pytest.mark.parametrize("scene, call", CALLS, ids=lambda one: one if isinstance(one, str) else " ".join(one))
def test_a_command_keeps_to_what_was_named(scenes, no_network, monkeypatch, tmp_path, scene, call):
    folder = tmp_path / "case"
    (scenes / scene).rename(folder)
    try:
        monkeypatch.chdir(folder)
        before = snapshot(folder)
        done = judge(
            [one.replace("OUT", "out") for one in call], folder, may_write(Case(0, scene, list(call)))
        )
        assert done.faults == []
        assert done.code == 0, done.err
        made = sorted(snapshot(folder).keys() - before.keys())
        for name in made:
            path = folder / name
            if path.is_file():
                path.unlink()
        if (folder / "out").is_dir():
            (folder / "out").rmdir()
    finally:
        os.chdir(tmp_path)
        folder.rename(scenes / scene)
