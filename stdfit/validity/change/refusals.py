"""Kits whose comparison would tell nothing of wear: refused, with the reason."""

import math
import re
from collections.abc import Sequence

import numpy as np

from stdfit.base.errors import RequestError
from stdfit.circuits.connectors import family_of
from stdfit.validity.change.cause import visible_shift
from stdfit.validity.change.difference import corrected_by_itself
from stdfit.validity.change.statistic import Projected
from stdfit.validity.kit import Kit, SourceFile

OTHER_PLANE_PS = 5.0
"""A common shift of all full reflections by more than this, 1.5 mm, is no wear: the planes of the kits differ."""

ALIKE = 0.2
"""Shifts that differ by less than this part of them are one shift."""

GENDERS = ({"male", "plug", "pin"}, {"female", "jack", "socket"})


def refuse(old: Kit, new: Kit, *, same_calibration: bool) -> None:
    """Refuse kits whose comparison would tell nothing of wear.

    Raises
    ------
    RequestError
    """
    same = {one.sha256 for one in _readings(old)} & {one.sha256 for one in _readings(new)}
    if same:
        count = f"{len(same)} files of readings are" if len(same) > 1 else "a file of readings is"
        raise RequestError(
            f"{count} in both kits: nothing was read anew", "read the standards again, and compare with that"
        )
    refuse_words(old.connector, new.connector, old.reference_ohm, new.reference_ohm)
    if not same_calibration:
        return
    if old.calibration and new.calibration and old.calibration != new.calibration:
        raise RequestError(
            f"--same-calibration is given, and the kits name two, '{old.calibration}' and '{new.calibration}'",
            "leave the option out, or mend the name in the bench file and fit again",
        )
    if not (corrected_by_itself(old) and corrected_by_itself(new)):
        raise RequestError(
            "--same-calibration is given for readings that the analyser did not correct itself",
            "leave it out: the same reference kit is known by its file",
        )


def refuse_words(old: str, new: str, old_ohm: float, new_ohm: float) -> None:
    """Refuse other connectors and other reference impedances.

    Raises
    ------
    RequestError
    """
    words = [set(re.findall(r"[a-z]+", connector.lower())) for connector in (old, new)]
    families = family_of(old).name, family_of(new).name
    other_side = any(words[0] & GENDERS[k] and words[1] & GENDERS[1 - k] for k in (0, 1))
    if other_side or (all(families) and families[0] != families[1]):
        raise RequestError(
            f"the kits have different connectors, '{old}' and '{new}'", "compare kits of one connector"
        )
    if not math.isclose(old_ohm, new_ohm, rel_tol=1e-9):
        raise RequestError(
            f"the kits have different reference impedances, {old_ohm:g} and {new_ohm:g} Ω",
            "compare kits that were fitted with the same one",
        )


def _readings(kit: Kit) -> list[SourceFile]:
    return [one for one in kit.files if one.holds_readings]


def refuse_other_plane(projected: Sequence[Projected]) -> None:
    """Refuse kits all of whose full reflections have moved by the same large shift: their planes are not the same.

    Raises
    ------
    RequestError
    """
    shifts = [visible_shift(one).value for one in projected if one.change.pair.one.kind != "load"]
    if len(shifts) < 2:
        return
    middle = float(np.mean(shifts))
    if abs(middle) > OTHER_PLANE_PS and max(abs(one - middle) for one in shifts) < ALIKE * abs(middle):
        raise RequestError(
            f"the reference planes of the kits lie {abs(middle):.3g} ps apart: open and short have moved by the same",
            "compare kits of one reference plane; where all standards were really cut or stretched, type the new kit",
        )
