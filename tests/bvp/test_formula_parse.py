"""Typed text to trees: what is read in each place, pasted typography among it."""

from __future__ import annotations

import math
import os
import pickle
import subprocess
import sys
from fractions import Fraction
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bvp.errors import FormulaError
from bvp.formula import Vocabulary, parse
from bvp.formula.tree import At, Binary, Call, Indexed, Name, Negative, Node, Number, Prime, Relation
from bvp.formula.vocabulary import ONE_ARGUMENT
from tests.drawn_formulas import VOCABULARY

GREEK = Vocabulary(("u", "θ"), "ξ", ("λ", "μ", "k"), measured=("κ",))
U, LAM = Name("u"), Name("lam")


def read(text: str, place: str = "equation", vocabulary: Vocabulary = VOCABULARY) -> Node:
    return parse(text, place, vocabulary, "case, equations, 1")


@pytest.mark.parametrize(
    ("text", "tree"),
    [
        ("u''", Prime(U, 2)),
        ("u'^2", Binary("^", Prime(U, 1), Number(2.0))),
        ("(u*lam)'", Prime(Binary("*", U, LAM), 1)),
        ("exp(u)'", Prime(Call("exp", (U,)), 1)),
        ("kappa'(u)", Call("kappa", (U,), (1,))),
        ("kappa(u)'", Prime(Call("kappa", (U,)), 1)),
        ("kappa'(u)'", Prime(Call("kappa", (U,), (1,)), 1)),
        ("q'", Prime(Name("q"), 1)),
        ("-u^2", Negative(Binary("^", U, Number(2.0)))),
        ("2^-u", Binary("^", Number(2.0), Negative(U))),
        ("u^2^3", Binary("^", U, Binary("^", Number(2.0), Number(3.0)))),
        ("u - v - x", Binary("-", Binary("-", U, Name("v")), Name("x"))),
        ("u/v*x", Binary("*", Binary("/", U, Name("v")), Name("x"))),
        ("-u*v", Binary("*", Negative(U), Name("v"))),
        ("+u", U),
        ("u**2", Binary("^", U, Number(2.0))),
        ("pi", Number(math.pi)),
        (".5 + 1.", Binary("+", Number(0.5), Number(1.0))),
        ("1e-3*u", Binary("*", Number(1e-3), U)),
        ("2.5E+2", Number(250.0)),
        ("u = v", Relation("=", U, Name("v"))),
        ("given(x, u)", Call("given", (Name("x"), U))),
        ("max(u, v)", Call("max", (U, Name("v")))),
        ("omega*u", Binary("*", Name("omega"), U)),
    ],
)
def test_equations(text: str, tree: Node) -> None:
    assert read(text) == tree


@pytest.mark.parametrize(
    ("place", "text", "tree"),
    [
        ("condition", "u(0)", At(U, Number(0.0))),
        ("condition", "u'(lam/2)", At(Prime(U, 1), Binary("/", LAM, Number(2.0)))),
        ("condition", "integral(u^2)", Call("integral", (Binary("^", U, Number(2.0)),))),
        ("condition", "max(u(0), 0)", Call("max", (At(U, Number(0.0)), Number(0.0)))),
        ("measure", "max(u)", Call("max", (U,))),
        ("measure", "u(1/2) >= 3", Relation(">=", At(U, Binary("/", Number(1.0), Number(2.0))), Number(3.0))),
        ("measure", "min(max(u), lam)", Call("min", (Call("max", (U,)), LAM))),
        ("scheme", "u[k]", Indexed("u", Fraction(0))),
        ("scheme", "v[ k - 1 ]", Indexed("v", Fraction(-1))),
        ("scheme", "x[k+1/2]", Indexed("x", Fraction(1, 2))),
        ("scheme", "f[k+1]", Indexed("f", Fraction(1))),
        ("scheme", "h*step", Binary("*", Name("h"), Name("step"))),
        ("plain", "1 + lam*x*u", Binary("+", Number(1.0), Binary("*", Binary("*", LAM, Name("x")), U))),
    ],
)
def test_the_extras_of_each_place(place: str, text: str, tree: Node) -> None:
    assert read(text, place) == tree


