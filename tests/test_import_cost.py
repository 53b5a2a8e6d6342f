"""What is loaded for what: a command that only reads text waits for no numerical library."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
HEAVY = ("numpy", "scipy", "numba", "matplotlib", "mpmath")


def loaded_by(program: str) -> set[str]:
    """The heavy libraries that are loaded once a program has run in a process of its own."""
    ending = f"\nimport sys\nprint('LOADED', *[name for name in {HEAVY!r} if name in sys.modules])"
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run([sys.executable, "-c", program + ending], env=environment, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return set(done.stdout.splitlines()[-1].split()[1:])


@pytest.mark.parametrize("package", ["bvp", "bvp.formula", "bvp.errors", "continuation", "cases"])
def test_packages_are_lazy(package: str) -> None:
    assert loaded_by(f"import {package}") == set()


@pytest.mark.parametrize(
    ("words", "allowed"),
    [
        (["list"], set()),
        (["--help"], set()),
        (["trace", "--help"], set()),
        (["show", "slab"], {"numpy"}),
        (["check", "straw-store-depth"], {"numpy", "scipy", "mpmath"}),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, list) else "",
)
def test_commands_load_no_more_than_they_need(words: list[str], allowed: set[str]) -> None:
    assert loaded_by(f"from cases.cli import main\nmain({words!r})") <= allowed
