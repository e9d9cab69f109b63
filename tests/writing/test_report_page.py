"""The words and figures of a report page: those of `show`, of the limits and of the pictures."""

import re
from dataclasses import replace

import pytest
from report_reader import Reader, shown_rows, table_of

from stdfit.validity.analyser import Analyser
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.limit import Limit
from stdfit.validity.next_steps import ACTIONS, END_OF_READINGS, EVIDENCE, NEXT_MODE, Step, next_steps
from stdfit.writing.numbers import frequency, good_to
from stdfit.writing.report.html import report_html
from stdfit.writing.report.reasons import GLOSSES, why
from stdfit.writing.summary import summary, verdict


def test_the_answer_is_that_of_show(loft, page):
    (limit,) = [frequency(loft.limit.limit_hz)]
    assert page.headings[0] == ["h1", loft.name]
    assert " ".join(page.headings[1][1].split()) == f"Good to {limit} within 0.02"
    described = [given for tag, given in page.tags if tag == "meta" and given.get("name") == "description"]
    assert described[0]["content"] == verdict(loft)
    for one in loft.definitions:
        assert f"{one.name} {frequency(one.limit.limit_hz)} {one.limit.reason}" in page.text


def test_why_holds_with_a_comma_in_a_name(loft):
    given = "open: given values (resistance of load, spare), 91 % of the bound; misfit 12 %"
    told, gloss = why(replace(loft, limit=Limit(0.02, 1e9, given)))
    assert told == (
        "It ends with “open”: the largest part of its bound there is given values (resistance of load, spare) "
        "(91 %; misfit 12 %)."
    )
    assert gloss.startswith("Given values are")


@pytest.mark.parametrize(
    "reason",
    [
        "the readings leave the model here (misfit), 55 % of the bound; noise 20 %",
        "the readings leave the model just above (misfit); at the limit noise, 70 % of the bound; misfit 17 %",
        "what is typed differs from the full definition here, 60 % of the bound",
        "the readings end here",
    ],
)
def test_what_is_no_source_is_told_as_it_is(loft, reason):
    told, gloss = why(replace(loft, limit=Limit(0.02, 1e9, f"open: {reason}")))
    assert told == f"It ends with “open”: {reason}."
    assert gloss


@pytest.mark.parametrize("kind", sorted({*ACTIONS, *EVIDENCE} - {MISFIT}))
def test_every_kind_of_source_is_explained(loft, kind):
    """Those that steps are known for; each has words of its own."""
    _, gloss = why(replace(loft, limit=Limit(0.02, 1e9, f"open: {kind}, 91 % of the bound")))
    assert gloss
    assert [text for _, text in GLOSSES].count(gloss) == 1


def test_values_are_those_of_show(loft, page):
    """What is typed is the value before the ±, beside its 95 % uncertainty; roles and sums are the same."""
    text = summary(loft)
    below = text.partition("\nWhat to type in")[2].partition("\n\n")[0].split("\n")[1:]
    sums = {row[0]: row for row in table_of(page, "Sums")}
    head, *kinds = table_of(page, "Where the values come from")
    roles = {row[0]: dict(zip(head[1:], row[1:], strict=True)) for row in kinds}
    typed = {caption: {row[0]: row for row in rows} for caption, rows in page.tables.items()}
    looked_at = 0
    for line in below:
        if line.startswith(("    order", "    all others", "  (")):
            continue
        if not line.startswith("    "):
            name = line.strip()
            continue
        label, value, *rest = re.split(" {2,}", line.strip())
        if rest[-1] == "the sum that the readings fix":
            assert sums[f"{name}: {label}"][1] == f"{value} {rest[0]}"
            assert f"The readings fix {label} = {value} {rest[0]}" in page.text
        else:
            number, half, own = typed[name][label][1:]
            assert f"{number} {half}".strip() == value
            shown = {"10⁻¹⁵ F": "fF", "10⁻¹² H": "pH"}.get(own, own)
            assert shown.replace("10⁻", "1e-")[:3] == rest[0][:3]
            assert label in roles[name][rest[1]].split(", ")
        looked_at += 1
    assert looked_at >= 14


def test_everything_has_to_be_typed(loft, page):
    """Terms that a standard does not have are typed as zeros."""
    for one in loft.definitions:
        rows = page.tables[one.name][1 : 1 + len(one.parameters)]
        assert len(page.tables[one.name]) == 1 + len(one.parameters) + len(one.combinations)
        unused = [row for row, p in zip(rows, one.parameters, strict=True) if p.role == "unused"]
        assert {row[1] for row in unused} == {"0"}


