"""Report pages of kits that are hostile, useless, without readings, of one standard or of twelve."""

from dataclasses import replace

from report_reader import Reader, table_of
from typed_kit import typed_kit

from stdfit.validity.entry.sheet import Wanted, entry_sheet
from stdfit.validity.limit import Limit
from stdfit.validity.limits import limits
from stdfit.writing.report.html import report_html


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
