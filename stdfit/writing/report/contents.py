"""From a kit to everything that stands on its page."""

import re
from collections.abc import Sequence

from stdfit.validity.kit import Kit
from stdfit.validity.next_steps import END_OF_READINGS, NEXT_MODE, Step, can_be_planned, next_steps
from stdfit.writing.adapter_words import line_rows
from stdfit.writing.analyser_text import are_assumed, residual_rows
from stdfit.writing.device_text import COMMENT
from stdfit.writing.numbers import frequency, good_to
from stdfit.writing.report.reasons import standard_of, why
from stdfit.writing.report.records import Answer, Figure, Page, Reach, Table
from stdfit.writing.report.standards import orders_note, standard_parts, typing_of
from stdfit.writing.report.sure import bound_tables, device_tables
from stdfit.writing.report.words import counted, sentence, unit
from stdfit.writing.summary import TOLD_FROM, verdict

NO_READINGS = "This kit file keeps no readings, so that the pictures show definitions and bounds alone."

STEPS_NOTE = "Estimates without another fit: one kind of error is halved and all else stays as it is."
PLANNED = (
    " “stdfit plan BENCH” fits again and often finds more, since a new fit leaves less misfit and may take another "
    "order and range."
)

NO_STEPS = "No kind of error moves this limit when it alone is halved, nor do three of them together."
NO_SOURCES = "Nothing can be estimated from this kit file alone: it states bounds without their causes."
LOOKS_FURTHER = " “stdfit plan BENCH” looks at the bench file and does the fits."

TOP_WARNINGS = 4
"""So many warnings stand near the top, the others further down."""


def page_of(kit: Kit, figures: Sequence[tuple[str | None, Figure]]) -> Page:
    """Return what stands on the page of a kit.

    Parameters
    ----------
    kit : Kit
    figures : sequence of (standard, Figure)
        Pictures with the standard that they are of, None for those of the kit.
    """
    of_standards: dict[str, list[Figure]] = {}
    for name, one in figures:
        if name is not None:
            of_standards.setdefault(name, []).append(one)
    devices, ideal = device_tables(kit)
    found = next_steps(kit)
    steps = _steps(kit, found)
    answer = _answer(kit, found)
    short = f"good to {answer.figure}" if answer.figure else "cannot be trusted"
    return Page(
        title=f"{kit.name}: {short} within {answer.within}",
        name=kit.name,
        about=", ".join(
            [
                kit.connector or "connector not named",
                f"{kit.reference_ohm:g} Ω",
                *([f"read {kit.measured}"] if kit.measured else []),
                f"fitted {kit.created}",
            ]
        ),
        answer=answer,
        warnings=tuple(sentence(one) for one in kit.warnings[:TOP_WARNINGS]),
        more_warnings=tuple(sentence(one) for one in kit.warnings[TOP_WARNINGS:]),
        warning_count=counted(len(kit.warnings), "warning"),
        typing=tuple(typing_of(kit, one) for one in kit.definitions),
        bounds=bound_tables(kit),
        device_note=sentence(COMMENT),
        devices=devices,
        ideal=sentence(ideal) if ideal else "",
        steps=steps,
        no_steps="" if steps else _no_steps(kit),
        figures=tuple(one for name, one in figures if name is None),
        readings_note="" if kit.session is not None else NO_READINGS,
        orders_note=orders_note(kit),
        standards=standard_parts(kit, of_standards),
        record=_record(kit),
        checks=tuple(sentence(one) for one in kit.checks),
        facts=_facts(kit),
    )


def _answer(kit: Kit, steps: Sequence[Step]) -> Answer:
    reason, gloss = why(kit)
    low = max(one.read_low_hz for one in kit.definitions)
    limit_hz = kit.limit.limit_hz
    step, reach = _best_step(steps)
    return Answer(
        figure=frequency(limit_hz) if limit_hz > 0.0 else "",
        from_where=f"from {frequency(low)}" if low > TOLD_FROM * limit_hz > 0.0 else "",
        within=f"{kit.within:g}",
        reason=reason,
        gloss=gloss,
        standards=_reaches(kit),
        scale=frequency(_scale_hz(kit)),
        step=step,
        reach=reach,
        verdict=verdict(kit),
    )


