"""Files with two columns: what is read, and what is said about those that are wrong."""

from __future__ import annotations

from pathlib import Path

import pytest

from bvp.errors import InputError
from cases.measured_data import read_columns


@pytest.mark.parametrize(
    "text",
    [
        "300,0.15\n310,0.16\n",
        "temperature,conductivity\n300,0.15\n310,0.16\n",
        "# from the laboratory\n\n300 ; 0,15  # first\n310 ; 0,16\n",
        "300\t0.15\r\n310\t0.16\r\n",
        "  300   1.5e-1\n  310   0.16\n",
        "\ufeff300,0.15\n310,0.16",
    ],
    ids=["plain", "heading", "semicolons and decimal commas", "tabulators", "blanks", "byte order mark"],
)
def test_columns(tmp_path: Path, text: str) -> None:
    path = tmp_path / "k.csv"
    path.write_bytes(text.encode())
    assert read_columns(path, "here") == ([300.0, 310.0], [0.15, 0.16])


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("300,0.15\n310\n", "line 2"),
        ("300,0.15\n310,0.16,3\n", "line 2"),
        ("300,0.15\n310,nan\n", "line 2"),
        ("300,0.15\n310,1e999\n", "line 2"),
        ("a,b\nc,d\n300,0.15\n", "line 2"),
        ("300,__import__('os')\n", "line 1"),
        ("300,0.15\n", "1 row of numbers"),
        ("", "0 rows of numbers"),
    ],
)
def test_wrong_files(tmp_path: Path, text: str, words: str) -> None:
    path = tmp_path / "k.csv"
    path.write_text(text)
    with pytest.raises(InputError, match=words) as caught:
        read_columns(path, "case.toml, [measured] k")
    assert str(caught.value).startswith("case.toml, [measured] k: k.csv")


def test_missing_and_unreadable_files(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be read: No such file"):
        read_columns(tmp_path / "none.csv", "here")
    with pytest.raises(InputError, match="cannot be read: Is a directory"):
        read_columns(tmp_path, "here")
    (tmp_path / "binary.csv").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(InputError, match="not UTF-8"):
        read_columns(tmp_path / "binary.csv", "here")
