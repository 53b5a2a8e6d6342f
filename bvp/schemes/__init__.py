"""Difference schemes: the built-in ones, and those typed by a user, through one engine."""

from bvp.schemes.registry import named, names, typed
from bvp.schemes.scheme import Scheme, Shape

__all__ = ["Scheme", "Shape", "named", "names", "typed"]
