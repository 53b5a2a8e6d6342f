"""Lint, format and types, checked by the suite's own run."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


@pytest.mark.parametrize("words", [("ruff", "check", "."), ("ruff", "format", "--check", "."), ("mypy",)], ids=" ".join)
def test_tool_is_content(words: tuple[str, ...]) -> None:
    done = subprocess.run([sys.executable, "-m", *words], cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
