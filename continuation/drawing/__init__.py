"""Parts of the drawing of a branch; `continuation.plot` puts them together."""
