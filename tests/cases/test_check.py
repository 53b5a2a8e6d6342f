"""`hairpin check`: everything that is wrong or doubtful at once, and nothing solved."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from cases.check import Findings, check, text_of
from cases.load import bundled_names
from cases.settings import Settings
from tests.cases.test_faults import GOOD


def checked(folder: Path, text: str, settings: Settings | None = None) -> Findings:
    path = folder / "mine.toml"
    path.write_text(text)
    return check(str(path), settings or Settings())


@pytest.mark.parametrize("name", bundled_names())
def test_nothing_is_wrong_or_doubtful_in_the_bundled_cases(name: str) -> None:
    assert check(name, Settings()) == Findings(name, (), ())


END = '\nwithin = [0, 10]\nuntil = "max(u) > 6"'

WRONG = [
    ("lam*exp(u)", "lam*exp(v)", ["mine.toml, equations, 1", '"v"']),
    ("lam*exp(u)", "lam exp(u)", ["mine.toml, equations, 1"]),
    ("lam*exp(u)", "__import__('os').system('true')", ["mine.toml, equations, 1"]),
    ('"u(1) = 0"]', '"u(1) = 0", "u(0) = 1"]', ["2 conditions are needed, 3 given"]),
    ('"u(0) = 0", ', "", ["2 conditions are needed, 1 given"]),
    ('"u(0) = 0", ', '"u(1/2) = 0", ', ["no end of the domain"]),
    ("x = [0, 1]", "x = [0, 1, 2]", ["3 ends"]),
    ("x = [0, 1]", "x = [1, 0]", ["the left end below the right one"]),
    (END, '\nuntil = "max(u)"', ["[trace] until", "compares nothing"]),
    (END, '\nmeasure = "max(u) > 3"', ["[trace] measure 1", "is a comparison"]),
    (END, '\nmeasure = "u"', ["[trace] measure 1", "without a place"]),
    (END, '\nmeasure = ["max(u)", "maxi(u)"]', ["[trace] measure 2", '"maxi"']),
    (END, '\nbranches = "all"', ["not built yet"]),
    (END, "\nlook_for_others = true", ["not built yet"]),
    (END, '\n[discretization]\nscheme = "centrl"', ['there is no scheme "centrl"', '"central"']),
    (END, '\n[scheme.central]\ndenominator = "h^2"', ["built-in scheme of that name"]),
    (END, '\n[scheme.mine]\ndenominator = "2*log(cosh(hh))"', ["[scheme.mine], denominator", '"hh"']),
    (END, '\n[measured]\nk = "none.csv"', ["[measured] k", "No such file"]),
    (END, '\n[[published]]\nquantity = "fold 1"\nvalue = 1.0\nsource = "b"', ["[published 1]", "names no value"]),
    ("[parameters]\nlam = 0.0", "[parameters]\nu = 0.0", ["u"]),
]


@pytest.mark.parametrize(("old", "new", "words"), WRONG, ids=[new[:50].strip() or f"without {old}" for old, new, _ in WRONG])
def test_wrong(tmp_path: Path, old: str, new: str, words: list[str]) -> None:
    good = GOOD.rstrip() + END
    assert old in good
    findings = checked(tmp_path, good.replace(old, new, 1))
    for word in words:
        assert word in "\n".join(findings.wrong)


def test_several_wrong_things_are_said_at_once(tmp_path: Path) -> None:
    text = GOOD.rstrip() + '\nuntil = "max(u)"\nmeasure = "u"\nbranches = "all"\n[discretization]\nscheme = "centrl"'
    findings = checked(tmp_path, text)
    assert len(findings.wrong) == 4
    assert text_of(findings).count("\n- ") == 4


@pytest.mark.parametrize(
    ("old", "new", "word"),
    [
        ("lam = 0.0", "lam = 0.0\nmu = 1.0", "the parameter mu is used nowhere"),
        (END, "", "the trace has no end"),
        (END, "\nwithin = [1, 10]", "outside its range 1 to 10"),
        (END, END + "\n[discretization]\ndigits = 14", "14 digits are wanted"),
        (END, END + '\n[[published]]\nquantity = "branch point 1"\nvalue = 1.0\nsource = "b"', "branch points are not built yet"),
    ],
)
def test_doubtful(tmp_path: Path, old: str, new: str, word: str) -> None:
    findings = checked(tmp_path, (GOOD.rstrip() + END).replace(old, new, 1))
    assert findings.wrong == ()
    assert len(findings.doubtful) == 1
    assert word in findings.doubtful[0]


def test_settings_are_checked_with_the_case(tmp_path: Path) -> None:
    assert 'no parameter "mu"' in checked(tmp_path, GOOD, Settings(at={"mu": 1.0})).wrong[0]
    assert 'no scheme "centrl"' in checked(tmp_path, GOOD, Settings(scheme="centrl")).wrong[0]
    assert "is no bundled case" in check("slb", Settings()).wrong[0]


LIGHT = """
import sys
from cases.cli import main
main(["check", "straw-store-depth"])
heavy = {"numba", "matplotlib", "sympy"} & set(sys.modules)
sys.exit(f"imported: {heavy}" if heavy else 0)
"""


def test_check_compiles_and_draws_nothing() -> None:
    done = subprocess.run([sys.executable, "-c", LIGHT], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
