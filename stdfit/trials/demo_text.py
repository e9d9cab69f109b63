"""The demonstration in words: fitted beside true."""

from collections.abc import Sequence
from typing import Any

from stdfit.trials.demo import Row
from stdfit.validity.kit import Kit
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency
from stdfit.writing.summary import summary

Curves = Sequence[tuple[str, float, float, float]]


def demo_text(kit: Kit, rows: Sequence[Row], curves: Curves) -> str:
    """Return the kit's summary, then fitted against true."""
    lines = [summary(kit), "Fitted against true (the truth is known, since the bench is simulated)"]
    lines += aligned(
        [
            ["standard", "what", "fitted", "true", "bound (95 %)", "inside"],
            *(
                [
                    one.standard,
                    f"{one.what} [{one.unit}]",
                    f"{one.fitted:.3f}",
                    f"{one.true:.3f}",
                    f"{one.bound:.3f}",
                    "yes" if one.inside else "NO",
                ]
                for one in rows
            ),
        ]
    )
    lines += ["", "Curves over the fit range: |fitted Γ − true Γ| and its bound"]
    lines += aligned(
        [
            ["standard", "frequency", "error", "bound (95 %)", "inside"],
            *(
                [name, frequency(f), f"{error:.4f}", f"{bound:.4f}", "yes" if error <= bound else "NO"]
                for name, f, error, bound in curves
            ),
        ]
    )
    inside = sum(error <= bound for _, _, error, bound in curves) + sum(one.inside for one in rows)
    lines += ["", f"the truth lies inside the bound in {inside} of {len(curves) + len(rows)} comparisons"]
    return "\n".join(lines)


def demo_data(rows: Sequence[Row], curves: Curves) -> dict[str, Any]:
    """Return the comparison as data."""
    return {
        "quantities": [
            {
                "standard": one.standard,
                "what": one.what,
                "unit": one.unit,
                "fitted": one.fitted,
                "true": one.true,
                "bound": one.bound,
                "inside": one.inside,
            }
            for one in rows
        ],
        "curves": [
            {"standard": name, "frequency_hz": f, "error": error, "bound": bound, "inside": error <= bound}
            for name, f, error, bound in curves
        ],
    }
