"""The decorator of the kernels: flags, the account of compilations, and the cache folder, each in a process of its own."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from bvp import cache_folder
from bvp.kernels import jit
from bvp.kernels.jit import kernel

ROOT = Path(__file__).parents[2]

PROGRAM = """
import sys
import warnings
import numpy as np
with warnings.catch_warnings(record=True) as warned:
    warnings.simplefilter("always")
    from bvp.kernels import jit, tables
    table = np.array([0.0, 1.0, 2.0, 3.0, 4.0, 5.0])
    value = tables.table_value(table, 0, 2, 0.5, 0)
    again = tables.table_value(table, 0, 2, 0.25, 0)
assert value == 2.0 + 0.5 * (3.0 + 0.5 * (4.0 + 0.5 * 5.0)), value
print(jit.compiled(), jit.compile_seconds(), len(warned), *(str(one.message).replace("\\n", " ") for one in warned))
"""


def run(cache: str, program: str = PROGRAM, **more: str) -> tuple[int, float, str]:
    """(kernels compiled, seconds, the number of warnings and their text) of a fresh process with this cache."""
    environment = {**os.environ, "HAIRPIN_CACHE": cache, "PYTHONPATH": str(ROOT), **more}
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, env=environment, check=False)
    assert done.returncode == 0, done.stderr
    count, seconds, warned = done.stdout.strip().split(" ", 2)
    return int(count), float(seconds), warned


def test_a_second_process_compiles_nothing_until_the_cache_is_damaged(tmp_path: Path) -> None:
    count, seconds, warned = run(str(tmp_path))
    assert count == 2
    assert seconds > 0.05
    assert warned == "0"
    count, again, warned = run(str(tmp_path))
    assert count == 0
    assert 0 < again < seconds
    assert warned == "0"
    damaged = [*tmp_path.rglob("*.nbi"), *tmp_path.rglob("*.nbc")]
    assert damaged
    for path in damaged:
        path.write_bytes(b"no longer what it was")
    assert run(str(tmp_path))[::2] == (2, "0")
    assert run(str(tmp_path))[0] == 0


def test_a_folder_that_cannot_be_written_is_said_once(tmp_path: Path) -> None:
    blocked = tmp_path / "file"
    blocked.write_text("where a folder should be")
    count, _, warned = run(str(blocked / "cache"))
    assert count == 2
    assert warned.startswith("1 compiled kernels cannot be kept")
    assert "HAIRPIN_CACHE" in warned


def test_the_cache_can_be_switched_off() -> None:
    assert run("off")[::2] == (2, "0")


def test_kernels_run_where_compiling_is_switched_off(tmp_path: Path) -> None:
    assert run(str(tmp_path), NUMBA_DISABLE_JIT="1")[0] == 0


def test_other_users_of_numba_keep_their_cache_folder() -> None:
    before = jit.config.CACHE_DIR
    kernel(run)
    assert before == jit.config.CACHE_DIR


def test_every_kernel_has_the_flags_of_the_project() -> None:
    made: Any = kernel(lambda a: a)
    options = made.targetoptions
    assert options["error_model"] == "numpy"
    assert options["nogil"]
    assert not options.get("fastmath")


def test_the_hash_follows_every_kernel_source(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    kernels = tmp_path / "kernels"
    kernels.mkdir()
    (kernels / "one.py").write_text("1")
    monkeypatch.setattr(cache_folder, "__file__", str(tmp_path / "cache_folder.py"))
    seen = {cache_folder.sources_hash()}
    (kernels / "one.py").write_text("2")
    seen.add(cache_folder.sources_hash())
    (kernels / "one.py").rename(kernels / "two.py")
    seen.add(cache_folder.sources_hash())
    assert len(seen) == 3


def test_only_the_folders_last_used_are_kept(tmp_path: Path) -> None:
    folders = [tmp_path / f"{cache_folder.PREFIX}{number}" for number in range(7)]
    for age, folder in enumerate(folders):
        folder.mkdir()
        (folder / "kernel.nbc").write_text("")
        os.utime(folder, (1e9 - age, 1e9 - age))
    other = tmp_path / "not ours"
    other.mkdir()
    cache_folder.remove_old_folders(tmp_path, keep=folders[-1])
    assert sorted(tmp_path.iterdir()) == sorted([*folders[: cache_folder.FOLDERS_KEPT - 1], folders[-1], other])


@pytest.mark.parametrize(
    ("environment", "expected"),
    [
        ({"HAIRPIN_CACHE": "/some/where", "XDG_CACHE_HOME": "/cache", "HOME": "/home"}, "/some/where"),
        ({"XDG_CACHE_HOME": "/cache", "HOME": "/home"}, "/cache/hairpin"),
        ({"XDG_CACHE_HOME": "relative", "HOME": "/home"}, "/home/.cache/hairpin"),
        ({"HOME": "/home"}, "/home/.cache/hairpin"),
    ],
)
def test_where_the_cache_stands(environment: dict[str, str], expected: str, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("HAIRPIN_CACHE", "XDG_CACHE_HOME", "HOME"):
        monkeypatch.delenv(name, raising=False)
    for name, value in environment.items():
        monkeypatch.setenv(name, value)
    assert cache_folder.cache_root() == Path(expected)
