"""The expression tree that a typed formula becomes: nine kinds of frozen nodes, and ways to walk them.

A tree knows no numbers but its literals and no grid. Equality ignores where in the text a node stood, so
trees serve as dictionary keys (for common subexpressions, for `replace` in a scheme).
"""

from __future__ import annotations

import operator
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, fields
from fractions import Fraction


class Node:
    """What all kinds of nodes share.

    place : the column in the typed text, -1 for a node made by the tool. key : the hash. size : the nodes of the tree,
    each counted as often as it stands there. height : the nodes on the longest way down to a leaf.
    """

    place: int
    key: int
    size: int
    height: int

    def __post_init__(self) -> None:
        # Made from those of the parts at once: worked out on demand they would need a stack as deep as the tree.
        put = object.__setattr__
        put(self, "key", hash((type(self).__name__, *self._identity())))
        put(self, "size", 1 + sum(part.size for part in self.parts))
        put(self, "height", 1 + max((part.height for part in self.parts), default=0))

    def __reduce__(self) -> tuple[object, tuple[object, ...]]:
        """A copy in another process is built anew: there text has other hashes."""
        return type(self), tuple(getattr(self, one.name) for one in fields(self))  # type: ignore[arg-type]

    @property
    def parts(self) -> tuple[Node, ...]:
        """The nodes directly below this one."""
        return ()

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        """The same node over other parts."""
        return self

    def __hash__(self) -> int:
        return self.key

    def _identity(self) -> tuple[object, ...]:
        raise AssertionError("each kind of node says what it is known by")

    def __eq__(self, other: object) -> bool:
        if self is other:
            return True
        if not isinstance(other, Node) or type(self) is not type(other) or self.key != other.key:
            return False
        return self._identity() == other._identity()


@dataclass(frozen=True, eq=False)
class Number(Node):
    """A literal, with its exact value where it was typed as a decimal fraction."""

    value: float
    place: int = field(default=-1)

    def _identity(self) -> tuple[object, ...]:
        return (self.value,)


@dataclass(frozen=True, eq=False)
class Name(Node):
    """A parameter, an unknown, a coordinate, the step, or a name of [where]."""

    name: str
    place: int = field(default=-1)

    def _identity(self) -> tuple[object, ...]:
        return (self.name,)


@dataclass(frozen=True, eq=False)
class Indexed(Node):
    """A nodal value of a scheme: u[k+1], x[k+1/2], f[k-1]; the offset counts from k."""

    name: str
    offset: Fraction
    place: int = field(default=-1)

    def _identity(self) -> tuple[object, ...]:
        return (self.name, self.offset)


@dataclass(frozen=True, eq=False)
class Binary(Node):
    """left operator right, the operator one of + - * / ^."""

    operator: str
    left: Node
    right: Node
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return (self.left, self.right)

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return Binary(self.operator, parts[0], parts[1], self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.operator, self.left, self.right)


@dataclass(frozen=True, eq=False)
class Negative(Node):
    """-operand."""

    operand: Node
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return (self.operand,)

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return Negative(parts[0], self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.operand,)


@dataclass(frozen=True, eq=False)
class Call(Node):
    """function(arguments); `orders` counts derivatives by each argument, of a measured or given function."""

    function: str
    arguments: tuple[Node, ...]
    orders: tuple[int, ...] = ()
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return self.arguments

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return Call(self.function, parts, self.orders, self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.function, self.arguments, self.orders)


@dataclass(frozen=True, eq=False)
class Prime(Node):
    """operand differentiated `order` times along the coordinate: u'', (k*u')'."""

    operand: Node
    order: int = 1
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return (self.operand,)

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return Prime(parts[0], self.order, self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.operand, self.order)


@dataclass(frozen=True, eq=False)
class At(Node):
    """An unknown or its derivative at a place: u(0), u'(L)."""

    operand: Node
    location: Node
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return (self.operand, self.location)

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return At(parts[0], parts[1], self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.operand, self.location)


@dataclass(frozen=True, eq=False)
class Relation(Node):
    """left sign right, the sign one of = < > <= >=; stands only at the top of a formula."""

    sign: str
    left: Node
    right: Node
    place: int = field(default=-1)

    @property
    def parts(self) -> tuple[Node, ...]:
        return (self.left, self.right)

    def rebuilt(self, parts: tuple[Node, ...]) -> Node:
        return Relation(self.sign, parts[0], parts[1], self.place)

    def _identity(self) -> tuple[object, ...]:
        return (self.sign, self.left, self.right)


def walk(tree: Node) -> Iterator[Node]:
    """Every node of a tree, the whole before its parts; one that several others share comes once."""
    waiting, met = [tree], {id(tree)}
    while waiting:
        node = waiting.pop()
        yield node
        for part in reversed(node.parts):
            if id(part) not in met:
                met.add(id(part))
                waiting.append(part)


def bottom_up(trees: Sequence[Node], opened: Callable[[Node], bool]) -> Iterator[Node]:
    """Every different node of some trees once, parts before the whole; the parts of a node that is not opened do not count."""
    done: set[Node] = set()
    waiting = [(tree, False) for tree in reversed(trees)]
    while waiting:
        node, parts_done = waiting.pop()
        if node in done:
            continue
        if parts_done or not opened(node):
            done.add(node)
            yield node
        else:
            waiting.append((node, True))
            waiting.extend((part, False) for part in reversed(node.parts))


def transform(tree: Node, change: Callable[[Node], Node | None]) -> Node:
    """The tree with nodes replaced from the top: where `change` gives a node it stands there, its parts unvisited.

    A part that several nodes share is asked about once.
    """
    done: dict[int, Node] = {}

    def of(node: Node) -> Node:
        if id(node) in done:
            return done[id(node)]
        new = change(node)
        if new is None:
            parts = tuple(map(of, node.parts))
            new = node if all(map(operator.is_, parts, node.parts)) else node.rebuilt(parts)
        done[id(node)] = new
        return new

    return of(tree)


def number_of(tree: Node) -> float | None:
    """The value of a literal with or without a sign, None for any other tree."""
    if isinstance(tree, Number):
        return tree.value
    if isinstance(tree, Negative) and isinstance(tree.operand, Number):
        return -tree.operand.value
    return None


def substituted(tree: Node, old: Node, new: Node) -> Node:
    """The tree with one subtree in place of another."""
    return transform(tree, lambda node: new if node == old else None)


def names_in(tree: Node) -> set[str]:
    """The plain names in a tree (indexed ones and functions not among them)."""
    return {node.name for node in walk(tree) if isinstance(node, Name)}


def difference_of_sides(tree: Node) -> Node:
    """left - right of an equation; a tree without '=' as it stands; nothing is subtracted where the right is 0."""
    if isinstance(tree, Relation):
        if isinstance(tree.right, Number) and tree.right.value == 0.0:
            return tree.left
        return Binary("-", tree.left, tree.right)
    return tree
