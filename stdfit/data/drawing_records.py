"""What a drawing file says, as records in SI units."""

from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True, slots=True)
class Measure:
    """One figure of a drawing.

    Attributes
    ----------
    value : float
        In SI units.
    u : float
        Standard uncertainty in the same unit; 0 for what is exact.
    """

    value: float
    u: float = 0.0


@dataclass(frozen=True, slots=True)
class SectionEntry:
    """One piece of coaxial line, in the order from the reference plane to the end.

    Attributes
    ----------
    length_m : Measure or None
        None where it was not measured.
    inner_m, outer_m : Measure or None
        Diameters of inner and outer conductor; both or neither.
    permittivity : Measure
        Relative permittivity of what fills it.
    """

    length_m: Measure | None
    inner_m: Measure | None
    outer_m: Measure | None
    permittivity: Measure


@dataclass(frozen=True, slots=True)
class EndEntry:
    """What closes a part.

    Attributes
    ----------
    form : str
        "shielded", "flush", "flat" or "chip".
    pin_m : Measure or None
        Shielded and flush: how far the pin reaches beyond the sections; negative where it is set back.
    pipe_m : Measure or None
        Shielded: how far the outer conductor goes on beyond the pin; None for far enough.
    closed : bool
        Shielded: whether a metal wall closes the pipe.
    beyond : Measure or None
        Shielded: relative permittivity in the pipe.
    flange_m : Measure or None
        Flush: diameter of the flange; None where it is not known.
    size : str
        Chip: the package's code.
    count : int
        Chip: how many of them in parallel.
    resistance_ohm : Measure or None
        Chip: of each.
    """

    form: str
    pin_m: Measure | None = None
    pipe_m: Measure | None = None
    closed: bool = False
    beyond: Measure | None = None
    flange_m: Measure | None = None
    size: str = ""
    count: int = 1
    resistance_ohm: Measure | None = None


@dataclass(frozen=True, slots=True)
class PartEntry:
    """One drawn part.

    Attributes
    ----------
    name, kind : str
        `kind` is "open", "short" or "load".
    sections : tuple of SectionEntry
    end : EndEntry or None
    conductivity : float or None
        Of the conductors, in S/m; None where it is not known.
    conductor : str
        What it was called in the drawing; empty where it is not known.
    roughness_m : float
        Rms roughness of the conductors.
    """

    name: str
    kind: str
    sections: tuple[SectionEntry, ...]
    end: EndEntry | None
    conductivity: float | None = None
    conductor: str = ""
    roughness_m: float = 0.0


@dataclass(frozen=True, slots=True)
class Drawing:
    """A drawing file.

    Attributes
    ----------
    path : path
    name, connector : str
        `connector` is free text, and may be empty.
    parts : tuple of PartEntry
    """

    path: Path
    name: str
    connector: str
    parts: tuple[PartEntry, ...]


@dataclass(frozen=True, slots=True)
class DrawnFrom:
    """Where a bench finds the drawing of a standard.

    Attributes
    ----------
    file : path
    part : str or None
        Its name there; None for the part of the standard's name, or the only one of its kind.
    """

    file: Path
    part: str | None = None
