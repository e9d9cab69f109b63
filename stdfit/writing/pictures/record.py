"""What a finished picture is."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture with all the words that go with it.

    Attributes
    ----------
    name : str
        Unique in its kit: letters a … z, digits and dashes.
    standard : str or None
        Name of its standard, None where it shows the kit as a whole.
    title : str
    caption : str
        What it shows, how to read it, its key figure.
    alt : str
        What is to be seen, for those who cannot see it.
    svg : str
        A complete ``<svg>`` element, to stand in a page; its colours are the variables of the palette.
    """

    name: str
    standard: str | None
    title: str
    caption: str
    alt: str
    svg: str
