"""The names of a problem: which may be taken, and that none stands for two things."""

from __future__ import annotations

import pytest

from bvp.errors import ProblemError
from bvp.formula import Vocabulary, parse
from bvp.formula.tree import Name


@pytest.mark.parametrize("name", ["exp", "min", "laplacian", "grad", "mean", "integral", "pi", "π", "erf"])
def test_no_name_is_taken_from_the_language(name: str) -> None:
    for vocabulary in (
        Vocabulary((name,), "x"),
        Vocabulary(("u",), name),
        Vocabulary(("u",), "x", (name,)),
        Vocabulary(("u",), "x", where=(name,)),
    ):
        with pytest.raises(ProblemError, match="keeps for itself"):
            vocabulary.check()


@pytest.mark.parametrize("name", ["sign", "fit", "cardinal", "step_le", "log1p"])
def test_no_function_is_called_like_one_that_the_tool_makes(name: str) -> None:
    with pytest.raises(ProblemError, match="keeps for itself"):
        Vocabulary(("u",), "x", measured=(name,)).check()
    with pytest.raises(ProblemError, match="keeps for itself"):
        Vocabulary(("u",), "x", functions={name: 1}).check()
    Vocabulary(("u",), "x", (name,)).check()


def test_no_name_stands_for_two_things() -> None:
    with pytest.raises(ProblemError, match='"u" is both an unknown and a parameter'):
        Vocabulary(("u",), "x", ("lam", "u")).check("case")
    with pytest.raises(ProblemError, match='"x" is both the coordinate and a name under'):
        Vocabulary(("u",), "x", where=("x",)).check()
    with pytest.raises(ProblemError, match="is both a parameter and a parameter"):
        Vocabulary(("u",), "x", ("\u00b5", "\u03bc")).check()


@pytest.mark.parametrize("name", ["", "2u", "u v", "u'", "x²", "a-b", "a.b", "½", "u\u200b", 3])
def test_what_is_no_name_is_refused(name: object) -> None:
    with pytest.raises(ProblemError, match="Expected: a letter, then letters, digits or underscores"):
        Vocabulary(("u",), "x", (name,)).check()  # type: ignore[arg-type]


@pytest.mark.parametrize("name", ["λ", "_a", "T0", "T₀", "é", "u_1"])
def test_names_that_are_allowed(name: str) -> None:
    vocabulary = Vocabulary((name,), "x")
    vocabulary.check()
    assert parse(name, "equation", vocabulary) == Name(name)
