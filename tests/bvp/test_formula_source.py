"""Trees as Python source: run here, and only here, the text gives what evaluation gives."""

from __future__ import annotations

import math
import re

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from bvp.formula import derivative, evaluate, float_functions, parse, source
from bvp.formula.tree import Binary, Call, Name, Negative, Node, Number, walk
from tests.drawn_formulas import VALUES, VOCABULARY, pointwise

FUNCTIONS = {name: f"functions['{name}']" for name in float_functions()}
LINE = re.compile(r"t\d+ = ")


def spelled(leaf: Node) -> str:
    assert isinstance(leaf, Name)
    return leaf.name


def run(trees: list[Node]) -> list[float]:
    """What the source text of some trees works out to."""
    lines, results = source(trees, lambda leaf: f"leaves[{spelled(leaf)!r}]", FUNCTIONS)
    assert all(LINE.match(line) for line in lines)
    place = {"leaves": VALUES, "functions": float_functions()}
    exec("\n".join([*lines, f"results = [{', '.join(results)}]"]), place)  # the text was made from a tree two lines above
    return place["results"]  # type: ignore[return-value]


def value(tree: Node) -> float:
    return float(evaluate(tree, lambda leaf: VALUES[leaf.name], float_functions()))


def is_tame(tree: Node) -> bool:
    """Whether every part is a real number of moderate size, so that rounding in another order stays small."""
    return all(1e-6 < abs(part) < 1e4 for part in map(value, walk(tree))) and not any(_loses_digits(node) for node in walk(tree))


def _loses_digits(node: Node) -> bool:
    return isinstance(node, Binary) and node.operator in "+-" and abs(value(node)) < 1e-3 * abs(value(node.left))


@settings(max_examples=500, deadline=None)
@given(st.lists(pointwise, min_size=1, max_size=3))
def test_running_the_text_equals_evaluation(trees: list[Node]) -> None:
    assume(all(is_tame(tree) for tree in trees))
    assert run(trees) == pytest.approx([value(tree) for tree in trees], rel=1e-9)


@settings(max_examples=200, deadline=None)
@given(st.lists(pointwise, min_size=1, max_size=3))
def test_every_operation_is_worked_out_once(trees: list[Node]) -> None:
    lines, _ = source(trees, spelled, FUNCTIONS)
    made = [line.partition(" = ")[2] for line in lines]
    # A power is made of products and a reciprocal, which may stand elsewhere too; everything else is there once.
    others = [text for text in made if " * " not in text and not text.startswith("1.0 / ")]
    assert len(set(others)) == len(others)
    assert len(set(lines)) == len(lines)


def lines_of(text: str) -> tuple[list[str], list[str]]:
    measured = {"kappa": "table(7, {}, 0)", "kappa:1": "table(7, {}, 1)"}
    return source([parse(text, "equation", VOCABULARY)], spelled, FUNCTIONS | measured)


@pytest.mark.parametrize(
    ("text", "lines", "result"),
    [
        ("u", [], "u"),
        ("2", [], "2.0"),
        ("-2", [], "(-2.0)"),
        ("u + 2*v", ["t0 = 2.0 * v", "t1 = u + t0"], "t1"),
        ("u^2", ["t0 = u * u"], "t0"),
        ("u^-1", ["t0 = 1.0 / u"], "t0"),
        ("u^13", ["t0 = u * u", "t1 = t0 * u", "t2 = t1 * t1", "t3 = t2 * t2", "t4 = t3 * u"], "t4"),
        ("u^0.5", ["t0 = u ** 0.5"], "t0"),
        ("u^17", ["t0 = u ** 17.0"], "t0"),
        ("u^v", ["t0 = u ** v"], "t0"),
        ("exp(u)*exp(u)", ["t0 = functions['exp'](u)", "t1 = t0 * t0"], "t1"),
        ("max(u, v)", ["t0 = functions['max'](u, v)"], "t0"),
        ("kappa'(u)", ["t0 = table(7, u, 1)"], "t0"),
        ("kappa(2*u)", ["t0 = 2.0 * u", "t1 = table(7, t0, 0)"], "t1"),
    ],
)
def test_the_lines(text: str, lines: list[str], result: str) -> None:
    assert lines_of(text) == (lines, [result])


@pytest.mark.parametrize("exponent", [n for n in range(-20, 21) if n])
def test_whole_powers(exponent: int) -> None:
    tree = Binary("^", Name("u"), Number(float(exponent)))
    assert run([tree]) == pytest.approx([VALUES["u"] ** exponent], rel=4e-15)


def test_trees_share_their_common_parts() -> None:
    tree = parse("lam*exp(u)*u", "equation", VOCABULARY)
    slope = derivative(tree, Name("u"))
    lines, _ = source([tree, slope], spelled, FUNCTIONS)
    assert sum("exp" in line for line in lines) == 1
    assert lines == ["t0 = functions['exp'](u)", "t1 = lam * t0", "t2 = t1 * u", "t3 = t2 + t1"]
    assert run([tree, slope]) == pytest.approx([value(tree), value(slope)], rel=1e-14)


def test_a_long_chain_needs_no_deep_stack() -> None:
    tree: Node = Name("u")
    for _ in range(3000):
        tree = Negative(Call("sin", (tree,)))
    lines, results = source([tree], lambda leaf: "u", FUNCTIONS)
    assert (len(lines), results) == (6000, ["t5999"])


def test_numbers_keep_all_their_digits() -> None:
    for number in (math.pi, 1e-300, 0.1, 123456789.123456789):
        assert run([Binary("*", Number(1.0), Number(number))]) == [number]
