"""What a bench file says, as records."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import inf
from pathlib import Path
from types import MappingProxyType

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.data.drawing_records import DrawnFrom


@dataclass(frozen=True, slots=True, eq=False)
class Given:
    """Evidence on one parameter.

    Attributes
    ----------
    value : float
        In the trade's unit, which the parameter's name tells.
    u : float or None
        Standard uncertainty in the same unit; None when the value is held fixed.
    """

    value: float
    u: float | None = None


@dataclass(frozen=True, slots=True, eq=False)
class StatedResidual:
    """What is left of the analyser's errors after its own correction: 95 % bounds on |δ|, linear.

    Attributes
    ----------
    frequency_hz : array of shape (n,)
        Rising; one element holds for all frequencies.
    directivity, source_match : arrays of shape (n,)
        10^(−dB/20).
    reflection_tracking : array of shape (n,)
        10^(dB/20) − 1.
    """

    frequency_hz: FloatArray
    directivity: FloatArray
    source_match: FloatArray
    reflection_tracking: FloatArray

    def __post_init__(self) -> None:
        for name in ("frequency_hz", "directivity", "source_match", "reflection_tracking"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


@dataclass(frozen=True, slots=True, eq=False)
class StandardEntry:
    """One standard on the bench.

    Attributes
    ----------
    name : str
        Unique on the bench.
    kind : str
        "open", "short" or "load".
    files : tuple of paths
        One for each connection.
    given : mapping of str to Given
        Evidence by parameter name.
    same_offset_as : str or None
        The standard whose offset line this one shares.
    port : int
        1 takes S11 of the files, 2 takes S22.
    polynomial : str
        Terms of C(f) or L(f): "chosen" by the program, "constant", "even" (orders 0, 2) or "full" (0 to 3).
    from_kit : path or None
        Kit file that knows this standard (raw readings only).
    standard : str or None
        Its name in that kit file.
    reading_set : str or None
        Known standards may be read in several sets, before and after the others: which set this one is of.
    behind : str or None
        The adapter through which it was read.
    matings : int or None
        How often it had been connected in all when it was read.
    from_drawing : DrawnFrom or None
        The drawing that tells more of it.
    drawn : tuple of str
        Which values of `given` that drawing told, once it was looked at.
    drawn_notes : tuple of str
        What is to be said of that drawing.
    next_mode_hz : float
        Where the next mode begins in what is drawn; infinite where nothing is.
    """

    name: str
    kind: str
    files: tuple[Path, ...]
    given: Mapping[str, Given] = field(default_factory=dict)
    same_offset_as: str | None = None
    port: int = 1
    polynomial: str = "chosen"
    from_kit: Path | None = None
    standard: str | None = None
    reading_set: str | None = None
    behind: str | None = None
    matings: int | None = None
    from_drawing: DrawnFrom | None = None
    drawn: tuple[str, ...] = ()
    drawn_notes: tuple[str, ...] = ()
    next_mode_hz: float = inf

    def __post_init__(self) -> None:
        object.__setattr__(self, "files", tuple(self.files))
        object.__setattr__(self, "given", MappingProxyType(dict(self.given)))


@dataclass(frozen=True, slots=True, eq=False)
class StatedBound:
    """A 95 % bound on |ΔΓ| of a stated value: a straight line between the frequencies, held beyond the ends.

    Attributes
    ----------
    frequency_hz : array of shape (m,)
        Rising.
    bound : array of shape (m,)
    """

    frequency_hz: FloatArray
    bound: FloatArray

    def __post_init__(self) -> None:
        for name in ("frequency_hz", "bound"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


@dataclass(frozen=True, slots=True, eq=False)
class DeviceEntry:
    """One device that a kit is checked with.

    At most one of `kind`, `from_kit` and `value_file` states its value.

    Attributes
    ----------
    name : str
        Unique among the devices.
    files : tuple of paths
        One for each connection.
    port : int
        1 takes S11 of the files, 2 takes S22.
    kind : str or None
        "open", "short" or "load": the value comes from `given`.
    given : mapping of str to Given
    from_kit : path or None
        Kit file that defines the device, as `standard`.
    standard : str or None
    value_file : path or None
        Readings of it from elsewhere, with the bound `value_u95`.
    value_u95 : StatedBound or None
    expect : str or None
        What physics is to say without a value: "line", "passive", or None to be told from the readings.
    """

    name: str
    files: tuple[Path, ...]
    port: int = 1
    kind: str | None = None
    given: Mapping[str, Given] = field(default_factory=dict)
    from_kit: Path | None = None
    standard: str | None = None
    value_file: Path | None = None
    value_u95: StatedBound | None = None
    expect: str | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "files", tuple(self.files))
        object.__setattr__(self, "given", MappingProxyType(dict(self.given)))


@dataclass(frozen=True, slots=True)
class AdapterEntry:
    """One adapter: determined before, estimated, or still to be determined.

    Attributes
    ----------
    name : str
        Unique among the adapters.
    file : path or None
        Adapter file that holds it.
    delay_ps : Given or None
        Estimate of its delay, always with its uncertainty.
    loss_db : Given or None
        Estimate of its loss one way at 1 GHz.
    z0_ohm : Given or None
        Estimate of its impedance.
    """

    name: str
    file: Path | None = None
    delay_ps: Given | None = None
    loss_db: Given | None = None
    z0_ohm: Given | None = None


@dataclass(frozen=True, slots=True)
class PlannedSweep:
    """How standards are going to be read.

    Attributes
    ----------
    from_hz, to_hz : float
    points : int
    connections : int
        Of each standard.
    """

    from_hz: float
    to_hz: float
    points: int
    connections: int


@dataclass(frozen=True, slots=True, eq=False)
class Bench:
    """A bench file: what was measured, and with what.

    Attributes
    ----------
    path : path
        The bench file.
    name, connector : str
        Of the kit; free text.
    reference_ohm : float
        Reference impedance in ohms.
    within : float
        Tolerance on |error of Γ|.
    highest_hz : float or None
        Frequencies above are not asked for; None for no such limit.
    state : str
        "corrected" or "raw".
    residual : StatedResidual or None
        Corrected readings only; None when nothing is stated.
    standards : tuple of StandardEntry
        In the order of the file.
    date : str or None
        As written.
    plan : PlannedSweep or None
        For standards that have no readings yet.
    devices : tuple of DeviceEntry
        Devices that a kit is checked with; no fit looks at them.
    adapters : tuple of AdapterEntry
    calibrated_with : str or None
        The adapter that the analyser was calibrated with, and that is gone now.
    thru : str or None
        The adapter that is the kit's thru.
    calibration : str or None
        The user's words for the correction of the analyser: the same words, the same errors.
    """

    path: Path
    name: str
    connector: str
    reference_ohm: float
    within: float
    highest_hz: float | None
    state: str
    residual: StatedResidual | None
    standards: tuple[StandardEntry, ...]
    date: str | None = None
    plan: PlannedSweep | None = None
    devices: tuple[DeviceEntry, ...] = ()
    adapters: tuple[AdapterEntry, ...] = ()
    calibrated_with: str | None = None
    thru: str | None = None
    calibration: str | None = None
