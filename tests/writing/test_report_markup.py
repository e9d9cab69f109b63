"""The report page as a file: well formed, asking for nothing, pictures told in words, text that stands out."""

import re
from itertools import pairwise

import numpy as np
import pytest
from report_reader import LOFT, plain_text

from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit
from stdfit.writing.pictures import DARK, PALETTE, kit_pictures
from stdfit.writing.report.html import report_html
from stdfit.writing.report.own import is_report


def test_numbers_keep_to_their_units_and_minus_is_one_sign(html):
    shown = re.sub(r"<(style|svg).*?</\1>|<title>.*?</title>|<meta[^>]*>", "", html, flags=re.DOTALL)
    shown = re.sub(r'<td class="number">.*?</td>', "", shown)  # with the sign of a keyboard
    assert not re.search(r"\d (?:GHz|MHz|ps|dB|Ω|%)", shown)
    assert not re.search(r"[ >]-\d", shown)
    assert "|\u2060Γ\u2060|" in shown


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
