"""The readings of the walk-through: the same every time, and over nothing of somebody else's."""

import json

from stdfit.cli import main
from stdfit.trials.workshop import workshop_texts


def test_they_are_written_where_they_are_wanted(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["demo", "--walkthrough", "--out", "here", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "folders": ["here/signal-box", "here/autumn", "here/check"]
    }
    texts = workshop_texts()
    written = {path.relative_to(tmp_path / "here").as_posix(): path for path in tmp_path.rglob("*.s1p")}
    assert {name: path.read_text(encoding="utf-8") for name, path in written.items()} == texts
    assert all(text.startswith("! simulated, invented data: ") for text in texts.values())
    # Again, over its own.
    assert main(["demo", "--walkthrough", "--out", "here"]) == 0
    assert "next: stdfit new here/signal-box " in capsys.readouterr().out


def test_nothing_of_somebody_else_is_overwritten(tmp_path, capsys):
    (tmp_path / "autumn").mkdir()
    mine = tmp_path / "autumn" / "load-1.s1p"
    mine.write_text("mine", encoding="utf-8")
    assert main(["demo", "--walkthrough", "--out", str(tmp_path)]) == 2
    assert "would overwrite a file that is not simulated" in capsys.readouterr().err
    assert [path for path in tmp_path.rglob("*") if path.is_file()] == [mine]
    mine.unlink()
    (tmp_path / "check").write_text("mine", encoding="utf-8")
    assert main(["demo", "--walkthrough", "--out", str(tmp_path)]) == 2
    assert "check: cannot be made" in capsys.readouterr().err
