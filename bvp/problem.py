"""The continuous problem: equations, conditions, domain, parameters. It knows no grid and no scheme."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from bvp import conditions as ends_conditions
from bvp.conditions import Condition
from bvp.errors import ProblemError, nearest
from bvp.formula import Vocabulary, evaluate, float_functions, parse, write
from bvp.formula.tree import Call, Name, Node, Number, Prime, difference_of_sides, names_in, transform, walk
from bvp.geometry import EXPONENTS, NAMES
from bvp.given import GivenFunction
from bvp.named_formulas import bounded, named_formulas
from bvp.recognise import recognised

Texts = str | Sequence[str]


@dataclass(frozen=True)
class Equation:
    """One equation as a tree that has to vanish, [where] names put in; `order` is that of its highest derivative."""

    tree: Node
    text: str
    order: int


@dataclass(frozen=True, init=False)
class Problem:
    """A two-point boundary value problem with parameters, as it is written on paper.

    Parameters
    ----------
    equations : one formula, or one for each unknown; "= 0" is meant where there is no "=".
    unknowns : their names. x : the two ends, numbers or formulas of parameters; domain = (name, left, right) names the
    coordinate too. conditions : as many as the orders of the equations ask for; u'(0) = 0 is understood at an axis.
    parameters : name -> value. geometry : slab, cylinder or sphere, the meaning of laplacian, div and of integrals.
    where : named formulas. measured : name -> (abscissae, values) or a MeasuredFunction. initial_guess : name -> formula.

    Raises ProblemError or FormulaError, each naming what is wrong, where, and what would do.
    """

    unknowns: tuple[str, ...]
    coordinate: str
    ends: tuple[Node, Node]
    equations: tuple[Equation, ...]
    conditions: tuple[Condition, ...]
    parameters: dict[str, float]
    geometry: str
    where: dict[str, Node]
    functions: dict[str, Any]
    initial_guess: dict[str, Node]
    vocabulary: Vocabulary
    origin: str
    notices: tuple[str, ...] = field(default=())

    def __init__(
        self,
        equations: Texts,
        unknowns: Texts = "u",
        x: tuple[float | str, float | str] = (0, 1),
        conditions: Texts = (),
        parameters: Mapping[str, float] | None = None,
        *,
        geometry: str = "slab",
        domain: tuple[str, float | str, float | str] | None = None,
        where: Mapping[str, str] | None = None,
        measured: Mapping[str, Any] | None = None,
        initial_guess: Mapping[str, str] | None = None,
        origin: str = "problem",
        functions: Mapping[str, GivenFunction] | None = None,
    ) -> None:

        def put(name: str, value: object) -> None:
            object.__setattr__(self, name, value)  # a frozen record fills itself once

        unknown_names = _listed(unknowns)
        coordinate, left, right = domain if domain is not None else ("x", *x)
        if geometry not in EXPONENTS:
            raise ProblemError(f'{origin}: geometry "{geometry}" is not known. {nearest(geometry, list(EXPONENTS))}')
        numbers = {name: _number(value, f"{origin}: parameter {name}") for name, value in (parameters or {}).items()}
        tables = _tables(measured or {}, functions or {})
        vocabulary = Vocabulary(
            unknowns=unknown_names,
            coordinate=coordinate,
            parameters=tuple(numbers),
            where=tuple(where or ()),
            measured=tuple(measured or ()),
            functions={name: given.arguments for name, given in (functions or {}).items()},
        )
        vocabulary.check(origin)
        put("unknowns", unknown_names)
        put("coordinate", coordinate)
        put("parameters", numbers)
        put("functions", tables)
        put("vocabulary", vocabulary)
        put("origin", origin)
        put("ends", tuple(self._of_parameters(end, f"{origin}, domain") for end in (left, right)))
        put("where", named_formulas(where or {}, vocabulary, origin))
        put("initial_guess", self._guesses(initial_guess or {}))
        self._state_equations(_listed(equations), geometry)
        self._state_conditions(_listed(conditions))
        self._notice_unused()

    # -- how the parts are read -------------------------------------------------------------------------------------

    def _of_parameters(self, text: float | str, origin: str) -> Node:
        """An end of the domain: a number, or a formula of parameters."""
        if not isinstance(text, str):
            return Number(_number(text, origin))
        tree = parse(text, "plain", self.vocabulary, origin)
        strangers = names_in(tree) - set(self.parameters)
        if strangers:
            raise ProblemError(
                f'{origin}: "{text}" holds {sorted(strangers)[0]}, which is no parameter.\nExpected: a number or a formula of parameters.'
            )
        return tree

    def _guesses(self, guesses: Mapping[str, str]) -> dict[str, Node]:
        trees = {}
        for name, text in guesses.items():
            where = f"{self.origin}, initial_guess"
            if name not in self.unknowns:
                raise ProblemError(f'{where}: "{name}" is no unknown. {nearest(name, list(self.unknowns))}')
            tree = self._with_where(parse(str(text), "plain", self.vocabulary, f"{where}, {name}"))
            if names_in(tree) & set(self.unknowns):
                raise ProblemError(f'{where}, {name}: "{text}" holds an unknown.\nExpected: a formula of {self.coordinate} and parameters.')
            trees[name] = tree
        return trees

    def _with_where(self, tree: Node) -> Node:
        return bounded(transform(tree, lambda node: self.where.get(node.name) if isinstance(node, Name) else None), self.origin)

    def _state_equations(self, texts: Sequence[str], geometry: str) -> None:
        origin = self.origin
        if len(texts) != len(self.unknowns):
            raise ProblemError(
                f"{origin}: {len(self.unknowns)} unknown{'s' * (len(self.unknowns) != 1)} ({', '.join(self.unknowns)}) "
                f"but {len(texts)} equations.\n"
                "Expected: one equation for each unknown, in the order of the unknowns."
            )
        left, right = self.end_values(self.parameters)
        if not right > left:
            shown = " and ".join(write(end) for end in self.ends)
            raise ProblemError(
                f"{origin}, domain: the ends {shown} are {left:g} and {right:g}.\nExpected: the left end below the right one, both finite."
            )
        reaches_axis = left == 0.0 and not names_in(self.ends[0])
        notices: list[str] = []
        stated = []
        for number, (text, unknown) in enumerate(zip(texts, self.unknowns, strict=True), start=1):
            tree = self._with_where(difference_of_sides(parse(text, "equation", self.vocabulary, f"{origin}, equations, {number}")))
            if reaches_axis:
                tree, exponent = recognised(tree, unknown, self.coordinate, self.function_table(float_functions()))
                if exponent and geometry == "slab":
                    geometry = NAMES[exponent]
                    notices.append(f'"{text}" is read as the operator of the {geometry}, with its limit at {self.coordinate} = 0.')
                elif exponent and EXPONENTS[geometry] != exponent:
                    raise ProblemError(
                        f'{origin}: "{text}" is the operator of the {NAMES[exponent]}, but the geometry is {geometry}.\n'
                        f"Write laplacian(u) with one geometry, or set geometry to {NAMES[exponent]}."
                    )
            stated.append(Equation(tree, text, order_of(tree, unknown, f'{origin}: "{text}"')))
        if EXPONENTS[geometry] and left < 0:
            raise ProblemError(
                f"{origin}, domain: a {geometry} starts at a radius of {left:g}.\nExpected: a left end of 0 (the axis) or more."
            )
        object.__setattr__(self, "geometry", geometry)
        object.__setattr__(self, "equations", tuple(stated))
        object.__setattr__(self, "notices", tuple(notices))

    def _state_conditions(self, texts: Sequence[str]) -> None:
        placed = []
        for number, text in enumerate(texts, start=1):
            origin = f"{self.origin}, conditions, {number}"
            tree = self._with_where(difference_of_sides(parse(text, "condition", self.vocabulary, origin)))
            placed.append(ends_conditions.placed_condition(tree, text, origin, self.ends, self.parameters, self.coordinate, self.unknowns))
        needed = sum(equation.order for equation in self.equations)
        orders = ", ".join(f"{unknown} of order {equation.order}" for unknown, equation in zip(self.unknowns, self.equations, strict=True))
        why = f"as many as the orders of the equations together ({orders})"
        if self.axis:
            placed = ends_conditions.without_axis(placed, self.coordinate)
            needed -= len(self.unknowns)
            why += ", less the zero derivative that is understood at the axis"
        ends_conditions.check_count(placed, needed, why, f"{self.origin}, conditions")
        ends_conditions.check_contradiction(placed, f"{self.origin}, conditions")
        object.__setattr__(self, "conditions", tuple(placed))

    def _notice_unused(self) -> None:
        used: set[str] = set()
        for tree in [*(e.tree for e in self.equations), *(c.tree for c in self.conditions), *self.ends, *self.initial_guess.values()]:
            used |= names_in(tree)
        notices = [f"the parameter {name} is used nowhere." for name in self.parameters if name not in used]
        notices += [f"the unknown {name} stands in no equation." for name in self.unknowns if name not in used]
        object.__setattr__(self, "notices", (*self.notices, *notices))

    # -- what others ask of it --------------------------------------------------------------------------------------

    @property
    def exponent(self) -> int:
        """s of the geometry: 0 slab, 1 cylinder, 2 sphere."""
        return EXPONENTS[self.geometry]

    @property
    def axis(self) -> bool:
        """Whether the domain starts at the axis of a cylinder or the centre of a sphere."""
        return self.exponent > 0 and isinstance(self.ends[0], Number) and self.ends[0].value == 0.0

    @property
    def corners(self) -> str:
        """Where an equation has corners, by abs, min or max: in the "unknown", in the "coordinate" alone, or "" nowhere."""
        cornered = [
            names_in(node)
            for equation in self.equations
            for node in walk(equation.tree)
            if isinstance(node, Call) and node.function in ("abs", "min", "max")
        ]
        if any(names & set(self.unknowns) for names in cornered):
            return "unknown"
        return "coordinate" if any(self.coordinate in names for names in cornered) else ""

    def with_parameters(self, changes: Mapping[str, float]) -> Problem:
        """The same problem with other values of its parameters."""
        numbers = dict(self.parameters)
        for name, value in changes.items():
            if name not in numbers:
                raise ProblemError(f'{self.origin}: there is no parameter "{name}". {nearest(name, list(numbers))}')
            numbers[name] = _number(value, f"{self.origin}: parameter {name}")
        return _copied(self, parameters=numbers)

    def end_values(self, parameters: Mapping[str, float]) -> tuple[float, float]:
        """The two ends at given parameter values."""
        left, right = self.ends
        if isinstance(left, Number) and isinstance(right, Number):
            return left.value, right.value
        return self.number(left, parameters), self.number(right, parameters)

    def number(self, tree: Node, parameters: Mapping[str, float]) -> float:
        """The value of a formula of parameters."""
        return float(evaluate(tree, lambda leaf: parameters[leaf.name], self.function_table(float_functions())))

    def function_table(self, table: Mapping[str, Callable[..., Any]]) -> dict[str, Callable[..., Any]]:
        """A table of functions for `evaluate`, the measured and given ones among them."""
        return {**table, **{name: function.evaluate for name, function in self.functions.items()}}

    @classmethod
    def from_functions(
        cls,
        source: Callable[..., Any],
        source_u: Callable[..., Any],
        derivatives: Mapping[str, Callable[..., Any]],
        *,
        parameters: Mapping[str, float],
        conditions: Texts,
        unknown: str = "u",
        **keywords: Any,
    ) -> Problem:
        """laplacian(u) + f(x, u, parameters) = 0 with f a vectorised NumPy function that is no formula.

        source(x, u, p1, p2, …) takes the parameters in the order of `parameters`; source_u is its derivative by u,
        derivatives[name] that by each parameter (and by "x", where an end of the domain is traced).
        """
        coordinate = keywords.get("domain", ("x",))[0]
        arguments = (coordinate, unknown, *parameters)
        partials = {unknown: source_u, **derivatives}
        given = GivenFunction("given", source, tuple(partials.get(name) for name in arguments), arguments)
        call = f"given({', '.join(arguments)})"
        return cls(
            f"laplacian({unknown}) + {call} = 0",
            unknown,
            conditions=conditions,
            parameters=parameters,
            functions={"given": given},
            **keywords,
        )


def order_of(tree: Node, unknown: str, origin: str) -> int:
    """The order of an equation in its unknown; ProblemError where it is none or above 2."""
    highest = 0
    for node in walk(tree):
        if isinstance(node, Prime):
            inside = max((part.order if isinstance(part, Prime) else 0 for part in walk(node.operand)), default=0)
            if unknown in names_in(node.operand):
                highest = max(highest, node.order + inside)
        elif isinstance(node, Call) and node.function in ("laplacian", "div") and unknown in names_in(node):
            highest = max(highest, 2)
    if highest == 0:
        raise ProblemError(f"{origin} holds no derivative of {unknown}.\nExpected: an equation of first or second order in its unknown.")
    return highest


def _copied(problem: Problem, **changes: Any) -> Problem:
    copy = object.__new__(Problem)
    for name, value in {**problem.__dict__, **changes}.items():
        object.__setattr__(copy, name, value)
    return copy


def _listed(texts: Texts) -> tuple[str, ...]:
    return (texts,) if isinstance(texts, str) else tuple(texts)


def _number(value: object, origin: str) -> float:
    if isinstance(value, bool) or (not isinstance(value, (int, float)) and not hasattr(value, "__float__")):
        raise ProblemError(f"{origin} is {value!r}.\nExpected: a number.")
    number = float(value)
    if not math.isfinite(number):
        raise ProblemError(f"{origin} is {number}.\nExpected: a finite number.")
    return number


def _tables(measured: Mapping[str, Any], functions: Mapping[str, GivenFunction]) -> dict[str, Any]:
    if not measured:
        return dict(functions)
    from bvp.measured import MeasuredFunction

    made = {name: data if isinstance(data, MeasuredFunction) else MeasuredFunction(name, *data) for name, data in measured.items()}
    return {**made, **functions}


__all__ = ["Condition", "Equation", "Problem", "order_of", "replace"]
