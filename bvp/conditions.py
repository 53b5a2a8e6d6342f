"""Conditions at the ends of the domain: where each stands, how many there must be, which derivatives they hold."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from bvp.errors import ProblemError
from bvp.formula import evaluate, float_functions, write
from bvp.formula.tree import At, Call, Name, Node, Prime, names_in, transform, walk

LEFT, RIGHT = "left", "right"


@dataclass(frozen=True)
class Condition:
    """One condition as a tree that has to vanish, its places written as At(…, Name("left" or "right"))."""

    tree: Node
    text: str
    origin: str

    @property
    def sides(self) -> frozenset[str]:
        """The ends at which it looks."""
        return frozenset(node.location.name for node in walk(self.tree) if isinstance(node, At) and isinstance(node.location, Name))

    def derivatives(self, side: str) -> frozenset[str]:
        """The unknowns whose derivative it holds at a side."""
        found = set()
        for node in walk(self.tree):
            if (
                isinstance(node, At)
                and node.location == Name(side)
                and isinstance(node.operand, Prime)
                and isinstance(node.operand.operand, Name)
            ):
                found.add(node.operand.operand.name)
        return frozenset(found)


def placed_condition(
    tree: Node, text: str, origin: str, ends: tuple[Node, Node], parameters: Mapping[str, float], coordinate: str, unknowns: Sequence[str]
) -> Condition:
    """The condition with each place recognised as the left or the right end; a named formula of unknowns is meant at its end.

    Raises ProblemError where a place is no end of the domain.
    """

    def placed(node: Node) -> Node | None:
        if not isinstance(node, At):
            return None
        for side, end in zip((LEFT, RIGHT), ends, strict=True):
            if node.location == end or (not names_in(end) and same_number(node.location, end, parameters)):
                return At(node.operand, Name(side), node.place)
        shown = " and ".join(write(end) for end in ends)
        raise ProblemError(
            f'{origin}: "{text}" stands at {coordinate} = {write(node.location)}, which is no end of the domain.\n'
            f"Expected: one of the two ends, {shown}.\nWrite the condition at one of them, or change the domain."
        )

    condition = Condition(transform(tree, placed), text, origin)
    if not condition.sides and "integral" not in text:
        raise ProblemError(
            f'{origin}: "{text}" holds no unknown at an end.\n'
            f"Expected: something like u(0) = 0 or u'({write(ends[1])}) + u({write(ends[1])}) = 0."
        )
    return Condition(_at_its_end(condition, unknowns), text, origin)


def _at_its_end(condition: Condition, unknowns: Sequence[str]) -> Node:
    """The tree with unknowns that have no place, as they come out of a named formula, at the end where the condition stands."""

    def placed(node: Node) -> Node | None:
        if isinstance(node, At) or (isinstance(node, Call) and node.function == "integral"):
            return node
        if not (isinstance(node, Name) and node.name in unknowns):
            return None
        if len(condition.sides) != 1:
            raise ProblemError(
                f'{condition.origin}: "{condition.text}" holds a named formula of {node.name} and stands at both ends.\n'
                f"At which end the formula is meant cannot be told.\nWrite it out, with {node.name} at its place."
            )
        (side,) = condition.sides
        return At(node, Name(side), node.place)

    return transform(condition.tree, placed)


def same_number(left: Node, right: Node, parameters: Mapping[str, float]) -> bool:
    """Whether two formulas of parameters have the same value."""
    values = [evaluate(side, lambda leaf: parameters[leaf.name], float_functions()) for side in (left, right)]
    return bool(abs(values[0] - values[1]) <= 1e-12 * max(abs(values[0]), abs(values[1]), 1e-300))


def without_axis(conditions: Sequence[Condition], coordinate: str) -> list[Condition]:
    """The conditions less u'(0) = 0, which is understood at the axis of a cylinder or the centre of a sphere."""
    kept = []
    for condition in conditions:
        if LEFT not in condition.sides:
            kept.append(condition)
        elif not (isinstance(condition.tree, At) and isinstance(condition.tree.operand, Prime) and condition.tree.operand.order == 1):
            raise ProblemError(
                f'{condition.origin}: "{condition.text}" stands at {coordinate} = 0, '
                "the axis of the cylinder or the centre of the sphere.\nThere only a zero derivative is possible, and it is understood.\n"
                "Leave the condition out, or start the domain at a positive radius."
            )
    return kept


def check_count(conditions: Sequence[Condition], needed: int, why: str, origin: str) -> None:
    """ProblemError unless there are as many conditions as the orders of the equations ask for."""
    if len(conditions) == needed:
        return
    given = "; ".join(condition.text for condition in conditions) or "none"
    plural = "s are" if needed != 1 else " is"
    advice = "Add what is missing." if len(conditions) < needed else "Leave out what says too much."
    raise ProblemError(f"{origin}: {needed} condition{plural} needed, {len(conditions)} given ({given}).\nNeeded: {why}.\n{advice}")


def check_contradiction(conditions: Sequence[Condition], origin: str) -> None:
    """ProblemError where two conditions are the same."""
    seen: dict[Node, Condition] = {}
    for condition in conditions:
        if condition.tree in seen:
            raise ProblemError(f'{origin}: "{condition.text}" stands there twice.\nExpected: conditions that say different things.')
        seen[condition.tree] = condition
