"""Each module here recomputes some of the recorded values by `values() -> dict[name, number]`, none of them looking at the record."""
