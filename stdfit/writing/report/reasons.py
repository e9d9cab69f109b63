"""Why a limit is where it is, in a sentence for somebody who has not read the method."""

import re

from stdfit.validity.evidence.causes import DIFFERS, LEAVES
from stdfit.validity.kit import Kit
from stdfit.validity.limits import STEPS

GLOSSES = (
    ("analyser residuals", "Analyser residuals are what the analyser's own calibration leaves uncorrected."),
    (
        "reference connections",
        "Reference connections are how well the known standards repeated when they were read.",
    ),
    ("reference kit", "Its references carry their own uncertainty into this kit."),
    ("reference misfit", "Its references do not follow their own definitions exactly."),
    (
        "reference noise",
        "Reference noise is what differs from one point to the next in readings of the known standards.",
    ),
    ("connections", "Connections are what changes when the same part is connected again."),
    ("noise", "Noise is what differs from one point of a reading to the next."),
    (
        "given values",
        "Given values are the lengths, resistances and so on that were stated with the readings.",
    ),
    ("assumed values", "Assumed values stand in where neither readings nor stated values tell enough."),
    (
        "adapter",
        "An adapter between the plane of the readings and the standard brings its own uncertainty along.",
    ),
    (
        "model errors",
        "Model errors are what the parts differ from their models by, as far as their readings show it.",
    ),
    ("drift", "Drift is what changed in the analyser between the sets of readings."),
    (
        "the readings leave the model",
        "Neither the definition nor the known errors explain the readings there: the part has a resonance, for "
        "instance, or the analyser is worse than stated.",
    ),
    ("the readings end", "Nothing was read beyond; a longer sweep would show more."),
    ("the next mode", "Beyond, the field in the connector is no longer that of a simple line."),
    ("the stated bound", "This kit states its bounds without their causes."),
    ("what is typed", "What is typed is simpler than the full definition."),
)
"""What the words of a reason mean, by their beginning."""


def standard_of(kit: Kit) -> str:
    """Return the standard with which the kit ends, as its reason names it; empty where it names none."""
    names = [one.name for one in kit.definitions if kit.limit.reason.startswith(f"{one.name}: ")]
    return max(names, key=len, default="")


def why(kit: Kit) -> tuple[str, str]:
    """Return why the kit ends where it does, as a sentence, and what its words mean."""
    name = standard_of(kit)
    reason = kit.limit.reason.removeprefix(f"{name}: ")
    gloss = next((text for start, text in GLOSSES if reason.startswith(start)), "")
    begin = "It ends" if kit.limit.limit_hz > 0.0 else "It fails at its first readings"
    begin = f"{begin} with “{name}”: " if name else f"{begin}: "
    # The name of a standard in the source may hold a comma of its own.
    found = re.match(r"(.*?), (\d+ %) of the bound(.*)", reason)
    if found is None or reason.startswith((LEAVES, STEPS, DIFFERS)):
        return f"{begin}{reason}.", gloss
    source, share, more = found.groups()
    return f"{begin}the largest part of its bound there is {source} ({share}{more}).", gloss
