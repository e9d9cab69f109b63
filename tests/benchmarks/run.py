"""Speed and size, as ratios measured in one run: `python tests/benchmarks/run.py [NAME ...]`."""

import argparse
import os
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

# One thread for linear algebra: the program's own parallel work is over kits.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np
from made import bench_in, rows
from measures import child, command, fastest

Line = tuple[str, str, str]
"""What was measured, the figure, and what it is meant to keep within."""


def reading(folder: Path) -> Iterator[Line]:
    """Read 100 000 lines: the program against pandas' C parser on the same numbers."""
    import pandas as pd

    from stdfit.data.readings import read_reading

    table = rows(100_000)
    for name, start in (
        ("touchstone.s1p", "# HZ S RI R 50\n"),
        ("columns.csv", "frequency_hz,gamma_re,gamma_im\n"),
    ):
        path, mark = folder / name, "," if name.endswith("csv") else " "
        text = "\n".join(mark.join(f"{x:.10g}" for x in row) for row in table)
        path.write_text(f"{start}{text}\n")
        ours, theirs = fastest(
            [
                lambda path=path: read_reading(path),
                lambda path=path, mark=mark: pd.read_csv(path, sep=mark, skiprows=1, header=None),
            ],
            9,
        )
        yield f"read {name}, 100 000 lines ÷ pandas.read_csv", f"{ours / theirs:.2f}", "≤ 1.5"


def kernel(folder: Path) -> Iterator[Line]:
    """Fit one problem with analytic derivatives, and with lmfit as it comes: bare formulas, numerical derivatives."""
    import lmfit
    from formulas import residual_function

    from stdfit.data.bench import read_bench
    from stdfit.fitting.problem import Evaluation
    from stdfit.pipeline import prepare_bench, read_sweeps
    from stdfit.pipeline.settle import choose_all, settle

    bench = read_bench(bench_in(folder, 1001, 5))
    prepared = prepare_bench(bench, read_sweeps(bench))
    problem = settle(prepared, choose_all(prepared)).problem
    start, _ = problem.evidence()
    both = Evaluation(problem)
    parameters = lmfit.Parameters()
    for k, value in enumerate(start):
        parameters.add(f"p{k}", value=float(value))

    def by_default(function: Callable[[np.ndarray], np.ndarray]) -> lmfit.minimizer.MinimizerResult:
        return lmfit.minimize(
            lambda current: function(np.array([one.value for one in current.values()])), parameters
        )

    bare = residual_function(problem)
    quick, slow, plain = fastest(
        [lambda: problem.solved(start), lambda: by_default(both.residual), lambda: by_default(bare)], 25
    )
    found, same = problem.solved(start), by_default(both.residual)
    cost = float(found.residual @ found.residual)
    yield (
        f"lmfit's default ÷ the program, {start.size} quantities, 3 × 1001 points",
        f"{slow / quick:.1f}",
        "≥ 5",
    )
    yield "the same with formulas that compute no derivatives", f"{plain / quick:.1f}", ""
    yield "relative difference of the two sums of squares", f"{abs(same.chisqr / cost - 1):.1e}", "≤ 1e-8"


def whole(folder: Path) -> Iterator[Line]:
    """The whole command against the bare import of lmfit."""
    bench = bench_in(folder, 1001, 5)
    plain, fit, report, bare = fastest(
        [
            command("-c", "import lmfit"),
            command("-m", "stdfit.cli", "fit", str(bench)),
            command("-m", "stdfit.cli", "fit", str(bench), "--report", str(folder / "kit.html")),
            command("-c", "pass"),
        ],
        5,
    )
    (helped,) = fastest([command("-m", "stdfit.cli", "--help")], 5)
    yield "stdfit fit, 3 × 5 × 1001 points ÷ import lmfit", f"{fit / plain:.2f}", "≤ 2"
    yield "--report adds, in seconds", f"{report - fit:.2f}", "≤ 3"
    yield "stdfit --help ÷ an empty Python", f"{helped / bare:.1f}", ""


def kits(folder: Path) -> Iterator[Line]:
    """Several benches in one command against one after the other."""
    count = 2 * (os.cpu_count() or 1)
    benches = [str(bench_in(folder / str(k), 401, 5, seed=k)) for k in range(count)]
    one, together = fastest(
        [
            lambda: [command("-m", "stdfit.cli", "fit", bench)() for bench in benches],
            command("-m", "stdfit.cli", "fit", *benches),
        ],
        3,
    )
    yield (
        f"{count} benches one by one ÷ in one command, on {os.cpu_count()} cores",
        f"{one / together:.1f}",
        "",
    )


