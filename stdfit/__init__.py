"""Readings of home-made calibration standards in; definitions with honest bounds and a validity limit out.

`fit` reads a bench file with all its readings and returns a `Kit`, `read` takes one from its kit file, and `kit_text`
is what to write into one. A kit holds for each standard the parameters that an analyser asks for, their joint
covariance source by source, the misfit of the model, and the highest frequency up to which the definition keeps
within a tolerance. `curve` gives the reflection and its 95 % bound at any frequency, `limits` the validity limits at
any tolerance, `next_steps` what would push them further; `parameters` and `budget` are tables of pandas, and the
`plot_...` functions draw on axes of matplotlib. Errors are `StdfitError`: what is wrong, where, what to do.
"""

# typing alone takes as long to import as the rest of `stdfit --help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from stdfit.base.errors import StdfitError
    from stdfit.pipeline import fit_bench as fit
    from stdfit.validity.kit import Kit, curve
    from stdfit.validity.limits import limits
    from stdfit.validity.next_steps import next_steps
    from stdfit.writing.frames import budget_table as budget
    from stdfit.writing.frames import parameters_table as parameters
    from stdfit.writing.kit_file import kit_text
    from stdfit.writing.kit_reading import read_kit as read
    from stdfit.writing.plots import plot_bound, plot_deviation, plot_devices, plot_element, plot_smith

_HOMES = {
    "read": ("stdfit.writing.kit_reading", "read_kit"),
    "fit": ("stdfit.pipeline", "fit_bench"),
    "Kit": ("stdfit.validity.kit", "Kit"),
    "curve": ("stdfit.validity.kit", "curve"),
    "limits": ("stdfit.validity.limits", "limits"),
    "next_steps": ("stdfit.validity.next_steps", "next_steps"),
    "parameters": ("stdfit.writing.frames", "parameters_table"),
    "budget": ("stdfit.writing.frames", "budget_table"),
    "plot_bound": ("stdfit.writing.plots", "plot_bound"),
    "plot_deviation": ("stdfit.writing.plots", "plot_deviation"),
    "plot_element": ("stdfit.writing.plots", "plot_element"),
    "plot_devices": ("stdfit.writing.plots", "plot_devices"),
    "plot_smith": ("stdfit.writing.plots", "plot_smith"),
    "kit_text": ("stdfit.writing.kit_file", "kit_text"),
    "StdfitError": ("stdfit.base.errors", "StdfitError"),
}

__all__ = [  # noqa: RUF022 — in the order of use
    "read",
    "fit",
    "Kit",
    "curve",
    "limits",
    "next_steps",
    "parameters",
    "budget",
    "plot_bound",
    "plot_deviation",
    "plot_element",
    "plot_devices",
    "plot_smith",
    "kit_text",
    "StdfitError",
]


def __getattr__(name: str) -> object:
    """Import a public name when it is first used: `stdfit --help` must not wait for scipy."""
    if name in _HOMES:
        from importlib import import_module

        home, own = _HOMES[name]
        return getattr(import_module(home), own)
    raise AttributeError(f"module 'stdfit' has no attribute {name!r}")


def __dir__() -> list[str]:
    """Return the public names, which a notebook completes."""
    return [*__all__]
