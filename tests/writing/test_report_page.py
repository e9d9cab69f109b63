"""The report page without a browser: its words and figures are those of `show`, and nothing of a kit becomes markup."""

import re
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from stdfit.validity.analyser import Analyser
from stdfit.validity.entry.sheet import Wanted, entry_sheet, typed_kit
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.limit import Limit
from stdfit.validity.limits import limits
from stdfit.validity.next_steps import ACTIONS, END_OF_READINGS, EVIDENCE, NEXT_MODE, Step, next_steps
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit
from stdfit.writing.numbers import frequency, good_to
from stdfit.writing.pictures import DARK, PALETTE, kit_pictures
from stdfit.writing.report.html import report_html
from stdfit.writing.report.own import is_report
from stdfit.writing.report.reasons import GLOSSES, why
from stdfit.writing.summary import summary, verdict

LOFT = Path(__file__).parents[2] / "kits" / "boathouse-loft-sma" / "kit.toml"
VOID = {"meta", "br", "hr", "img", "input", "link"}


def plain_text(text):
    """Return a text of the page as commands print it: without what keeps lines together, and with a plain minus."""
    return text.replace("\u00a0", " ").replace("\u2060", "").replace("−", "-")


class Reader(HTMLParser):
    """Everything that these tests look at."""

    def __init__(self, text):
        super().__init__()
        self.tables, self.headings, self.tags, self.ids, self.named = {}, [], [], [], []
        self.words, self.open, self.cell = [], [], None
        self.feed(text)
        assert self.open == []

    def handle_starttag(self, tag, given):
        given = dict(given)
        self.tags.append((tag, given))
        self.ids += [given["id"]] if "id" in given else []
        if tag not in VOID:
            self.open.append(tag)
        if tag == "table":
            self.caption, self.rows = "", []
        elif tag == "tr":
            self.rows.append([])
        elif tag in ("td", "th"):
            self.rows[-1].append("")
        elif re.fullmatch("h[1-6]", tag):
            self.headings.append([tag, ""])

    def handle_startendtag(self, tag, given):
        self.tags.append((tag, dict(given)))
        self.ids += [dict(given)["id"]] if "id" in dict(given) else []

    def handle_endtag(self, tag):
        assert self.open.pop() == tag
        if tag == "table":
            assert self.caption.strip() not in self.tables
            self.tables[self.caption.strip()] = [[cell.strip() for cell in row] for row in self.rows]

    def handle_data(self, data):
        if "style" in self.open or "svg" in self.open:
            return
        data = plain_text(data)
        self.words.append(data)
        if "caption" in self.open:
            self.caption += data
        elif {"td", "th"} & set(self.open):
            self.rows[-1][-1] += data
        elif any(re.fullmatch("h[1-6]", tag) for tag in self.open):
            self.headings[-1][1] += data

    @property
    def text(self):
        return " ".join(" ".join(self.words).split())


@pytest.fixture(scope="module")
def loft():
    return read_kit(LOFT)


@pytest.fixture(scope="module")
def html(loft):
    return report_html(loft)


@pytest.fixture(scope="module")
def page(html):
    return Reader(html)


@pytest.fixture
def plain(monkeypatch):
    """Leave out the pictures, which take most of the time, where a test does not look at them."""
    monkeypatch.setattr("stdfit.writing.report.html.kit_pictures", lambda kit: ())


def table_of(page, beginning):
    (found,) = [rows for caption, rows in page.tables.items() if caption.startswith(beginning)]
    return found


def shown_rows(text, title, indent):
    """Return the cells of the aligned lines below a line of `show` that begins with a title."""
    _, _, below = text.partition(f"\n{title}")
    lines = below.split("\n")[1:]
    rows = []
    for line in lines:
        if not line.startswith(indent):
            break
        rows.append(re.split(" {2,}", line.strip()))
    return rows


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


def test_numbers_keep_to_their_units_and_minus_is_one_sign(html):
    shown = re.sub(r"<(style|svg).*?</\1>|<title>.*?</title>|<meta[^>]*>", "", html, flags=re.DOTALL)
    shown = re.sub(r'<td class="number">.*?</td>', "", shown)  # with the sign of a keyboard
    assert not re.search(r"\d (?:GHz|MHz|ps|dB|Ω|%)", shown)
    assert not re.search(r"[ >]-\d", shown)
    assert "|\u2060Γ\u2060|" in shown


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


