"""Units as people say them."""

_SAID = {"1e-15 F": "fF", "1e-12 H": "pH"}


def said_unit(unit: str) -> str:
    """Return the name of a trade unit in a sentence or a table; the number stays what it is.

    Examples
    --------
    >>> said_unit("1e-15 F"), said_unit("1e-36 F/Hz²"), said_unit("ps")
    ('fF', '1e-36 F/Hz²', 'ps')
    """
    return _SAID.get(unit, unit)
