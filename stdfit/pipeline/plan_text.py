"""A plan in words: what holds a kit back, and what would move it."""

from typing import Any

from stdfit.pipeline.plan import Plan, Remedy, ranked
from stdfit.writing.aligned import aligned
from stdfit.writing.bound_rows import bound_rows
from stdfit.writing.numbers import frequency
from stdfit.writing.summary import verdict

HEAD = (
    "What would move the limit, each fitted again (estimates without a fit, as in 'stdfit show', are lower)"
)


def plan_text(plan: Plan, *, measured: bool) -> str:
    """Return the plan for a terminal, the verdict first.

    Parameters
    ----------
    plan : Plan
    measured : bool
        False where the readings are imagined.
    """
    lines = [("" if measured else "predicted, before any reading: ") + verdict(plan.kit)]
    if not measured:
        lines.append(
            "  (usual parts that follow their models, read by a typical analyser whose errors pass for misfit in part)"
        )
    lines += ["", f"What makes up the bound of '{plan.standard}' at {frequency(plan.at_hz)}"]
    named = [(one.name, one.part * plan.bound) for one in plan.contributions]
    lines += aligned([["source", "part of the bound", ""], *bound_rows(named, plan.misfit)])
    helping, useless = ranked(plan.remedies)
    lines += ["", HEAD]
    if helping:
        lines += aligned([["good to", "gain", "what to do"], *(_row(one) for one in helping)])
    else:
        lines.append("  none of the remedies that were tried moves it")
    if useless:
        lines += ["", "What would not", *(f"  {one.what}" for one in useless)]
    return "\n".join(lines) + "\n"


def _row(one: Remedy) -> list[str]:
    most = "at most " if one.at_most else ""
    return [f"{most}{frequency(one.limit_hz)}", f"+{frequency(one.gain_hz)}", one.what]


def plan_data(plan: Plan) -> dict[str, Any]:
    """Return the plan as data."""
    return {
        "within": plan.kit.within,
        "limit_hz": plan.kit.limit.limit_hz,
        "reason": plan.kit.limit.reason,
        "held_back_by": plan.standard,
        "at_hz": plan.at_hz,
        "bound": plan.bound,
        "misfit": plan.misfit,
        "sources": [{"name": one.name, "part": one.part, "alone": one.alone} for one in plan.contributions],
        "remedies": [
            {"what": one.what, "limit_hz": one.limit_hz, "gain_hz": one.gain_hz, "at_most": one.at_most}
            for one in plan.remedies
        ],
    }