def test_pictures_stand_with_captions_and_alternative_text(loft, html, page):
    pictures = kit_pictures(loft)
    drawn = [given for tag, given in page.tags if tag == "svg"]
    assert [given["aria-label"] for given in drawn] == [one.alt for one in pictures]
    assert all(given["role"] == "img" for given in drawn)
    assert html.count("<figcaption>") == len(pictures) >= 3
    for one in pictures:
        assert plain_text(one.caption) in page.text


def test_it_is_one_well_formed_file_that_asks_for_nothing(html, page):
    assert len(page.ids) == len(set(page.ids))
    names = {tag for tag, _ in page.tags}
    assert not names & {"script", "link", "img", "iframe", "object", "embed", "form", "base"}
    for _, given in page.tags:
        assert not any(name.startswith("on") for name in given)
        for name in ("href", "src", "xlink:href"):
            assert given.get(name, "#").startswith("#"), given
            if given.get(name, "").startswith("#"):
                assert given[name][1:] in page.ids
    assert "@import" not in html
    assert len(html.encode()) < 2_000_000
    assert not re.search(r"url\((?!#|&#35;)", html)
    policy = [given for tag, given in page.tags if given.get("http-equiv") == "Content-Security-Policy"]
    assert policy[0]["content"].startswith("default-src 'none'; style-src 'unsafe-inline'")
    assert ("html", {"lang": "en"}) in page.tags


def test_headings_go_down_one_by_one(page):
    levels = [int(tag[1]) for tag, _ in page.headings]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))
    assert all(title.strip() for _, title in page.headings)


def test_the_page_is_the_same_every_time(loft, html):
    assert report_html(parse_kit(kit_text(loft), "kit.toml")) == html


def hostile(kit):
    bad = "<script>alert(1)</script>&\"'{{ 7*7 }}{% endif %}"
    names = [f"{bad} {k}" for k in range(len(kit.definitions))]
    definitions = tuple(
        replace(one, name=name, notes=(bad,)) for one, name in zip(kit.definitions, names, strict=True)
    )
    return replace(
        kit,
        name=bad,
        connector=bad,
        measured=bad,
        calibration=bad,
        definitions=definitions,
        warnings=(bad,) * 7,
        checks=(bad,),
        limit=Limit(kit.within, kit.limit.limit_hz, bad),
        files=tuple(replace(one, file=bad, standard=bad) for one in kit.files),
        session=None,
    )


def test_no_text_of_a_kit_becomes_markup(loft, page):
    kit = hostile(loft)
    text = report_html(kit)
    assert "<script" not in text
    read = Reader(text)
    assert {tag for tag, _ in read.tags} <= {tag for tag, _ in page.tags} | {"a"}
    assert read.headings[0] == ["h1", kit.name]
    assert "49" not in read.headings[0][1]


def test_a_kit_that_is_good_for_nothing(loft, plain):
    ((whole, each),) = limits(loft, [1e-5])
    assert whole.limit_hz == 0.0
    definitions = tuple(replace(one, limit=own) for one, own in zip(loft.definitions, each, strict=True))
    read = Reader(report_html(replace(loft, within=1e-5, limit=whole, definitions=definitions)))
    assert " ".join(read.headings[1][1].split()) == "Cannot be trusted at any frequency within 1e-05"
    assert f"open none {each[0].reason}" in read.text
    assert "Up to there" not in read.text


def test_many_warnings_stand_near_the_top_and_none_is_lost(loft, plain):
    told = tuple(f"warning number {k} of many" for k in range(9))
    read = Reader(report_html(replace(loft, warnings=told)))
    assert read.text.index("Before you rely on it") < read.text.index("What to type in")
    assert read.text.index("Warning number 0") < read.text.index("What to type in")
    assert all(one[1:] in read.text for one in told)
    assert "5 more further down" in read.text
    assert "more-warnings" in read.ids


