"""The changes of all pairs of two kits, and what makes the comparison weaker than it could be.

Where both kits keep their mean readings these are compared, else the definitions.
"""

from collections.abc import Sequence

from stdfit.validity.change.definitions import by_definitions, fitted_alike
from stdfit.validity.change.difference import Change, same_correction
from stdfit.validity.change.readings import by_readings
from stdfit.validity.device.pairing import Pair
from stdfit.validity.kit import Kit


def changes(old: Kit, new: Kit, pairs: Sequence[Pair], *, same_calibration: bool = False) -> list[Change]:
    """Return the change of each pair, by readings where both kits kept them.

    Parameters
    ----------
    old, new : Kit
    pairs : sequence of Pair
    same_calibration : bool
        The user's word that one calibration of the analyser served both.

    Raises
    ------
    RequestError
        A pair has too few frequencies in common.
    """
    shared = bool(same_correction(old, new, same_calibration))
    found = []
    for pair in pairs:
        means = [
            None if kit.session is None else kit.session.mean_of(own.name)
            for kit, own in ((old, pair.one), (new, pair.two))
        ]
        if old.session and new.session and means[0] and means[1]:
            sessions = (old.session, new.session)
            found.append(by_readings(pair, (old, new), sessions, (means[0], means[1]), common=shared))
        else:
            found.append(by_definitions(pair, old, new, same_calibration=same_calibration))
    return found


def weak_points(found: Sequence[Change]) -> tuple[str, ...]:
    """Say what makes the comparison weaker than it could be."""
    by_definition = [one.pair for one in found if one.by == "definitions"]
    if not by_definition:
        return ()
    names = ", ".join(pair.label for pair in by_definition)
    notes = [
        f"{names}: definitions are compared, since a kit keeps no readings of them: a change is seen only as far as a "
        "definition follows it, and evidence that is given again holds it back. Fit both benches with this version"
    ]
    apart = [pair.label for pair in by_definition if not fitted_alike(pair)]
    if apart:
        notes.append(
            f"{', '.join(apart)}: fitted with other orders or ranges, so that common errors do not cancel and are "
            "counted twice"
        )
    return tuple(notes)
