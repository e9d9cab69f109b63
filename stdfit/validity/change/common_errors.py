"""Which errors several kits of the same standards have in common."""

from collections.abc import Hashable

from stdfit.validity.kit import ADAPTER, Definition, Kit

MODELS = ("misfit", "model errors")
"""Kinds of sources that are a standard's own: its model is wrong by the same every time."""


def root_of(
    kit: Kit, definition: Definition, source: str, *, same_calibration: bool = False
) -> Hashable | None:
    """Return what stands behind a source of error: kits with the same root have the same error; None is its own.

    Parameters
    ----------
    kit : Kit
    definition : Definition
        The standard in question.
    source : str
        Name of a share, or "misfit".
    same_calibration : bool
        Whether one calibration of the analyser served all kits.

    Notes
    -----
    A reference kit is the same where the SHA-256 of its file is, an adapter likewise. Given values are the same where
    value and uncertainty of every one of them are, assumed ones where the same parameters are assumed. The model's own
    error belongs to the standard and comes back with it.
    """
    kind = source.partition(" (")[0]
    if kind in ("reference kit", "reference misfit"):
        parents = tuple(sorted(one.sha256 for one in kit.ancestors if not one.of))
        return (source, parents) if parents else None
    if kind == "adapter":
        files = tuple(sorted(one.sha256 for one in kit.files if one.standard.startswith(ADAPTER)))
        return (source, files) if files and "connection" not in source else None
    if kind == "analyser residuals":
        if same_calibration:
            return source
        return (source, kit.calibration) if kit.calibration else None
    if kind == "given values":
        return _evidence(kit, "given")
    if kind == "assumed values":
        return _evidence(kit, "assumed")
    return (source, definition.name) if kind in MODELS else None


def _evidence(kit: Kit, role: str) -> Hashable | None:
    """Return all evidence of a kit of that role; None where a given value is not told."""
    pieces = [
        (definition.name, definition.shape, one.name, one.given)
        for definition in kit.definitions
        for one in definition.parameters
        if one.role == role
    ]
    if role == "given" and any(given is None for *_, given in pieces):
        return None
    return tuple(pieces)
