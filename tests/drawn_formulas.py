"""Formulas drawn at random, as trees: what the tests of the formula language are run on."""

from __future__ import annotations

from hypothesis import strategies as st

from bvp.formula import Vocabulary
from bvp.formula.tree import Binary, Call, Name, Negative, Node, Number, Prime

VOCABULARY = Vocabulary(
    unknowns=("u", "v"),
    coordinate="x",
    parameters=("lam", "Bi"),
    where=("q",),
    measured=("kappa",),
    functions={"given": 2},
    numbers=("omega",),
)
# Irregular values, so that no two subtrees tie by chance.
VALUES = {"u": 0.7310585786300049, "v": 1.4142135623730951, "x": 0.3678794411714423, "lam": 1.2020569031595942, "Bi": 0.5772156649015329}
ENTIRE = ("exp", "sin", "cos", "sinh", "cosh", "tanh", "atan", "erf")
PARTIAL = ("log", "sqrt", "tan", "asin", "acos", "abs")

literals = st.sampled_from([0.5, 1.0, 2.0, 3.0, 0.1, 1e-3, 12.0]).map(Number)
names = st.sampled_from(sorted(VALUES)).map(Name)
exponents = st.sampled_from([Number(2.0), Number(3.0), Number(0.5), Negative(Number(1.0)), Negative(Number(2.0)), Number(1.5), Name("lam")])


def _larger(parts: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        st.builds(Binary, st.sampled_from("+-*/"), parts, parts),
        st.builds(lambda base, exponent: Binary("^", base, exponent), parts, exponents),
        st.builds(Negative, parts),
        st.builds(lambda name, part: Call(name, (part,)), st.sampled_from(ENTIRE + PARTIAL), parts),
        st.builds(lambda name, left, right: Call(name, (left, right)), st.sampled_from(["min", "max"]), parts, parts),
    )


pointwise = st.recursive(st.one_of(names, literals), _larger, max_leaves=8)


def _with_derivatives(parts: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        _larger(parts),
        st.builds(lambda part: Call("laplacian", (part,)), parts),
        st.builds(lambda left, right: Call("given", (left, right)), parts, parts),
        st.builds(lambda part, order: Call("kappa", (part,), (order,) if order else ()), parts, st.integers(0, 3)),
        st.builds(
            Prime, parts.filter(lambda part: not isinstance(part, Number) and part not in (Name("lam"), Name("Bi"))), st.integers(1, 3)
        ),
    )


equations = st.recursive(st.one_of(names, literals), _with_derivatives, max_leaves=10)
