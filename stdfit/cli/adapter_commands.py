"""The command that determines an adapter: adapter."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_json, say, tell
from stdfit.cli.targets import refuse_inputs

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse
    from pathlib import Path


def adapter(asked: argparse.Namespace) -> int:
    """Determine an adapter from known standards behind it."""
    from stdfit.data.bench import read_bench
    from stdfit.pipeline.adapters.determined import determine_adapter
    from stdfit.writing.adapter_file import adapter_text
    from stdfit.writing.adapter_touchstone import adapter_touchstone
    from stdfit.writing.adapter_words import adapter_data, adapter_summary
    from stdfit.writing.safely import write_whole

    bench = read_bench(asked.bench)
    target = asked.output if asked.output is not None else _default_target(bench.path)
    beside = touchstone_beside(target)
    _check_targets(target, beside)
    refuse_inputs(bench, target, beside)
    found = determine_adapter(bench)
    write_whole(target, adapter_text(found))
    write_whole(beside, adapter_touchstone(found))
    for warning in found.warnings:
        tell(f"warning: {warning}")
    if asked.json:
        print_json({**adapter_data(found), "adapter_file": str(target), "touchstone_file": str(beside)})
        return DONE
    say(adapter_summary(found))
    say(f"adapter file: {target}")
    say(f"Touchstone file: {beside}")
    say("next: name the adapter file in an [[adapter]] table, and the adapter at standards behind it")
    return DONE


def touchstone_beside(target: Path) -> Path:
    """Return where the Touchstone file of an adapter file goes: barrel.s2p beside barrel.adapter.toml."""
    stem = target.name.removesuffix(".toml").removesuffix(".adapter")
    return target.parent / f"{stem or 'adapter'}.s2p"


def _default_target(bench: Path) -> Path:
    """Return where the adapter of a bench goes: adapter.toml beside bench.toml, NAME.adapter.toml beside NAME.toml."""
    name = "adapter.toml" if bench.name == "bench.toml" else f"{bench.stem}.adapter.toml"
    return bench.parent / name


def _check_targets(target: Path, beside: Path) -> None:
    """Refuse places where the files cannot go, before the work is done: only files of this command are overwritten."""
    from stdfit.base.errors import RequestError
    from stdfit.writing.adapter_file import is_adapter_file
    from stdfit.writing.adapter_touchstone import is_adapter_touchstone

    if not target.parent.is_dir():
        raise RequestError("no such folder", "make it, or name another place with -o", file=target.parent)
    for path, own, what in (
        (target, is_adapter_file, "adapter file"),
        (beside, is_adapter_touchstone, "Touchstone file of an adapter"),
    ):
        if path.is_dir():
            raise RequestError("a folder stands where the file should go", "name another with -o", file=path)
        if path.exists() and not own(path):
            raise RequestError(f"exists and is no {what}", "name another file with -o", file=path)
