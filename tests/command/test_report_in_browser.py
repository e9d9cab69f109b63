"""The report page in a browser: the answer on the first screen, nothing asked for, readable by all, printable."""

import re
import shutil
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace

import pytest

from stdfit.writing.kit_reading import read_kit
from stdfit.writing.report.html import report_html

LOFT = Path(__file__).parents[2] / "kits" / "boathouse-loft-sma" / "kit.toml"
NAMES = ("chromium", "chromium-browser", "google-chrome")
SWITCHES = (
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
TITLE = "<script>alert(1)</script> set"
DESK, PHONE = {"width": 1280, "height": 800}, {"width": 390, "height": 844}


@pytest.fixture(scope="module")
def seen(tmp_path_factory):
    """Open one page; return it with everything that happened while it was opened."""
    browser = next(filter(None, map(shutil.which, NAMES)), None)
    if browser is None:
        pytest.skip(f"no browser: none of {', '.join(NAMES)} is installed")
    playwright = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
    path = tmp_path_factory.mktemp("page") / "kit.html"
    kit = read_kit(LOFT)
    text = report_html(replace(kit, name=TITLE, warnings=("mind the step",)))
    path.write_text(text, encoding="utf-8")
    with playwright.sync_playwright() as started:
        program = started.chromium.launch(executable_path=browser, args=list(SWITCHES))
        page = program.new_page(viewport=DESK, color_scheme="light")
        said, asked, alerts = [], [], []
        page.on("console", lambda message: said.append((message.type, message.text)))
        page.on("pageerror", lambda fault: said.append(("pageerror", str(fault))))
        page.on("request", lambda request: asked.append(request.url))
        page.on("dialog", lambda dialog: (alerts.append(dialog.message), dialog.dismiss()))
        page.goto(path.as_uri(), wait_until="load")
        yield SimpleNamespace(
            page=page, uri=path.as_uri(), text=text, kit=kit, said=said, asked=asked, alerts=alerts
        )
        program.close()


@pytest.fixture
def page(seen):
    """The page as it was opened, at the size of a desk."""
    seen.page.set_viewport_size(DESK)
    seen.page.emulate_media(media="screen", color_scheme="light")
    return seen.page


def test_it_asks_for_nothing_and_nothing_goes_wrong(seen):
    assert seen.asked == [seen.uri]
    assert seen.said == []


def test_a_name_is_text_and_runs_nothing(seen, page):
    assert page.locator("h1").inner_text() == TITLE
    assert page.title().startswith(TITLE)
    assert page.locator("script").count() == 0
    assert seen.alerts == []


@pytest.mark.parametrize("size", [DESK, PHONE], ids=["desk", "phone"])
def test_the_answer_stands_on_the_first_screen(seen, page, size):
    page.set_viewport_size(size)
    lines = page.locator("#answer .reaches li")
    assert lines.count() == len(seen.kit.definitions)
    parts = [page.locator("#answer-title"), page.locator("#reason"), *lines.all()]
    for part in parts:
        box = part.bounding_box()
        assert box["x"] >= 0.0
        assert box["x"] + box["width"] <= size["width"]
        assert box["y"] >= 0.0
        assert box["y"] + box["height"] <= size["height"], part.inner_text()


@pytest.mark.parametrize("width", [320, 390, 700, 1280])
def test_nothing_scrolls_sideways_but_wide_tables_in_their_boxes(page, width):
    page.set_viewport_size({"width": width, "height": 844})
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    beyond = page.evaluate(
        """() => [...document.querySelectorAll('body *')]
        .filter(one => !one.closest('svg') && !one.closest('.wide table') && !one.closest('.unseen'))
        .filter(one => one.getBoundingClientRect().right > window.innerWidth + 1)
        .map(one => one.outerHTML.slice(0, 80))"""
    )
    assert beyond == []


def test_no_two_pieces_of_text_lie_on_each_other(page):
    """Boxes of the lines of text outside of pictures: none overlaps another by more than rounding."""
    for size in (DESK, PHONE):
        page.set_viewport_size(size)
        overlaps = page.evaluate(
            """() => {
                const boxes = [];
                for (const one of document.querySelectorAll('p, h1, h2, h3, li, caption, th, td, dt, dd, figure')) {
                    if (one.closest('.unseen') || one.querySelector('p')) continue;
                    const box = one.getBoundingClientRect();
                    if (box.width > 0 && box.height > 0) boxes.push([one, box]);
                }
                const found = [];
                for (let i = 0; i < boxes.length; i++) for (let j = i + 1; j < boxes.length; j++) {
                    const [one, a] = boxes[i], [other, b] = boxes[j];
                    if (one.contains(other) || other.contains(one)) continue;
                    if (one.closest('.wide') !== other.closest('.wide')) continue;
                    const wide = Math.min(a.right, b.right) - Math.max(a.left, b.left);
                    const high = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top);
                    if (wide > 1.5 && high > 1.5) found.push(one.innerText + ' | ' + other.innerText);
                }
                return found;
            }"""
        )
        assert overlaps == []


def test_every_picture_has_alternative_text(page):
    told = page.locator("svg").evaluate_all(
        "all => all.map(one => [one.getAttribute('role'), one.getAttribute('aria-label')])"
    )
    assert len(told) >= 3
    assert all(role == "img" and len(label) > 40 for role, label in told)
    assert page.locator("img:not([alt])").count() == 0


@pytest.fixture(scope="module")
def unpainted(seen):
    """The page without what is in its pictures, which is drawn and holds no text: it makes axe ten times slower."""
    text = re.sub(r"(<svg[^>]*>).*?</svg>", r"\1</svg>", seen.text, flags=re.DOTALL)
    page = seen.page.context.browser.new_page(viewport=DESK)
    page.set_content(text)
    yield page
    page.close()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_everybody_can_read_it(unpainted, scheme):
    """No violation of WCAG 2.1 A and AA that axe-core can find, contrast among them."""
    axe = pytest.importorskip("axe_playwright_python.sync_playwright", reason="axe-core is not installed")
    unpainted.emulate_media(color_scheme=scheme)
    # Darkness changes colours and nothing else.
    every = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "best-practice"]
    found = axe.Axe().run(unpainted, options={"runOnly": every if scheme == "light" else ["color-contrast"]})
    assert [one["id"] for one in found.response["violations"]] == []
    passed = {one["id"] for one in found.response["passes"]}
    told = {"document-title", "svg-img-alt"} if scheme == "light" else set()
    assert {"color-contrast", *told} <= passed


def test_dark_and_light_differ(page):
    def background():
        return page.evaluate("getComputedStyle(document.body).backgroundColor")

    light = background()
    page.emulate_media(color_scheme="dark")
    assert sum(map(int, re.findall(r"\d+", light))) > 700
    assert sum(map(int, re.findall(r"\d+", background()))) < 100


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_it_prints_on_a_sensible_number_of_pages(page, paper):
    page.emulate_media(media="print", color_scheme="dark")
    ink, paper_colour = (
        page.evaluate(f"getComputedStyle(document.documentElement).getPropertyValue('--{name}')")
        for name in ("ink", "paper")
    )
    assert (ink[:2], paper_colour[:2]) == ("#1", "#f")  # dark ink, even where the reader's screen is dark
    printed = page.pdf(format=paper)
    assert 4 <= len(re.findall(rb"/Type\s*/Page\b", printed)) <= 20
