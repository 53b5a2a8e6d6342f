"""Text that is no formula, or none for its place: each is refused with the place, what was expected and what to do."""

from __future__ import annotations

import pickle

import pytest

from bvp.errors import FormulaError
from bvp.formula import parse
from tests.drawn_formulas import VOCABULARY

REFUSED: dict[str, list[tuple[str, int, str, str]]] = {  # text, column of the caret, what is found, what to do
    "equation": [
        # what would be a program elsewhere
        ("__import__('os').system('true')", 16, "a dot", "Expected"),
        ("u.__class__", 1, "a dot", "Expected"),
        ("lambda: u", 6, "a colon", "Expected"),
        ('exec("1")', 0, '"exec" is not known', 'Did you mean "exp"?'),
        ("u; v", 1, "a semicolon", "Expected"),
        ("u if v else 1", 2, "two factors side by side", '"*"'),
        ("`u`", 0, "'`'", "Expected"),
        ("{u}", 0, "a brace", "round brackets"),
        ("u@v", 1, "an at sign", "Expected"),
        ("\x1b[31mu", 0, "'\\x1b'", "Expected"),
        # bounds
        ("(" * 100000 + "u", 4000, "100001 characters; the bound is 4000", "[where]"),
        ("(" * 100 + "u" + ")" * 100, 60, "more than 60 brackets", "[where]"),
        ("exp(" * 70 + "u" + ")" * 70, 240, "more than 60 brackets", "[where]"),
        ("u^" * 80 + "u", 120, "more than 60 brackets or powers", "[where]"),
        ("u+" * 1500 + "u", 299, "more than 150 operations", "[where]"),
        ("2*" * 400 + "u", 299, "more than 150 operations", "[where]"),
        ("u^(" + "1+" * 500 + "1)", 302, "more than 150 operations", "[where]"),
        ("-" * 500 + "u", 60, "more than 60 signs", "one"),
        ("u^100", 1, "the power 100 is beyond 64", "exp"),
        ("u^-65", 1, "the power -65 is beyond 64", "exp"),
        ("2^3^4", 1, "the power 81", "exp"),
        ("9^9^9^9", 3, "the power", "exp"),
        ("u^exp(9)", 1, "the power 8103", "exp"),
        ("1e400*u", 0, "1e400 is too large; the bound is 1e+300", "Scale"),
        ("1e-400*u", 0, "too small", "Scale"),
        ("9" * 400, 0, "too large", "Scale"),
        ("u" + "'" * 12, 1, "12 primes; the bound is 8", "Split"),
        # products without a sign
        ("2u", 1, "two factors side by side", '"*"'),
        ("lam exp(u)", 4, "two factors side by side", '"*"'),
        ("(u)3", 3, "two factors side by side", '"*"'),
        ("3(u)", 1, "two factors side by side", '"*"'),
        ("lam(u)", 3, "two factors side by side", '"*"'),
        ("0x10", 1, "two factors side by side", '"*"'),
        # names
        ("lamm*u", 0, '"lamm" is not known', 'Did you mean "lam"? Known here: x, u, v, lam, Bi, q, omega, kappa, given.'),
        ("LAM*u", 0, '"LAM" is not known', 'Did you mean "lam"?'),
        ("kapa(u)", 0, '"kapa" is not known', 'Did you mean "kappa"?'),
        ("ln(u)", 0, '"ln" is not known', "Write log(…)."),
        ("e^u", 0, '"e" is not known', "write exp(1)"),
        ("h*u", 0, '"h" is not known', "[scheme]"),
        ("sign(u)", 0, '"sign" is not known', "Known here"),
        ("cardinal(u)", 0, '"cardinal" is not known', "Known here"),
        ("q(u)", 1, "q is a formula under [where]", "q by itself"),
        ("a" * 500, 0, '"' + "a" * 40 + '…" is not known', "Known here"),
        # wrong place
        ("u(0) = 1", 1, "u(…) is u at a place, which belongs in conditions and measures", "write u for the function"),
        ("u'(1)", 2, "u'(…) is u' at a place", "write u'"),
        ("u[k+1] - u[k]", 1, "those belong in schemes, under [scheme]", "write u for the function"),
        ("mean(u)", 0, "mean(…) is a measure; measures stand under [trace]", "pointwise"),
        ("max(u)", 0, "max of one argument is a measure", "max(a, b)"),
        ("integral(u)", 0, "belongs in conditions and measures", "pointwise"),
        ("u > 0", 2, 'a comparison ">" stands only in a measure', '"="'),
        # signs, brackets, arguments
        ("", 0, "empty", "Write it"),
        ("u +", 3, "ends too early", "Expected: a number, a name or a bracket"),
        ("* u", 0, '"*" where a number', "missing before it"),
        ("u ** ** 2", 5, '"^" where a number', "missing before it"),
        ("(u", 0, "the bracket opened at column 1 is never closed", 'Add ")"'),
        ("u)", 1, 'a ")" that was never opened', "Take it away"),
        ("(u]", 2, 'a "]" where the bracket opened at column 1 closes with ")"', 'Write ")"'),
        ("[u]", 0, "square brackets", "round"),
        ("exp u", 4, "exp without its bracket", "exp(…)"),
        ("exp()", 4, '")" where a number', "missing"),
        ("exp(u, v)", 0, "exp takes 1 argument, not 2", "exp(…)"),
        ("max(u, v, x)", 0, "max takes 2 arguments, not 3", "max(a, b)"),
        ("given(u)", 0, "given takes 2 arguments, not 1", "given(…, …)"),
        ("kappa", 0, "kappa is a function and needs its argument", "kappa(…)"),
        ("given'(x, u)", 0, "a prime on given", "derivatives"),
        ("1,5*u", 1, "a comma", "0.5"),
        ("u = v = 0", 6, 'a second "="', "Expected: one"),
        ("u == 0", 2, "two equals signs", '"="'),
        ("(u = 0)", 3, '"=" inside a bracket', "between the two sides"),
        ("lam'", 3, "lam is a number; its derivative along x is 0", "prime away"),
        ("3'", 1, "a prime on a number", "closing bracket"),
        ("'u", 0, "a prime that belongs to nothing", "follows a name"),
        ("√u", 0, "'√'", "sqrt(…)"),
        ("∂u", 0, "'∂'", "u'"),
        ("½*u", 0, "'½'", "Expected"),
        ("1..2", 2, "two factors side by side", '"*"'),
        (".²", 0, "a dot", "Expected"),
        ("x²⁻", 1, "the raised 2- is no whole number", "after ^"),
    ],
    "condition": [
        ("u = 0", 0, "u without a place", "u(0)"),
        ("u(0) + u' = 0", 7, "u' without a place", "u'(0)"),
        ("exp(u) = 1", 4, "u without a place", "u(0)"),
        ("x = 0", 0, "x in a condition", "the place itself"),
        ("u(x) = 0", 2, "x inside the brackets of u(…)", "formula of parameters"),
        ("u(u(0)) = 0", 2, "u inside the brackets of u(…)", "formula of parameters"),
        ("u(0)' = 0", 4, "a prime behind a place", "u'(…)"),
        ("lam'(0) = 0", 3, "a prime in a condition follows an unknown", "unknown"),
        ("laplacian(u) = 0", 0, "laplacian belongs in equations", "u'(1)"),
        ("mean(u) = 1", 0, "mean(…) is a measure", "integral(u)"),
        ("max(u) = 1", 0, "is a measure", "max(a, b)"),
        ("integral(u(0)) = 1", 9, "inside integral(…)", "formula of the unknowns"),
        ("u(0) > 1", 5, "only in a measure", '"="'),
        ("u[k] = 0", 1, "under [scheme]", "u for the function"),
        ("u(0", 1, "opened at column 2 is never closed", 'Add ")"'),
    ],
    "measure": [
        ("u", 0, "u without a place", "max(u), mean(u)"),
        ("u' > 1", 0, "u' without a place", "max(u)"),
        ("max(max(u))", 4, "inside max(…)", "formula of the unknowns"),
        ("mean(u(0))", 5, "inside mean(…)", "formula of the unknowns"),
        ("mean(u, v)", 0, "mean takes 1 argument, not 2", "mean(…)"),
        ("max(u, v, x)", 0, "max takes 1 or 2 arguments, not 3", "max(a, b)"),
        ("max(u) => 1", 7, '"=>" is no comparison', '">="'),
        ("1 < max(u) < 2", 11, 'a second "<"', "Expected: one"),
        ("grad(u)", 0, "grad belongs in equations", "u'(1)"),
    ],
    "scheme": [
        ("u'", 0, "u without its node", "u[k]"),
        ("exp(u[k])'", 9, "a derivative in a scheme", "(u[k+1] - u[k])/h"),
        ("lam*f", 4, "f without its node", "f[k]"),
        ("k*u[k]", 0, '"k" is not known', "k is the index inside square brackets only"),
        ("u[k+2]", 0, "the node k+2 is out of reach", "k-1, k and k+1"),
        ("u[k+1/2]", 0, "u has no value half way", "x[k+1/2]"),
        ("x[k+1/3]", 6, "a fraction of 3", "halves"),
        ("u[1]", 2, "does not begin with k", "k+1"),
        ("u[k+0.5]", 4, "no whole number", "k+1/2"),
        ("u[k+x]", 4, "no whole number", "k+1/2"),
        ("u[k", 1, "never closed", 'Add "]"'),
        ("lam[k]", 0, '"lam" has no nodal values', "Known here: u, v, x, f"),
        ("laplacian(u)", 0, "laplacian belongs in equations", "nodal values"),
        ("max(u[k])", 0, "is a measure", "max(a, b)"),
    ],
    "plain": [
        ("u'", 1, "a derivative; those belong in equations", "prime away"),
        ("u(0)", 1, "belongs in conditions and measures", "u for the function"),
        ("x = 1", 2, '"=" where a value is asked for', "without it"),
        ("x > 1", 2, '">" where a value is asked for', "without it"),
        ("div(u)", 0, "div belongs in equations", "without derivatives"),
        ("rms(u)", 0, "is a measure", "pointwise"),
        ("step", 0, '"step" is not known', "[scheme]"),
    ],
}


