"""What is loaded for what: a command that only reads text waits for no numerical library."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
OURS = {"bvp", "continuation", "cases"}


def loaded_by(program: str) -> set[str]:
    """The libraries from outside Python that a program loads in a process of its own."""
    beginning = "import sys\nbefore = set(sys.modules)\n"
    ending = "\nprint('LOADED', *{name.partition('.')[0] for name in set(sys.modules) - before} - sys.stdlib_module_names)"
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run(
        [sys.executable, "-c", beginning + program + ending], env=environment, capture_output=True, text=True, encoding="utf-8", check=False
    )
    assert done.returncode == 0, done.stderr
    kind, *names = done.stdout.splitlines()[-1].split()
    assert kind == "LOADED"
    return set(names) - OURS


@pytest.mark.parametrize("package", ["bvp", "bvp.formula", "bvp.errors", "continuation", "cases", "cases.cli"])
def test_packages_are_lazy(package: str) -> None:
    assert loaded_by(f"import {package}") == set()


@pytest.mark.parametrize(
    "words", ["list", "--help", "trace --help", "solve --help", "show slab", "show slab --toml", "show straw-store-depth"]
)
def test_commands_that_read_text_load_nothing(words: str) -> None:
    assert loaded_by(f"from cases.cli import main\ntry: main({words.split()!r})\nexcept SystemExit: pass") == set()


@pytest.mark.parametrize("case", ["slab", "straw-store-depth"])
def test_checking_a_case_loads_neither_compiler_nor_plots(case: str) -> None:
    assert not loaded_by(f"from cases.cli import main\nmain(['check', {case!r}])") & {"numba", "llvmlite", "matplotlib", "scipy", "mpmath"}


def test_solving_loads_no_plots() -> None:
    program = (
        "import bvp\nslab = bvp.Problem(\"u'' + u = 1\", 'u', (0, 1), ['u(0) = 0', 'u(1) = 0'])\n"
        "assert bvp.solve(slab, intervals=10, compiled=False).ok"
    )
    assert not loaded_by(program) & {"matplotlib", "pandas"}


def test_what_is_loaded_is_seen() -> None:
    assert "numpy" in loaded_by("import numpy")
