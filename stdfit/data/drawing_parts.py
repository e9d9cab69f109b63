"""The [[part]] tables of a drawing file."""

from math import sqrt
from pathlib import Path

from stdfit.data.bench_table import Table
from stdfit.data.drawing_materials import CHIP_SIZES, DIELECTRICS, METALS
from stdfit.data.drawing_records import EndEntry, Measure, PartEntry, SectionEntry
from stdfit.data.words import quoted, suggestion

FORMS = {"open": ("shielded", "flush"), "short": ("flat",), "load": ("chip",)}
"""How a part of each kind may end."""

_END_KEYS = {
    "shielded": ("form", "pin_mm", "pipe_mm", "closed", "beyond"),
    "flush": ("form", "pin_mm", "flange_mm"),
    "flat": ("form",),
    "chip": ("form", "size", "count", "resistance_ohm"),
}
_MM = 1e-3
LONGEST_MM = 1000.0
SHORTEST_MM = 1e-3
LEAST_BORE_MM = 0.2
"""No coaxial part is narrower; a figure in m or in inches may be."""
RATIOS = (1.2, 10.0)
"""Ratios of outer to inner diameter within which fields are computed."""
MOST_SECTIONS = 20
MOST_CHIPS = 20
HIGHEST_PERMITTIVITY = 20.0
SAME_PERMITTIVITY = 0.01
"""Relative difference up to which two fillings count as one: half of it is the error of a pin's delay."""
CONDUCTIVITIES = (1e4, 1e9)


def decode_part(item: object, file: Path, place: int) -> PartEntry:
    """Return one part; until its name is known, messages call it by its place, counted from 1.

    Raises
    ------
    BenchError
    """
    name = item.get("name") if isinstance(item, dict) else None
    shown = quoted(name)[1:-1] if isinstance(name, str) and name.strip() else f"#{place}"
    table = Table(
        item,
        file,
        f"part[{shown}]",
        ("name", "kind", "section", "end", "conductor", "roughness_um"),
        "describe each part in a [[part]] table",
    )
    kind = table.choice("kind", tuple(FORMS))
    conductivity, conductor = _conductor(table)
    roughness = table.number("roughness_um", 0.0)
    if not 0.0 <= roughness <= 100.0:
        raise table.fault("roughness_um", f"{roughness:g} µm cannot be", "give the rms roughness, 0 … 100 µm")
    if roughness and conductivity is None:
        raise table.fault("roughness_um", "stands without a conductor", "add conductor, or leave it out")
    part = PartEntry(
        name=table.text("name"),
        kind=kind,
        sections=_sections(table),
        end=_end(table, kind) if "end" in table else None,
        conductivity=conductivity,
        conductor=conductor,
        roughness_m=roughness * 1e-6,
    )
    _refuse_nothing(table, part)
    _refuse_pin(table, part)
    return part


def _refuse_nothing(table: Table, part: PartEntry) -> None:
    """Refuse an end whose line is needed and not drawn."""
    if part.end is None or part.end.form == "chip":
        return
    if not part.sections or part.sections[-1].inner_m is None:
        raise table.fault(
            "end",
            f"the diameters of the line before a {part.end.form} end are missing",
            "give inner_mm and outer_mm of the last section",
        )


def _refuse_pin(table: Table, part: PartEntry) -> None:
    """Refuse a pin whose end lies in another line than that of the last section, of which it is computed."""
    if part.end is None or part.end.pin_m is None or part.end.pin_m.value == 0.0:
        return
    pin, last, beyond = part.end.pin_m.value, part.sections[-1], part.end.beyond
    what = mend = ""
    if len(part.sections) > 1 and last.length_m is not None and -pin >= last.length_m.value:
        what = f"set back by {-pin / _MM:g} mm, the pin ends before the last section begins"
        mend = "draw sections only as far as the pin reaches: what follows is the pipe"
    elif beyond is not None and abs(last.permittivity.value / beyond.value - 1.0) > SAME_PERMITTIVITY:
        what = "the pin ends away from where the dielectric changes"
        mend = "end the last section at the pin's face, and give in beyond what lies before that face"
        if pin > 0.0:
            mend = "draw what stands out as a section filled as the pipe is"
    if what:
        raise table.fault("end.pin_mm", what, mend)


def _conductor(table: Table) -> tuple[float | None, str]:
    if "conductor" not in table:
        return None, ""
    value = table.values["conductor"]
    if isinstance(value, str):
        name = table.text("conductor").lower()
        if name not in METALS:
            raise table.fault(
                "conductor", f"{quoted(value)} is not in the table of metals", suggestion(name, METALS)
            )
        return METALS[name], name
    low, high = CONDUCTIVITIES
    number = table.as_number("conductor", value)
    if not low <= number <= high:
        raise table.fault("conductor", f"{number:g} S/m is no metal", "give S/m, such as 1.5e7, or a name")
    return number, f"{number:g} S/m"


def _sections(table: Table) -> tuple[SectionEntry, ...]:
    if "section" not in table:
        return ()
    listed = table.list_of("section", "describe each piece of line in a [[part.section]] table")
    if len(listed) > MOST_SECTIONS:
        raise table.fault("section", f"more than {MOST_SECTIONS} sections", "join pieces that are alike")
    return tuple(_section(item, table, place) for place, item in enumerate(listed, start=1))


