"""Pictures of a kit on axes of one's own, for notebooks and papers.

Each function draws on the axes that it is given and returns them; nothing is shown or saved. The library's own axes,
ticks and frames are turned off: the drawings bring grid and numbers along. They are best on axes about 4 by 2 inches.
"""

from collections.abc import Iterator, Sequence
from contextlib import contextmanager

from matplotlib import rc_context
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.base.errors import RequestError
from stdfit.validity.device.bound import three_of
from stdfit.validity.evidence.standard import StandardEvidence, standard_evidence
from stdfit.validity.evidence.whole import KitEvidence, kit_evidence
from stdfit.validity.kit import Kit
from stdfit.writing.pictures.bound import colours_of, draw_bound
from stdfit.writing.pictures.deviation import draw_absorbing, draw_reflecting
from stdfit.writing.pictures.devices import draw_devices
from stdfit.writing.pictures.element import draw_element
from stdfit.writing.pictures.smith import draw_smith


def plot_bound(axes: Axes, kit: Kit, standard: str) -> Axes:
    """Draw the 95 % bound on a standard's Γ over frequency, its sources upon each other, against the tolerance.

    Parameters
    ----------
    axes : matplotlib Axes
    kit : Kit
    standard : str
        Name of the standard.

    Raises
    ------
    RequestError
        The kit holds no such standard.
    """
    wanted = kit.definition(standard)
    # Colours are those of the kit's other pictures.
    each = [standard_evidence(kit, definition) for definition in kit.definitions]
    (one,) = [found for definition, found in zip(kit.definitions, each, strict=True) if definition is wanted]
    with _plain_text():
        return _with_key(axes, *draw_bound(_bare(axes), one, colours_of(each)))


def plot_deviation(pair: Sequence[Axes], kit: Kit, standard: str) -> Sequence[Axes]:
    """Draw readings and model of a standard with its bound: |Γ| in dB and phase, or |Γ| and both parts of a load.

    Parameters
    ----------
    pair : two matplotlib Axes
        The upper one, and the one below it.
    kit, standard
        As for `plot_bound`.

    Raises
    ------
    RequestError
        The kit holds no such standard, or there are not two axes.
    """
    one = _evidence(kit, standard)
    above, below = (_bare(axes) for axes in _so_many(pair, 2))
    draw = draw_absorbing if one.kind == "load" else draw_reflecting
    with _plain_text():
        _with_key(below, *draw(above, below, one))
    return pair


def plot_element(panels: Sequence[Axes] | Axes, kit: Kit, standard: str) -> Sequence[Axes] | Axes:
    """Draw what lies behind the offset line, with its bound: capacitance, inductance, or both parts of a load's Z.

    Parameters
    ----------
    panels : matplotlib Axes
        One; of a load two, below each other.
    kit, standard
        As for `plot_bound`.

    Raises
    ------
    RequestError
        The kit holds no such standard, or there are not as many axes as needed.
    """
    one = _evidence(kit, standard)
    each = [_bare(axes) for axes in _so_many(panels, len(one.element.symbols))]
    with _plain_text():
        _with_key(each[-1], *draw_element(each, one))
    return panels


def plot_devices(axes: Axes, kit: Kit) -> Axes:
    """Draw the bound on devices that are measured with the kit, at the worst phase, a line for each |Γ|.

    Parameters
    ----------
    axes : matplotlib Axes
    kit : Kit

    Raises
    ------
    RequestError
        The kit holds no three standards with a common band.
    """
    one = _whole(kit)
    with _plain_text():
        draw_devices(_bare(axes), one)
    return axes


def plot_smith(axes: Axes, kit: Kit) -> Axes:
    """Draw Γ of the three standards on a Smith chart, thick up to the kit's limit and dotted beyond.

    Parameters
    ----------
    axes : matplotlib Axes
        Square.
    kit : Kit

    Raises
    ------
    RequestError
        The kit holds no three standards with a common band.
    """
    one = _whole(kit)
    with _plain_text():
        return _with_key(axes, *draw_smith(_bare(axes), one))


def _evidence(kit: Kit, standard: str) -> StandardEvidence:
    return standard_evidence(kit, kit.definition(standard))


def _whole(kit: Kit) -> KitEvidence:
    """Return what there is to see of the kit as a whole."""
    found = kit_evidence(kit)
    if found is None:
        three_of(kit)  # says what is missing
        raise RequestError("the three standards have no common band", "plot them one by one")
    return found


def _so_many(given: Sequence[Axes] | Axes, count: int) -> list[Axes]:
    """Return axes, of which there must be so many."""
    try:
        each = [given] if isinstance(given, Axes) else list(given)
    except TypeError:
        each = []
    if len(each) != count:
        panels = "one panel" if count == 1 else f"{count} panels"
        raise RequestError(f"{len(each)} axes for {panels}", f"make {count} with subplots({count})")
    return each


@contextmanager
def _plain_text() -> Iterator[None]:
    """Make texts that are no formulas, whatever the user's settings are: names may hold dollar signs or backslashes."""
    with rc_context({"text.parse_math": False, "text.usetex": False}):
        yield


def _bare(axes: Axes) -> Axes:
    """Turn ticks and frame off."""
    if not isinstance(axes, Axes):
        raise RequestError(
            f"{type(axes).__name__} where the Axes of one panel is wanted", "give one that subplots() makes"
        )
    axes.set_axis_off()
    return axes


def _with_key(axes: Axes, handles: Sequence[Artist], labels: Sequence[str]) -> Axes:
    """Set the key below the axes, where it hides nothing."""
    axes.legend(
        handles, labels, loc="upper center", bbox_to_anchor=(0.5, -0.2), ncols=3, frameon=False, fontsize=8
    )
    return axes
