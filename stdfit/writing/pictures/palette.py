"""The colours of all pictures, by name: a page may give each name another colour, as for a dark background.

Six colours of different hue and lightness carry the data. On both backgrounds any two of them are at least 25 apart in
CIE L*a*b* for usual sight and for the three kinds of dichromatic sight (the matrices of G. M. Machado, M. M. Oliveira,
L. A. F. Fernandes, IEEE Trans. Vis. Comput. Graph. 15, 2009, 1291–1298; a test repeats it).
"""

PALETTE: dict[str, str] = {
    "ink": "#1d2a30",
    "quiet": "#55646c",
    "grid": "#dde2e5",
    "paper": "#fdfdfc",
    "series-1": "#2a3c87",
    "series-2": "#af4d1b",
    "series-3": "#008463",
    "series-4": "#f1b27c",
    "series-5": "#4f2044",
    "rest": "#cdcde3",
}
"""On a light background: words, second words, grid lines, the background; lines and areas; what is left over."""

DARK: dict[str, str] = {
    "ink": "#e6ebed",
    "quiet": "#a3afb5",
    "grid": "#2c3438",
    "paper": "#14191c",
    "series-1": "#a1b5f2",
    "series-2": "#d98320",
    "series-3": "#4cbcb0",
    "series-4": "#fddd99",
    "series-5": "#945fa1",
    "rest": "#575b5d",
}
"""The same on a dark background."""

LINES = ("series-1", "series-2", "series-3")
"""For lines, marks and words at them; each stands out from the background by 4.5 to 1 or more."""

AREAS = ("series-1", "series-4", "series-3", "series-5")
"""For areas that lie upon each other, the most important first; then `rest`."""

MISFIT_COLOUR = "series-2"
"""What the model leaves has this colour in every picture."""