@pytest.mark.parametrize(
    ("place", "text", "column", "found", "advice"),
    [(place, *case) for place, cases in REFUSED.items() for case in cases],
    ids=lambda value: str(value)[:30].encode("unicode_escape").decode() if isinstance(value, str) else None,
)
def test_what_is_refused(place: str, text: str, column: int, found: str, advice: str) -> None:
    with pytest.raises(FormulaError) as refusal:
        parse(text, place, VOCABULARY, "case, equations, 1")
    error = refusal.value
    first, shown, caret, *rest = str(error).split("\n")
    assert error.column == column
    assert first.startswith("case, equations, 1: ")
    assert found in first
    assert advice in "\n".join(rest)
    # The caret stands under the character at that column, also where only a part of the formula is shown.
    assert caret.endswith("^")
    under = shown[len(caret) - 1 : len(caret)]
    assert under == (text[column : column + 1] if text[column : column + 1].isprintable() else " ")
    assert max(len(shown), len(caret)) <= 120


@pytest.mark.parametrize("given_text", [3, None, 2.5, ["u"], True])
def test_what_is_no_text_is_refused(given_text: object) -> None:
    with pytest.raises(FormulaError, match="is no formula"):
        parse(given_text, "equation", VOCABULARY)  # type: ignore[arg-type]


def test_an_error_survives_the_way_between_processes() -> None:
    with pytest.raises(FormulaError) as refusal:
        parse("2u", "equation", VOCABULARY)
    copy = pickle.loads(pickle.dumps(refusal.value))
    assert (str(copy), copy.column) == (str(refusal.value), 1)
