"""Can the readings be what they are called? Only clear contradictions are refused."""

from collections.abc import Mapping, Sequence
from itertools import combinations

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import PhysicsError
from stdfit.base.records import Sweep

# |Γ| at the low end: a load above the first is no load, an open or short below the second is none.
LOAD_REFLECTS = 0.8
REFLECTOR_ABSORBS = 0.5
# Phase at f → 0, in degrees: an open stands near 0 and a short near 180; up to here the name is believed.
CLEAR_CONTRADICTION = 120.0
# Standards whose mean readings differ by less are the same part (corrected, raw).
SAME_PART = {"corrected": 0.05, "raw": 0.002}
MEND_KIND = "check which file belongs to which standard"
ACTIVE = 1.1
# What a middling correction may leave (34 dB and 40 dB residuals together) is not worth a word.
SLIGHTLY_ACTIVE = 1.05

Readings = Mapping[str, tuple[str, Sequence[Sweep]]]


def verify_standards(readings: Readings, *, state: str = "corrected") -> tuple[str, ...]:
    """Refuse readings that contradict the names of their standards.

    Parameters
    ----------
    readings : mapping of str to (kind, sweeps)
        For each standard its kind ("open", "short", "load") and one sweep for each connection.
    state : str
        "corrected" or "raw"; raw readings say little by themselves, so only grids and doubles are checked.

    Returns
    -------
    tuple of str
        Warnings: what is odd but can be, in words for the user.

    Raises
    ------
    PhysicsError
        Different frequency grids, the same readings twice, standards that read alike, open and short swapped,
        a load that reflects, an open or short that absorbs, or |Γ| clearly above 1.
    """
    _check_grids(readings, across=state == "raw")
    _check_doubles(readings)
    _check_alike(readings, state)
    if state == "raw":
        return ()
    warnings = [warning for name, (_, sweeps) in readings.items() for warning in _check_passive(name, sweeps)]
    for name, (kind, sweeps) in readings.items():
        _check_magnitude(name, kind, sweeps)
    _check_phases(readings)
    return tuple(warnings)