def test_a_kit_that_was_read_back_from_a_sheet(loft, plain):
    """It states bounds and no sources: no budget, no readings, no steps."""
    read = Reader(report_html(typed_kit(entry_sheet(loft, Wanted()))))
    assert not any(caption.startswith("What makes up") for caption in read.tables)
    assert "Nothing can be estimated from this kit file alone" in read.text
    assert not any(caption.startswith("Where the values") for caption in read.tables)
    assert "good to" in read.text.lower()


def test_a_kit_without_readings_says_so(loft, page):
    assert loft.session is not None
    assert "keeps no readings" not in page.text
    assert "This kit file keeps no readings" in Reader(report_html(replace(loft, session=None))).text


def test_a_narrow_band_has_its_bounds_told_too(small_kit, plain):
    """From 40 to 200 MHz a single round frequency would be told."""
    definitions = tuple(
        replace(one, read_low_hz=4e7, read_top_hz=2e8, fit_low_hz=4e7, fit_top_hz=2e8)
        for one in small_kit.definitions
    )
    rows = table_of(Reader(report_html(replace(small_kit, definitions=definitions))), "Bound on the error")
    assert [row[0] for row in rows[1:]] == ["40 MHz", "93.3 MHz", "147 MHz", "200 MHz"]


def test_a_single_standard_and_twelve(loft, small_kit, plain):
    alone = replace(loft, definitions=loft.definitions[:1], files=loft.files[:1])
    read = Reader(report_html(replace(alone, ladder=())))
    assert not any(caption.startswith("What is left") for caption in read.tables)
    one = small_kit.definitions[1]
    twelve = tuple(replace(one, name=f"a load with a rather long name {k}") for k in range(12))
    whole = Limit(0.02, 6e9, f"{twelve[0].name}: {one.limit.reason}")
    many = replace(small_kit, definitions=twelve, limit=whole, ladder=(), files=())
    read = Reader(report_html(many))
    assert (
        sum(caption in [one.name for one in twelve] or "(load)" in caption for caption in read.tables) == 12
    )


def test_where_readings_begin_high_the_answer_says_so(small_kit, plain):
    definitions = tuple(replace(one, read_low_hz=1e9, fit_low_hz=1e9) for one in small_kit.definitions)
    read = Reader(report_html(replace(small_kit, definitions=definitions)))
    assert " ".join(read.headings[1][1].split()) == "Good from 1 GHz to 3.5 GHz within 0.02"


def test_only_pages_of_the_program_are_its_own(tmp_path, html):
    page = tmp_path / "page.html"
    for text, own in (
        (html, True),
        ("", False),
        ("<!doctype html>\n" + html, False),
        ("stdfit report", False),
    ):
        page.write_text(text, encoding="utf-8")
        assert is_report(page) is own
    page.write_text(html, encoding="utf-8", newline="\r\n")
    assert is_report(page)
    assert not is_report(tmp_path)
    assert not is_report(tmp_path / "none")


def luminance(colour):
    """Relative luminance (W3C Recommendation WCAG 2.1, definitions)."""
    part = np.array([int(colour[k : k + 2], 16) for k in (1, 3, 5)]) / 255.0
    linear = np.where(part <= 0.03928, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)
    return float(linear @ [0.2126, 0.7152, 0.0722])


def contrast(one, other):
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


def test_contrast_by_the_formula():
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.01)  # a known near miss, from memory


def test_text_stands_out_from_the_page(html):
    """WCAG 2.1, success criterion 1.4.3: 4.5 to 1 for text; the text of pictures is drawn in ink and quiet."""
    light, dark = re.findall(r":root \{[^}]*?--rule: (#\w{6}); --accent: (#\w{6});", html)
    for colours, (_, accent) in ((PALETTE, light), (DARK, dark)):
        for ink in (colours["ink"], colours["quiet"], accent):
            assert contrast(ink, colours["paper"]) >= 4.5


def test_typed_numbers_can_be_copied_into_other_programs():
    """The sign of a keyboard where numbers are typed; the true minus in sentences."""
    typed = re.findall(r'<td class="number">(.*?)</td>', report_html(read_kit(LOFT)))
    assert any(float(one) < 0.0 for one in typed)
