"""A kit: definitions of standards, how sure they are, and up to where."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.standard import reflection
from stdfit.uncertainty.budget import Share, radius
from stdfit.validity.analyser import Analyser
from stdfit.validity.limit import Limit
from stdfit.validity.session import Session
from stdfit.validity.thru import Thru


@dataclass(frozen=True, slots=True)
class Fitted:
    """One parameter of a definition, in trade units.

    Attributes
    ----------
    name, unit : str
    value, u, low, high : float
        Value, standard uncertainty and 95 % interval; u = 0 for what is held or unused.
    role : str
        "free", "given", "assumed", "held", "unused", or "at its bound".
    of : str
        Its name in the joint covariance, "standard.parameter"; empty where it is not part of it.
    given : (float, float) or None
        Value and standard uncertainty of the user's evidence, where the role is "given".
    """

    name: str
    unit: str
    value: float
    u: float
    low: float
    high: float
    role: str
    of: str
    given: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True)
class Combination:
    """A combination that the readings fix better than its parts.

    Attributes
    ----------
    label, unit : str
    value, u, low, high : float
    correlation : float
        Between the two parts.
    """

    label: str
    unit: str
    value: float
    u: float
    low: float
    high: float
    correlation: float


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class Definition:
    """One standard of a kit.

    Attributes
    ----------
    name, kind, shape : str
        `shape` names the order that was chosen.
    connections : int
    read_low_hz, read_top_hz, fit_low_hz, fit_top_hz : float
        Ends of the readings and of the fit range.
    parameters : tuple of Fitted
        In the order of ``PARAMETERS[kind]``.
    combinations : tuple of Combination
    misfit_hz, misfit : arrays of shape (m,)
        Bound on the model's own error over frequency.
    limit : Limit
        At the kit's tolerance.
    notes : tuple of str
    tried : tuple of (order, limit in Hz)
        How far each order that was tried would have been good, each over its own best range.
    matings : int or None
        How often it had been connected in all when it was read; None where nobody counted.
    """

    name: str
    kind: str
    shape: str
    connections: int
    read_low_hz: float
    read_top_hz: float
    fit_low_hz: float
    fit_top_hz: float
    parameters: tuple[Fitted, ...]
    combinations: tuple[Combination, ...]
    misfit_hz: FloatArray
    misfit: FloatArray
    limit: Limit
    notes: tuple[str, ...]
    tried: tuple[tuple[str, float], ...] = ()
    matings: int | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "misfit_hz", frozen_float(self.misfit_hz))
        object.__setattr__(self, "misfit", frozen_float(self.misfit))

    def __repr__(self) -> str:
        return f"<Definition '{self.name}': {self.kind}, order {self.shape}, {_said(self.limit)}>"

    @property
    def values(self) -> FloatArray:
        """Parameter values in trade units, shape (p,)."""
        return np.array([parameter.value for parameter in self.parameters])


@dataclass(frozen=True, slots=True)
class Rung:
    """One step of the ladder over tolerances: the kit's limit and each standard's, in Hz."""

    within: float
    kit_hz: float
    standards_hz: tuple[float, ...]


ADAPTER, DRAWING = "adapter ", "drawing of "
"""How the names of files begin that hold no readings."""


@dataclass(frozen=True, slots=True)
class SourceFile:
    """A file that went into a kit.

    Attributes
    ----------
    standard : str
        The standard that its readings are of; "adapter NAME" or "drawing of NAME" for what is no file of readings.
    file : str
    sha256 : str
    """

    standard: str
    file: str
    sha256: str

    @property
    def holds_readings(self) -> bool:
        """Whether it is a file of readings."""
        return not self.standard.startswith((ADAPTER, DRAWING))


@dataclass(frozen=True, slots=True)
class Ancestor:
    """A kit whose standards were the references of a kit, or of one of its ancestors.

    Attributes
    ----------
    name, created : str
        As in its kit file.
    sha256 : str
        Of its kit file.
    of : str
        SHA-256 of the ancestor that it was a reference of; empty where it was one of the kit's own.
    """

    name: str
    created: str
    sha256: str
    of: str = ""


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class Kit:
    """Everything that is known of a set of standards.

    Attributes
    ----------
    name, connector : str
    reference_ohm : float
    within : float
        The tolerance that was asked for.
    top_hz : float
        Ceiling from the connector family; infinite where it is not known.
    created, version : str
        Date, and version of the program.
    limit : Limit
        Of the kit at `within`.
    definitions : tuple of Definition
    order : tuple of str
        Quantities of the joint covariance, "standard.parameter".
    shares : tuple of Share
        Joint covariance in trade units, source by source.
    ladder : tuple of Rung
    files : tuple of SourceFile
    warnings : tuple of str
    checks : tuple of str
        What a Monte Carlo check said, in words; empty where none was asked for.
    ancestors : tuple of Ancestor
        The kits that its uncertainty comes from; empty where the readings were corrected by the analyser.
    thru : Thru or None
        A determined adapter that serves as its thru.
    measured : str
        When the readings were taken, as the bench file says; empty where it does not.
    calibration : str
        The user's words for the correction of the analyser: the same words, the same errors. Empty for none.
    session : Session or None
        The mean readings, for comparison with those of another day; None where they were not kept.
    analyser : Analyser or None
        What the analyser's own correction left; None where readings were raw, or where it was not kept.
    """

    name: str
    connector: str
    reference_ohm: float
    within: float
    top_hz: float
    created: str
    version: str
    limit: Limit
    definitions: tuple[Definition, ...]
    order: tuple[str, ...]
    shares: tuple[Share, ...]
    ladder: tuple[Rung, ...]
    files: tuple[SourceFile, ...]
    warnings: tuple[str, ...]
    checks: tuple[str, ...] = ()
    ancestors: tuple[Ancestor, ...] = ()
    thru: Thru | None = None
    measured: str = ""
    calibration: str = ""
    session: Session | None = None
    analyser: Analyser | None = None

    def __repr__(self) -> str:
        names = ", ".join(one.name for one in self.definitions)
        return f"<Kit '{self.name}': {names}; {_said(self.limit)}>"

    def definition(self, name: str) -> Definition:
        """Return the definition of that name.

        Raises
        ------
        RequestError
            The kit holds no such standard.
        """
        for definition in self.definitions:
            if definition.name == name:
                return definition
        names = ", ".join(definition.name for definition in self.definitions)
        raise RequestError(f"the kit holds no standard named '{name}'", f"it holds: {names}")


def _said(limit: Limit) -> str:
    """Say a limit in a few words."""
    return f"within {limit.within:g} good to {limit.limit_hz / 1e9:.3g} GHz"


LEAST_HZ = 1e-6
"""Below, the impedance of a lossy line grows beyond what the numbers can take: Γ would lose its digits in silence."""


def model(kit: Kit, definition: Definition, frequency_hz: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return Γ, shape (n,), and its derivatives by the quantities of the joint covariance, shape (n, p).

    Raises
    ------
    RequestError
        A frequency is so close to zero, or the definition so far from sense, that numbers fail.
    """
    with np.errstate(all="ignore"):
        gamma, own = reflection(definition.kind, definition.values, frequency_hz, kit.reference_ohm)
    faulty = ~(np.isfinite(gamma) & np.isfinite(own).all(axis=1)) | (frequency_hz < LEAST_HZ)
    if faulty.any():
        raise RequestError(
            f"the reflection of '{definition.name}' cannot be computed at {float(frequency_hz[faulty][0]):.4g} Hz",
            f"ask for frequencies from {definition.read_low_hz:.10g} Hz on, where the readings begin",
        )
    place = {name: k for k, name in enumerate(kit.order)}
    design = np.zeros((frequency_hz.size, len(kit.order)), dtype=complex)
    for k, parameter in enumerate(definition.parameters):
        if parameter.of in place:
            design[:, place[parameter.of]] += own[:, k]
    return gamma, design


