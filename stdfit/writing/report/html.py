"""The page of a kit as HTML: one file that asks for nothing else."""

from functools import cache

from jinja2 import Environment, PackageLoader, StrictUndefined, Template
from markupsafe import Markup, escape

from stdfit.validity.kit import Kit
from stdfit.writing.pictures import DARK, PALETTE, Picture, kit_pictures
from stdfit.writing.report.contents import page_of
from stdfit.writing.report.own import BEGINNING
from stdfit.writing.report.records import Figure
from stdfit.writing.report.words import unbroken


def report_html(kit: Kit) -> str:
    """Return the report page of a kit, the same bytes every time."""
    figures = [(one.standard, _figure(one)) for one in kit_pictures(kit)]
    return BEGINNING + _template().render(page=page_of(kit, figures), light=PALETTE, dark=DARK) + "\n"


def _figure(one: Picture) -> Figure:
    """Return a picture whose element tells its alternative text."""
    told = f'<svg role="img" aria-label="{escape(one.alt)}" '
    return Figure(one.name, one.title, one.caption, Markup(one.svg.replace("<svg ", told, 1)))


@cache
def _template() -> Template:
    """Return the template; values that it does not know are faults, and text is escaped."""
    environment = Environment(
        loader=PackageLoader("stdfit.writing.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["nb"] = unbroken
    return environment.get_template("report.html")