def growth(folder: Path) -> Iterator[Line]:
    """Growth of time and memory with points and with connections."""
    for what, sizes, shape in (
        ("points", (101, 1001, 10_001, 100_001), lambda n: (n, 3)),
        ("connections", (2, 5, 16, 50), lambda n: (1001, n)),
    ):
        base_seconds, base_bytes = child(
            "-c", "import lmfit, pandas, stdfit.pipeline, stdfit.writing.summary"
        )
        seconds, peaks = [], []
        for size in sizes:
            bench = bench_in(folder / f"{what}-{size}", *shape(size))
            taken = [child("-m", "stdfit.cli", "fit", str(bench)) for _ in range(2)]
            seconds.append(min(one[0] for one in taken) - base_seconds)
            peaks.append(min(one[1] for one in taken) - base_bytes)
        told = ", ".join(
            f"{n}: {s:.2f} s, {max(p, 0) / 2**20:.0f} MB"
            for n, s, p in zip(sizes, seconds, peaks, strict=True)
        )
        yield f"above the bare imports, by {what}", told, ""
        yield f"exponent of time in {what}, steepest step", f"{steepest(sizes, seconds):.2f}", "≤ 1.1"
        yield f"exponent of memory in {what}, steepest step", f"{steepest(sizes, peaks):.2f}", "≤ 1.1"


def steepest(sizes: tuple[int, ...], figures: list[float]) -> float:
    """Return the largest slope of log(figure) over log(size) between neighbours."""
    return float(np.max(np.diff(np.log(np.maximum(figures, 1e-3))) / np.diff(np.log(sizes))))


def size(folder: Path) -> Iterator[Line]:
    """The largest bench that is promised."""
    bench = bench_in(folder, 100_001, 16)
    seconds, peak = child("-m", "stdfit.cli", "fit", str(bench))
    yield "3 × 16 × 100 001 points in one go, peak memory in GB", f"{peak / 1e9:.2f}", "< 2"
    yield "the same, processor time in seconds", f"{seconds:.0f}", ""


def efficiency(folder: Path) -> Iterator[Line]:
    """How near the estimates come to the limit that noise alone sets."""
    from stdfit.base.arrays import as_pairs
    from stdfit.circuits.standard import PARAMETERS, reflection
    from stdfit.fitting.observed import Observed
    from stdfit.fitting.problem import Problem, Quantity
    from stdfit.fitting.solve import least_squares

    f, noise, rng = np.linspace(10e6, 6e9, 201), 1e-3, np.random.default_rng(1)
    truth = {"offset_delay_ps": 20.0, "offset_z0_ohm": 50.0, "c0": 50.0, "c2": 300.0}
    quantities = tuple(
        Quantity(
            "open", one, "free" if one.name in ("offset_delay_ps", "c2") else "held", truth.get(one.name, 0.0)
        )
        for one in PARAMETERS["open"]
    )
    gamma, _ = reflection("open", [one.value for one in quantities], f, 50.0)
    errors = []
    for _ in range(1000):
        noisy = gamma + noise * (rng.standard_normal(f.size) + 1j * rng.standard_normal(f.size))
        observed = Observed("open", "open", f, noisy, np.zeros((1, f.size), complex))
        weights = (np.full(f.size, 1 / noise**2),)
        problem = Problem((observed,), quantities, (tuple(range(len(quantities))),), weights, 50.0)
        start = problem.evidence()[0]
        found = least_squares(problem.residual, problem.jacobian, start)
        errors.append(found.values - start)
    design = as_pairs(problem.model(0, problem.values)[1]) / noise
    limit = np.diag(np.linalg.inv(design.T @ design))
    for name, ratio in zip(("delay", "C2"), np.mean(np.square(errors), axis=0) / limit, strict=True):
        yield (
            f"mean square error of the {name} ÷ information limit, 1000 fits (± 0.09)",
            f"{ratio:.2f}",
            "0.9 … 1.1",
        )


BENCHMARKS: dict[str, Callable[[Path], Iterator[Line]]] = {
    "reading": reading,
    "kernel": kernel,
    "whole": whole,
    "kits": kits,
    "growth": growth,
    "size": size,
    "efficiency": efficiency,
}


def main() -> None:
    """Run the named benchmarks, or all."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("names", nargs="*", metavar="NAME", help=f"one of {', '.join(BENCHMARKS)} (all)")
    names = asked.parse_args().names or list(BENCHMARKS)
    for name in names:
        if name not in BENCHMARKS:
            asked.error(f"no benchmark {name!r}; there are {', '.join(BENCHMARKS)}")
    for name in names:
        with tempfile.TemporaryDirectory() as folder:
            for what, figure, meant in BENCHMARKS[name](Path(folder)):
                print(f"{name:<11} {what}: {figure}{f'   ({meant})' if meant else ''}", flush=True)


if __name__ == "__main__":
    main()
