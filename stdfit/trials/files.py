"""A simulated bench as files: Touchstone readings and the bench file that names them."""

import io
import json
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.data.ordinary import beginning
from stdfit.trials.bench import SimulatedBench
from stdfit.writing.safely import write_whole

MARK = "simulated, invented data"


def touchstone_text(frequency_hz: FloatArray, gamma: ComplexArray, reference_ohm: float, title: str) -> str:
    """Return a one-port Touchstone text with all digits, so that reading it back gives the same numbers."""
    out = io.StringIO()
    out.write(f"! {MARK}: {title}\n# HZ S RI R {reference_ohm:g}\n")
    np.savetxt(out, np.column_stack([frequency_hz, gamma.real, gamma.imag]), fmt="%.17g")
    return out.getvalue()


def bench_text(simulated: SimulatedBench, name: str) -> str:
    """Return the text of the bench file."""
    scenario, stated = simulated.scenario, simulated.residual
    lines = [
        f"# {MARK}: no such parts exist.",
        'format = "stdfit-bench/1"',
        "",
        "[kit]",
        f"name = {quoted(name)}",
        f"connector = {quoted(scenario.connector)}",
        f"reference_impedance_ohm = {float(scenario.reference_ohm)!r}",
        "",
        "[analyser]",
        'state = "corrected"',
        "",
        "[analyser.residual]  # 95 % bounds",
    ]
    for key in ("frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db"):
        lines.append(f"{key} = {[float(x) for x in getattr(stated, key)]!r}")
    for standard, kind in simulated.kinds.items():
        lines += ["", "[[standard]]", f"name = {quoted(standard)}", f"kind = {quoted(kind)}"]
        lines.append(f"readings = [{', '.join(quoted(x) for x in reading_names(simulated, standard))}]")
        if standard in simulated.same_offset_as:
            lines.append(f"same_offset_as = {quoted(simulated.same_offset_as[standard])}")
        for key, evidence in simulated.given.get(standard, {}).items():
            lines.append(f"given.{key} = {{ value = {float(evidence.value)!r}, u = {float(evidence.u)!r} }}")
    return "\n".join(lines) + "\n"


def write_bench(simulated: SimulatedBench, folder: Path | str, name: str = "Simulated bench") -> Path:
    """Write the readings and, last, the bench file; return the bench file's path.

    Parameters
    ----------
    simulated : SimulatedBench
        What to write.
    folder : path
        Made if it is missing.
    name : str
        Name of the kit.

    Returns
    -------
    Path
        The bench file, `bench.toml` in the folder.

    Raises
    ------
    RequestError
        A file of the same name is there and is not a simulated one; nothing is written then.
    """
    folder = Path(folder)
    texts: dict[Path, str] = {}
    zr = simulated.scenario.reference_ohm
    for standard, readings in simulated.readings.items():
        for file_name, gamma in zip(reading_names(simulated, standard), readings, strict=True):
            title = f"{name}, {file_name}"
            texts[folder / file_name] = touchstone_text(simulated.frequency_hz, gamma, zr, title)
    bench = folder / "bench.toml"
    texts[bench] = bench_text(simulated, name)
    for path in texts:
        if (path.exists() or path.is_symlink()) and not is_simulated(path):
            raise RequestError(
                "would overwrite a file that is not simulated", "choose another folder", file=path
            )
    folder.mkdir(parents=True, exist_ok=True)
    for path, text in texts.items():
        write_whole(path, text)
    return bench


def is_simulated(path: Path) -> bool:
    """Tell whether a file says of itself in its first line that it is simulated."""
    return MARK.encode() in beginning(path, 4096).split(b"\n")[0]


def reading_names(simulated: SimulatedBench, standard: str) -> list[str]:
    """Return the file names of a standard's readings, in order."""
    return [f"{standard}-{number}.s1p" for number in range(1, len(simulated.readings[standard]) + 1)]


def quoted(text: str) -> str:
    """Return a TOML basic string; JSON's rules of escape are a part of TOML's."""
    return json.dumps(text, ensure_ascii=False)
