"""A bench that determines an adapter: is it one, and what must be said of it?"""

from collections.abc import Mapping, Sequence
from pathlib import Path

from stdfit.base.errors import BenchError
from stdfit.data.bench import Bench
from stdfit.data.bench_records import AdapterEntry
from stdfit.data.words import quoted
from stdfit.pipeline.raw.references import FEWEST, Reference, looked_up
from stdfit.validity.adapter import Adapter, too_active
from stdfit.validity.ancestry import Origin, distinct, related


def check_bench(bench: Bench) -> AdapterEntry:
    """Return the adapter that a bench is to determine.

    Raises
    ------
    BenchError
        The bench is not of three or more known standards behind one adapter that is not known yet.
    """
    if bench.state != "corrected":
        what = "an adapter is determined from corrected readings"
        raise _fault(bench, "analyser.state", what, 'set state = "corrected"')
    if not bench.adapters:
        raise _fault(bench, "adapter", "the table is missing", 'write [[adapter]] with name = "…"')
    if len(bench.adapters) > 1 or bench.calibrated_with is not None:
        raise _fault(bench, "adapter", "one adapter at a time is determined", "leave the others out")
    (entry,) = bench.adapters
    if entry.file is not None:
        key = f"adapter[{quoted(entry.name)[1:-1]}].file"
        raise _fault(bench, key, "this adapter is known already", "leave file out to determine it")
    for standard in bench.standards:
        if standard.from_kit is None:
            key = f"standard[{quoted(standard.name)[1:-1]}].from_kit"
            what = "missing: an adapter is determined from known standards"
            raise _fault(bench, key, what, "name the kit file that knows this standard")
    if len(bench.standards) < FEWEST:
        what = f"{len(bench.standards)} of the {FEWEST} known standards that fix an adapter"
        raise _fault(bench, "standard", what, "read three or more behind it")
    return entry


def known_standards(bench: Bench, origins: Mapping[Path, Origin] | None = None) -> tuple[Reference, ...]:
    """Return the known standards, each once.

    Parameters
    ----------
    bench : Bench
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.

    Raises
    ------
    KitError, BenchError
        They cannot be looked up, or one stands under two names.
    """
    references, seen = looked_up(bench, origins), dict[tuple[str, str], str]()
    for one in references:
        if one.part in seen:
            key = f"standard[{quoted(one.entry.name)[1:-1]}].standard"
            what = f"the same known standard as {quoted(seen[one.part])}"
            raise _fault(bench, key, what, "list all its readings under one name")
        seen[one.part] = one.entry.name
    return references


def _fault(bench: Bench, key: str, what: str, mend: str) -> BenchError:
    return BenchError(what, mend, file=bench.path, key=key)


def cautions(bench: Bench, references: Sequence[Reference]) -> list[str]:
    """Say what had to be assumed, and what the kits say."""
    told = []
    if bench.residual is None:
        told.append(
            "no analyser residuals are stated: those of a modest calibration are assumed (common practice, no "
            "source). State yours under [analyser.residual]."
        )
    origins = distinct([one.origin for one in references])
    told += [f"reference {one.kit.name}: {warning}" for one in origins for warning in one.kit.warnings]
    for group in related(origins):
        if len(group) > 1:
            names = ", ".join(one.kit.name for one in group)
            told.append(
                f"the kits {names} have an ancestor or readings in common, and how their errors go together is not "
                "known: they are counted so that any way is covered"
            )
    return told


def not_passive(found: Adapter) -> list[str]:
    """Say where a determined adapter gives more than it takes; nothing where it is passive."""
    over = too_active(found)
    if over is None:
        return []
    return [
        f"the adapter gives more than it takes, by {100.0 * over[0]:.2g} % of the wave at {over[1] / 1e9:.4g} GHz, "
        "more than its bound allows: look at connections, analyser and kit"
    ]
