"""`stdfit report` and `stdfit fit --report`: one page, the same either way, over nothing but its own kind."""

import json
import shutil

import pytest

from stdfit.cli import main
from stdfit.writing.kit_reading import read_kit
from stdfit.writing.report.own import is_report
from stdfit.writing.summary import verdict


@pytest.fixture
def shed(demo, tmp_path):
    """A folder with the demo's readings and kit file."""
    folder = tmp_path / "shed"
    shutil.copytree(demo[0] / "bench", folder)
    (folder / "report.html").unlink()
    return folder


def test_the_demo_writes_one_and_says_where(demo):
    folder, done = demo
    assert is_report(folder / "bench" / "report.html")
    assert "\nreport: bench/report.html\nnext: open bench/report.html" in done.stdout


def test_it_stands_beside_the_kit_file_unless_told_otherwise(demo, shed, command):
    done = command(shed, "report", "kit.toml")
    kit = read_kit(shed / "kit.toml")
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout == f"report: kit.html\n{verdict(kit)}\n"
    other = command(shed, "report", "kit.toml", "-o", "other.htm", "--json")
    data = json.loads(other.stdout)
    assert (data["report_file"], data["limit_hz"]) == ("other.htm", kit.limit.limit_hz)
    # The demo made its page right after the fit, from the same kit file.
    pages = [shed / "kit.html", shed / "other.htm", demo[0] / "bench" / "report.html"]
    assert len({page.read_bytes() for page in pages}) == 1


def test_fit_writes_the_page_that_report_writes(shed, capsys, monkeypatch):
    page, kit = shed / "page.html", shed / "new.toml"
    assert main(["fit", str(shed), "-o", str(kit), "--report", str(page)]) == 0
    assert f"\nkit file: {kit}\nreport: {page}\nwithin 0.02" in capsys.readouterr().out
    assert main(["report", str(kit), "-o", str(shed / "again.html")]) == 0
    assert page.read_bytes() == (shed / "again.html").read_bytes()
    capsys.readouterr()
    fitted = read_kit(kit)
    monkeypatch.setattr("stdfit.pipeline.fit_bench", lambda *_, **__: fitted)
    assert main(["fit", str(shed), "-o", str(kit), "--report", str(page), "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["report_file"] == str(page)


def test_warnings_go_to_standard_error(shed, capsys):
    text = (shed / "kit.toml").read_text(encoding="utf-8")
    (shed / "kit.toml").write_text(text.replace("warnings = []", 'warnings = ["mind the step"]', 1))
    assert main(["report", str(shed / "kit.toml")]) == 0
    out, err = capsys.readouterr()
    assert err == "stdfit: warning: mind the step\n"
    assert "mind" not in out


@pytest.fixture(params=["report", "fit"])
def write(request, shed, capsys, monkeypatch):
    """Return a function that asks for a page at some place, by either command."""

    def run(page):
        if request.param == "report":
            code = main(["report", str(shed / "kit.toml"), "-o", str(page)])
        else:
            monkeypatch.setattr("stdfit.pipeline.fit_bench", lambda *_, **__: pytest.fail("fitted"))
            code = main(["fit", str(shed), "-o", str(shed / "fresh.toml"), "--report", str(page)])
        out, err = capsys.readouterr()
        return code, out, err

    return run


def mine(shed):
    (shed / "mine.html").write_text("<!doctype html>\n<title>mine</title>\n")
    return shed / "mine.html"


def linked(shed):
    (shed / "link.html").symlink_to(shed / "gone.html")
    return shed / "link.html"


def folder(shed):
    (shed / "folder.html").mkdir()
    return shed / "folder.html"


@pytest.mark.parametrize(
    ("make", "said"),
    [
        (mine, "exists and is no report of this program\nname another file with "),
        (linked, "exists and is no report of this program\nname another file with "),
        (folder, "a folder stands where the file should go\nname a file with "),
        (lambda shed: shed / "open-1.s1p", "a report is an HTML file\nlet its name end in .html\n"),
        (lambda shed: shed / "kit.toml", "a report is an HTML file\nlet its name end in .html\n"),
        (lambda shed: shed / "none" / "a.html", "no such folder\nmake it, or name another place with "),
    ],
)
def test_a_bad_place_is_refused_before_anything_is_done(shed, write, make, said):
    page = make(shed)
    before = {path: path.read_bytes() for path in shed.rglob("*") if path.is_file()}
    code, out, err = write(page)
    assert (code, out) == (2, "")
    assert err.startswith("stdfit: ")
    assert said in err
    assert err.count("\n") == 2
    assert {path: path.read_bytes() for path in shed.rglob("*") if path.is_file()} == before


def test_kit_and_page_cannot_be_one_file(shed, capsys):
    same = str(shed / "one.html")
    assert main(["fit", str(shed), "-o", same, "--report", same]) == 2
    assert "kit file and report would be one file" in capsys.readouterr().err
    assert not (shed / "one.html").exists()


def test_an_older_page_is_replaced(shed, capsys):
    page = shed / "kit.html"
    assert main(["report", str(shed / "kit.toml")]) == 0
    first = page.read_bytes()
    page.write_bytes(first[: len(first) // 2])
    assert main(["report", str(shed / "kit.toml")]) == 0
    assert page.read_bytes() == first
    assert not list(shed.glob(".*"))


def test_no_kit_no_page(shed, capsys):
    (shed / "broken.toml").write_text("nothing")
    for name in ("none.toml", "broken.toml", "bench.toml"):
        assert main(["report", str(shed / name)]) == 2
        assert capsys.readouterr().err.startswith("stdfit: ")
        assert not (shed / name).with_suffix(".html").exists()


def test_the_demo_spares_a_page_that_is_not_its_own(tmp_path, capsys):
    (tmp_path / "report.html").write_text("mine")
    assert main(["demo", "--out", str(tmp_path)]) == 2
    assert "exists and is no report of this program" in capsys.readouterr().err
    assert [path.name for path in tmp_path.iterdir()] == ["report.html"]


def test_a_quiet_report_prints_nothing(shed, capsys):
    assert main(["report", str(shed / "kit.toml"), "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")
    assert is_report(shed / "kit.html")
