"""Fits without references tell how many of their ranges are done, so that a bar can show it."""

from types import SimpleNamespace

import numpy as np

from stdfit.pipeline.raw import unreferenced


def test_each_range_is_told(monkeypatch):
    gathered = SimpleNamespace(frequency_hz=np.linspace(50e6, 6e9, 101))
    monkeypatch.setattr(unreferenced, "gather", lambda *_: gathered)
    monkeypatch.setattr(unreferenced, "eliminate", lambda *_: None)
    monkeypatch.setattr(unreferenced, "_without_outlying", lambda same, _: same)
    kit = SimpleNamespace(limit=SimpleNamespace(limit_hz=1e9), definitions=())
    bench = SimpleNamespace(path=None)
    monkeypatch.setattr(unreferenced, "_kit", lambda *_: kit)
    told = []
    found = unreferenced.characterise_unreferenced(bench, {}, tell=lambda *one: told.append(one))
    assert found is kit
    assert told == [(1, 4), (2, 4), (3, 4)]
    assert unreferenced.characterise_unreferenced(bench, {}) is kit
