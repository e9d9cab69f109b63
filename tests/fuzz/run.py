"""Hostile and sloppy input, drawn at random: python tests/fuzz/run.py --inputs 20000 --seed 1

Prints every kind of fault with the first input that showed it, then counts. `--only K --keep DIR` runs input K alone
and leaves its files in DIR. The exit code is the number of kinds of faults, at most 100.
"""

import argparse
import resource
import sys
import tempfile
from pathlib import Path

from fuzz_loop import Counts, run_case, run_many
from fuzz_seeds import make_scenes


def table(counts: Counts) -> str:
    """Return the counts as text."""
    commands = sorted({command for command, _ in counts.calls})
    codes = sorted(counts.codes)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    lines = [
        f"{counts.inputs} inputs in {counts.seconds:.0f} s, "
        f"slowest {counts.slowest[0]:.1f} s (input {counts.slowest[1]}), peak memory {peak:.0f} MB",
        "command   " + "".join(f"{f'exit {code}':>10}" for code in codes),
        *(f"{one:10}" + "".join(f"{counts.calls[one, code]:10}" for code in codes) for one in commands),
        f"{'all':10}" + "".join(f"{counts.codes[code]:10}" for code in codes),
        "mutated readings: " + ", ".join(f"{what} {n}" for what, n in sorted(counts.readings.items())),
        "mutations: " + ", ".join(f"{what} {n}" for what, n in sorted(counts.changes.items())),
        f"kinds of faults: {len(counts.faults)}",
    ]
    lines += [
        f"  {len(found)} times, first {found[0]}: {what}" for what, found in sorted(counts.faults.items())
    ]
    return "\n".join(lines)


def main() -> int:
    asked = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    asked.add_argument("--inputs", type=int, default=1000)
    asked.add_argument("--first", type=int, default=0)
    asked.add_argument("--seed", type=int, default=1)
    asked.add_argument("--only", type=int)
    asked.add_argument("--keep", type=Path)
    options = asked.parse_args()
    if options.only is not None:
        with tempfile.TemporaryDirectory() as root:
            make_scenes(Path(root))
            case, outcome, read = run_case(Path(root), options.seed, options.only, options.keep)
        print(case, outcome.code, read, outcome.faults, sep="\n")
        print(repr(outcome.out[:2000]), repr(outcome.err[:2000]), sep="\n")
        return min(len(outcome.faults), 100)
    indices = range(options.first, options.first + options.inputs)
    counts = run_many(indices, options.seed, lambda line: print(ascii(line), flush=True))
    print(table(counts))
    return min(len(counts.faults), 100)


if __name__ == "__main__":
    sys.exit(main())
