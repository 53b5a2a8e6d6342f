"""The rules of the house, held against every file; each rule also finds a planted fault, so that none of them sleeps."""

from __future__ import annotations

import re
import subprocess
import tomllib
from collections.abc import Callable
from pathlib import Path

import pytest

from tests import house_rules
from tests.house_rules import PACKAGES
from tests.reference import KNOWN

ROOT = Path(__file__).parents[1]
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", *PACKAGES, "tests"}
MADE_BY_TOOLS = {"build", "hairpin.egg-info", "__pycache__"}
CATALOGUE = sorted((ROOT / "cases" / "catalogue").glob("*.toml"))

Rule = Callable[[str, str], house_rules.Found]

PRODUCT: list[Rule] = [
    house_rules.upward_imports,
    house_rules.strangers_privacy,
    house_rules.text_run,
    house_rules.numba_elsewhere,
    house_rules.unexplained,
]
LIBRARY: list[Rule] = [house_rules.printing]
EVERYWHERE: list[Rule] = [house_rules.put_off, house_rules.too_long, house_rules.says_nothing]

PLANTED: list[tuple[Rule, str, str]] = [
    (house_rules.upward_imports, "bvp/grid.py", "import continuation"),
    (house_rules.upward_imports, "bvp/grid.py", "def f():\n    from cases.load import load"),
    (house_rules.upward_imports, "continuation/path.py", "from importlib import import_module\nimport_module('cases')"),
    (house_rules.upward_imports, "cases/run.py", "from tests.reference import KNOWN"),
    (house_rules.strangers_privacy, "cases/run.py", "from continuation.path import _hidden"),
    (house_rules.text_run, "bvp/formula/parse.py", "value = eval(text)"),
    (house_rules.text_run, "bvp/formula/parse.py", "from builtins import exec as go\nrun = exec"),
    (house_rules.text_run, "bvp/formula/parse.py", "import sympy\nsympy.sympify(text)"),
    (house_rules.text_run, "bvp/generated.py", "exec(text)"),
    (house_rules.text_run, "bvp/given.py", "loader.exec_module(module)"),
    (house_rules.text_run, "cases/store.py", "numpy.load(file, allow_pickle=True)"),
    (house_rules.text_run, "cases/store.py", "import pickle"),
    (house_rules.numba_elsewhere, "bvp/kernels/sweep.py", "from numba import njit"),
    (house_rules.unexplained, "bvp/grid.py", '"""Grids."""\ndef step(): ...'),
    (house_rules.unexplained, "bvp/grid.py", "x = 1"),
    (house_rules.printing, "bvp/newton.py", "print(1)"),
    (house_rules.printing, "bvp/newton.py", "import sys\nsys.stderr.write('1')"),
    (house_rules.printing, "continuation/follow.py", "import logging"),
    *((house_rules.put_off, "bvp/grid.py", f"x = 1  # {word}") for word in house_rules.PUT_OFF),
    (house_rules.too_long, "bvp/grid.py", "x = 1\n" * 351),
    (house_rules.says_nothing, "bvp/utils.py", ""),
    (house_rules.says_nothing, "tests/helpers/grid.py", ""),
]


def broken(rules: list[Rule], *folders: str) -> list[str]:
    """All that the rules find in the Python files under the folders."""
    files = [path for folder in folders for path in sorted((ROOT / folder).rglob("*.py"))]
    assert len(files) > 10
    return [
        fault for path in files for rule in rules for fault in rule(path.read_text(encoding="utf-8"), path.relative_to(ROOT).as_posix())
    ]


def test_the_product_keeps_its_rules() -> None:
    assert broken(PRODUCT, *PACKAGES) == []


def test_library_code_never_prints() -> None:
    assert broken(LIBRARY, "bvp", "continuation") == []


def test_files_are_short_and_done_and_have_telling_names() -> None:
    assert broken(EVERYWHERE, *PACKAGES, "tests") == []


@pytest.mark.parametrize(("rule", "where", "text"), PLANTED, ids=lambda value: value.__name__ if callable(value) else "")
def test_each_rule_finds_a_planted_fault(rule: Rule, where: str, text: str) -> None:
    assert list(rule(text, where))


def test_rules_leave_good_code_alone() -> None:
    good = '"""Grids."""\nimport re\nimport numpy\nfrom bvp.errors import InputError\nPATTERN = re.compile("a")\ndef _f(): ...\n'
    assert [fault for rule in [*PRODUCT, *LIBRARY, *EVERYWHERE] for fault in rule(good, "bvp/grid.py")] == []


