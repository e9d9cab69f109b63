"""A kit for the tests that only look at one, and kits made by hand."""

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Definition, Fitted, Kit
from stdfit.validity.limit import Limit


@pytest.fixture(scope="session")
def modest_kit(workshop):
    """A kit whose limits end below the last reading, because of the analyser."""
    return workshop(residual_db=38.0).kit()


def made_kit(standards, covariances, misfits=None, same=None, top_hz=np.inf):
    """A kit by hand, 50 MHz to 6 GHz; all numbers are invented.

    standards : name -> (kind, values in trade units); covariances : source -> {quantity: u}, one random number that
    acts on all of them; misfits : name -> misfit at both ends; same : quantity -> the quantity that it is part of.
    """
    same, misfits = same or {}, misfits or {}
    order = tuple(dict.fromkeys(q for one in covariances.values() for q in one))
    shares = []
    for source, sizes in covariances.items():
        vector = np.array([sizes.get(quantity, 0.0) for quantity in order])
        shares.append(Share(source, np.inf, np.outer(vector, vector)[None]))
    definitions = []
    for name, (kind, values) in standards.items():
        parameters = []
        for one, value in zip(PARAMETERS[kind], values, strict=True):
            own = f"{name}.{one.name}"
            of = same.get(own, own)
            role = ("free", of) if of in order else ("held", "")
            parameters.append(Fitted(one.name, one.unit, value, 0.0, value, value, *role))
        ends = (50e6, 6e9)
        definitions.append(
            Definition(
                *(name, kind, "constant", 3, *ends, *ends, tuple(parameters), ()),
                misfit_hz=np.array(ends),
                misfit=np.array(misfits.get(name, (0.0, 0.0))),
                limit=Limit(0.02, 6e9, "the readings end here"),
                notes=(),
            )
        )
    whole = Limit(0.02, 6e9, "open: the readings end here")
    return Kit(
        *("Kit made by hand", "", 50.0, 0.02, top_hz, "2000-01-01", "0.0.0", whole),
        *(tuple(definitions), order, tuple(shares), (), (), ()),
    )


FLUSH = {
    "open": ("open", [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "short": ("short", [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "load": ("load", [0.0, 0.0, 50.0, 50.0, 0.0, 0.0]),
}
"""Standards at +1, −1 and 0 at all frequencies."""


@pytest.fixture(scope="session")
def by_hand():
    """Return a function that makes a kit; flush standards are replaced, or left out where None is given."""

    def make(covariances, standards=None, **fields):
        chosen = {**FLUSH, **(standards or {})}
        return made_kit({name: one for name, one in chosen.items() if one}, covariances, **fields)

    return make