def _reaches(kit: Kit) -> tuple[Reach, ...]:
    """Return how far each standard is good, on one scale of frequency for all."""
    whole = _scale_hz(kit)
    ending = standard_of(kit)
    return tuple(
        Reach(
            one.name,
            good_to(one.limit.limit_hz),
            one.limit.reason,
            _start(one.read_low_hz, whole),
            100.0 * one.read_top_hz / whole,
            100.0 * min(one.limit.limit_hz, one.read_top_hz) / whole
            if one.limit.limit_hz > 0.0
            else _start(one.read_low_hz, whole),
            one.name == ending,
        )
        for one in kit.definitions
    )


def _scale_hz(kit: Kit) -> float:
    """Return where the scale of the bars ends."""
    return max(one.read_top_hz for one in kit.definitions)


def _start(low_hz: float, whole_hz: float) -> float:
    """Return where a bar begins in percent: with its label, unless the readings begin so high that it matters."""
    return 100.0 * low_hz / whole_hz if low_hz > TOLD_FROM * whole_hz else 0.0


def _no_steps(kit: Kit) -> str:
    """Say why there are no steps, and who looks further."""
    return (NO_STEPS if kit.shares else NO_SOURCES) + (LOOKS_FURTHER if can_be_planned(kit) else "")


def _best_step(steps: Sequence[Step]) -> tuple[str, str]:
    """Return the best step in few words, and how far it reaches."""
    if not steps:
        return "", ""
    best = steps[0]
    if best.kind == NEXT_MODE:
        return "", ""
    short = {END_OF_READINGS: "read on further up"}.get(
        best.kind, "halve several errors together" if " and " in best.kind else ""
    )
    return sentence(short or re.split(r": |, or | \(|; ", best.action)[0]).removesuffix("."), good_to(
        best.limit_hz
    )


def _steps(kit: Kit, steps: Sequence[Step]) -> Table | None:
    """Return what would push the limit, best first."""
    if not steps:
        return None
    now = kit.limit.limit_hz
    caption = (
        f"What would push the limit of {frequency(now)} further" if now > 0.0 else "What would make it useful"
    )
    rows = tuple((sentence(one.action), good_to(one.limit_hz)) for one in steps)
    return Table(
        caption,
        ("what to do", "good to at least about"),
        rows,
        STEPS_NOTE + (PLANNED if can_be_planned(kit) else ""),
        flows=True,
    )


def _record(kit: Kit) -> tuple[Table, ...]:
    """Return thru, references and source files."""
    tables = []
    if kit.analyser is not None:
        note = "Nobody stated them: limits rest on an assumption." if are_assumed(kit.analyser) else ""
        tables.append(
            Table(
                f"What the correction of the analyser left, {kit.analyser.residuals} (95 %)",
                ("frequency", "directivity", "source match", "reflection tracking"),
                tuple(residual_rows(kit.analyser)),
                note,
            )
        )
    if kit.thru is not None:
        rows = [(label, value, unit(own)) for label, value, own in line_rows(kit.thru.line)]
        rows.append(("SHA-256 of its file", kit.thru.sha256, ""))
        tables.append(Table(f"Thru: {kit.thru.name} (± 95 %)", ("term", "value", "unit"), tuple(rows)))
    if kit.ancestors:
        names = {one.sha256: one.name for one in kit.ancestors}
        tables.append(
            Table(
                "Its references, and theirs",
                ("kit", "made", "reference of", "SHA-256 of its file"),
                tuple(
                    (one.name, one.created, names.get(one.of, "this kit"), one.sha256)
                    for one in kit.ancestors
                ),
            )
        )
    if kit.files:
        tables.append(
            Table(
                "Files of readings",
                ("file", "standard", "SHA-256"),
                tuple((one.file, one.standard, one.sha256) for one in kit.files),
            )
        )
    return tuple(tables)


def _facts(kit: Kit) -> tuple[tuple[str, str], ...]:
    facts = [
        ("connector", kit.connector or "not named"),
        ("reference impedance", f"{kit.reference_ohm:g} Ω"),
        ("tolerance on the error of Γ", f"{kit.within:g}"),
        ("standards", counted(len(kit.definitions), "standard")),
    ]
    if 0.0 < kit.top_hz < float("inf"):
        facts.append(("top of the connector family", frequency(kit.top_hz)))
    if kit.measured:
        facts.append(("read on", kit.measured))
    if kit.calibration:
        facts.append(("correction of the analyser", kit.calibration))
    facts += [("fitted on", kit.created), ("program", f"stdfit {kit.version}")]
    return tuple(facts)