def test_top_level_holds_what_it_should() -> None:
    assert top_level() == TOP


def top_level() -> set[str]:
    """What stands at the top of the project: in a checkout what git tracks, elsewhere all that tools have not made."""
    if (ROOT / ".git").exists():
        done = subprocess.run(["git", "-c", "safe.directory=*", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True)
        names = {line.partition("/")[0].strip('"') for line in done.stdout.splitlines()}
    else:
        names = {path.name for path in ROOT.iterdir()} - MADE_BY_TOOLS
    return {name for name in names if not name.startswith(".")}


def test_packages_that_are_installed_are_those_there_are() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    listed = project["tool"]["setuptools"]["packages"]
    folders = {path.parent for package in PACKAGES for path in (ROOT / package).rglob("*.py")}
    assert sorted(listed) == sorted(folder.relative_to(ROOT).as_posix().replace("/", ".") for folder in folders)
    assert all((folder / "__init__.py").is_file() for folder in folders)


def test_files_that_are_no_program_are_installed_too() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    data = project["tool"]["setuptools"]["package-data"]
    for package in PACKAGES:
        there = {path for path in (ROOT / package).rglob("*") if path.is_file() and path.suffix not in {".py", ".pyc"}}
        assert there == {path for pattern in data[package] for path in (ROOT / package).glob(pattern)}
        assert (ROOT / package / "py.typed") in there


@pytest.mark.parametrize("path", CATALOGUE, ids=lambda path: path.stem)
def test_published_values_have_sources_and_danger_a_caution(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    case = tomllib.loads(text)
    assert case["about"]
    for value in case.get("published", []):
        assert is_source(value["source"]), value["quantity"]
    if re.search("self-heating|stor(e|ed|age)|buckl|pressure|runaway|load", case["title"].lower()):
        assert "tests on the material" in case["caution"]
        assert "codes" in case["caution"]
        assert "licensed" in case["caution"]
    if "invented" in text.lower():
        assert "INVENTED" in case["about"]


def test_there_are_cases_to_hold_to_it() -> None:
    assert len(CATALOGUE) > 5


def is_source(text: str) -> bool:
    """Whether a text says where a number is from: a year of print, or in plain words that it was computed here, or how."""
    return bool(re.search(r"\b1[6-9]\d\d\b|\b20\d\d\b|recomputed|exact|closed form|common practice|abstract of", text))


def test_every_reference_value_has_a_source() -> None:
    assert [value.name for value in KNOWN.values() if not is_source(value.source)] == []


def test_a_source_that_says_nothing_is_no_source() -> None:
    assert not is_source("")
    assert not is_source("the literature")


def named_in_guide() -> set[str]:
    """The files and folders that DEVELOPERS.md names, from the top; a bare name belongs to the folder named before it."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    found: set[str] = set()
    for line in text.splitlines():
        folder = ""
        for name in re.findall(r"`([\w./-]+(?:\.py|\.toml|/))`", line):
            folder = name.partition("/")[0] + "/" if "/" in name and not folder else folder
            found.add(name if "/" in name and (ROOT / name).exists() else folder + name)
    return found


def test_the_guide_names_every_file_of_the_product() -> None:
    named = named_in_guide()
    assert not named & {f"{package}/" for package in PACKAGES}  # which would stand for all
    files = [path.relative_to(ROOT).as_posix() for package in PACKAGES for path in (ROOT / package).rglob("*.py")]
    missing = [file for file in files if "__" not in file and not any(file == name or file.startswith(name) for name in named)]
    assert missing == []


def test_the_guide_names_no_tests_that_are_not_there() -> None:
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    paths = set(re.findall(r"`((?:tests|bvp|continuation|cases|\.ci)/[\w./]*)`", text))
    assert len(paths) > 10
    assert [path for path in sorted(paths) if not (ROOT / path).exists()] == []
    modules = re.findall(r"python -m (tests[\w.]+)", text)
    assert [module for module in modules if not (ROOT / (module.replace(".", "/") + ".py")).exists()] == []


def test_continuous_integration_runs_what_the_readme_says() -> None:
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    for step in ("-m venv .venv && .venv/bin/pip install ", "'.[test]' && .venv/bin/python -m pytest"):
        assert step in readme
        assert step in script
