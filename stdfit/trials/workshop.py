"""The signal box of the walk-through: readings of three days, simulated with a fixed seed (invented data).

The parts are not made from the models of the fit, and one of them is worn by the time of the second day.
"""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from stdfit.base.arrays import ComplexArray
from stdfit.base.errors import RequestError
from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.trials.bench import SimulatedBench
from stdfit.trials.families import economy_residual, sweep
from stdfit.trials.files import is_simulated, reading_names, touchstone_text
from stdfit.trials.scenario import Scenario
from stdfit.trials.session import connect, draw_connections
from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.writing.safely import write_whole

SEED = 7

SCENARIO = Scenario(
    frequency_hz=sweep(50e6, 4e9, 159),
    residual=economy_residual(),
    connections=5,
    scatter_ps=0.1,
    scatter_ohm=0.01,
    open_kind="shielded",
    load_reflection=(0.02, 0.03),
    offset_delay_ps=(14.0, 24.0),
    z0_scatter_ohm=0.3,
    given_resistance_u_ohm=0.02,
    given_delay_u_ps=0.4,
)

CRACK = Worn("load", "contact resistance", series_ohm=0.9)
"""A hairline crack in a solder joint, as the load has it by the time of the second day."""

OFFSET_SHORT = (50.3, 1.4, 50.0, 0.0, 0.0, 0.0, 0.0)
"""The device of the check, in the units of a short."""

FIRST, SECOND, CHECK = "signal-box", "autumn", "check"
"""The folders."""

OF_DEVICE = 3
"""Readings of each part on the day of the check."""


def write_workshop(folder: Path, seed: int = SEED) -> list[Path]:
    """Write the readings of a first day, of one after half a year, and raw ones of a check; return the folders.

    Raises
    ------
    RequestError
        A file of the same name is there and is not a simulated one; nothing is written then.
    """
    texts = {folder / name: text for name, text in workshop_texts(seed).items()}
    for path in texts:
        if (path.exists() or path.is_symlink()) and not is_simulated(path):
            raise RequestError(
                "would overwrite a file that is not simulated", "choose another folder", file=path
            )
    folders = [folder / name for name in (FIRST, SECOND, CHECK)]
    for one in folders:
        try:
            one.mkdir(parents=True, exist_ok=True)
        except OSError as fault:
            raise RequestError(
                f"cannot be made: {fault.strerror or fault}", "choose another folder with --out", file=one
            ) from fault
    for path, text in texts.items():
        write_whole(path, text)
    return folders


def workshop_texts(seed: int = SEED) -> dict[str, str]:
    """Return the text of each file of readings, by its name with its folder."""
    rng = np.random.default_rng(seed)
    first, second = draw_pair(SCENARIO, rng, same_calibration=False, worn=CRACK)
    texts: dict[str, str] = {}
    for folder, session in ((FIRST, first), (SECOND, second)):
        for standard, readings in session.readings.items():
            texts |= _texts(folder, readings, reading_names(session, standard))
    for name, shown in _raw_readings(first, rng).items():
        texts |= _texts(CHECK, shown, [f"{name}-{k}.s1p" for k in range(1, OF_DEVICE + 1)])
    return texts


def _raw_readings(first: SimulatedBench, rng: np.random.Generator) -> dict[str, ComplexArray]:
    """Return what an analyser without correction shows of the standards and of an offset short."""
    f = SCENARIO.frequency_hz
    turn = np.exp(-2j * np.pi * f * 1.1e-9)
    box = np.stack([0.05 * turn, 0.9 * turn - 0.004 * turn**3, 0.08 * turn**2], axis=-1)
    device = reflection("short", np.array(OFFSET_SHORT), f, SCENARIO.reference_ohm)[0]
    found = {}
    for name, gamma in {**first.truth, "offset-short": device}.items():
        drawn = draw_connections(SCENARIO, "short", rng)
        seen = connect(gamma, f, drawn, SCENARIO.reference_ohm)[:OF_DEVICE]
        noise = 1e-4 * (rng.standard_normal(seen.shape) + 1j * rng.standard_normal(seen.shape))
        found[name] = seen_raw(box, seen + noise)
    return found


def _texts(
    folder: str, readings: Sequence[ComplexArray] | ComplexArray, names: Sequence[str]
) -> dict[str, str]:
    return {
        f"{folder}/{name}": touchstone_text(
            SCENARIO.frequency_hz, gamma, SCENARIO.reference_ohm, f"signal box, {name}"
        )
        for name, gamma in zip(names, readings, strict=True)
    }