def curve(
    kit: Kit, definition: Definition | str, frequency_hz: FloatArray
) -> tuple[ComplexArray, FloatArray]:
    """Return Γ and its bound: the 95 % radius of all sources, plus the misfit.

    Parameters
    ----------
    kit : Kit
    definition : Definition or str
        A standard of the kit, or its name.
    frequency_hz : array of shape (n,)
        Above 0 and not above the last reading: beyond it nothing is known.

    Raises
    ------
    RequestError
        A frequency lies outside, or the kit holds no such standard.
    """
    if isinstance(definition, str):
        definition = kit.definition(definition)
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    outside = ~((frequency_hz > 0.0) & (frequency_hz <= definition.read_top_hz))
    if outside.any():
        raise RequestError(
            f"{float(frequency_hz[outside][0]):.10g} Hz lies outside the readings of '{definition.name}'",
            f"ask for frequencies above 0 and up to {definition.read_top_hz:.10g} Hz: beyond them there is no bound",
        )
    gamma, design = model(kit, definition, frequency_hz)
    spread = radius(design, kit.shares) if kit.shares else np.zeros(frequency_hz.size)
    return gamma, spread + misfit_at(definition, frequency_hz)


def misfit_at(definition: Definition, frequency_hz: FloatArray) -> FloatArray:
    """Return the misfit at any frequency, held at the ends."""
    return np.interp(frequency_hz, definition.misfit_hz, definition.misfit)


def total_covariance(shares: Sequence[Share]) -> FloatArray:
    """Return the sum of all shares, shape (p, p), at the correlation length with the largest total variance."""
    lengths = max(share.covariances.shape[0] for share in shares)
    size = shares[0].covariances.shape[1:]
    stack = sum(np.broadcast_to(share.covariances, (lengths, *size)) for share in shares)
    stack = np.asarray(stack)
    scale = np.sqrt(np.maximum(np.einsum("aii->ai", stack).max(axis=0), 1e-300))
    return np.asarray(stack[int(np.argmax((np.einsum("aii->ai", stack) / scale**2).sum(axis=1)))])
