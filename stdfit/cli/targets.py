"""Where a kit file goes, and what it may overwrite."""

from __future__ import annotations

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from pathlib import Path

    from stdfit.data.bench_records import Bench
    from stdfit.validity.kit import Kit


def check_target(path: Path) -> None:
    """Refuse a place where no kit file can go, before the work is done: only kit files are overwritten."""
    from stdfit.base.errors import RequestError
    from stdfit.writing.kit_file import is_kit_file

    if path.is_dir():
        raise RequestError("a folder stands where the file should go", "name a file", file=path)
    if not path.parent.is_dir():
        raise RequestError("no such folder", "make it, or name another place with -o", file=path.parent)
    if path.exists() and not is_kit_file(path):
        raise RequestError("exists and is no kit file", "name another file with -o", file=path)


def refuse_inputs(bench: Bench, *targets: Path) -> None:
    """Refuse to write over a file that the bench reads: its reference kit has the usual name of a kit file, too."""
    from os.path import realpath

    from stdfit.base.errors import RequestError

    read = [bench.path, *(one.file for one in bench.adapters)]
    for standard in bench.standards:
        read += [*standard.files, standard.from_kit]
    for device in bench.devices:
        read += [*device.files, device.from_kit, device.value_file]
    own = {realpath(file) for file in read if file is not None}
    for target in targets:
        if realpath(target) in own:
            raise RequestError(
                "is read by the bench, and would be overwritten", "name another file with -o", file=target
            )


def write_kit(kit: Kit, path: Path) -> None:
    """Write a kit file, over nothing but a kit file."""
    from stdfit.writing.kit_file import kit_text
    from stdfit.writing.safely import write_whole

    check_target(path)
    write_whole(path, kit_text(kit))


def default_target(bench: Path) -> Path:
    """Return where the kit of a bench file goes: kit.toml beside bench.toml, NAME.kit.toml beside NAME.toml."""
    name = "kit.toml" if bench.name == "bench.toml" else f"{bench.stem}.kit.toml"
    return bench.parent / name
