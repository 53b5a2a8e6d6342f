"""The engine that turns a differential equation into the difference equation of a scheme, tree into tree.

Every operator has one standard form, which a scheme may replace: u'' and laplacian(F) by nodal differences, a flux by
the difference of its face values, u' by the central difference. None is expanded by the product rule.
"""

from __future__ import annotations

from fractions import Fraction

from bvp.errors import SchemeError
from bvp.formula import write
from bvp.formula.tree import Binary, Call, Indexed, Name, Negative, Node, Number, Prime, Relation, difference_of_sides, transform, walk
from bvp.geometry import power, times, volume
from bvp.problem import Equation
from bvp.schemes.scheme import STEP, Scheme, Shape, at_node, shifted

HALF = Fraction(1, 2)


def minus(left: Node, right: Node) -> Node:
    """left - right."""
    return Binary("-", left, right)


def over(left: Node, right: Node) -> Node:
    """left / right."""
    return Binary("/", left, right)


def node_value(name: str, offset: int | Fraction) -> Indexed:
    """name[k + offset]."""
    return Indexed(name, Fraction(offset))


def width(coordinate: str, left: int | Fraction, right: int | Fraction, shape: Shape) -> Node:
    """x[k+right] - x[k+left], a multiple of the step on a uniform grid."""
    if shape.uniform:
        return times(Number(float(right - left)), STEP)
    return minus(node_value(coordinate, right), node_value(coordinate, left))


def difference_row(scheme: Scheme, equation: Equation, unknown: str, shape: Shape) -> Node:
    """The scheme's difference equation at node k, as a tree of nodal values that has to vanish.

    At the axis u[k-1] is u[k+1] by symmetry and laplacian(u) takes its limit. Raises SchemeError where the scheme has
    no form for what the equation holds.
    """
    problem = shape.problem
    whole = scheme.formula("equation", problem, unknown)
    if whole is not None:
        return _whole(scheme, whole, unknown, shape)
    if scheme.texts.get("right_hand_side"):
        moved, rest = split_by_derivatives(equation.tree)
        rule = scheme.formula("right_hand_side", problem, unknown)
        assert rule is not None
        averaged = transform(
            rule, lambda node: at_node(rest, int(node.offset), problem) if isinstance(node, Indexed) and node.name == "f" else None
        )
        return _folded(Binary("+", _differenced(scheme, moved, unknown, shape), averaged), shape)
    return _folded(_differenced(scheme, equation.tree, unknown, shape), shape)


def split_by_derivatives(tree: Node) -> tuple[Node, Node]:
    """The additive terms with derivatives, and those without (f of the scheme language); 0 where there are none."""
    parts: tuple[list[Node], list[Node]] = ([], [])
    for sign, term in additive_terms(tree):
        held = any(
            isinstance(node, Prime) or (isinstance(node, Call) and node.function in ("laplacian", "div", "grad")) for node in walk(term)
        )
        parts[0 if held else 1].append(term if sign > 0 else Negative(term))
    return _sum(parts[0]), _sum(parts[1])


def additive_terms(tree: Node, sign: int = 1) -> list[tuple[int, Node]]:
    """The terms of a sum with their signs, brackets opened, products left alone."""
    if isinstance(tree, Relation):
        return additive_terms(difference_of_sides(tree), sign)
    if isinstance(tree, Binary) and tree.operator in "+-":
        return additive_terms(tree.left, sign) + additive_terms(tree.right, sign if tree.operator == "+" else -sign)
    if isinstance(tree, Negative):
        return additive_terms(tree.operand, -sign)
    return [(sign, tree)]


def _sum(terms: list[Node]) -> Node:
    total: Node | None = None
    for term in terms:
        total = term if total is None else Binary("+", total, term)
    return total if total is not None else Number(0.0)


def _whole(scheme: Scheme, whole: Node, unknown: str, shape: Shape) -> Node:
    if shape.axis:
        axis = scheme.formula("axis", shape.problem, unknown)
        if axis is not None:
            return difference_of_sides(axis)
        singular = [
            node for node in walk(whole) if isinstance(node, Indexed) and node.name == shape.problem.coordinate and node.offset == 0
        ]
        if singular:
            raise SchemeError(
                f'{scheme.origin or scheme.name}: "equation" holds {shape.problem.coordinate}[k], which is 0 at the axis.\n'
                'Expected: an equation of its own for the axis node, under "axis", such as "4*(u[k+1] - u[k])/h^2 + … = 0".'
            )
    return _folded(difference_of_sides(whole), shape)


def _folded(row: Node, shape: Shape) -> Node:
    """At the axis the node k-1 is the mirror image of k+1."""
    if not shape.axis:
        return row
    coordinate = shape.problem.coordinate

    def mirrored(node: Node) -> Node | None:
        if isinstance(node, Indexed) and node.offset < 0:
            image = Indexed(node.name, -node.offset)
            return Negative(image) if node.name == coordinate else image
        return None

    return transform(row, mirrored)


