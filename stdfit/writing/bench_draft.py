"""A commented bench file, drafted from the readings that lie in a folder."""

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import tomlkit

from stdfit.base.errors import InputError, RequestError
from stdfit.base.records import Sweep
from stdfit.base.shown import shown
from stdfit.data.bench_files import natural_key
from stdfit.data.bench_table import LONGEST_NAME
from stdfit.data.readings import read_reading
from stdfit.data.verify import low_end, phase_at_zero
from stdfit.data.words import quoted
from stdfit.writing.adapter_touchstone import is_adapter_touchstone
from stdfit.writing.export_targets import is_export

SUFFIXES = (".s1p", ".s2p", ".ts", ".csv")
KINDS = ("open", "short", "load")
WORDS = {"open": "open", "short": "short", "load": "load", "match": "load", "termination": "load"}


@dataclass(frozen=True, slots=True)
class Found:
    """Readings that seem to be of one standard.

    Attributes
    ----------
    kind : str
    files : tuple of str
        Names relative to the folder.
    by_name : bool
        Whether the kind was read off the names; otherwise off the readings.
    name : str
        What the standard is called, different from all others.
    """

    kind: str
    files: tuple[str, ...]
    by_name: bool
    name: str


def find_standards(folder: Path) -> tuple[list[Found], list[str]]:
    """Return the standards found in a folder, and a line for each file that was left out.

    The kind comes from a word in the file's name, else from the reflection at low frequency.

    Raises
    ------
    RequestError
        No such folder, or nothing in it that could be readings.
    """
    if not folder.is_dir():
        raise RequestError("no such folder", "name the folder that holds your readings", file=folder)
    candidates = sorted(
        (
            path
            for path in folder.iterdir()
            if path.suffix.lower() in SUFFIXES and not path.name.startswith(".")
        ),
        key=natural_key,
    )
    groups: dict[tuple[str, bool], list[str]] = {}
    left_out = []
    for path in candidates:
        file = quoted(path.name)[1:-1]
        if not path.name.isprintable():
            left_out.append(f"{file}: its name holds a control character; rename it")
            continue
        if is_export(path):
            left_out.append(f"{file}: written by 'stdfit export', and no reading")
            continue
        if is_adapter_touchstone(path):
            left_out.append(f"{file}: written by 'stdfit adapter', and no reading")
            continue
        try:
            sweep = read_reading(path)
        except InputError as fault:
            left_out.append(f"{file}: {fault.what}")
            continue
        named = kind_by_name(path.stem)
        kind = named or kind_by_reading(sweep)
        if kind is None:
            left_out.append(f"{file}: reflects neither like an open, a short nor a load")
            continue
        groups.setdefault((kind, named is not None), []).append(path.name)
    if not groups:
        why = f"; {left_out[0]}" if left_out else ""
        raise RequestError(
            f"no readings of standards found{why}", f"put files {', '.join(SUFFIXES)} there", file=folder
        )
    found = [one for (kind, by_name), files in groups.items() for one in _standards(kind, files, by_name)]
    return _with_names(sorted(found, key=lambda one: KINDS.index(one.kind))), left_out


def _standards(kind: str, files: Sequence[str], by_name: bool) -> list[Found]:
    """Part the files of a kind by what stands before their last number: "offset-short-1-2" is not "short-2"."""
    stems: dict[str, list[str]] = {}
    for file in files:
        stems.setdefault(re.sub(r"[\W_]*\d+$", "", Path(file).stem), []).append(file)
    if len(stems) == 1 or all(len(own) == 1 for own in stems.values()):
        return [Found(kind, tuple(files), by_name, kind)]
    return [
        Found(kind, tuple(own), by_name, re.sub(r"[\W_]+", " ", stem)[: LONGEST_NAME - 8].strip() or kind)
        for stem, own in stems.items()
    ]


def _with_names(found: Sequence[Found]) -> list[Found]:
    """Number names that several standards would have."""
    named: list[Found] = []
    for one in found:
        taken, name, count = {other.name for other in named}, one.name, 1
        while name in taken:
            count += 1
            name = f"{one.name} {count}"
        named.append(replace(one, name=name))
    return named


def kind_by_name(stem: str) -> str | None:
    """Return the kind that a file's name tells, or None where it tells none or several."""
    words = {WORDS[word] for word in re.findall(r"[a-z]+", stem.lower()) if word in WORDS}
    return words.pop() if len(words) == 1 else None


def kind_by_reading(sweep: Sweep) -> str | None:
    """Return what the reflection at low frequency looks like."""
    size = float(np.median(np.abs(sweep.gamma[low_end(sweep.frequency_hz)])))
    if size < 0.3:
        return "load"
    if size < 0.7:
        return None
    phase = phase_at_zero(sweep.frequency_hz, sweep.gamma)
    if phase is None:
        return None
    return "open" if abs(phase) < 60.0 else "short" if abs(phase) > 120.0 else None


def quote(text: str) -> str:
    """Return a text as a TOML string."""
    return str(tomlkit.item(text).as_string())


def draft(folder_name: str, found: Sequence[Found], command: str = "stdfit fit .") -> str:
    """Return the text of a bench file with a comment for each line that a user must look at.

    Parameters
    ----------
    folder_name : str
        What the kit is called.
    found : sequence of Found
    command : str
        What to type when that is done.
    """
    name = "".join(letter for letter in folder_name if letter.isprintable())[:LONGEST_NAME].strip()
    lines = [
        "# What was measured, and with what. Look at every line marked with '<--', then run:",
        f"# {shown(command)}",
        'format = "stdfit-bench/1"',
        "",
        "[kit]",
        f"name = {quote(name or 'My standards')}",
        'connector = "SMA"                      # <-- SMA, N, BNC, 3.5 mm …: sets the ceiling of the limit',
        "reference_impedance_ohm = 50.0",
        "",
        "[goal]",
        "within = 0.02                          # tolerance on |error of Γ|; 0.02 is -34 dB",
        "",
        "[analyser]",
        'state = "corrected"                    # <-- "raw" if the analyser\'s own correction was off',
        "# <-- What is left of the analyser's errors after its own correction, 95 % bounds. They come from",
        "# the data sheet of the kit it was corrected with. The values below are those of a modest calibration",
        "# (common practice, no source); without this table the same are assumed.",
        "[analyser.residual]",
        "frequency_hz = [1e9, 6e9]",
        "directivity_db = [36, 32]",
        "source_match_db = [34, 28]",
        "reflection_tracking_db = [0.1, 0.2]",
    ]
    for one in found:
        doubt = "" if one.by_name else "               # <-- guessed from the readings"
        lines += [
            "",
            "[[standard]]",
            f"name = {quote(one.name)}",
            f"kind = {quote(one.kind)}{doubt}",
            "readings = ["
            + ", ".join(quote(file) for file in one.files)
            + "]   # one file for each connection",
        ]
        if one.kind == "load":
            lines.append(
                "# given.resistance_ohm = { value = …, u = 0.05 }   # <-- a multimeter's, if you have it"
            )
        else:
            lines.append("# given.offset_delay_ps = { value = …, u = 0.5 }   # <-- a ruler's, if you have it")
    return "\n".join(lines) + "\n"
