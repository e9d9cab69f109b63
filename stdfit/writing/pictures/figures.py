"""All pictures of a kit, with their words."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace

from matplotlib.figure import Figure

from stdfit.validity.evidence.standard import StandardEvidence, standard_evidence
from stdfit.validity.evidence.whole import KitEvidence, kit_evidence
from stdfit.validity.kit import Kit
from stdfit.writing.pictures import whole_words, words
from stdfit.writing.pictures.bound import colours_of, draw_bound
from stdfit.writing.pictures.deviation import draw_absorbing, draw_reflecting
from stdfit.writing.pictures.devices import draw_devices, draw_separation, longest_label
from stdfit.writing.pictures.element import draw_element
from stdfit.writing.pictures.frame import panels, square
from stdfit.writing.pictures.labels import key_below
from stdfit.writing.pictures.leftover import draw_connections, draw_residuals
from stdfit.writing.pictures.record import Picture
from stdfit.writing.pictures.smith import draw_smith
from stdfit.writing.pictures.vector import drawing_rules, svg_element

Drawing = Callable[[], Figure]


def kit_pictures(kit: Kit) -> tuple[Picture, ...]:
    """Return the pictures of a kit: those of the kit as a whole first, then those of each standard.

    Parameters
    ----------
    kit : Kit

    Returns
    -------
    tuple of Picture
        None of the whole where there are no three standards to correct with; none of readings where the kit keeps none.

    Raises
    ------
    RequestError
        A definition gives no finite reflection somewhere between its first reading and its last.
    """
    evidence = [standard_evidence(kit, definition) for definition in kit.definitions]
    colours = colours_of(evidence)
    whole = kit_evidence(kit)
    made = [] if whole is None else [*_of_whole(whole)]
    for place, one in enumerate(evidence, start=1):
        made += [replace(picture, standard=one.name) for picture in _of_standard(place, one, colours)]
    return tuple(made)


def _of_whole(one: KitEvidence) -> Iterator[Picture]:
    def devices() -> Figure:
        figure, (axes,) = panels([2.1], right=0.72)
        draw_devices(axes, one)
        return figure

    def chart() -> Figure:
        figure, axes = square()
        key_below(figure, *draw_smith(axes, one))
        return figure

    def separation() -> Figure:
        figure, (axes,) = panels([1.7], right=0.14 + longest_label(one))
        draw_separation(axes, one)
        return figure

    yield _picture("kit-devices", whole_words.device_words(one), devices)
    yield _picture("kit-chart", whole_words.smith_words(one), chart)
    yield _picture("kit-separation", whole_words.separation_words(one), separation)


def _of_standard(place: int, one: StandardEvidence, colours: Mapping[str, str]) -> Iterator[Picture]:
    def bound() -> Figure:
        figure, (axes,) = panels([2.1])
        key_below(figure, *draw_bound(axes, one, colours))
        return figure

    def deviation() -> Figure:
        figure, (above, below) = panels([1.4, 1.4])
        draw = draw_absorbing if one.kind == "load" else draw_reflecting
        key_below(figure, *draw(above, below, one))
        return figure

    def element() -> Figure:
        figure, axes = panels([1.3] * len(one.element.symbols) if one.kind == "load" else [1.8])
        key_below(figure, *draw_element(axes, one))
        return figure

    yield _picture(f"standard-{place}-bound", words.bound_words(one), bound)
    yield _picture(f"standard-{place}-deviation", words.deviation_words(one), deviation)
    readings = one.readings
    if readings is not None:

        def residuals() -> Figure:
            figure, (axes,) = panels([1.8])
            key_below(figure, *draw_residuals(axes, one, readings))
            return figure

        yield _picture(f"standard-{place}-residuals", words.residual_words(one, readings), residuals)
    connections = None if readings is None else readings.connections
    if connections is not None:

        def single() -> Figure:
            figure, (axes,) = panels([1.6], right=0.75)
            draw_connections(axes, one, connections)
            return figure

        yield _picture(f"standard-{place}-connections", words.connection_words(one, connections), single)
    yield _picture(f"standard-{place}-element", words.element_words(one), element)


def _picture(name: str, said: whole_words.Words, drawing: Drawing) -> Picture:
    title, caption, alt = said
    with drawing_rules(name):
        svg = svg_element(drawing(), name)
    return Picture(name, None, title, caption, alt, svg)