def test_ladder_and_devices_are_those_of_show(loft, page):
    text = summary(loft)
    assert table_of(page, "How far at which tolerance") == shown_rows(text, "How far at which", "  ")
    devices = shown_rows(text, "As a kit", "  ")
    assert table_of(page, "What is left in an analyser") == devices[:4]
    for line in devices[4:7]:
        asked, _, answered = line[0].partition(": to ")
        assert answered
        (row,) = [row for row in table_of(page, "Up to where") if row[0] == asked]
        assert row[1] == answered.partition(", held back by ")[0]
        assert row[2].startswith(answered.partition(", held back by ")[2])
    assert devices[7][0][1:] in page.text


def test_the_budget_adds_up_and_agrees_with_the_reason(loft, page):
    for one in loft.definitions:
        rows = table_of(page, f"What makes up the bound of {one.name} at")[1:]
        *parts, bound = rows
        assert sum(float(row[1]) for row in parts) == pytest.approx(float(bound[1]), abs=1e-9)
        if " of the bound" not in one.limit.reason:
            continue
        kind, percent = re.match(r"(.*?), (\d+) % of the bound", one.limit.reason).groups()
        own = [float(row[2].split()[0]) for row in parts if row[0].startswith(kind) and "<" not in row[2]]
        assert sum(own) == pytest.approx(float(percent), abs=2.0)
        for name, told in re.findall(r"; (\w+) (\d+) %", one.limit.reason):
            assert sum(float(row[2].split()[0]) for row in parts if row[0].startswith(name)) == pytest.approx(
                float(told), abs=2.0
            )
        assert float(bound[1]) == loft.within


def test_steps_are_those_of_the_estimate(loft, page):
    rows = table_of(page, "What would push the limit")[1:]
    assert [row[1] for row in rows] == [frequency(one.limit_hz) for one in next_steps(loft)]
    assert len(rows) >= 1


def test_the_best_step_stands_beside_the_answer(loft, html, page):
    best = next_steps(loft)[0]
    line = page.text.partition("Next : ")[2]
    said, _, reach = line.partition(" → at least about ")
    assert best.action.startswith(said[:1].lower() + said[1:])
    assert reach.startswith(frequency(best.limit_hz))
    assert page.text.index("Next : ") < page.text.index("What to type in")
    assert '<a href="#next">' in html


@pytest.mark.parametrize("kind, said", [(END_OF_READINGS, "Read on further up"), (NEXT_MODE, None)])
def test_the_step_of_a_kit_at_its_end(loft, plain, monkeypatch, kind, said):
    step = Step(kind, "the limit is what it is", 7e9)
    monkeypatch.setattr("stdfit.writing.report.contents.next_steps", lambda kit: (step,))
    text = Reader(report_html(loft)).text
    assert ("Next : " in text) == (said is not None)
    assert said is None or f"Next : {said} → at least about 7 GHz" in text


def test_the_chosen_order_has_the_limit_of_the_kit(loft, page):
    """The scan over ranges estimates its own: 4.26 GHz, say, where the kit is good to 4.22."""
    for one in loft.definitions:
        rows = table_of(page, f"Orders that were tried for {one.name}")[1:]
        (chosen,) = [row for row in rows if row[2] == "chosen"]
        assert chosen[:2] == [one.shape, good_to(one.limit.limit_hz)]
        others = {order: good_to(hertz) for order, hertz in one.tried if order != one.shape}
        assert {row[0]: row[1] for row in rows if not row[2]} == others
    assert "of nearly equal ones the simplest is taken" in page.text
    assert "even C0 and C2" in page.text


def test_residuals_are_in_the_record(loft, plain):
    told = Analyser("assumed", [1e9, 6e9], [36.0, 32.0], [34.0, 28.0], [0.1, 0.2])
    read = Reader(report_html(replace(loft, analyser=told)))
    rows = table_of(read, "What the correction of the analyser left, assumed")
    assert rows[2] == ["6 GHz", "32 dB", "28 dB", "± 0.2 dB"]
    assert "Nobody stated them" in read.text


def test_where_no_step_helps_the_page_says_so(loft, plain, monkeypatch):
    monkeypatch.setattr("stdfit.writing.report.contents.next_steps", lambda kit: ())
    read = Reader(report_html(loft))
    assert not any(caption.startswith("What would") for caption in read.tables)
    assert "No kind of error moves this limit when it alone is halved" in read.text


def test_files_stand_with_their_sums(loft, page):
    rows = table_of(page, "Files of readings")[1:]
    assert [(row[1], row[0], row[2]) for row in rows] == [
        (one.standard, one.file, one.sha256) for one in loft.files
    ]
