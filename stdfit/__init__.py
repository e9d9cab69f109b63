"""Readings of home-made calibration standards in; definitions with honest bounds and a validity limit out.

A bench file says what was measured and with what. `fit_bench` reads it with all its readings and returns a `Kit`:
for each standard the parameters that an analyser asks for, their joint covariance source by source, the misfit of
the model, and the highest frequency up to which the definition keeps within a tolerance. `curve` gives the
reflection and its 95 % bound at any frequency, `limits` the validity limits at any tolerance; `kit_text` and
`read_kit` write and read kit files.
"""

# typing alone takes as long to import as the rest of `stdfit --help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from stdfit.base.errors import FitError, InputError, StdfitError
    from stdfit.data.bench import read_bench
    from stdfit.data.readings import read_reading
    from stdfit.pipeline import characterise, fit_bench
    from stdfit.validity.kit import Kit, curve
    from stdfit.validity.limits import limits
    from stdfit.writing.kit_file import kit_text
    from stdfit.writing.kit_reading import read_kit

_HOMES = {
    "FitError": "stdfit.base.errors",
    "InputError": "stdfit.base.errors",
    "StdfitError": "stdfit.base.errors",
    "read_bench": "stdfit.data.bench",
    "read_reading": "stdfit.data.readings",
    "characterise": "stdfit.pipeline",
    "fit_bench": "stdfit.pipeline",
    "Kit": "stdfit.validity.kit",
    "curve": "stdfit.validity.kit",
    "limits": "stdfit.validity.limits",
    "kit_text": "stdfit.writing.kit_file",
    "read_kit": "stdfit.writing.kit_reading",
}

__all__ = [  # noqa: RUF022 — in the order of use
    "read_reading",
    "read_bench",
    "fit_bench",
    "characterise",
    "Kit",
    "curve",
    "limits",
    "kit_text",
    "read_kit",
    "StdfitError",
    "InputError",
    "FitError",
]


def __getattr__(name: str) -> object:
    """Import a public name when it is first used: `stdfit --help` must not wait for scipy."""
    if name in _HOMES:
        from importlib import import_module

        return getattr(import_module(_HOMES[name]), name)
    raise AttributeError(f"module 'stdfit' has no attribute {name!r}")
