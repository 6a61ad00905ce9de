"""Decisions about readings in the case: each once, with its reason, and taken back without a trace."""

from scenarios import FACTORY

from engine.job.case.fields import FIELDS
from engine.job.result.decisions import (
    window_row,
    with_removed,
    with_switch,
    with_window,
    without_removed,
    without_window,
)


def test_one_window_for_a_run_the_last_one_counts():
    case = with_window(with_window(FACTORY, "a", 60.0, 600.0), "b", 0.0, 60.0, "steady")
    case = with_window(case, "a", 120.0, 900.0, "load steady")
    assert [row["log"] for row in case["windows"]] == ["a", "b"]
    assert (window_row(case, "a")["begin"].value, window_row(case, "a")["reason"]) == (2.0, "load steady")
    assert window_row(case, "c") is None
    assert without_window(without_window(case, "a"), "b") == FACTORY


def test_a_row_left_out_is_known_by_its_run_and_number():
    case = with_removed(with_removed(FACTORY, "a", 7), "b", 7, "slug")
    case = with_removed(case, "a", 7, "valve touched")
    assert [(row["log"], row["reason"]) for row in case["removed"]] == [("a", "valve touched"), ("b", "slug")]
    assert without_removed(without_removed(case, "a", 7), "b", 7) == FACTORY
    assert without_removed(case, "a", 8) == case


def test_a_switch_goes_off_for_a_reason_and_on_again():
    case = with_switch(FACTORY, "heat loss", off=True)
    case = with_switch(case, "heat loss", off=True, reason="disputed")
    assert [(row["correction"], row["reason"]) for row in case["switched_off"]] == [("heat loss", "disputed")]
    assert with_switch(case, "heat loss", off=False) == FACTORY


def test_a_full_table_lets_the_oldest_go():
    case = FACTORY
    for k in range(FIELDS["removed"].most + 1):
        case = with_removed(case, "a", k, "r")
    assert len(case["removed"]) == FIELDS["removed"].most and case["removed"][0]["row"].value == 1.0
