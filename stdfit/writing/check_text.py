"""A check of a kit in words, columns and plain data."""

import math
from typing import Any

from stdfit.validity.device.check import AGREES, DOUBT, FAILS, Check, Finding
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import figure, finite, frequency

COLUMNS = (
    "device",
    "against",
    "frequency_hz",
    "gamma_re",
    "gamma_im",
    "difference",
    "bound",
    "in_bounds",
    "judged",
)

UNIT = (
    "in bounds: the difference over its 95 % bound, E_n where a value is known; up to 1 contradicts nothing"
)


def check_text(found: Check) -> str:
    """Return what each device says, the verdict on the whole last."""
    how = "by the analyser itself" if found.corrected_before else f"with {', '.join(found.standards)}"
    lines = [
        f"{found.kit}: devices corrected {how}, judged from {frequency(found.low_hz)} to {frequency(found.top_hz)}",
        f"({UNIT})",
        "",
    ]
    rows = [
        [
            "device",
            "compared with",
            "largest in bounds",
            "bound there",
            "inside",
            "agrees to",
            "inside above",
            "verdict",
        ]
    ]
    rows += [_row(one, found.factor) for one in found.findings]
    lines += aligned(rows, indent="")
    notes = _notes(found)
    if notes:
        lines += ["", "Notes", *(f"  {note}" for note in notes)]
    return "\n".join([*lines, "", check_verdict(found)]) + "\n"


def _row(one: Finding, factor: float) -> list[str]:
    if not one.tells and not one.judged.any():
        return [one.device, one.against, "no value there", "", "", "", "", one.verdict(factor)]
    ratio, hertz, bound = one.largest
    to = one.agrees_to_hz
    return [
        one.device,
        one.against,
        f"{figure(ratio)} at {frequency(hertz)}",
        f"{bound:.2g}",
        _part(one.inside()),
        frequency(to) if to > 0.0 else "nowhere",
        _part(one.inside(judged=False)),
        one.verdict(factor),
    ]


def _part(part: float | None) -> str:
    # 99.6 % are not all.
    return "" if part is None else f"{math.floor(100.0 * part)} %"


def _notes(found: Check) -> list[str]:
    notes = list(found.notes)
    silent = [one for one in found.findings if not one.tells]
    for one in silent:
        why = (
            "too far inside the circle for an error of the kit to show; state its value"
            if one.judged.any()
            else "its value is not known where the verdict is given"
        )
        notes.append(f"'{one.device}' against {one.against}: {why}")
    for one in found.telling:
        hertz = one.frequency_hz[one.judged]
        if hertz[0] > found.low_hz or hertz[-1] < found.top_hz:
            band = f"{frequency(float(hertz[0]))} to {frequency(float(hertz[-1]))}"
            notes.append(
                f"'{one.device}' against {one.against}: judged from {band} alone, where its value is known"
            )
    if found.telling:
        notes.append(
            f"fails: more than 5 % of a curve beyond {found.factor:.2f} bounds, by chance alone in about 1 of 20 "
            "checks or fewer; in doubt: more than 5 % beyond one bound"
        )
    if found.verdict in (FAILS, DOUBT):
        notes.append(
            "kit, value or readings: which of them is wrong, the check cannot tell; read the device again"
        )
    return notes


def check_verdict(found: Check) -> str:
    """Return the answer in one line."""
    told = [one for one in found.telling if one.verdict(found.factor) == found.verdict]
    if not told:
        return "nothing was checked: no device could show an error of the kit"
    band = f"up to {frequency(found.top_hz)}"
    if found.verdict == AGREES:
        names = dict.fromkeys(one.device for one in told)
        return f"the kit agrees with {', '.join(names)} {band}"
    worst = max(told, key=lambda one: one.largest[0])
    ratio, hertz, _ = worst.largest
    most = f"{worst.device} against {worst.against}, {figure(ratio)} bounds at {frequency(hertz)}"
    if found.verdict == FAILS:
        return f"the check fails {band}: {most}"
    return f"in doubt {band}, neither confirmed nor contradicted: {most}"


def check_data(found: Check) -> dict[str, Any]:
    """Return what `check_text` says, as data; what is infinite or not there is null."""
    return {
        "kit": found.kit,
        "standards": list(found.standards),
        "corrected_before": found.corrected_before,
        "judged_from_hz": found.low_hz,
        "judged_to_hz": found.top_hz,
        "read_to_hz": found.read_top_hz,
        "fails_beyond_bounds": found.factor,
        "devices": [_data(one, found.factor) for one in found.findings],
        "notes": _notes(found),
        "result": found.verdict,
        "verdict": check_verdict(found),
    }


def _data(one: Finding, factor: float) -> dict[str, Any]:
    ratio, hertz, bound = one.largest if one.judged.any() else (math.nan, math.nan, math.nan)
    return {
        "name": one.device,
        "against": one.against,
        "largest_in_bounds": finite(ratio),
        "largest_in_bounds_at_hz": finite(hertz),
        "bound_there": finite(bound),
        "part_inside": one.inside(),
        "part_inside_beyond": one.inside(judged=False),
        "agrees_to_hz": one.agrees_to_hz if one.frequency_hz.size else None,
        "verdict": one.verdict(factor),
    }


def check_rows(found: Check) -> list[list[Any]]:
    """Return the rows of `COLUMNS`: every device at every frequency."""
    return [
        [one.device, one.against, *row, "yes" if judged else "no"]
        for one in found.findings
        for row, judged in zip(
            zip(
                one.frequency_hz.tolist(),
                one.gamma.real.tolist(),
                one.gamma.imag.tolist(),
                one.difference.tolist(),
                one.bound.tolist(),
                one.ratio.tolist(),
                strict=True,
            ),
            one.judged.tolist(),
            strict=True,
        )
    ]
