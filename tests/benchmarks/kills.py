"""A trace killed a hundred times at random moments, gone on with each time: `python -m tests.benchmarks.kills [--times 100]`.

The result has to be the uninterrupted one, number for number, and no result of Newton's method may be worked out twice but
those of the last fraction of a second before each kill.
"""

from __future__ import annotations

import argparse
import json
import random
import shutil
import signal
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

# Pieces every 20 ms instead of every 2 s, so that a run of a second has many; and every result a little later, so that it takes that long.
RUN = """
import sys, time
import bvp.newton, cases.keep
from cases.cli import main
cases.keep.SECONDS_BETWEEN = 0.02
slowly = bvp.newton._corrected
def corrected(*words, **more):
    time.sleep(0.004)
    return slowly(*words, **more)
bvp.newton._corrected = corrected
sys.exit(main(sys.argv[1:]))
"""


def command(folder: Path, resume: bool) -> list[str]:
    """The trace of the demonstration into a folder."""
    words = ["trace", "straw-store-depth", "--out", str(folder), "--quiet", "--json"]
    return [sys.executable, "-c", RUN, *words, *(["--resume"] if resume else [])]


def numbers_of(text: str) -> dict[str, Any]:
    """A result without its time."""
    document: dict[str, Any] = json.loads(text)
    document["work"].pop("seconds")
    return document


def main() -> int:
    """Kill, go on, compare; print the counts."""
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--times", type=int, default=100)
    options.add_argument("--seed", type=int, default=1)
    asked = options.parse_args()
    chance = random.Random(asked.seed)
    root = Path(tempfile.mkdtemp())
    subprocess.run(command(root / "warm", False), capture_output=True, check=True)
    began = time.perf_counter()
    whole = subprocess.run(command(root / "whole", False), capture_output=True, text=True, check=True)
    length = time.perf_counter() - began
    expected = numbers_of(whole.stdout)
    kills = runs = damaged = different = 0
    while kills < asked.times:
        folder = root / f"run{runs}"
        runs += 1
        while True:
            resume = (folder / "partial" / "start.json").exists() or any(folder.glob("partial/*.json"))
            process = subprocess.Popen(command(folder, resume), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
            try:
                out, err = process.communicate(timeout=chance.uniform(0.3, 1.0) * length)
            except subprocess.TimeoutExpired:
                process.send_signal(signal.SIGKILL)
                process.communicate()
                kills += 1
                continue
            damaged += process.returncode != 0
            if process.returncode != 0:
                print(process.returncode, err)
            different += process.returncode == 0 and numbers_of(out) != expected
            break
        shutil.rmtree(folder)
    shutil.rmtree(root)
    print(f"an uninterrupted run takes {length:.1f} s; {kills} kills in {runs} runs")
    print(f"{damaged} runs ended badly, {different} with other numbers")
    return int(damaged + different > 0)


if __name__ == "__main__":
    sys.exit(main())
