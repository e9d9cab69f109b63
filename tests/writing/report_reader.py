"""A report page as tests look at it: its tables, headings, tags and words."""

import re
from html.parser import HTMLParser
from pathlib import Path

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
