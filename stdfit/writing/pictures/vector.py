"""Figures as vector graphics: the same bytes every time, and fit to stand in a page with others.

What is written into a page has no outside references, its own identifiers, and variables in place of colours.
"""

import io
import re
import warnings
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from typing import Any

from matplotlib import rc_context
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure

from stdfit.writing.pictures.palette import PALETTE

FONT_SIZE = 9.0

_COMMENT = re.compile(r"<!--.*?-->", re.DOTALL)
_METADATA = re.compile(r"<metadata>.*?</metadata>\s*", re.DOTALL)
_SHEET = re.compile(r"<defs>\s*<style.*?</style>\s*</defs>\s*", re.DOTALL)
_IDENTIFIER = re.compile(r' id="([^"]*)"')
_REFERENCE = re.compile(r'(?<=xlink:href="#)[^"]+|(?<=url\(#)[^)]+')
_STYLE = re.compile(r'style="[^"]*"')
_COLOUR = re.compile(r"#[0-9a-fA-F]{6}\b")
_PLACES = re.compile(r' (?:d|x|y|transform|points)="[^"]*"')
_PATH = re.compile(r' d="([^"]*)"')
_BESIDE_LETTER = re.compile(r"\s*([A-Za-z])\s*")
_FRACTION = re.compile(r"-?\d+\.\d+(?:e-?\d+)?")
_NAMES = {colour: name for name, colour in PALETTE.items()}


@contextmanager
def drawing_rules(salt: str) -> Iterator[None]:
    """Hold what all figures have in common; figures are made, drawn and written inside."""
    with rc_context(
        {
            "svg.hashsalt": salt,
            "svg.fonttype": "path",
            "font.family": "DejaVu Sans",
            "font.size": FONT_SIZE,
            "text.parse_math": False,
        }
    ):
        yield


def new_figure(width: float, height: float, **more: Any) -> Figure:
    """Return an empty figure that can be written as vector graphics; sizes in inches."""
    figure = Figure(figsize=(width, height), **more)
    FigureCanvasSVG(figure)
    return figure


def svg_file(figure: Figure, metadata: Mapping[str, str | None]) -> str:
    """Return a figure as the text of an SVG file, without a date."""
    stream = io.StringIO()
    with warnings.catch_warnings():
        # A name in another script is drawn as boxes.
        warnings.filterwarnings("ignore", "Glyph .* missing")
        figure.savefig(stream, format="svg", metadata={"Date": None, "Creator": None, **metadata})
    return stream.getvalue()


def svg_element(figure: Figure, name: str) -> str:
    """Return a figure as an ``<svg>`` element; `name` starts its identifiers, so that none comes twice in a page."""
    text = svg_file(figure, {})
    text = text[text.index("<svg") :].rstrip()
    for unwanted in (_COMMENT, _METADATA, _SHEET):
        text = unwanted.sub("", text)
    used = {old: f"{name}-{k}" for k, old in enumerate(dict.fromkeys(_REFERENCE.findall(text)))}
    text = _REFERENCE.sub(lambda found: used[found[0]], text)
    text = _IDENTIFIER.sub(lambda found: f' id="{used[found[1]]}"' if found[1] in used else "", text)
    text = text.replace("xlink:href=", "href=").replace(' xmlns:xlink="http://www.w3.org/1999/xlink"', "")
    text = _STYLE.sub(lambda found: _COLOUR.sub(_variable, found[0]), text)
    text = _PLACES.sub(lambda found: _FRACTION.sub(_short, found[0]), text)
    text = _PATH.sub(lambda found: f' d="{_BESIDE_LETTER.sub(lambda letter: letter[1], found[1])}"', text)
    # What a style sheet says of every element would act on the whole page.
    text = text.replace("<svg ", '<svg style="stroke-linejoin: round; stroke-linecap: butt" ', 1)
    return re.sub(r"\n\s*", "\n", text)


def _variable(found: re.Match[str]) -> str:
    colour = found[0].lower()
    return f"var(--{_NAMES[colour]}, {colour})" if colour in _NAMES else colour


def _short(found: re.Match[str]) -> str:
    """Return a coordinate to a hundredth of a point; factors of glyph sizes are smaller than that, and stay."""
    value = float(found[0])
    return f"{value:.2f}".rstrip("0").rstrip(".") if abs(value) >= 0.5 or value == 0.0 else f"{value:.6g}"
