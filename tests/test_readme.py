"""The README held against what the tool does: its sessions, its tables, its program."""

from __future__ import annotations

import contextlib
import io
import re
import shlex
import tomllib
from collections import OrderedDict
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest

import bvp
from bvp import discretize
from cases import cli, options, run
from cases.build import problem_of, scheme_of
from cases.load import bundled_names, case_of, load

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
NUMBER = r"[-−]?\d+(?:\.\d+)?(?:e[-+]?\d+)?"
AGO = re.compile(r"^(Work|Branch|  +[\d.]+ +[\d.]+ +[\d.]+ +[\d.]+ +\d)")  # how long it took, and where steps happened to fall


def blocks(kind: str) -> list[str]:
    """The fenced blocks of one kind, in their order."""
    return re.findall(rf"^```{kind}\n(.*?)^```$", README, re.DOTALL | re.MULTILINE)


def table_under(head: str) -> list[list[str]]:
    """The rows of the table whose first line starts with this head."""
    rows = README[README.index(f"\n{head}") + 1 :].partition("\n\n")[0].splitlines()[2:]
    return [[cell.strip() for cell in row.strip().strip("|").split("|")] for row in rows]


@pytest.fixture(autouse=True)
def _interpreted(monkeypatch: pytest.MonkeyPatch) -> None:
    """Rows evaluated by NumPy: compiling every case would take longer than tracing it."""
    made = discretize.Discretization
    monkeypatch.setattr(discretize, "Discretization", lambda *given, **keywords: made(*given, **{**keywords, "compiled": False}))
    monkeypatch.setattr(discretize, "_MADE", OrderedDict())  # no other test is to meet what is made here


def sessions() -> list[tuple[str, str]]:
    """The command lines shown, each with what it printed."""
    found = []
    for block in blocks("text"):
        for part in re.split(r"^\$ ", block, flags=re.MULTILINE)[1:]:
            command, _, printed = part.partition("\n")
            found.append((command, printed))
    return found


def same_text(line: str) -> str:
    """A line without its numbers and the widths that follow from them."""
    return re.sub(r"\s+", " ", re.sub(NUMBER, "#", re.sub("─+", "─", line))).strip()


@pytest.mark.parametrize(("command", "printed"), sessions(), ids=lambda value: value.partition("\n")[0][:40])
def test_a_session_is_what_the_command_prints(command: str, printed: str, capsys: pytest.CaptureFixture[str]) -> None:
    program, *words = shlex.split(command)
    assert program == "hairpin"
    assert cli.main(words) == 0
    output = capsys.readouterr().out
    shown = [line for line in printed.splitlines() if line.strip() not in ("", "…") and not AGO.match(line)]
    there = [same_text(line) for line in output.splitlines()]
    assert [line for line in shown if same_text(line) not in there] == []
    for value, uncertainty in re.findall(rf"({NUMBER}) ± ({NUMBER})", printed):
        near = [
            float(a)
            for a, b in re.findall(rf"({NUMBER}) ± ({NUMBER})", output)
            if abs(float(a) - float(value)) <= float(b) + float(uncertainty)
        ]
        assert near, f"{value} ± {uncertainty} is not in the output"


def test_there_are_sessions_to_be_held() -> None:
    assert len(sessions()) >= 4


def test_the_table_of_commands_is_what_the_command_line_has() -> None:
    shown = [re.match(r"`hairpin (\w+)", first).group(1) for first, _ in table_under("| command |")]  # type: ignore[union-attr]
    assert sorted(shown) == sorted(options.COMMANDS)


def test_the_table_of_schemes_is_what_there_is() -> None:
    assert [row[0].strip("`") for row in table_under("| scheme |")] == bvp.schemes.names()


def test_the_case_of_ones_own_is_a_case() -> None:
    (text,) = blocks("toml")
    case = case_of(tomllib.loads(text), "own", ROOT / "own.toml", text)
    problem = problem_of(case)
    assert scheme_of(case, problem).name == "mine"
    central = replace(case, discretization=replace(case.discretization, scheme="central"))
    own, other = run.trace(case).turning_points, run.trace(central).turning_points
    assert len(own) == len(other) == 2
    for one, two in zip(own, other, strict=True):
        assert one.uncertainty is not None
        assert two.uncertainty is not None
        assert abs(one.value - two.value) <= one.uncertainty + two.uncertainty < 1e-6


@cache
def traced(name: str) -> Any:
    """A bundled case's result."""
    return run.trace(load(name))


def test_the_table_of_cases_is_what_they_give() -> None:
    rows = table_under("| case |")
    assert sorted({row[0].strip("`") for row in rows}) == bundled_names()
    for name, quantity, published, computed, source in rows:
        case = load(name.strip("`"))
        number = int(re.search(r"turning point (\d+)", quantity).group(1))  # type: ignore[union-attr]
        point = traced(case.name).turning_points[number - 1]
        value, uncertainty = re.findall(NUMBER, computed)[:2]
        assert abs(float(value) - point.value) <= float(uncertainty) + point.uncertainty, quantity
        if published == "none":
            assert not case.published
            continue
        (known,) = [one for one in case.published if one.quantity == f"turning point {number}"]
        assert source == known.source
        assert float(published.partition(" ")[0]) == pytest.approx(known.value, rel=1e-15)


def test_the_program_prints_what_is_shown() -> None:
    (program,) = [block for block in blocks("python") if "import bvp" in block]
    output = io.StringIO()
    with contextlib.redirect_stdout(output):
        exec(compile(program, "README.md", "exec"), {})
    shown = README.partition("prints\n\n```text\n")[2].partition("```")[0].splitlines()
    printed = output.getvalue().splitlines()
    assert [same_text(line) for line in printed] == [same_text(line) for line in shown]
    for one, other in zip(shown, printed, strict=True):
        for a, b in zip(re.findall(NUMBER, one), re.findall(NUMBER, other), strict=True):
            small = abs(float(a)) < 1e-6 and abs(float(b)) < 1e-6  # an uncertainty; those differ from machine to machine
            assert small or float(b) == pytest.approx(float(a), rel=1e-8), other