@pytest.mark.parametrize("name", ONE_ARGUMENT)
def test_every_function_is_there(name: str) -> None:
    assert read(f"{name}(u)") == Call(name, (U,))


@pytest.mark.parametrize(
    ("pasted", "typed"),
    [
        ("u’’", "u''"),
        ("u′′", "u''"),
        ("u″", "u''"),
        ('u"', "u''"),
        ("u”", "u''"),
        ("u‴", "u'''"),
        ("uʹ", "u'"),
        ("u² + v³", "u^2 + v^3"),
        ("u¹²", "u^12"),
        ("u⁻²", "u^-2"),
        ("u'²", "u'^2"),
        ("u − lam", "u - lam"),
        ("u – lam", "u - lam"),
        ("1e−3*u", "1e-3*u"),
        ("lam·u", "lam*u"),
        ("lam⋅u × v", "lam*u*v"),
        ("u∕v", "u/v"),
        ("u÷v", "u/v"),
        ("π*u", "pi*u"),
        ("lam\u00a0*\u2009u\u200b", "lam*u"),
        ("（u＋v）", "(u+v)"),
        ("uˆ2", "u^2"),
    ],
)
def test_pasted_typography_is_read_as_meant(pasted: str, typed: str) -> None:
    assert read(pasted) == read(typed)


def test_greek_letters_are_names() -> None:
    tree = read("θ″ + λ·κ′(θ)·θ² = 0", vocabulary=GREEK)
    assert tree == read("θ'' + λ*κ'(θ)*θ^2 = 0", vocabulary=GREEK)
    assert Name("λ") in (tree.left.right.left.left,)  # type: ignore[attr-defined]


def test_spellings_that_look_the_same_are_one_name() -> None:
    micro, mu, script_theta = "\u00b5", "\u03bc", "\u03d1"
    assert read(f"{micro}*{script_theta}", vocabulary=GREEK) == Binary("*", Name(mu), Name("θ"))
    typed_with_micro = Vocabulary(("u",), "x", (micro,))
    assert read(f"{mu}*u", vocabulary=typed_with_micro) == Binary("*", Name(micro), U)
    assert read("e\u0301*u", vocabulary=Vocabulary(("u",), "x", ("\u00e9",))) == Binary("*", Name("\u00e9"), U)


def test_k_is_an_index_only_inside_square_brackets() -> None:
    vocabulary = Vocabulary(("u",), "x", ("k", "h"))
    assert read("k*u[k]*h/step", "scheme", vocabulary) == Binary(
        "/", Binary("*", Binary("*", Name("k"), Indexed("u", Fraction(0))), Name("h")), Name("step")
    )


def test_places_are_remembered() -> None:
    tree = read("lam*exp(u)")
    assert isinstance(tree, Binary)
    assert (tree.place, tree.left.place, tree.right.place, tree.right.parts[0].place) == (3, 0, 4, 8)


@given(
    st.text(alphabet="uvx(01.2e)'+-*/^[]k,=<> λ²″½\x00\ud800", max_size=30),
    st.sampled_from(["equation", "condition", "measure", "scheme", "plain"]),
)
@settings(max_examples=1500, deadline=None)
def test_any_text_is_read_or_refused(text: str, place: str) -> None:
    refusal = None
    try:
        tree = read(text, place)
    except FormulaError as error:
        refusal = error
    if refusal is None:
        assert tree.height <= 151
    else:
        assert 0 <= refusal.column <= len(text)


ELSEWHERE = """
import pickle, sys
from bvp.formula.tree import Call, Name, walk
tree = pickle.load(sys.stdin.buffer)
assert Call("exp", (Name("u"),)) in set(walk(tree))  # found by its hash, which is another one in every process
"""


def test_a_tree_survives_the_way_between_processes() -> None:
    tree = read("u'' + lam*exp(u) = kappa'(u)")
    assert pickle.loads(pickle.dumps(tree)) == tree
    for seed in ("1", "2"):
        environment = {**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": str(Path(__file__).parents[2])}
        subprocess.run([sys.executable, "-c", ELSEWHERE], input=pickle.dumps(tree), env=environment, check=True, timeout=60)
