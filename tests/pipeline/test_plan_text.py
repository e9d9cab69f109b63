"""The plan in words, as data, and printed by the command."""

import json
import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.pipeline import fit_bench
from stdfit.pipeline.plan import Remedy, ranked
from stdfit.pipeline.plan_text import HEAD, plan_data, plan_text
from stdfit.trials import demo_scenario, draw_bench, write_bench


def test_the_plan_in_words(first):
    lines = plan_text(first, measured=True).splitlines()
    assert lines[0].startswith("within 0.02 the kit is good to ")
    assert f"What makes up the bound of '{first.standard}' at" in "\n".join(lines)
    start = lines.index("  source                             part of the bound") + 1
    rows = [re.split(" {2,}", line.strip()) for line in lines[start : lines.index("", start)]]
    *parts, bound = [float(row[1]) for row in rows]
    assert sum(parts) == pytest.approx(bound, abs=1e-9)
    at = lines.index(HEAD)
    best = ranked(first.remedies)[0][0]
    assert lines[at + 2].endswith(best.what)
    assert ("at most" in lines[at + 2]) == best.at_most
    assert "predicted" not in lines[0]


def test_the_plan_in_words_before_measuring(first):
    lines = plan_text(first, measured=False).splitlines()
    assert lines[0].startswith("predicted, before any reading: within 0.02")
    assert "follow their models" in lines[1]


def test_a_plan_without_a_remedy_says_so(first):
    idle = Remedy("polish the bench", first.kit.limit.limit_hz, 0.0, False)
    text = plan_text(replace(first, remedies=(idle,)), measured=True)
    assert "  none of the remedies that were tried moves it\n\nWhat would not\n  polish the bench\n" in text


def test_the_plan_as_data(first):
    data = plan_data(first)
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    assert data["limit_hz"] == first.kit.limit.limit_hz
    assert data["held_back_by"] == first.standard
    assert [one["what"] for one in data["remedies"]] == [one.what for one in first.remedies]
    assert sum(one["part"] for one in data["sources"]) == pytest.approx(1.0)


def test_the_command_on_a_measured_bench(tmp_path, capsys):
    bench = draw_bench(demo_scenario(), np.random.default_rng([66, 0]))
    path = write_bench(bench, tmp_path)
    assert main(["plan", str(tmp_path), "--within", "0.03", "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert data["within"] == 0.03
    assert data["limit_hz"] == fit_bench(path, within=0.03, created="2000-01-01").limit.limit_hz
    assert {"what", "limit_hz", "gain_hz", "at_most"} == set(data["remedies"][0])
