"""The command line: exit status, what goes to which stream, what is said about wrong words, folders, interruption."""

from __future__ import annotations

import errno
import io
import json
import os
import signal
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from bvp.errors import ComputationError
from cases import cli, run, store
from cases.options import COMMANDS, NOT_BUILT, OPTIONS
from cases.progress import Watch
from tests.cases.made_results import profile, solved, traced

Heard = tuple[int, str, str]
Say = Callable[..., Heard]


@pytest.fixture
def say(capsys: pytest.CaptureFixture[str]) -> Say:
    """Run a command line in this process: its exit status, standard output and standard error."""

    def run_line(*words: str) -> Heard:
        status = cli.main(words)
        heard = capsys.readouterr()
        return status, heard.out, heard.err

    return run_line


@pytest.fixture
def computed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The closed form in place of the computation: what is tested here is what is done with a result."""
    monkeypatch.setattr(run, "trace", lambda case, watch: traced(case))
    monkeypatch.setattr(run, "solve", lambda case, at, discrete, watch: solved())


def test_list_and_show(say: Say) -> None:
    status, out, err = say("list")
    assert (status, err) == (0, "")
    assert any(line.startswith("slab ") for line in out.splitlines())
    assert "slab" in [case["name"] for case in json.loads(say("list", "--json")[1])["cases"]]
    assert say("show", "sphere")[1].startswith("Self-heating sphere")
    assert say("show", "sphere", "--toml")[1].startswith("title = ")
    assert json.loads(say("show", "sphere", "--json")[1])["geometry"] == "sphere"


WRONG = [
    (["trce", "slab"], 'Did you mean "trace"'),
    (["trace"], "the case is missing"),
    (["trace", "slb"], 'Did you mean "slab"'),
    (["trace", "slab", "sphere"], "one word too many"),
    (["trace", "slab", "--interval", "5"], 'Did you mean "--intervals"'),
    (["trace", "slab", "--intervals", "1e12"], "outside 2 to 50000000"),
    (["trace", "slab", "--intervals", "many"], '"many" is no whole number'),
    (["trace", "slab", "--intervals", "2.5"], "no whole number"),
    (["trace", "slab", "--intervals", "nan"], "no whole number"),
    (["trace", "slab", "--intervals"], "expected one argument"),
    (["trace", "slab", "--digits", "0"], "outside 1 to 15"),
    (["trace", "slab", "--at", "lam"], "not of the form name=number"),
    (["trace", "slab", "--at", "lam=inf"], "no finite number"),
    (["trace", "slab", "--at", "lam=__import__('os')"], "no finite number"),
    (["trace", "slab", "--at", "lam=1", "--at", "lam=2"], "gives lam twice"),
    (["trace", "slab", "--at", "mu=1"], 'no parameter "mu"'),
    (["solve", "slab", "--at", "mu=1"], 'no parameter "mu"'),
    (["trace", "slab", "--branches", "al"], 'Did you mean "all"'),
    (["trace", "slab", "--branches", "all"], "not built yet"),
    (["trace", "slab", "--look-for-others"], "not built yet"),
    (["trace", "slab", "--workers", "2"], "not built yet"),
    (["trace", "slab", "--resume"], "--out DIR"),
    (["trace", "slab", "--when", "max(u) = 1"], "--when is no option of this command"),
    (["reach", "slab"], "--when is missing"),
    (["--json", "trace", "slab"], "stands before the command"),
    *[([name, "slab"], f"hairpin {name} is not built yet") for name in NOT_BUILT],
]


@pytest.mark.parametrize(("words", "message"), WRONG, ids=[" ".join(words) for words, _ in WRONG])
def test_wrong_words_get_one_message_and_status_2(say: Say, words: list[str], message: str) -> None:
    status, out, err = say(*words)
    assert (status, out) == (2, "")
    assert message in err
    assert "Traceback" not in err
    assert err.count("\n") <= 3


def test_every_option_of_every_command_is_defined_and_helped(say: Say) -> None:
    used = {option for command in COMMANDS.values() for option in command.options}
    assert used == set(OPTIONS)
    general = say("--help")[1]
    for name, command in COMMANDS.items():
        status, out, _ = say(name, "--help")
        assert status == 0
        assert name in general
        for option in command.options:
            assert option in out


def test_no_words_at_all_show_the_help(say: Say) -> None:
    assert say()[0] == 2
    assert say() == (2, say("--help")[1], "")


@pytest.mark.usefixtures("computed")
def test_json_is_one_object_on_standard_output_and_nothing_else(say: Say) -> None:
    status, out, _ = say("trace", "cylinder", "--json", "--quiet")
    assert status == 0
    assert out.count("\n") == 1
    assert json.loads(out)["turning_points"][0]["value"] == 2.0
    assert json.loads(say("solve", "cylinder", "--at", "lam=1", "--json")[1])["asked"] == "equation"


@pytest.mark.usefixtures("computed")
def test_folder_stands_alone(say: Say, tmp_path: Path) -> None:
    out = tmp_path / "out"
    status, printed, err = say("trace", "cylinder", "--at", "lam=0", "--out", str(out))
    assert status == 0
    assert f"written to {out}" in err
    assert {"result.json", "branch.csv", "states.npz", "case.toml", "versions.json", "report.txt", "figure.png", "figure.svg"} <= {
        path.name for path in out.iterdir()
    }
    assert not (out / "partial").exists()
    assert (out / "report.txt").read_text() == printed
    document = json.loads((out / "result.json").read_text())
    lines = (out / "branch.csv").read_text().splitlines()
    assert lines[0] == "lam,max(u),unstable directions,arclength,branch"
    assert [float(line.split(",")[0]) for line in lines[1:]] == document["branches"][0]["values"]
    with np.load(out / "states.npz") as states:
        assert states["names"].tolist() == ["main, point 0", "main, point 20", "main, point 40", "turning point 1"]
        assert states["u"].shape == states["r"].shape == (4, 9)
        assert states["lam"][3] == 2.0
        np.testing.assert_array_equal(states["u"][3], profile(1.0).u)
    assert say("check", str(out / "case.toml"))[0] == 0


@pytest.mark.usefixtures("computed")
def test_resume(say: Say, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    out = str(tmp_path / "out")
    status, _, err = say("trace", "cylinder", "--out", out, "--resume")
    assert (status, "no unfinished work" in err) == (2, True)
    printed = say("trace", "cylinder", "--out", out)[1]
    monkeypatch.setattr(run, "trace", None)  # finished work is not done again
    assert say("trace", "cylinder", "--out", out, "--resume", "--quiet") == (0, printed, "")
    assert json.loads(say("trace", "cylinder", "--out", out, "--resume", "--json")[1])["case"] == "cylinder"
    status, _, err = say("trace", "slab", "--out", out)
    assert (status, "holds a result of hairpin trace cylinder" in err) == (2, True)


def interrupted(case: Any, watch: Any) -> Any:
    os.kill(os.getpid(), signal.SIGINT)
    event = type("Event", (), {"branch": "main", "point": 0, "parameter": 0.0, "measures": {}, "turning_points": 0})()
    assert watch(event) is True
    return replace(traced(case), complete=False, reason="interrupted; what was found until then is given.")


def test_interruption_delivers_what_was_found(say: Say, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(run, "trace", interrupted)
    before = signal.getsignal(signal.SIGINT)
    out = tmp_path / "out"
    status, printed, err = say("trace", "cylinder", "--json", "--out", str(out))
    assert status == 3
    assert json.loads(printed)["complete"] is False
    assert "interrupted" in err
    assert (out / "result.json").exists()
    assert (out / "partial").exists()  # it is not finished
    assert signal.getsignal(signal.SIGINT) is before


def test_a_computation_that_fails_is_told_with_status_3(say: Say, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(case: Any, watch: Any) -> Any:
        raise ComputationError("no first state was found.")

    monkeypatch.setattr(run, "trace", fail)
    assert say("trace", "cylinder", "--quiet") == (3, "", "no first state was found.\n")


def test_second_interruption_ends_at_once(say: Say, monkeypatch: pytest.MonkeyPatch) -> None:
    def twice(case: Any, watch: Any) -> Any:
        os.kill(os.getpid(), signal.SIGINT)
        os.kill(os.getpid(), signal.SIGINT)

    monkeypatch.setattr(run, "trace", twice)
    status, out, err = say("trace", "cylinder")
    assert (status, out) == (3, "")
    assert "nothing was found" in err


@pytest.mark.usefixtures("computed")
@pytest.mark.parametrize("number", [errno.ENOSPC, errno.EROFS])
def test_full_or_read_only_disk_at_the_end_costs_the_folder_alone(
    say: Say, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int
) -> None:
    whole = store.write_whole

    def fail(path: Path, data: bytes) -> None:
        if path.name == "branch.csv":
            raise store.StoreError(f"{path} cannot be written: {os.strerror(number)}.")
        whole(path, data)

    monkeypatch.setattr(store, "write_whole", fail)
    status, out, err = say("trace", "cylinder", "--json", "--out", str(tmp_path / "out"))
    assert status == 3
    assert json.loads(out)["turning_points"][0]["value"] == 2.0
    assert f"branch.csv cannot be written: {os.strerror(number)}" in err


def test_a_folder_that_cannot_be_written_is_told_before_any_work(say: Say, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(path: Path, data: bytes) -> None:
        raise store.StoreError(f"{path} cannot be written: {os.strerror(errno.EACCES)}.")

    monkeypatch.setattr(store, "write_whole", fail)
    monkeypatch.setattr(run, "trace", None)
    status, out, err = say("trace", "cylinder", "--out", str(tmp_path / "out"))
    assert (status, out) == (2, "")
    assert "Permission denied" in err


def test_watch_shows_one_line_on_a_terminal_and_nothing_elsewhere() -> None:
    class Stream:
        def __init__(self, terminal: bool) -> None:
            self.terminal, self.text = terminal, ""

        def isatty(self) -> bool:
            return self.terminal

        def write(self, text: str) -> None:
            self.text += text

        def flush(self) -> None:
            pass

    event = type("Event", (), {"point": 4, "parameter": 0.5, "measures": {"max(u)": 0.25}, "turning_points": 0})()
    shown = {}
    for terminal, quiet in ((True, False), (False, False), (True, True)):
        stream = Stream(terminal)
        with Watch("lam", quiet=quiet, stream=stream) as watch:  # type: ignore[arg-type]
            watch._last -= 1.0
            assert watch(event) is False
        shown[terminal, quiet] = stream.text
    assert "lam = 0.5, max(u) = 0.25; 5 points" in shown[True, False]
    assert "\n" not in shown[True, False]
    assert shown[True, False].endswith("\r\x1b[K")
    assert shown[False, False] == shown[True, True] == ""


LIGHT = """
import sys
from cases.cli import main
for words in (["list"], ["--help"], ["trace", "--help"], ["show", "slab"], ["trace", "nothing"], ["compare"]):
    main(words)
heavy = {"numpy", "scipy", "numba", "matplotlib", "sympy", "mpmath", "rich"} & set(sys.modules)
sys.exit(f"imported: {heavy}" if heavy else 0)
"""


def test_light_commands_import_nothing_heavy() -> None:
    done = subprocess.run([sys.executable, "-c", LIGHT], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    planted = subprocess.run([sys.executable, "-c", "import numpy\n" + LIGHT], capture_output=True, text=True, check=False)
    assert planted.returncode != 0


def test_a_reader_that_goes_away_is_no_error() -> None:
    with subprocess.Popen([sys.executable, "-m", "cases", "list"], stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        process.stdout.close()  # nobody reads any more
        assert process.wait() == 0
        assert process.stderr is not None
        assert process.stderr.read() == b""


def test_standard_output_that_is_full(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    class Full(io.StringIO):
        def flush(self) -> None:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

        def fileno(self) -> int:
            return os.open(os.devnull, os.O_WRONLY)

    monkeypatch.setattr(sys, "stdout", Full())
    assert cli.main(["list"]) == 3
    assert capsys.readouterr().err.startswith("standard output cannot be written: No space left on device")
