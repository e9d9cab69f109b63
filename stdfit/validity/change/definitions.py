"""The change of a standard between two definitions, where a kit keeps no readings.

A definition follows readings only as far as order, range and evidence let it, so less is seen.
"""

import numpy as np

from stdfit.uncertainty.budget import factor_of
from stdfit.uncertainty.region import CIRCULAR
from stdfit.validity.change.common_errors import root_of
from stdfit.validity.change.difference import Change, Effect, enough, same_correction, smooth_effect
from stdfit.validity.device.pairing import Pair
from stdfit.validity.kit import Kit, misfit_at, model

POINTS = 200
"""Frequencies at which definitions are compared."""

MIXING_UNKNOWN = 0.02
"""Part of a change by which it may be shown wrong, where the errors of the analyser's correction were not kept."""


def by_definitions(pair: Pair, old: Kit, new: Kit, *, same_calibration: bool) -> Change:
    """Return the change of a definition; what both kits share cancels only in fits of one order and range.

    Parameters
    ----------
    pair : Pair
    old, new : Kit
    same_calibration : bool
        Whether one calibration of the analyser served both.

    Raises
    ------
    RequestError
        No common fit range.
    """
    f = np.linspace(pair.low_hz, min(pair.one.fit_top_hz, pair.two.fit_top_hz), POINTS)
    if not f[0] < f[-1]:
        enough(f[:0], pair)
    alike = fitted_alike(pair)
    (gamma_one, design_one), (gamma_two, design_two) = (
        model(kit, own, f) for kit, own in ((old, pair.one), (new, pair.two))
    )
    roots = [
        {
            name: root_of(kit, own, name, same_calibration=same_calibration) if alike else None
            for name in [*(share.name for share in kit.shares), "misfit"]
        }
        for kit, own in ((old, pair.one), (new, pair.two))
    ]
    effects: list[Effect] = []
    common: list[Effect] = []
    for place, (kit, own, design) in enumerate(((old, pair.one, design_one), (new, pair.two, design_two))):
        each = [
            Effect(
                share.name,
                share.freedom,
                tuple(design @ factor_of(covariance) for covariance in share.covariances),
            )
            for share in kit.shares
        ]
        # A model that is wrong by the same both times needs fits of the same readings' errors, too.
        each.append(smooth_effect("misfit", misfit_at(own, f) / CIRCULAR, f))
        for effect in each:
            root = roots[place][effect.name]
            same = root is not None and root == roots[1 - place].get(effect.name)
            if effect.name == "misfit":
                same = same and bool(same_correction(old, new, same_calibration))
            (common if same else effects).append(effect)
    return Change(
        pair=pair,
        by="definitions",
        reference_ohm=old.reference_ohm,
        frequency_hz=f,
        gamma=0.5 * (gamma_one + gamma_two),
        difference=gamma_two - gamma_one,
        noise_sd=0.0,
        effects=tuple(effects),
        common=tuple(common),
        mixing=np.full(f.size, MIXING_UNKNOWN),
    )


def fitted_alike(pair: Pair) -> bool:
    """Tell whether two definitions have one order and range: only then errors of a common source act alike."""
    tops = pair.one.fit_top_hz, pair.two.fit_top_hz
    return pair.one.shape == pair.two.shape and bool(np.isclose(*tops, rtol=1e-6))
