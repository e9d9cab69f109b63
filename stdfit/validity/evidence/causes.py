"""What makes a bound where it ends, in one line: the kinds of errors by their parts of it."""

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import kind_of, parts_of_variance
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.kit import Kit

GIVEN = "given values"
"""The source that stands for what the user gave."""

TYPED = "what is typed"
"""The part of a bound that comes from typing less than the full definition."""

LEAVES = "the readings leave the model here (misfit)"
DIFFERS = "what is typed differs from the full definition here"
"""How a reason begins that is no source of uncertainty."""

SECOND_FROM = 0.10
"""The second largest part is told from here on."""

TYPED_FROM = 0.01
"""What is typed is told from here on, since the user chose it."""


def parts_of_bound(
    kit: Kit, design: ComplexArray, u95: float, misfit: float, typed: float = 0.0
) -> dict[str, float]:
    """Return what each kind of error takes of a bound at one frequency, in parts of it, largest first.

    Those of the sources are part_k = U95·v_k/Σv, as in `shared_out`; the bound is U95 + misfit + typed.

    Parameters
    ----------
    kit : Kit
        With shares.
    design : complex array of shape (p,)
        Derivatives of Γ by the quantities of the joint covariance.
    u95, misfit, typed : float
        95 % radius of all sources, bound on the model's own error, and what typing less than the definition adds.
    """
    whole = max(u95 + misfit + typed, 1e-300)
    parts: dict[str, float] = {}
    for share, part in zip(kit.shares, parts_of_variance(design[None], kit.shares)[:, 0], strict=True):
        kind = kind_of(share.name)
        parts[kind] = parts.get(kind, 0.0) + float(part) * u95 / whole
    # Of equal parts the misfit is told: it is what can be seen in the readings.
    found = {TYPED: typed / whole, MISFIT: misfit / whole, **parts}
    return dict(sorted(found.items(), key=lambda one: -one[1]))


def cause(
    kit: Kit,
    design: ComplexArray,
    u95: float,
    misfit: float,
    typed: float = 0.0,
    *,
    of: str = "the bound",
) -> str:
    """Say which kind of error has the largest part of a bound at one frequency, and which the second.

    Parameters
    ----------
    kit, design, u95, misfit, typed
        As for `parts_of_bound`.
    of : str
        What the bound is called.

    Returns
    -------
    str
        "analyser residuals, 62 % of the bound, most of it source match; misfit 31 %".
    """
    parts = parts_of_bound(kit, design, u95, misfit, typed)
    first, second, *others = parts
    said = f"{_begin(kit, first)}, {percent(parts[first])} of {of}{_member(kit, design, first)}"
    if parts[second] >= SECOND_FROM:
        said += f"; {second} {percent(parts[second])}"
    else:
        others = [second, *others]
    return (
        f"{said}; {TYPED} {percent(parts[TYPED])}" if TYPED in others and parts[TYPED] >= TYPED_FROM else said
    )


def percent(part: float) -> str:
    """Return a part in percent, without decimals.

    Examples
    --------
    >>> percent(0.314)
    '31 %'
    """
    return f"{100.0 * part:.0f} %"


def _begin(kit: Kit, kind: str) -> str:
    """Return what a reason begins with."""
    if kind == GIVEN:
        values = _given_values(kit)
        return f"{kind} ({values[0][0]})" if len(values) == 1 else kind
    return {MISFIT: LEAVES, TYPED: DIFFERS}.get(kind, kind)


def _member(kit: Kit, design: ComplexArray, kind: str) -> str:
    """Say which source of a kind, or which given value, is the largest."""
    if kind == GIVEN:
        return _given_member(kit, design)
    own = [k for k, share in enumerate(kit.shares) if kind_of(share.name) == kind]
    if len(own) < 2:
        return ""
    sizes = parts_of_variance(design[None], kit.shares)[own, 0]
    largest = int(np.argmax(sizes))
    name = kit.shares[own[largest]].name.partition(" (")[2].rstrip(")")
    much = "most of it" if 2.0 * sizes[largest] > sizes.sum() else "above all"
    return f", {much} {name}" if name else ""


def _given_values(kit: Kit) -> list[tuple[str, int]]:
    """Return the given values in words, with their places in the joint covariance."""
    return [
        (f"{parameter.label} of {definition.name}", kit.order.index(own.of))
        for definition in kit.definitions
        for own, parameter in zip(definition.parameters, PARAMETERS[definition.kind], strict=True)
        if own.role == "given" and own.of in kit.order
    ]


def _given_member(kit: Kit, design: ComplexArray) -> str:
    values = _given_values(kit)
    given = [share for share in kit.shares if share.name == GIVEN]
    if len(values) < 2 or not given:
        return ""
    covariance = given[0].covariances[0]
    # A value kept by its evidence has the evidence's error: the one that the error of Γ goes along with is the cause.
    along = np.array([design.real, design.imag]) @ covariance
    size = np.sqrt(np.maximum(np.diag(covariance), 1e-300))
    most = max(values, key=lambda value: float(np.hypot(*along[:, value[1]]) / size[value[1]]))
    return f", most of it {most[0]}"
