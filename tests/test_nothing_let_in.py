"""Nothing that the program reads is run, and nothing that it does leads out of the computer."""

import ast
from pathlib import Path

import pytest

import stdfit

SOURCE = Path(stdfit.__file__).parent
FILES = sorted(SOURCE.rglob("*.py"))

CALLS = {"eval", "exec", "compile", "__import__", "input", "breakpoint"}
"""Built-in functions that run text, or wait for somebody."""

_NAMES = """pickle cPickle _pickle dill joblib marshal shelve dbm yaml subprocess socket socketserver ssl asyncio urllib
http ftplib smtplib poplib imaplib telnetlib nntplib xmlrpc requests httpx aiohttp urllib3 webbrowser ctypes cffi code
codeop runpy pty sqlite3 antigravity skrf pip ensurepip venv"""
MODULES = set(_NAMES.split())
"""Modules that read more than data, run programs, or speak to other computers."""

METHODS = {
    "system": ("os",),
    "popen": ("os",),
    "startfile": ("os",),
    "fork": ("os",),
    "eval": ("pd", "pandas", "frame", "asteval", "lmfit"),
    "read_pickle": ("pd", "pandas"),
    "to_pickle": None,
    "query": ("frame", "pd"),
    "literal_eval": None,
    "from_string": None,
    "fromstring": None,
}
"""Methods that do the same, with the names that they are called on; None for any."""


def calls_in(tree):
    return [node for node in ast.walk(tree) if isinstance(node, ast.Call)]


def faults_of(text, name="x.py"):
    """Return what a source text does that this program may not do."""
    tree = ast.parse(text, name)
    found = []
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found += [one.name for one in node.names if one.name.split(".")[0] in MODULES]
        if isinstance(node, ast.ImportFrom) and node.module and node.level == 0:
            if node.module.split(".")[0] in MODULES:
                found.append(node.module)
            found += [f"{node.module}.{one.name}" for one in node.names if one.name in CALLS]
    for node in calls_in(tree):
        called = node.func
        if isinstance(called, ast.Name) and called.id in CALLS:
            found.append(called.id)
        if isinstance(called, ast.Attribute):
            owner = called.value.id if isinstance(called.value, ast.Name) else ""
            if called.attr in METHODS and (METHODS[called.attr] is None or owner in METHODS[called.attr]):
                found.append(f"{owner}.{called.attr}")
            if owner in ("os", "builtins") and called.attr.startswith(("exec", "spawn", "posix_spawn")):
                found.append(f"{owner}.{called.attr}")
            if owner in ("np", "numpy") and called.attr in ("load", "memmap", "fromfile"):
                found.append(f"{owner}.{called.attr}")
            if called.attr in ("import_module", "loads", "load") and owner in (
                "importlib",
                "pickle",
                "marshal",
            ):
                found.append(f"{owner}.{called.attr}")
    for node in ast.walk(tree):
        if isinstance(node, ast.keyword) and node.arg in ("shell", "allow_pickle"):
            value = node.value
            if not (isinstance(value, ast.Constant) and value.value is False):
                found.append(node.arg)
    return found


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.relative_to(SOURCE).as_posix())
def test_no_source_file_runs_text_or_programs_or_opens_connections(path):
    assert faults_of(path.read_text(encoding="utf-8"), str(path)) == []


@pytest.mark.parametrize(
    "text",
    [
        "eval('1')",
        "from builtins import exec",
        "import pickle",
        "import urllib.request as r",
        "from subprocess import run",
        "import os\nos.system('x')",
        "import os\nos.execv('x', [])",
        "import numpy as np\nnp.load('x', allow_pickle=True)",
        "f(shell=True)",
        "frame.query('x')",
    ],
)
def test_the_check_would_see_it(text):
    assert faults_of(text)


def test_modules_are_imported_by_name_in_two_places():
    """The names are those of a table of the package's own, and of the modules that hold the commands."""
    named = [
        path.relative_to(SOURCE).as_posix()
        for path in FILES
        for node in calls_in(ast.parse(path.read_text(encoding="utf-8")))
        if isinstance(node.func, ast.Name) and node.func.id == "import_module"
    ]
    assert named == ["__init__.py", "cli/__init__.py"]
