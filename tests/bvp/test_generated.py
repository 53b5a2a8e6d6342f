"""Generated modules: the same module for the same text, kept for later processes, safe where processes race."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from bvp import cache_folder, generated

ROOT = Path(__file__).parents[2]

TEXT = '''"""A generated module."""
import math

from bvp.kernels.jit import kernel


@kernel
def source(u):
    return math.exp(u) - 1.0


@kernel
def fill(u, values):
    for i in range(u.size):
        values[i] = source(u[i])
    return 0
'''

PROGRAM = f"""
import json, sys, time
import numpy as np
from bvp import generated
from bvp.kernels import jit
began = time.perf_counter()
module = generated.load({TEXT!r}, "slab, u'' + exp(u)")
loaded = time.perf_counter() - began
u = np.linspace(-1.0, 1.0, 7)
values = np.empty(7)
code = module.fill(u, values)
print(json.dumps([module.__name__, code, float(abs(values - np.expm1(u)).max()), jit.compiled(), loaded]))
"""


def start(cache: Path) -> subprocess.Popen[str]:
    environment = {**os.environ, "HAIRPIN_CACHE": str(cache), "PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-W", "error", "-c", PROGRAM]
    return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=environment)


def finish(process: subprocess.Popen[str]) -> tuple[str, int, float, int, float]:
    output, errors = process.communicate(timeout=120)
    assert process.returncode == 0, errors
    name, code, error, count, loaded = json.loads(output)
    assert code == 0
    assert error < 1e-15
    return name, code, error, count, loaded


def test_processes_that_race_all_succeed_and_a_later_one_compiles_nothing(tmp_path: Path) -> None:
    racing = [start(tmp_path) for _ in range(3)]
    found = [finish(process) for process in racing]
    later = finish(start(tmp_path))
    assert max(one[3] for one in found) == 2
    assert later[3] == 0
    assert {one[0] for one in found} == {later[0]}
    assert later[4] < 0.2  # a few milliseconds when nothing else runs
    assert not list(tmp_path.rglob("*.part"))


def test_the_date_of_change_stays_whoever_uses_a_module(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    # older versions of numba compile again what has another date than its source had
    monkeypatch.setattr(generated, "cache_folder", lambda: tmp_path)
    dates = set()
    for _ in range(3):
        path = Path(generated.load("VALUE = 'dated'\n", "dated").__file__ or "")
        dates.add(path.stat().st_mtime)
        assert path.stat().st_atime > generated.CHANGED
        del sys.modules[path.stem]
    assert dates == {generated.CHANGED}


def test_the_same_text_is_the_same_module() -> None:
    module = generated.load(TEXT, "first")
    assert generated.load(TEXT, "first") is module
    assert generated.load(TEXT + "\nOTHER = 1\n", "first") is not module
    assert sys.modules[module.__name__] is module


def test_any_hint_makes_a_name() -> None:
    name = generated.load("VALUE = 1\n", "../λ = exp(u)!" * 20).__name__
    assert name.isidentifier()
    assert len(name) < 100


def test_a_module_that_fails_leaves_nothing_behind() -> None:
    before = set(sys.modules)
    with pytest.raises(ZeroDivisionError):
        generated.load("1 / 0\n", "bad")
    assert not [name for name in set(sys.modules) - before if name.startswith("hairpin_generated")]


def test_a_file_that_was_changed_is_written_again(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(generated, "cache_folder", lambda: tmp_path)
    path = Path(generated.load("VALUE = 41\n", "changed").__file__ or "")
    path.write_text("raise SystemExit('not what was generated')\n")
    del sys.modules[path.stem]
    assert generated.load("VALUE = 41\n", "changed").VALUE == 41
    assert path.read_text() == "VALUE = 41\n"


def test_without_a_folder_kernels_are_compiled_in_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(generated, "cache_folder", lambda: None)
    module = generated.load(TEXT + "\nUNCACHED = True\n", "uncached")
    u, values = np.array([0.5, 2.0]), np.empty(2)
    module.fill(u, values)
    np.testing.assert_allclose(values, np.expm1(u), rtol=1e-15)


def test_the_modules_longest_unused_are_removed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(generated, "cache_folder", lambda: tmp_path)
    monkeypatch.setattr(generated, "MODULES_KEPT", 4)
    paths = [Path(generated.load(f"VALUE = {number} + 1000\n", "many").__file__ or "") for number in range(4)]
    for age, path in enumerate(paths):
        os.utime(path, (1e9 - age, 1e9 - age))
    kept_by_numba = tmp_path / "generated_abc" / f"{paths[3].stem}.fill-8.py311.nbi"
    kept_by_numba.parent.mkdir()
    kept_by_numba.write_text("")
    newest = Path(generated.load("VALUE = 'newest'\n", "many").__file__ or "")
    assert sorted((tmp_path / "generated").glob("*.py")) == sorted([newest, paths[0]])
    assert not kept_by_numba.exists()


def test_the_cache_folder_in_use_is_the_one_of_the_kernels() -> None:
    folder = cache_folder.cache_folder()
    assert folder is not None  # tests/conftest.py gives the suite a folder of its own
    assert folder.name == cache_folder.PREFIX + cache_folder.sources_hash()
