"""Readable reports: what must stand in them, beside which number."""

from __future__ import annotations

from dataclasses import replace

from cases.describe import described
from cases.load import load
from cases.report import text_of
from cases.tables import WIDTH, table
from cases.words import NUMERICAL_ONLY, unit_of_measure
from tests.cases.made_results import branch, cylinder, found_states, solved, traced


def test_trace_report_gives_value_with_uncertainty_and_verdict() -> None:
    text = text_of(traced())
    assert "2.000000000000 ± 3e-12" in text
    assert "below" in text
    assert text.count("agrees") == 3
    assert "not judged" in text  # a measure at a turning point whose uncertainty the record has not
    assert "41 points" in text
    assert "a note." in text


def test_pieces_of_the_branch_end_at_its_turning_points() -> None:
    rows = [line.split() for line in text_of(traced()).splitlines() if line.endswith(("  0", "  1"))]
    assert [row[-1] for row in rows] == ["0", "1"]
    assert float(rows[0][1]) == float(rows[1][0])
    assert abs(float(rows[0][1]) - 2.0) < 1e-3


def test_a_value_without_uncertainty_says_so_and_gets_no_safe_side() -> None:
    turning = replace(branch().turning_points[0], uncertainty=None)
    text = text_of(traced(branches=(replace(branch(), turning_points=(turning,)),)))
    assert "A value without ± has no uncertainty" in text
    assert "safe side" not in text


def test_where_work_can_hurt_someone() -> None:
    text = text_of(traced())
    assert "Caution: A calculation on a model, no proof of safety." in text
    assert text.count(NUMERICAL_ONLY.split(",")[0]) == 2
    assert "lam = 1.99" in text.replace("\n", " ")  # three digits, rounded into the side where the states exist
    harmless = replace(cylinder(), caution="")
    assert "safe side" not in text_of(traced(harmless))


def test_no_turning_point_and_none_that_survives() -> None:
    assert "No turning point" in text_of(traced(branches=(replace(branch(), turning_points=()),)))
    turning = replace(branch().turning_points[0], survives=False)
    text = text_of(traced(branches=(replace(branch(), turning_points=(turning,)),)))
    assert "does not survive refinement" in text
    assert "safe side" not in text


def test_disagreement_is_seen() -> None:
    result = traced()
    wrong = replace(result.compared[0], agrees=False, difference=0.5)
    assert "DISAGREES" in text_of(replace(result, compared=(wrong,)))


def test_solve_report() -> None:
    text = text_of(solved())
    assert "2 steady states at lam = 1" in text
    assert "0.31669436764" in text
    none = replace(solved(), found=type(found_states())(**{**vars(found_states()), "states": ()}), notes=("the turning point lies at 2.",))
    assert "No steady state at lam = 1." in text_of(none)


def test_units() -> None:
    store = load("straw-store-depth")
    assert unit_of_measure(store, "max(T)") == "K"
    assert unit_of_measure(store, "T(0)") == "K"
    assert unit_of_measure(store, "T'(depth)") == "K/m"
    assert unit_of_measure(store, "max(T) - 300") == ""


def test_described_case_holds_what_the_file_says() -> None:
    text = described(load("straw-store-depth"))
    for words in (
        "INVENTED",
        "Caution",
        "T'(0) = 0",
        "T (K)",
        "surface = 8 W/(m^2 K)",
        "along depth from 0.5, upwards",
        "0 <= z <= depth (m)",
    ):
        assert words in text
    assert "2.895531265492769 ± 1e-15" in described(load("slab"))
    assert max(map(len, text.splitlines())) <= WIDTH


def test_table_sets_numbers_to_the_right_and_words_to_the_left() -> None:
    lines = table(["value", "name"], [["1.5", "a"], ["-12.5", "long"]])
    assert lines == ["  value   name", "  ─────   ────", "    1.5   a", "  -12.5   long"]
