"""Case files that are wrong: what is said about each, and that it names the place and what would do."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

import bvp.geometry
import bvp.grid
import bvp.schemes.scheme
from bvp.errors import InputError
from bvp.grid import FEWEST_INTERVALS
from cases.faults import faults
from cases.kinds import KINDS
from cases.load import load
from cases.schema import CLOSED, DISCRETIZATION, GEOMETRY, MOST_INTERVALS, OPEN, PUBLISHED, SCHEME, TOP, TRACE

GOOD = """
title = "a slab"
unknowns = ["u"]
equations = ["u'' + lam*exp(u) = 0"]
conditions = ["u(0) = 0", "u(1) = 0"]
[domain]
x = [0, 1]
[parameters]
lam = 0.0
[trace]
along = "lam"
"""

# What is changed in the good file, what it becomes, and words that the message must hold.
BAD = [
    ('title = "a slab"', "", ['"title" is missing']),
    ('title = "a slab"', 'titel = "a slab"', ['"titel" is not a key here', 'Did you mean "title"']),
    ('title = "a slab"', "title = 3", ['"title": 3 is not text']),
    ('title = "a slab"', 'title = "  "', ['"title"', "is empty"]),
    ('unknowns = ["u"]', 'unknowns = "u"', ['"unknowns"', "is not a list"]),
    ('unknowns = ["u"]', "unknowns = []", ['"unknowns"', "is empty"]),
    ('unknowns = ["u"]', "unknowns = [1]", ['"unknowns"', "holds 1"]),
    ("equations = [", "equation = [", ['"equation" is not a key here', 'Did you mean "equations"']),
    ("x = [0, 1]", "x = [0]", ['[domain] "x": 1 ends', "two"]),
    ("x = [0, 1]", "x = [0, nan]", ['[domain] "x": nan is not finite']),
    ("x = [0, 1]", "x = [0, inf]", ["an end at infinity is not built yet"]),
    ("x = [0, 1]", 'x = [0, "inf"]', ["an end at infinity is not built yet"]),
    ("x = [0, 1]", "x = [0, true]", ["true is not a number"]),
    ("x = [0, 1]", "x = [0, 1]\ny = [0, 1]", ["x and y both look like a coordinate"]),
    ("x = [0, 1]", "", ["the coordinate is missing"]),
    ("x = [0, 1]", 'x = [0, 1]\ngeometri = "slab"', ['"geometri" is not a key here', '"geometry"']),
    ("x = [0, 1]", 'x = [0, 1]\ngeometry = "ball"', ['[domain] "geometry": "ball" is not known', "slab, cylinder, sphere"]),
    ("lam = 0.0", "lam = inf", ['[parameters] "lam": inf is not finite']),
    ("lam = 0.0", "lam = nan", ['[parameters] "lam": nan is not finite']),
    ("lam = 0.0", 'lam = "0"', ['[parameters] "lam": "0" is not a number']),
    ("lam = 0.0", "lam = false", ['[parameters] "lam": false is not a number']),
    ("lam = 0.0", f"lam = 1{'0' * 400}", ['"lam": a number of 401 digits is not finite']),
    ("lam = 0.0", 'lam = 0.0\n"lam c" = 1.0', ['"lam c" cannot be a parameter']),
    ('along = "lam"', 'along = "lan"', ['"lan" is no parameter', '"lam"']),
    ('along = "lam"', 'along = "lam"\nintervals = 50', ['"intervals" is not a key here', "under [discretization]"]),
    ('along = "lam"', 'along = "lam"\ntitle = "late"', ['"title" is not a key here', "above the first table"]),
    ('along = "lam"', 'along = "lam"\ndirection = "upp"', ['"direction": "upp" is not known', "up, down, both"]),
    ('along = "lam"', 'along = "lam"\nwithin = [3, 1]', ['"within"', "first number not below the second"]),
    ('along = "lam"', 'along = "lam"\nwithin = [0, inf]', ['"within"', "two finite numbers"]),
    ('along = "lam"', 'along = "lam"\nturning_points_wanted = 1.5', ["is not a whole number"]),
    ('along = "lam"', 'along = "lam"\nturning_points_wanted = 0', ["is too small", "at least 1"]),
    ('along = "lam"', 'along = "lam"\nlook_for_others = 1', ["neither true nor false"]),
    ('along = "lam"', 'along = "lam"\nmeasure = []', ['"measure"', "is empty"]),
    ('along = "lam"', 'along = "lam"\nmeasure = [1]', ['"measure"', "holds 1"]),
    ('along = "lam"', 'along = "lam"\nstart = 1979-05-27', ['"start": 1979-05-27 is not a number']),
    ('along = "lam"', 'along = "lam"\n[discretization]\nintervals = 1000000000000', ['"intervals"', "is too large", "50000000"]),
    ('along = "lam"', 'along = "lam"\n[discretization]\nintervals = 1', ["is too small"]),
    ('along = "lam"', 'along = "lam"\n[discretization]\ndigits = 40', ["is too large", "at most 15"]),
    ('along = "lam"', 'along = "lam"\n[scheme]\ndenominator = "h^2"', ["[scheme]", "stands outside a scheme"]),
    ('along = "lam"', 'along = "lam"\n[scheme.mine]\n', ["[scheme.mine]", "no formula"]),
    ('along = "lam"', 'along = "lam"\n[scheme.mine]\nfluxx = "1"', ['[scheme.mine] "fluxx"', '"flux"']),
    ('along = "lam"', 'along = "lam"\n[scheme.mine]\nreplace = "u"', ['"replace"', "a term for a term"]),
    ('along = "lam"', 'along = "lam"\n[units]\nmu = "m"', ['[units]: "mu" is no name of this case']),
    ('along = "lam"', 'along = "lam"\n[[published]]\nquantity = "turning point 1"\nvalue = 1.0', ['[published 1] "source" is missing']),
    ('along = "lam"', 'along = "lam"\n[[published]]\nquantity = "a"\nvalue = 1.0\nsource = "b"\nuncertainty = -1', ["is too small"]),
    ('along = "lam"', 'along = "lam"\n[published]\nvalue = 1.0', ['"published"', "is not a list of tables"]),
    ('along = "lam"', 'along = "lam"\n[unknown_numbers]\nc = 1.0', ["[unknown_numbers]", "not built yet"]),
    ('along = "lam"', 'along = "lam"\n[tarce]\nstart = 1', ['"tarce" is not a key here', '"trace"']),
    ("[trace]", "[[trace]]", ['"trace"', "is not a table"]),
    ("[parameters]\nlam = 0.0", "[[parameters]]\nlam = 0.0", ['"parameters"', "is not a table"]),
]


def test_the_good_file_has_no_fault() -> None:
    assert list(faults(tomllib.loads(GOOD), "good.toml")) == []


@pytest.mark.parametrize(("old", "new", "words"), BAD, ids=[new[-40:] or f"without {old}" for old, new, _ in BAD])
def test_bad_file_is_told_where_and_what(tmp_path: Path, old: str, new: str, words: list[str]) -> None:
    assert old in GOOD
    path = tmp_path / "bad.toml"
    path.write_text(GOOD.replace(old, new, 1))
    with pytest.raises(InputError) as caught:
        load(str(path))
    message = str(caught.value)
    assert message.startswith("bad.toml")
    for word in words:
        assert word in message
    assert message.count("\n") <= 2


def test_every_kind_of_the_schema_can_be_judged() -> None:
    keys = [*TOP.values(), *SCHEME.values(), *PUBLISHED.values(), *(key for key, _ in OPEN.values())]
    keys += [key for table in CLOSED.values() for key in table.values()]
    assert {key.kind for key in keys} <= set(KINDS)


def test_defaults_pass_the_judgement_they_stand_in_for() -> None:
    for table in (TRACE, DISCRETIZATION):
        for name, key in table.items():
            if key.default is not None:
                assert KINDS[key.kind](key.default, key) is None, name


def test_what_the_schema_says_again_is_what_the_lower_floors_say() -> None:
    assert MOST_INTERVALS == bvp.grid.MOST_INTERVALS
    assert DISCRETIZATION["intervals"].least == FEWEST_INTERVALS
    assert set(SCHEME) == set(bvp.schemes.scheme.KEYS)
    assert set(GEOMETRY.choices) == set(bvp.geometry.EXPONENTS)


def test_several_faults_are_all_found() -> None:
    document = tomllib.loads(GOOD.replace('title = "a slab"', "").replace("lam = 0.0", "lam = nan").replace("x = [0, 1]", "x = [0]"))
    assert len(list(faults(document, "bad.toml"))) == 3