def _section(item: object, part: Table, place: int) -> SectionEntry:
    table = Table(
        item,
        part.file,
        f"{part.prefix}.section[{place}]",
        ("length_mm", "inner_mm", "outer_mm", "dielectric"),
    )
    length = _length(table, "length_mm", zero=True) if "length_mm" in table else None
    if ("inner_mm" in table) != ("outer_mm" in table):
        key = "outer_mm" if "inner_mm" in table else "inner_mm"
        raise table.fault(key, "missing", "give both diameters, or neither")
    inner = outer = None
    if "inner_mm" in table:
        inner, outer = _length(table, "inner_mm"), _length(table, "outer_mm")
        if outer.value < LEAST_BORE_MM * _MM:
            what = f"{outer.value / _MM:g} mm is too narrow to be meant"
            raise table.fault("outer_mm", what, f"give the diameter in mm, {LEAST_BORE_MM:g} or more")
        ratio = outer.value / inner.value
        if not RATIOS[0] <= ratio <= RATIOS[1]:
            raise table.fault(
                "outer_mm",
                f"is {ratio:.3g} times inner_mm; fields are computed for {RATIOS[0]:g} … {RATIOS[1]:g} times",
                "give both as diameters in mm",
            )
        # Beyond that the line changes by more than linear bounds can follow.
        if max(inner.u / inner.value, outer.u / outer.value) > 0.1:
            raise table.fault("inner_mm", "a diameter is not known to 10 %", "measure it, or leave both out")
    if length is None and inner is None:
        raise table.fault("length_mm", "the section says nothing", "give its length, its diameters, or both")
    return SectionEntry(length, inner, outer, _permittivity(table, "dielectric"))


def _end(part: Table, kind: str) -> EndEntry:
    every = sorted({key for keys in _END_KEYS.values() for key in keys})
    table = Table(part.values["end"], part.file, f"{part.prefix}.end", every)
    form = table.choice("form", FORMS[kind])
    for key in table.values:
        if key not in _END_KEYS[form]:
            raise table.fault(key, f"does not belong to a {form} end", suggestion("", _END_KEYS[form]))
    if form == "chip":
        return _chip(table)
    closed = table.values.get("closed", False)
    if not isinstance(closed, bool):
        raise table.fault("closed", "must be true or false", "write closed = true for a pipe with a wall")
    pipe = _length(table, "pipe_mm") if "pipe_mm" in table else None
    if closed and pipe is None:
        raise table.fault("pipe_mm", "missing", "give how far the wall lies beyond the pin")
    return EndEntry(
        form,
        pin_m=_length(table, "pin_mm", signed=True) if "pin_mm" in table else None,
        pipe_m=pipe,
        closed=closed,
        beyond=_permittivity(table, "beyond") if form == "shielded" else None,
        flange_m=_length(table, "flange_mm") if "flange_mm" in table else None,
    )


def _chip(table: Table) -> EndEntry:
    count = table.values.get("count", 1)
    if isinstance(count, bool) or not isinstance(count, int) or not 1 <= count <= MOST_CHIPS:
        raise table.fault("count", f"must be a whole number from 1 to {MOST_CHIPS}", "count the chips")
    resistance = _measure(table, "resistance_ohm", 1.0)
    if not 0.0 < resistance.value <= 1e6:
        raise table.fault("resistance_ohm", f"{resistance.value:g} Ω cannot be", "give Ω of each chip")
    return EndEntry(
        "chip", size=table.choice("size", tuple(CHIP_SIZES)), count=count, resistance_ohm=resistance
    )


def _permittivity(table: Table, key: str) -> Measure:
    value = table.values.get(key, "air")
    if isinstance(value, str):
        name = value.lower()
        if name not in DIELECTRICS:
            raise table.fault(key, f"{quoted(value)} is not in the table", suggestion(name, DIELECTRICS))
        return DIELECTRICS[name]
    measure = _measure(table, key, 1.0)
    if not 1.0 <= measure.value <= HIGHEST_PERMITTIVITY:
        raise table.fault(
            key,
            f"a relative permittivity of {measure.value:g} is not usual",
            f"give 1 … {HIGHEST_PERMITTIVITY:g}, or a name",
        )
    # As for diameters; delay and impedance go with its root.
    if measure.u > 0.2 * measure.value:
        raise table.fault(key, "the permittivity is not known to 20 %", "look it up, or name a material")
    return measure


def _length(table: Table, key: str, *, signed: bool = False, zero: bool = False) -> Measure:
    """Return a length in m, from mm; `zero` lets it be 0, as that of a flush short is."""
    measure = _measure(table, key, _MM)
    size = abs(measure.value) / _MM
    possible = signed or (zero and measure.value == 0.0) or (measure.value > 0.0 and size >= SHORTEST_MM)
    if size > LONGEST_MM or not possible:
        what = f"{measure.value / _MM:g} mm cannot be"
        raise table.fault(key, what, f"give mm, {SHORTEST_MM:g} … {LONGEST_MM:g}")
    if measure.u > LONGEST_MM * _MM:
        raise table.fault(key, f"u = {measure.u / _MM:g} mm is too large to be meant", "check the unit")
    return measure


def _measure(table: Table, key: str, unit: float) -> Measure:
    """Return a figure in SI units: a number is exact, limits ± t are u = t/√3 (JCGM 100:2008, 4.3.7)."""
    if key not in table:
        raise table.fault(key, "missing", f"write {key} = {{ value = …, tolerance = … }}")
    entry = table.values[key]
    if not isinstance(entry, dict):
        return Measure(table.as_number(key, entry) * unit)
    fields = Table(entry, table.file, f"{table.prefix}.{key}", ("value", "tolerance", "u"))
    if "tolerance" in fields and "u" in fields:
        raise fields.fault("u", "stands beside tolerance", "give one of them")
    u = 0.0
    if "tolerance" in fields:
        u = fields.number("tolerance", above=0.0) / sqrt(3.0)
    elif "u" in fields:
        u = fields.number("u", above=0.0)
    if u * unit > 1e6 or abs(fields.number("value")) > 1e9:
        raise fields.fault("value", "too large to be meant", "check the unit")
    return Measure(fields.number("value") * unit, u * unit)
