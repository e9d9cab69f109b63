"""The floors of the house: a module imports from lower floors only, and heavy libraries stay where they belong."""

import ast
import os
import subprocess
import sys
from pathlib import Path

import pytest

import stdfit

FLOORS = (
    "base",
    "circuits",
    "data",
    "fitting",
    "uncertainty",
    "validity",
    "writing",
    "pipeline",
    "trials",
    "cli",
)
ROOT = Path(next(iter(stdfit.__path__)))
MODULES = {
    ".".join(("stdfit", *path.relative_to(ROOT).with_suffix("").parts)).removesuffix(".__init__"): path
    for path in sorted(ROOT.rglob("*.py"))
}
OUTSIDE = {
    "lmfit": ("fitting",),
    "scipy.optimize": ("fitting",),
    "matplotlib": ("writing",),
    "jinja2": ("writing",),
    "rich": ("cli",),
    "click": ("cli",),
    "tomlkit": ("writing", "cli"),
    "msgspec": ("data", "writing"),
}
ONLY_NUMPY = {"base": (), "circuits": (), "data": ("pandas", "msgspec")}
# Fields of round lines are Bessel functions, which numpy has not. They are needed for drawings alone, so that no other
# circuit may import them: the command must start at once.
BESSEL = "stdfit.circuits.coaxial"
BESSEL_MAY = ("scipy.special", "scipy.linalg", "scipy.integrate")


def imports_of(module, path, text=None):
    """Yield the full name of everything that a module imports, wherever the statement stands."""
    package = module if path.name == "__init__.py" else module.rpartition(".")[0]
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8") if text is None else text)):
        if isinstance(node, ast.Import):
            for name in node.names:
                yield name.name, node.lineno
        elif isinstance(node, ast.ImportFrom):
            base = node.module or ""
            if node.level:
                above = package.split(".")[: len(package.split(".")) - node.level + 1]
                base = ".".join([*above, base] if base else above)
            for name in node.names:
                yield f"{base}.{name.name}", node.lineno


def floor_of(module):
    """Return the floor of a module by its second name; files cli_*.py stand on the floor of cli."""
    second = [*module.split("."), ""][1]
    return next((floor for floor in FLOORS if second == floor or second.startswith(f"{floor}_")), None)


def faults_in(module, path, text=None):
    own, faults = floor_of(module), []
    for name, line in imports_of(module, path, text):
        where = f"{module}, line {line}: "
        if name.split(".")[0] == "stdfit":
            other = floor_of(name)
            if other is None and name != "stdfit.__version__":
                faults.append(f"{where}{name} is on no floor")
            elif other is not None and FLOORS.index(other) > FLOORS.index(own):
                faults.append(f"{where}{own} imports {name}, which stands above it")
        for library, floors in OUTSIDE.items():
            if (name + ".").startswith(library + ".") and own not in floors:
                faults.append(f"{where}{library} belongs in {' and '.join(floors)}")
        inside = (module + ".").startswith(BESSEL + ".")
        if own == "circuits" and not inside and (name + ".").startswith(BESSEL + "."):
            faults.append(f"{where}only what needs the fields may import {BESSEL}")
        if own in ONLY_NUMPY and not (inside and name.startswith(BESSEL_MAY)):
            top = name.split(".")[0]
            if top not in (*sys.stdlib_module_names, "stdfit", "numpy", *ONLY_NUMPY[own]):
                faults.append(f"{where}{own} knows numpy only, not {top}")
    return faults


def test_there_is_something_to_look_at():
    assert {floor_of(module) for module in MODULES} >= {"base", "circuits", "data", "fitting", "uncertainty"}


@pytest.mark.parametrize("module", [module for module in MODULES if module != "stdfit"])
def test_imports_go_down(module):
    assert floor_of(module) is not None, f"{module} is on no floor"
    assert faults_in(module, MODULES[module]) == []


@pytest.mark.parametrize(
    ("module", "text"),
    [
        ("stdfit.circuits.line", "from stdfit.fitting.problem import Problem"),
        ("stdfit.base.arrays", "def f():\n    import stdfit.cli"),
        ("stdfit.data.bench", "from ..validity import limit"),
        ("stdfit.data.bench", "from stdfit import pipeline"),
        ("stdfit.writing.kit", "import stdfit.trials.bench as b"),
        ("stdfit.uncertainty.push", "from scipy.optimize import least_squares"),
        ("stdfit.uncertainty.push", "from scipy import optimize"),
        ("stdfit.validity.limit", "import lmfit"),
        ("stdfit.fitting.solve", "from matplotlib import pyplot"),
        ("stdfit.writing.sheet", "import rich.table"),
        ("stdfit.circuits.line", "def f():\n    from scipy.special import erf"),
        ("stdfit.circuits.line", "from stdfit.circuits.coaxial.modes import line_te11_hz"),
        ("stdfit.circuits.coaxial.modes", "from scipy.optimize import brentq"),
        ("stdfit.circuits.coaxial.modes", "from scipy.sparse import coo_array"),
        ("stdfit.fitting.solve", "from stdfit import Kit"),
    ],
)
def test_the_check_finds_what_it_looks_for(module, text):
    assert len(faults_in(module, Path("a.py"), text)) >= 1


@pytest.mark.parametrize(
    ("module", "text"),
    [
        (
            "stdfit.fitting.solve",
            "import lmfit\nfrom scipy import optimize\nfrom stdfit.data.bench import Bench",
        ),
        ("stdfit.writing.plots", "from matplotlib.figure import Figure\nfrom stdfit import __version__"),
        ("stdfit.cli_show", "import rich.table\nfrom stdfit.pipeline import characterise"),
        ("stdfit.uncertainty.region", "from scipy.special import stdtrit\nfrom .push import push"),
        ("stdfit.circuits.coaxial.modes", "from scipy.special import j0"),
    ],
)
def test_the_check_lets_pass_what_is_in_order(module, text):
    assert faults_in(module, Path("a.py"), text) == []


def test_modules_do_not_import_in_circles():
    """Statements inside functions count too: what needs them is laid out wrongly."""
    needs = {
        module: {
            found
            for name, _ in imports_of(module, path)
            for found in (name, name.rpartition(".")[0])
            if found in MODULES and found not in (module, "stdfit")
        }
        for module, path in MODULES.items()
        if path.name != "__init__.py"
    }
    while True:
        done = {module for module, wanted in needs.items() if not wanted & needs.keys()}
        if not done:
            break
        needs = {module: wanted for module, wanted in needs.items() if module not in done}
    assert needs == {}


def test_the_command_starts_without_heavy_libraries():
    """Help and wrong usage must answer at once, so that the libraries are imported inside the commands."""
    code = (
        "import sys, stdfit, stdfit.cli\n"
        "print(*sorted({'numpy', 'scipy', 'lmfit', 'pandas', 'matplotlib'} & set(sys.modules)))"
    )
    paths = os.pathsep.join([str(ROOT.parent), *filter(None, [os.environ.get("PYTHONPATH")])])
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
        env={**os.environ, "PYTHONPATH": paths},
    )
    assert done.returncode == 0, done.stderr
    assert done.stdout.split() == []
