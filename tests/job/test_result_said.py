"""The result in words: digits follow the uncertainty, every verdict has its word, every reason its numbers."""

from dataclasses import replace

import pytest
from scenarios import FACTORY, FULL, TEN, sets, typed
from simulated import log_of

from engine.job.case.rows import Entry
from engine.job.result import reduce
from engine.job.result.data import as_data, run_table
from engine.job.result.runs import run_of_log
from engine.job.result.said import (
    chance,
    channel_rows,
    check_lines,
    correction_rows,
    decision_words,
    drift_text,
    figures,
    flagged,
    headline,
    outlier_rows,
    reason_text,
    rule_text,
    run_rows,
    told,
    unsettled_lines,
)
from engine.job.uncertainty import check
from engine.measurement import Reason, Unsettled
from engine.steam.units import SI, US


@pytest.fixture(scope="module")
def result():
    return typed(FULL, sets((*TEN[:-1], 124.0)))


@pytest.mark.parametrize(("U", "texts"), [
    (0.00582, ("0.9720", "0.0058")), (0.00077, ("0.97202", "0.00077")), (0.0996, ("0.97", "0.10")),
    (0.058, ("0.972", "0.058")), (2e-9, ("0.972022", "0.000000")), (0.0, ("0.972022", "0.000000"))])
def test_digits_follow_the_uncertainty(result, U, texts):
    assert figures(replace(result.budget, value=0.9720224, U=U)) == texts


def test_the_headline_has_quality_and_wetness_in_the_same_digits(result):
    budget = replace(result.budget, value=0.9720224, U=0.00582)
    assert headline(replace(result, budget=budget)) == "Quality 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %."


def test_a_result_an_exploration_and_none_are_told_apart(result):
    assert (told(result).word, told(result).shape) == ("result", "●")
    open_one = told(typed(FULL.with_(sampling_kind="not stated"), sets(TEN)))
    assert (open_one.word, open_one.shape) == ("exploration", "◐")
    assert open_one.open_points == ("Not a result yet, because not stated: sampling representativeness.",)
    none = told(typed(FULL, sets([100.0, 100.1, 100.0])))
    assert (none.word, none.shape) == ("no result", "○") and none.verdicts == () and none.open_points


def test_the_verdict_has_its_word_and_shape_with_and_without_sampling(result):
    (with_it, why), (alone, _) = decision_words(result)
    assert with_it == "◇ undecided with sampling" and alone == "✓ accept by the instruments alone"
    assert why.startswith("The chance that the limit is met is ") and why.endswith("the rule accepts from 0.9748.")
    rejected = typed(FACTORY.with_(x_limit=Entry(0.99, "1")), sets(TEN))
    assert decision_words(rejected)[0][0] == "✕ reject with sampling"
    assert decision_words(typed(FACTORY.with_(x_limit=None), sets(TEN))) == ()


@pytest.mark.parametrize(("p", "text"), [(0.7563, "76 %"), (0.95, "95.0 %"), (0.99999, "over 99.9 %"),
                                         (1e-6, "under 0.1 %"), (0.05, "5.0 %")])
def test_a_chance_is_never_a_certainty(p, text):
    assert chance(p) == text


def test_the_rule_in_words():
    assert rule_text(FACTORY) == ("Limit: quality at least 0.97. Rule: accept or reject only when the chance of being "
                                  "wrong is 5 % or less.")
    assert "further away than U" in rule_text(FACTORY.with_(decision_rule="guarded by U", limit_side="at most"))
    assert "leaves the doubt to chance" in rule_text(FACTORY.with_(decision_rule="simple"))


def test_corrections_in_the_readers_units(result):
    rows = {row["Correction"]: row for row in correction_rows(result.runs[0], SI)}
    assert rows["line gauge certificate"]["Adds to the reading"] == "line pressure -0.05 bar"
    assert rows["heat loss"]["Adds to the quality"] == "+0.099 %pt"
    in_us = {row["Correction"]: row for row in correction_rows(result.runs[0], US)}
    assert in_us["thermometer certificate"]["Adds to the reading"].endswith("°F")
    assert "psi" in in_us["line gauge certificate"]["Adds to the reading"]