def _differenced(scheme: Scheme, tree: Node, unknown: str, shape: Shape) -> Node:
    """Every derivative of a pointwise formula replaced by the scheme's difference, every plain u by its source."""
    problem = shape.problem
    pairs = [pair for name in problem.unknowns for pair in scheme.replaced_terms(problem, name)]
    met: set[Node] = set()

    def change(node: Node) -> Node | None:
        for term, stands in pairs:
            if node == term:
                met.add(term)
                return stands
        if isinstance(node, Prime):
            return _primed(scheme, node, shape)
        if isinstance(node, Call) and node.function == "laplacian":
            return _laplacian(scheme, node.arguments[0], shape)
        if isinstance(node, Call) and node.function == "div":
            return _divergence(scheme, node.arguments[0], shape, weighted=True)
        if isinstance(node, Call) and node.function == "grad":
            raise SchemeError(f'"{write(node)}" stands outside div.\nExpected: div(k*grad(u)), or u\' for the derivative itself.')
        if isinstance(node, Name) and node.name in problem.unknowns:
            stands_for = scheme.formula("source", problem, node.name)
            return stands_for if stands_for is not None else node_value(node.name, 0)
        if isinstance(node, Name) and node.name == problem.coordinate:
            return node_value(node.name, 0)
        return None

    changed = transform(tree, change)
    missed = {term for term, _ in pairs} - met
    if scheme.replacements and len(missed) == len({term for term, _ in pairs}):
        shown = ", ".join(f'"{term}"' for term in scheme.replacements)
        raise SchemeError(
            f"{scheme.origin or scheme.name}, replace: {shown} stands nowhere in {write(tree)}.\nWrite the term as the equation has it."
        )
    return changed


def _primed(scheme: Scheme, node: Prime, shape: Shape) -> Node:
    problem, inside = shape.problem, node.operand
    if isinstance(inside, Name) and inside.name in problem.unknowns:
        if node.order == 1:
            return standard_or_own_first(scheme, inside.name, shape)
        if node.order == 2:
            plane = problem.exponent == 0 and scheme.texts.get("flux")  # there u'' is the divergence of u'
            return _flux_laplacian(scheme, inside, shape) if plane else _second(scheme, inside, shape)
        raise SchemeError(
            f'"{write(node)}" is a derivative of order {node.order}.\nBuilt so far: first and second derivatives of each unknown.'
        )
    if inside == Name(problem.coordinate):
        return Number(1.0 if node.order == 1 else 0.0)
    if any(isinstance(part, Prime) or (isinstance(part, Call) and part.function == "grad") for part in walk(inside)):
        if node.order != 1:
            raise SchemeError(f'"{write(node)}" differentiates a flux {node.order} times.\nExpected: (flux)\', once.')
        return _divergence(scheme, inside, shape, weighted=False)
    if node.order == 1:
        return over(minus(at_node(inside, 1, problem), at_node(inside, -1, problem)), width(problem.coordinate, -1, 1, shape))
    if node.order == 2:
        return _second(scheme, inside, shape)
    raise SchemeError(f'"{write(node)}" is a derivative of order {node.order}.\nExpected: one or two primes on a bracket.')


def standard_or_own_first(scheme: Scheme, unknown: str, shape: Shape) -> Node:
    """u' at node k: 0 at the axis, the scheme's own formula, or the central difference."""
    if shape.axis:
        return Number(0.0)
    return scheme.formula("first", shape.problem, unknown) or standard_first(unknown, shape)


def standard_first(unknown: str, shape: Shape) -> Node:
    """(u[k+1] - u[k-1])/(x[k+1] - x[k-1]), even in the step on a smooth map."""
    return over(minus(node_value(unknown, 1), node_value(unknown, -1)), width(shape.problem.coordinate, -1, 1, shape))


def _denominator(scheme: Scheme, shape: Shape) -> Node | None:
    return scheme.formula("denominator", shape.problem, shape.problem.unknowns[0])


def _second(scheme: Scheme, inside: Node, shape: Shape) -> Node:
    """F'' from nodal values: (F[k+1] - 2 F[k] + F[k-1])/h^2, or over the map's own widths."""
    problem = shape.problem
    up, here, down = (at_node(inside, offset, problem) for offset in (1, 0, -1))
    if shape.uniform:
        total = Binary("+", minus(up, Binary("*", Number(2.0), here)), down)
        return over(total, _denominator(scheme, shape) or power(STEP, 2))
    x = problem.coordinate
    outer = over(minus(up, here), width(x, 0, 1, shape))
    inner = over(minus(here, down), width(x, -1, 0, shape))
    return over(minus(outer, inner), width(x, -HALF, HALF, shape))