def low_end(frequency_hz: FloatArray) -> slice:
    """The lowest tenth of the points, at least five."""
    return slice(0, max(5, -(-len(frequency_hz) // 10)))


def phase_at_zero(frequency_hz: FloatArray, gamma: ComplexArray) -> float | None:
    """Return the phase of a reflector at f → 0 in degrees, with the turn of its offset line taken off.

    An offset line turns the phase by −4π f τ. A straight line is put through the unwrapped phase of the
    lowest third of the sweep (at least 8 points); its value at f = 0 is the phase of the reflector alone.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Rising.
    gamma : complex array of shape (n,)
        Reflection of an open or short.

    Returns
    -------
    float or None
        −180 … 180; None when the phase turns too fast between points to be followed, or when the sweep begins
        too high to look down to zero.
    """
    count = min(len(frequency_hz), max(8, len(frequency_hz) // 3))
    frequency, part = frequency_hz[:count], gamma[:count]
    span = frequency[-1] - frequency[0]
    if count < 3 or not np.abs(part).all() or frequency[0] > 3.0 * span:
        return None
    steps = np.abs(np.angle(part[1:] / part[:-1]))
    if np.median(steps) > 2.0:
        return None
    phase = np.unwrap(np.angle(part))
    slope, start = np.polyfit((frequency - frequency[0]) / span, phase, 1)
    at_zero = start - slope * frequency[0] / span
    return float(np.degrees(np.angle(np.exp(1j * at_zero))))


def _mean(sweeps: Sequence[Sweep]) -> ComplexArray:
    """Mean over the connections."""
    mean: ComplexArray = np.mean([s.gamma for s in sweeps], axis=0)
    return mean


def _check_grids(readings: Readings, across: bool) -> None:
    """All connections of a standard, and for raw readings of the bench, must have one frequency grid."""
    first: Sweep | None = None
    for name, (_, sweeps) in readings.items():
        if not sweeps:
            raise PhysicsError(f"standard '{name}' has no readings", "give it at least one file")
        first = first if across and first is not None else sweeps[0]
        for sweep in sweeps:
            if np.array_equal(sweep.frequency_hz, first.frequency_hz):
                continue
            if len(sweep.frequency_hz) == len(first.frequency_hz):
                step = float(np.min(np.diff(first.frequency_hz)))
                # Frequencies that were rounded when written out are still the same.
                if np.max(np.abs(sweep.frequency_hz - first.frequency_hz)) < 1e-3 * step:
                    continue
            raise PhysicsError(
                f"standard '{name}': its frequencies ({_grid(sweep)}) differ from those of {first.name} "
                f"({_grid(first)})",
                "read all connections with the same sweep",
                file=sweep.name,
            )


def _grid(sweep: Sweep) -> str:
    low, high = sweep.frequency_hz[0], sweep.frequency_hz[-1]
    return f"{len(sweep.frequency_hz)} points, {low:.10g} to {high:.10g} Hz"


def _check_doubles(readings: Readings) -> None:
    """The same numbers twice are one reading: a copied file, not a second connection."""
    seen: dict[bytes, tuple[str, Sweep]] = {}
    for name, (_, sweeps) in readings.items():
        for sweep in sweeps:
            key = sweep.gamma.tobytes()
            if key in seen:
                other_name, other = seen[key]
                where = (
                    f"in standard '{name}'" if name == other_name else f"in '{other_name}' and in '{name}'"
                )
                raise PhysicsError(
                    f"the same readings as {other.name}, {where}",
                    "give each connection its own file, and each file to one standard",
                    file=sweep.name,
                )
            seen[key] = (name, sweep)


def _check_alike(readings: Readings, state: str) -> None:
    """Refuse standards of different kinds that read the same."""
    means = {name: (kind, sweeps[0].frequency_hz, _mean(sweeps)) for name, (kind, sweeps) in readings.items()}
    for (name_a, a), (name_b, b) in combinations(means.items(), 2):
        if a[0] == b[0] or len(a[2]) != len(b[2]):
            continue
        low = low_end(a[1])
        if np.max(np.abs(a[2][low] - b[2][low])) < SAME_PART[state]:
            raise PhysicsError(
                f"standards '{name_a}' ({a[0]}) and '{name_b}' ({b[0]}) read the same",
                "check that the analyser was connected and that the files are the right ones",
                file=readings[name_b][1][0].name,
            )


def _check_passive(name: str, sweeps: Sequence[Sweep]) -> list[str]:
    """Refuse readings clearly above 1 over more than a few points; warn when they are a little above."""
    highest, odd = 0.0, 0
    for sweep in sweeps:
        magnitude = np.abs(sweep.gamma)
        few = max(3, len(magnitude) // 50)
        if np.count_nonzero(magnitude > ACTIVE) > few:
            at = sweep.frequency_hz[int(np.argmax(magnitude))]
            raise PhysicsError(
                f"|Γ| is up to {magnitude.max():.3f} (at {at:.4g} Hz), which no passive part reaches",
                'check the correction and the number format; uncorrected readings need state = "raw"',
                file=sweep.name,
            )
        if np.count_nonzero(magnitude > SLIGHTLY_ACTIVE) > max(few, len(magnitude) // 10):
            highest, odd = max(highest, float(magnitude.max())), odd + 1
    if not odd:
        return []
    where = f"in {odd} of {len(sweeps)} readings"
    return [f"standard '{name}': |Γ| is up to {highest:.3f} {where}, more than a good correction leaves"]


def _check_magnitude(name: str, kind: str, sweeps: Sequence[Sweep]) -> None:
    """Refuse a load that reflects, and an open or short that absorbs, at the low end."""
    for sweep in sweeps:
        size = float(np.median(np.abs(sweep.gamma[low_end(sweep.frequency_hz)])))
        what = unlike_its_kind(name, kind, size)
        if what is not None:
            raise PhysicsError(what, MEND_KIND, file=sweep.name)


def unlike_its_kind(name: str, kind: str, size: float) -> str | None:
    """Return what contradicts the kind of a standard whose |Γ| at low frequency is known, or None."""
    if kind == "load" and size > LOAD_REFLECTS:
        return f"standard '{name}' is called a load but reflects like a short or open (|Γ| = {size:.2f})"
    if kind != "load" and size < REFLECTOR_ABSORBS:
        article = "an" if kind == "open" else "a"
        return f"standard '{name}' is called {article} {kind} but absorbs like a load (|Γ| = {size:.2f})"
    return None


def _check_phases(readings: Readings) -> None:
    """Refuse an open that reads like a short, and the other way round; two of them are a swap."""
    wrong: dict[str, list[tuple[str, Sweep, float]]] = {"open": [], "short": []}
    for name, (kind, sweeps) in readings.items():
        for sweep in sweeps if kind in wrong else ():
            phase = phase_at_zero(sweep.frequency_hz, sweep.gamma)
            off = 0.0 if phase is None else abs(phase) if kind == "open" else 180.0 - abs(phase)
            if phase is not None and off > CLEAR_CONTRADICTION:
                wrong[kind].append((name, sweep, phase))
    if wrong["open"] and wrong["short"]:
        (open_name, sweep, _), short_name = wrong["open"][0], wrong["short"][0][0]
        raise PhysicsError(
            f"standards '{open_name}' and '{short_name}' are swapped: each reads like the other kind",
            "exchange their files",
            file=sweep.name,
        )
    for kind, other in (("open", "a short"), ("short", "an open")):
        for name, sweep, phase in wrong[kind]:
            article = "an" if kind == "open" else "a"
            what = f"standard '{name}' is called {article} {kind} but reads like {other}"
            raise PhysicsError(
                f"{what} (phase {phase:.0f}° at f → 0)",
                "check which file belongs to which standard",
                file=sweep.name,
            )