def test_channels_with_their_scatter_and_what_they_were_corrected_to(result):
    rows = {row["Channel"]: row for row in channel_rows(result.runs[0], SI)}
    line = rows["line pressure"]
    assert (line["Mean as shown"], line["Scatter s"], line["Readings"]) == ("9.000 bar gauge", "0 bar", "10")
    assert line["Corrected"].endswith("bar absolute") and line["Independent"] == ""
    assert rows["exhaust temperature"]["Corrected"] == "121.7 °C"


def test_outliers_the_farthest_first_and_what_was_decided(result):
    found, count = flagged(result.runs[0], SI)
    assert count == 1 and (found[0].row, found[0].by, found[0].text) == (10, "Grubbs and tau", "124.0 °C")
    assert outlier_rows(result.runs[0], SI)[0]["Decided"] == "kept"


def test_a_great_many_flagged_readings_are_told_quickly_and_capped():
    log = log_of(FACTORY, 0.972, minutes=900.0, step=1.0, noise_T=0.2)
    case = FACTORY.with_(steady_rate=Entry(1.0, "K/min"))
    run = reduce(case, [run_of_log(log)]).runs[0]
    found, count = flagged(run, SI)
    assert len(found) == 50 < count
    assert all(a.distance >= b.distance for a, b in zip(found, found[1:], strict=False))


@pytest.mark.parametrize(("reason", "text"), [
    (Reason("T_exhaust", Unsettled.SLOPE, 0.092 / 60, 0.05 / 60),
     "the exhaust temperature drifts by 0.092 K/min, more than 0.05 K/min"),
    (Reason("p_line", Unsettled.SCATTER, 25e3, 9.9e3), "the line pressure scatters by 0.25 bar, more than 0.099 bar"),
    (Reason("p_line", Unsettled.DRIFT, 25e3, 9.9e3), "the line pressure changes by 0.25 bar, more than 0.099 bar"),
    (Reason("T_exhaust", Unsettled.SIGNIFICANT, 0.4, 0.25),
     "the exhaust temperature has a trend beyond chance, 0.4 K, more than 0.25 K"),
    (Reason("T_exhaust", Unsettled.GAP, 200.0, 150.0),
     "the exhaust temperature has a pause of 200 s, longer than 150 s"),
    (Reason("p_exhaust", Unsettled.TOO_FEW, 3, 5), "the exhaust pressure has too few readings (3, at least 5 needed)"),
])
def test_every_reason_against_a_window_has_its_numbers(reason, text):
    assert reason_text(reason, SI) == text


def test_the_unsettled_part_is_what_no_settled_window_covers():
    run = reduce(FACTORY, [run_of_log(log_of(FACTORY, 0.972, warm_up=25.0, noise_T=0.02))]).runs[0]
    line, = unsettled_lines(run, SI)
    begin = run.settling.found[0].begin / 60
    assert line.startswith(f"0.0 to {begin:.1f} min: the exhaust temperature drifts by")
    assert "K/min" in line and "°F/min" in unsettled_lines(run, US)[0]
    assert drift_text(run).startswith("Over the window the quality moves by")


def test_runs_and_draws_in_words(result):
    row, = run_rows(result, SI)
    assert row["Readings"] == "10 of 10" and row["Quality"] == f"{result.x:.5f}"
    lines = check_lines(check(result.measurement, result.budget, draws=20_000))
    assert lines[0].startswith("20 000 draws: mean 0.97") and "The budget and Monte Carlo give" in lines[1]
    assert lines[2].startswith("By the instruments alone from 0.97")


def test_data_are_plain_and_complete(result):
    data = as_data(result)
    assert data["sentence"] == headline(result) and data["decision"]["with_sampling"]["outcome"] == "undecided"
    assert [line["run"] for line in run_table(result)] == ["typed readings", "all runs"]
