"""The rules of the house as functions that find what breaks them: each takes a file's text and where it stands.

`tests/test_house_rules.py` turns them on the project, and on text with a planted fault that they must find.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator

PACKAGES = ("bvp", "continuation", "cases")
BELOW = {"bvp": set[str](), "continuation": {"bvp"}, "cases": {"bvp", "continuation"}}
LONGEST = 350
SAYING_NOTHING = {"util", "utils", "utilities", "helper", "helpers", "core", "common", "misc", "base", "tools"}

# Text is run in one place only, as a module of kernels: it is written from trees and never typed by a user.
RUNS_TEXT = {
    "eval",
    "exec",
    "compile",
    "sympify",
    "parse_expr",
    "lambdify",
    "__import__",
    "exec_module",
    "source_to_code",
    "spec_from_loader",
}
RUNS_TEXT_AS_METHOD = RUNS_TEXT - {"compile"}  # re.compile reads patterns
RUNS_PROGRAMS = {"pickle", "marshal", "shelve", "dill", "subprocess", "code", "runpy"}
MAY_RUN_GENERATED = "bvp/generated.py"
MAY_IMPORT_NUMBA = {"bvp/kernels/jit.py", "bvp/cache_folder.py"}

# Put together here, so that this file does not hold what it looks for.
PUT_OFF = tuple(
    "".join(parts)
    for parts in (
        ("TO", "DO"),
        ("FIX", "ME"),
        ("XX", "X"),
        ("NotImplemented", "Error"),
        ("skip", "if"),
        ("pytest.", "skip"),
        ("mark.", "skip"),
        ("mark.", "xfail"),
        ("pytest.", "xfail"),
        ("importor", "skip"),
        ("assert ", "True"),
    )
)

Found = Iterator[str]


def upward_imports(text: str, where: str) -> Found:
    """Imports of a floor above, or of the tests."""
    floor = where.partition("/")[0]
    for module, line in imported(text):
        other = module.partition(".")[0]
        if other in {*PACKAGES, "tests"} - {floor} - BELOW[floor]:
            yield f"{where}:{line} imports {module}"


def strangers_privacy(text: str, where: str) -> Found:
    """Names with a leading underscore that are imported from another file."""
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.ImportFrom) and (node.module or "").partition(".")[0] in PACKAGES:
            for name in node.names:
                if re.match(r"_[^_]", name.name):
                    yield f"{where}:{node.lineno} imports {name.name}"


def text_run(text: str, where: str) -> Found:
    """Calls that run text as a program, and imports that can."""
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.Name) and node.id in RUNS_TEXT:
            yield f"{where}:{node.lineno} {node.id}"
        elif isinstance(node, ast.Attribute) and node.attr in RUNS_TEXT_AS_METHOD and where != MAY_RUN_GENERATED:
            yield f"{where}:{node.lineno} {node.attr}"
        elif isinstance(node, ast.keyword) and node.arg == "allow_pickle" and not _says_false(node.value):
            yield f"{where}:{node.value.lineno} allow_pickle"
    for module, line in imported(text):
        if module.partition(".")[0] in RUNS_PROGRAMS:
            yield f"{where}:{line} imports {module}"


def printing(text: str, where: str) -> Found:
    """What writes to the terminal or a log in library code."""
    for node in ast.walk(ast.parse(text)):
        named = node.id if isinstance(node, ast.Name) else node.attr if isinstance(node, ast.Attribute) else ""
        if named in {"print", "input", "stdout", "stderr"}:
            yield f"{where}:{node.lineno} {named}"  # type: ignore[attr-defined]  # names and attributes both have it
    for module, line in imported(text):
        if module.partition(".")[0] == "logging":
            yield f"{where}:{line} imports {module}"


def numba_elsewhere(text: str, where: str) -> Found:
    """Imports of numba outside the one file that decorates kernels (and the one that asks for its version)."""
    for module, line in imported(text):
        if module.partition(".")[0] == "numba" and where not in MAY_IMPORT_NUMBA:
            yield f"{where}:{line} imports {module}"


def unexplained(text: str, where: str) -> Found:
    """Files, public functions and public classes without a docstring."""
    module = ast.parse(text)
    if not ast.get_docstring(module):
        yield where
    for node in module.body:
        if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_") and not ast.get_docstring(node):
            yield f"{where}:{node.lineno} {node.name}"


def put_off(text: str, where: str) -> Found:
    """Words of what is not done or not checked."""
    for number, line in enumerate(text.splitlines(), start=1):
        for word in PUT_OFF:
            if re.search(rf"(?<![A-Za-z]){re.escape(word)}", line):
                yield f"{where}:{number} {word}"


def too_long(text: str, where: str) -> Found:
    """Files of more lines than one subject needs."""
    lines = text.count("\n")
    if lines > LONGEST:
        yield f"{where} has {lines} lines"


def says_nothing(text: str, where: str) -> Found:
    """Files and folders whose name does not tell what is in them."""
    del text  # the name is what counts
    for part in where.removesuffix(".py").split("/"):
        if part in SAYING_NOTHING:
            yield where


def imported(text: str) -> Iterator[tuple[str, int]]:
    """Names of all modules that a file imports, at its top or inside its functions, with their lines."""
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.Import):
            yield from ((name.name, node.lineno) for name in node.names)
        elif isinstance(node, ast.ImportFrom) and node.level == 0:
            yield node.module or "", node.lineno
        elif isinstance(node, ast.Call) and _called(node) == "import_module":
            yield from ((str(name.value), node.lineno) for name in node.args if isinstance(name, ast.Constant))


def _called(node: ast.Call) -> str:
    return node.func.attr if isinstance(node.func, ast.Attribute) else node.func.id if isinstance(node.func, ast.Name) else ""


def _says_false(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value is False
