"""The rules of the house that a machine can check; DEVELOPERS.md says why they are there."""

from __future__ import annotations

import ast
import tomllib
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.reference import KNOWN

ROOT = Path(__file__).parents[1]
PACKAGES = ("bvp", "continuation", "cases")
BELOW = {"bvp": set(), "continuation": {"bvp"}, "cases": {"bvp", "continuation"}}
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", *PACKAGES, "tests"}
MADE_BY_TOOLS = {"build", "hairpin.egg-info", "__pycache__"}
LONGEST = 350
SAYING_NOTHING = {"util", "utils", "helper", "helpers", "core", "common", "misc"}


def sources(*folders: str) -> Iterator[Path]:
    """Every Python file under the folders."""
    for folder in folders:
        yield from sorted((ROOT / folder).rglob("*.py"))


def tree_of(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"), str(path))


def calls(path: Path) -> Iterator[tuple[str, int]]:
    """Names that are called as functions, with their lines."""
    for node in ast.walk(tree_of(path)):
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
            yield node.func.id, node.lineno


@pytest.mark.parametrize("package", PACKAGES)
def test_imports_point_downward(package: str) -> None:
    upward = []
    for path in sources(package):
        for node in ast.walk(tree_of(path)):
            modules = [name.name for name in node.names] if isinstance(node, ast.Import) else []
            if isinstance(node, ast.ImportFrom) and node.level == 0:
                modules = [node.module or ""]
            floors = {module.partition(".")[0] for module in modules} & {*PACKAGES, "tests"}
            upward += [f"{path.relative_to(ROOT)}:{node.lineno}" for floor in floors - BELOW[package] - {package}]  # type: ignore[attr-defined]
    assert not upward


def test_top_level_holds_what_it_should() -> None:
    found = {path.name for path in ROOT.iterdir() if not path.name.startswith(".")}
    assert found - MADE_BY_TOOLS <= TOP
    assert found >= TOP


def test_files_have_one_subject_and_a_telling_name() -> None:
    long = {str(path.relative_to(ROOT)): lines for path in sources(*PACKAGES, "tests") if (lines := path.read_text().count("\n")) > LONGEST}
    assert not long
    assert not [path for path in sources(*PACKAGES, "tests") if path.stem in SAYING_NOTHING]


def test_nothing_typed_is_run() -> None:
    """`exec` stands once, for kernels that are not kept on disk; their text is written from trees, never from what a user typed."""
    dangerous = {"eval", "exec", "compile", "sympify", "parse_expr", "lambdify", "__import__"}
    found = {(str(path.relative_to(ROOT)), name) for path in sources(*PACKAGES) for name, _ in calls(path) if name in dangerous}
    assert found <= {("bvp/generated.py", "exec"), ("bvp/generated.py", "compile")}


def test_library_code_never_prints() -> None:
    assert not [f"{path}:{line}" for path in sources("bvp", "continuation") for name, line in calls(path) if name == "print"]


def test_one_place_decorates_kernels() -> None:
    for path in sources(*PACKAGES):
        imported = {
            module.partition(".")[0]
            for node in ast.walk(tree_of(path))
            for module in (
                [name.name for name in node.names]
                if isinstance(node, ast.Import)
                else [node.module or ""]
                if isinstance(node, ast.ImportFrom)
                else []
            )
        }
        assert "numba" not in imported or path.relative_to(ROOT).as_posix() in {"bvp/kernels/jit.py", "bvp/cache_folder.py"}


def test_what_is_public_is_explained() -> None:
    missing = []
    for path in sources(*PACKAGES):
        module = tree_of(path)
        if not ast.get_docstring(module):
            missing.append(str(path.relative_to(ROOT)))
        for node in module.body:
            if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_") and not ast.get_docstring(node):
                missing.append(f"{path.relative_to(ROOT)}: {node.name}")
    assert not missing


def test_nothing_is_put_off() -> None:
    words = [
        "TO" + "DO",
        "FIX" + "ME",
        "NotImplemented" + "Error",
        "pytest." + "skip(",
        "mark." + "skip",
        "mark." + "xfail",
        "assert " + "True",
    ]
    held = [
        f"{path.relative_to(ROOT)}: {word}"
        for path in sources(*PACKAGES, "tests")
        for word in words
        if word in path.read_text(encoding="utf-8")
    ]
    assert not held


def test_packages_that_are_installed_are_those_there_are() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())
    listed = set(project["tool"]["setuptools"]["packages"])
    there = {path.parent.relative_to(ROOT).as_posix().replace("/", ".") for path in sources(*PACKAGES) if path.name == "__init__.py"}
    folders = {path.parent.relative_to(ROOT).as_posix().replace("/", ".") for path in sources(*PACKAGES)}
    assert listed == there == folders


@pytest.mark.parametrize("path", sorted((ROOT / "cases" / "catalogue").glob("*.toml")), ids=lambda path: path.stem)
def test_published_values_have_sources_and_danger_a_caution(path: Path) -> None:
    case = tomllib.loads(path.read_text(encoding="utf-8"))
    for value in case.get("published", []):
        assert len(value["source"]) > 5
    text = path.read_text(encoding="utf-8").lower()
    if any(word in text for word in ("self-heating", "stored", "store", "buckling", "pressure", "runaway")):
        assert "codes" in case["caution"]
        assert "licensed" in case["caution"]
    if "invented" in text:
        assert "INVENTED" in case["about"]


def test_every_reference_value_has_a_source() -> None:
    assert all(len(value.source) > 5 for value in KNOWN.values())