def _laplacian(scheme: Scheme, inside: Node, shape: Shape) -> Node:
    """laplacian(F): the scheme's flux form where it has one, else F'' + (s/r) F' with the limit (s + 1) F'' at the axis."""
    problem, exponent = shape.problem, shape.exponent
    if scheme.texts.get("flux"):
        return _flux_laplacian(scheme, inside, shape)
    second = _second(scheme, inside, shape)
    if exponent == 0:
        return second
    if shape.axis:
        return Binary("*", Number(exponent + 1.0), second)
    if isinstance(inside, Name):
        first = standard_or_own_first(scheme, inside.name, shape)
    else:
        first = over(minus(at_node(inside, 1, problem), at_node(inside, -1, problem)), width(problem.coordinate, -1, 1, shape))
    return Binary("+", second, Binary("*", over(Number(float(exponent)), node_value(problem.coordinate, 0)), first))


def _flux_laplacian(scheme: Scheme, inside: Node, shape: Shape) -> Node:
    problem = shape.problem
    if not isinstance(inside, Name):
        raise SchemeError(
            f'the flux of the scheme "{scheme.name}" is one of {problem.unknowns[0]}, not of "{write(inside)}".\n'
            "Expected: laplacian of an unknown."
        )
    if shape.axis:
        axis = scheme.formula("axis", problem, inside.name)
        if axis is not None:
            return axis
    return _divergence(scheme, Prime(inside, 1), shape, weighted=True)


def _divergence(scheme: Scheme, flux: Node, shape: Shape, *, weighted: bool) -> Node:
    """The difference of a flux between the two faces of a cell, over the cell's volume.

    weighted = True is div: areas r^s and volumes of the geometry. At the axis only the outer face counts.
    """
    problem, exponent = shape.problem, shape.exponent if weighted else 0
    x = problem.coordinate
    outside = _face_flux(scheme, flux, 1, shape, exponent)
    if shape.axis and weighted:
        cell = volume(Number(0.0), node_value(x, HALF), exponent)
        return over(outside, cell)
    inside = _face_flux(scheme, flux, -1, shape, exponent)
    own = scheme.formula("volume", problem, problem.unknowns[0]) if weighted else None
    cell = own or _cell_volume(x, shape, exponent)
    total = over(minus(outside, inside), cell)
    denominator = _denominator(scheme, shape)
    return total if denominator is None else Binary("*", total, over(power(STEP, 2), denominator))


def _cell_volume(coordinate: str, shape: Shape, exponent: int) -> Node:
    """The volume between the two faces; the width is a step on a uniform grid, so that nothing cancels."""
    if exponent == 0:
        return width(coordinate, -HALF, HALF, shape)
    whole = volume(node_value(coordinate, -HALF), node_value(coordinate, HALF), exponent)
    narrow = minus(node_value(coordinate, HALF), node_value(coordinate, -HALF))
    return transform(whole, lambda node: STEP if shape.uniform and node == narrow else None)


def _face_flux(scheme: Scheme, flux: Node, side: int, shape: Shape, exponent: int) -> Node:
    """area * G at the face k + 1/2 (side 1) or k - 1/2 (side -1): u at the mean of its two nodes, u' their difference."""
    problem = shape.problem
    x = problem.coordinate
    near, far = (0, 1) if side > 0 else (-1, 0)
    area = power(node_value(x, HALF * side), exponent)
    held = None

    # A scheme with a formula of its own for the axis says that its flux is none between the axis and its neighbour.
    plain = shape.axis and "axis" in scheme.texts

    def gradient(name: str) -> Node:
        own = None if plain else scheme.formula("flux", problem, name)
        if own is None:
            return over(minus(node_value(name, far), node_value(name, near)), width(x, near, far, shape))
        moved = own if side > 0 else shifted(own, -1)
        return moved if exponent == 0 else over(moved, area)

    def change(node: Node) -> Node | None:
        inside = (
            node.operand if isinstance(node, Prime) else node.arguments[0] if isinstance(node, Call) and node.function == "grad" else None
        )
        if inside is not None:
            if not isinstance(inside, Name) or inside.name not in problem.unknowns or (isinstance(node, Prime) and node.order != 1):
                raise SchemeError(f'"{write(node)}" stands inside a flux.\nExpected: first derivatives of unknowns there, such as k*u\'.')
            return gradient(inside.name)
        if isinstance(node, Name) and node.name in problem.unknowns:
            return over(Binary("+", node_value(node.name, near), node_value(node.name, far)), Number(2.0))
        if isinstance(node, Name) and node.name == x:
            return node_value(x, HALF * side)
        return None

    held = None if plain else _own_flux_alone(scheme, flux, side, shape)
    return held if held is not None else times(area, transform(flux, change))


def _own_flux_alone(scheme: Scheme, flux: Node, side: int, shape: Shape) -> Node | None:
    """The scheme's own flux where the gradient stands alone: area times gradient is then what its formula says, undivided."""
    if not (isinstance(flux, Prime) and isinstance(flux.operand, Name)):
        return None
    own = scheme.formula("flux", shape.problem, flux.operand.name)
    return None if own is None else (own if side > 0 else shifted(own, -1))
