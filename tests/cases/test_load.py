"""Finding and reading case files: names, paths, files that are no case files, and defaults."""

from __future__ import annotations

import errno
import os
from dataclasses import replace
from pathlib import Path

import pytest

from bvp.errors import InputError
from cases.case import Case
from cases.load import MOST_BYTES, bundled_names, half_of_last_digit, load
from cases.settings import Settings, asked_for
from cases.toml_text import measured_copy, toml_text
from tests.cases.test_faults import GOOD


@pytest.fixture
def good(tmp_path: Path) -> Case:
    path = tmp_path / "good.toml"
    path.write_text(GOOD)
    return load(str(path))


def test_defaults(good: Case) -> None:
    assert (good.geometry, good.coordinate, good.ends) == ("slab", "x", (0.0, 1.0))
    assert good.trace.measure == ("max(u)",)
    assert (good.trace.along, good.start, good.trace.direction) == ("lam", 0.0, "up")
    assert (good.discretization.scheme, good.discretization.intervals) == ("central", 200)
    assert good.published == ()


def test_first_parameter_is_traced_where_none_is_named(tmp_path: Path) -> None:
    path = tmp_path / "good.toml"
    path.write_text(GOOD.replace('along = "lam"', "").replace("lam = 0.0", "mu = 3\nlam = 0.0"))
    case = load(str(path))
    assert (case.trace.along, case.start) == ("mu", 3.0)


@pytest.mark.parametrize(
    ("data", "word"),
    [
        (b"title = \n", "is not TOML"),
        (b"\x89PNG\r\n\x1a\n\x00", "not UTF-8"),
        (b"title = 'a'\n# \xff\n", "line 2: not UTF-8"),
        (b"# " + b"x" * MOST_BYTES, f"more than {MOST_BYTES} bytes"),
        (b"a = " + b"[" * 5000 + b"]" * 5000, "brackets stand 5000 deep"),
        (b"a = 1979-13-45", "TOML"),
        (b"a = " + b"9" * 5000, "cannot be read as TOML"),
        (b"", '"title" is missing'),
        (b"\xef\xbb\xbf# with a mark of the byte order\n", '"title" is missing'),
    ],
    ids=["no value", "a picture", "one wrong byte", "too large", "too deep", "no date", "a long number", "empty", "byte order mark"],
)
def test_files_that_are_no_case_files(tmp_path: Path, data: bytes, word: str) -> None:
    path = tmp_path / "bad.toml"
    path.write_bytes(data)
    with pytest.raises(InputError, match=word):
        load(str(path))


@pytest.mark.parametrize(
    ("name", "word"),
    [
        ("slb", 'Did you mean "slab"'),
        ("nowhere/slab.toml", "there is no file nowhere/slab.toml"),
        ("slab\0.toml", "cannot be read"),
        ("", "is no bundled case"),
        ("../slab", "there is no file"),
    ],
)
def test_names_that_lead_nowhere(name: str, word: str) -> None:
    with pytest.raises(InputError, match=word):
        load(name)


def test_folders_are_no_cases(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "folder").mkdir()
    (tmp_path / "folder.toml").mkdir()
    monkeypatch.chdir(tmp_path)
    for name in ("folder", "folder.toml", "./folder"):
        with pytest.raises(InputError, match="is a folder"):
            load(name)


def test_file_without_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_: object, **__: object) -> None:
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    path = tmp_path / "closed.toml"
    path.write_text(GOOD)
    for name in ("open", "read_bytes", "read_text"):
        monkeypatch.setattr(Path, name, refused)  # root, who often runs tests, may read everything
    with pytest.raises(InputError, match="no permission"):
        load(str(path))


def test_bundled_name_goes_before_a_file_of_that_name(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "slab.toml").write_text(GOOD)
    (tmp_path / "slab").write_text(GOOD)
    monkeypatch.chdir(tmp_path)
    assert load("slab").title != "a slab"
    assert load("slab.toml").title == "a slab"


@pytest.mark.parametrize(("value", "half"), [(0.88, 0.005), (3.51, 0.005), (2.0, 0.0), (1.5e-7, 0.5e-8), (120.0, 0.0)])
def test_half_a_unit_of_the_last_digit(value: float, half: float) -> None:
    assert half_of_last_digit(value) == pytest.approx(half, rel=1e-12)


@pytest.mark.parametrize("name", bundled_names())
def test_written_case_reads_as_the_same_case(tmp_path: Path, name: str) -> None:
    case = load(name)
    assert_same_when_written(case, tmp_path)


def test_written_case_keeps_odd_text_and_schemes(good: Case, tmp_path: Path) -> None:
    odd = replace(
        good,
        title='quotes " and \\ and µ and ″',
        about="two\nlines\tand a \x07 bell",
        units={"lam": "W/m²"},
        schemes={"mine": {"replace": {"u^2": "u[k]*u[k+1]"}, "denominator": "2*log(cosh(h))"}},
        parameters={"lam": 1e-300, "β": -0.1},
        initial_guess={"u": "lam*x"},
    )
    assert_same_when_written(odd, tmp_path)


def assert_same_when_written(case: Case, folder: Path) -> None:
    path = folder / "as-run.toml"
    path.write_text(toml_text(case, "one remark\nanother"))
    again = load(str(path))
    start = replace(case.trace, start=again.trace.start)
    expected = replace(case, name=again.name, origin=again.origin, folder=again.folder, text=again.text, trace=start)
    assert again == replace(expected, measured={name: measured_copy(name) for name in case.measured})
    assert again.start == case.start


def test_settings_change_the_case(good: Case) -> None:
    case, notices = asked_for(good, Settings(at={"lam": 2.0}, scheme="compact", intervals=50, digits=10, grid="uniform"))
    assert (case.start, case.parameters["lam"]) == (2.0, 2.0)
    assert (case.discretization.scheme, case.discretization.intervals, case.discretization.digits) == ("compact", 50, 10)
    assert notices == []


def test_published_values_hold_for_the_parameters_of_the_case_alone() -> None:
    cooled = load("cooled-slab")
    assert asked_for(cooled, Settings(at={"lam": 0.1}))[0].published == cooled.published
    case, notices = asked_for(cooled, Settings(at={"Bi": 2.0}))
    assert case.published == ()
    assert "Bi = 1" in notices[0]


def test_unknown_parameter_is_named(good: Case) -> None:
    with pytest.raises(InputError, match='no parameter "lan"'):
        asked_for(good, Settings(at={"lan": 2.0}))
