"""Functions given as NumPy callables with their partial derivatives, for right-hand sides that are no formula."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from bvp.errors import ProblemError


@dataclass(frozen=True)
class GivenFunction:
    """A vectorised function of named arguments and its first partial derivatives, None where one was not given."""

    name: str
    function: Callable[..., Any]
    partials: tuple[Callable[..., Any] | None, ...]
    argument_names: tuple[str, ...]

    @property
    def arguments(self) -> int:
        """How many arguments it takes."""
        return len(self.argument_names)

    def evaluate(self, *values: Any, orders: tuple[int, ...] = ()) -> Any:
        """The function, or the partial derivative whose orders are given; ProblemError where that was not given."""
        if not any(orders):
            return self.function(*values)
        partial = self.partials[orders.index(1)] if sum(orders) == 1 else None
        if partial is None:
            wanted = ", ".join(name for name, order in zip(self.argument_names, orders, strict=True) for _ in range(order))
            raise ProblemError(
                f"the derivative by {wanted} of the given function is needed and was not given.\nGive it under `derivatives`."
            )
        return partial(*values)
